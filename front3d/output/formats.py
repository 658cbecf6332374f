"""How numbers are written for a reader."""

from front3d.arrays import FloatArray


def place(position: FloatArray, length: float) -> str:
    """Coordinates of a point (3,); what is nought against `length` is written so."""
    return ", ".join(f"{0.0 if abs(x) < 1e-9 * length else x:.4g}" for x in position.tolist())
