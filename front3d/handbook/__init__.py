"""Published stress intensity factors of standard cracks, one file per family.

Each function names its symbols, units, validity, claimed accuracy and source, works on arrays,
and raises CaseError outside its range.  K comes in the stress times the square root of
the length that go in.  Local axes at a front point: e1 growth, e2 crack normal, e3 = e1 x e2.
Ellipses lie in z = 0, semi-axis c along x and a along y; the point at the parametric angle phi
is (c cos phi, a sin phi).

`catalogue.py` names the solutions that a front can be compared with, `comparing.py` compares.
"""

from front3d.handbook.bars import (
    external_crack_tension,
    external_crack_torsion,
    round_bar_bending,
    round_bar_tension,
    round_bar_torsion,
)
from front3d.handbook.corners import corner_crack, corner_crack_at_hole
from front3d.handbook.infinite import (
    ellipse_shear,
    ellipse_tension,
    penny_inclined,
    penny_pressure,
    penny_shear,
    penny_t_stress,
    penny_tension,
)
from front3d.handbook.plates import embedded_crack, surface_crack
from front3d.handbook.rows import collinear_row
from front3d.handbook.specimens import bend_specimen, compact_specimen
from front3d.handbook.tabulated import tabulated
from front3d.handbook.through import (
    antiplane_through_crack,
    centre_crack,
    double_edge_crack,
    edge_crack,
    edge_crack_bending,
    inclined_through_crack,
    through_crack,
    through_crack_t_stress,
)

__all__ = [
    "antiplane_through_crack",
    "bend_specimen",
    "centre_crack",
    "collinear_row",
    "compact_specimen",
    "corner_crack",
    "corner_crack_at_hole",
    "double_edge_crack",
    "edge_crack",
    "edge_crack_bending",
    "ellipse_shear",
    "ellipse_tension",
    "embedded_crack",
    "external_crack_tension",
    "external_crack_torsion",
    "inclined_through_crack",
    "penny_inclined",
    "penny_pressure",
    "penny_shear",
    "penny_t_stress",
    "penny_tension",
    "round_bar_bending",
    "round_bar_tension",
    "round_bar_torsion",
    "surface_crack",
    "tabulated",
    "through_crack",
    "through_crack_t_stress",
]
