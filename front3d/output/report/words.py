"""Figures and units as the report writes them."""

import re

import numpy as np

from front3d.output.report.page import join, tag
from front3d.units import Units
from front3d.units import percent as in_percent

NAMES = tuple(join(["K", tag("sub", mode)]) for mode in ("I", "II", "III"))
_DIGITS = 4


def number(value: float, digits: int = _DIGITS) -> str:
    return "no value" if not np.isfinite(value) else f"{value:.{digits}g}"


def levelled(value: float, largest: float, digits: int = _DIGITS) -> str:
    """`value` with as many decimals as show `largest` with `digits`: what is nought against it
    reads so.
    """
    if not np.isfinite(value) or not 0 < largest < 1e7:
        return number(value, digits)
    decimals = max(0, digits - 1 - int(np.floor(np.log10(largest))))
    return f"{round(value, decimals) + 0.0:.{decimals}f}"


def percent(value: float | None) -> str:
    if value is None or not np.isfinite(value):
        return "no value"
    if value < 1e-5:
        return "below 0.001\N{NO-BREAK SPACE}%"
    return in_percent(value).replace(" ", "\N{NO-BREAK SPACE}")


def with_units(K: float, units: Units) -> str:
    """K in the model's units, and in MPa sqrt(m) where they are named."""
    text = f"{number(K)} {rooted(units.K_label)}" if units.named else number(K)
    if units.K_factor is not None and (units.length, units.stress) != ("m", "MPa"):
        text += f" ({number(K * units.K_factor)} {rooted('MPa sqrt(m)')})"
    return text


def rooted(unit: str) -> str:
    """A unit of K with the root as a sign: MPa sqrt(mm) becomes MPa, root, mm."""
    return re.sub(r"sqrt\((\w+)\)", "\N{SQUARE ROOT}\\1", unit)
