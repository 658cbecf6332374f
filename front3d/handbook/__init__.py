"""Published stress intensity factors of standard cracks, one file per family.

Each function names its symbols, units, validity, claimed accuracy and source, works on arrays,
and raises CaseError outside its range.  K comes in the stress times the square root of
the length that go in.  Local axes at a front point: e1 growth, e2 crack normal, e3 = e1 x e2.
Ellipses lie in z = 0, semi-axis c along x and a along y; the point at the parametric angle phi
is (c cos phi, a sin phi).
"""

from front3d.handbook.infinite import (
    ellipse_shear,
    ellipse_tension,
    penny_inclined,
    penny_shear,
    penny_tension,
)
from front3d.handbook.plates import surface_crack
from front3d.handbook.rows import collinear_row

__all__ = [
    "collinear_row",
    "ellipse_shear",
    "ellipse_tension",
    "penny_inclined",
    "penny_shear",
    "penny_tension",
    "surface_crack",
]
