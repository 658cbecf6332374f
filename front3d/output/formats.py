"""How numbers are written for a reader."""

from math import ceil, log10

from front3d.arrays import FloatArray

NOUGHT = 1e-4
"""Part of the front's largest K below which another mode is called nought (as on the terminal)."""


def place(position: FloatArray, length: float) -> str:
    """Coordinates of a point (3,) to a ten-thousandth of `length`, however far from the origin;
    what is nought against `length` is written so.
    """
    return ", ".join(coordinate(x, length) for x in position.tolist())


def coordinate(x: float, length: float) -> str:
    """One coordinate to a ten-thousandth of `length`, with four digits at least."""
    if abs(x) < 1e-9 * length:
        return "0"
    digits = 4 + max(0, ceil(log10(abs(x) / length)))
    return f"{x:.{digits}g}"
