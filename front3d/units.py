"""Units of length and stress by name, only as many as reports need, and per cent.

A model is in its user's own consistent set; naming the set lets K be given in MPa sqrt(m) too.
"""

from dataclasses import dataclass
from math import sqrt

from front3d.errors import CaseError

LENGTHS: dict[str, float] = {
    "m": 1.0,
    "cm": 1e-2,
    "mm": 1e-3,
    "um": 1e-6,
    "in": 0.0254,
    "ft": 0.3048,
}
"""Metres per unit; the inch and foot are exact (international yard, 1959)."""

STRESSES: dict[str, float] = {
    "Pa": 1e-6,
    "kPa": 1e-3,
    "MPa": 1.0,
    "GPa": 1e3,
    "psi": 6.894757293168361e-3,
    "ksi": 6.894757293168361,
}
"""Megapascals per unit; psi from the pound-force 4.4482216152605 N over the square inch."""


@dataclass(frozen=True, slots=True)
class Units:
    """The units of a model, each named or left unknown (empty)."""

    length: str = ""
    stress: str = ""

    def __post_init__(self) -> None:
        for what, name, known in (
            ("length", self.length, LENGTHS),
            ("stress", self.stress, STRESSES),
        ):
            if name and name not in known:
                raise CaseError(
                    f"unit of {what}: found {name!r}, expected one of {', '.join(known)}"
                )

    @property
    def named(self) -> bool:
        return bool(self.length and self.stress)

    @property
    def K_label(self) -> str:
        """How the unit of K is written in tables and on axes."""
        return f"{self.stress} sqrt({self.length})" if self.named else "stress x sqrt(length)"

    @property
    def K_factor(self) -> float | None:
        """Factor from model units of K to MPa sqrt(m); None unless both units are named."""
        if not self.named:
            return None
        return STRESSES[self.stress] * sqrt(LENGTHS[self.length])


def percent(part: float) -> str:
    """A part of one in per cent for a sentence: two digits, and no exponent where it is large."""
    value = 100 * part
    return f"{value:.2g} %" if abs(value) < 99.5 else f"{value:.0f} %"
