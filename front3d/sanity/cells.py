"""Cells around a front that are too few, too flat, or have their mid-side nodes astray."""

from front3d.crack.cells import FrontCells

FEWEST = 4
"""Cells around the front, both sides together, below which the angular field is not resolved:
common practice asks for more, 8 and above."""

FLAT = 2.0
"""Angle of a cell at the front, degrees, that is spoken of: the embedded models of tetrahedra have
angles down to 3, and their K is within 1 % of what is known."""

ASTRAY = 0.02
"""Share of the mid-side nodes next to the front that may stand elsewhere than the others."""

OFF_CHORD = 0.002
"""Distance of a quarter-point from the chord of its edge, in edge lengths.  An edge that is bent
there leaves the front with a vertical tangent: on a spherical cap 0.001 cost 3 % of K_I."""


def cell_warnings(cells: FrontCells, half: bool) -> tuple[str, ...]:
    """Sentences on the cells that touch a front."""
    said = []
    needed = FEWEST // 2 if half else FEWEST
    if cells.fewest < needed:
        said.append(
            f"found {cells.fewest} cells around an edge of the front, expected {needed} or more: "
            "too few for the field around the front; refine the mesh there"
        )
    if "tetra" in cells.kinds:
        said.append(
            "4-node tetrahedra touch the front: strain does not vary in them, and K by every "
            "method stays off, whatever their size (2 to 13 % low was found on a penny crack); use "
            "10-node tetrahedra there"
        )
    if cells.smallest_angle < FLAT:
        kind, number = cells.worst
        said.append(
            f"{kind} cell {number} at the front has an angle of {cells.smallest_angle:.1f} "
            f"degrees, expected {FLAT:g} or more: K scatters with such cells; mesh the "
            "front anew"
        )
    if cells.n_middles and cells.astray > ASTRAY * cells.n_middles:
        usual = "a quarter" if cells.quarter_points else "the middle"
        low, high = cells.astray_range
        said.append(
            f"{cells.astray} of the {cells.n_middles} mid-side nodes next to the front stand at "
            f"{low:.2f} to {high:.2f} of their edges, the others at {usual}, expected all alike: "
            "set them all to a quarter or all to the middle"
        )
    if cells.quarter_points and cells.off_chord > OFF_CHORD:
        said.append(
            f"quarter-points stand off their straight edges by up to {100 * cells.off_chord:.2g} "
            f"% of the edge, expected less than {100 * OFF_CHORD:g} %: the crack faces leave the "
            "front at a wrong angle in such cells; keep edges that leave the front straight"
        )
    return tuple(said)
