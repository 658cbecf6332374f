"""How fine each kind of mesh is, by the parameter `refine`."""

from front3d.samples.sheet import Density
from front3d.samples.tube import Tube

_BRICKS = {
    0: (3, 1, 3.0, Tube(sectors=4, rings=4)),
    1: (6, 2, 2.2, Tube(sectors=8, rings=5)),
    2: (10, 3, 1.7, Tube(sectors=8, rings=7)),
}
# Tetrahedra have no quarter-points: rings of nearly equal width, and more of them in vain.
_TETRA = {
    0: (3, 1, 3.0, Tube(sectors=4, rings=3, power=1.0, quarter_points=False)),
    1: (8, 2, 2.5, Tube(sectors=4, rings=4, power=1.2, quarter_points=False)),
    2: (12, 2, 2.0, Tube(sectors=8, rings=5, power=1.2, quarter_points=False)),
}


def density(cells: str, refine: float, quarters: int) -> Density:
    """Fineness of a mesh whose front consists of `quarters` quarters of an ellipse."""
    along, layers, growth, tube = (_TETRA if cells == "tetra10" else _BRICKS)[int(refine)]
    if quarters < 4:
        along = along + along // 3  # a short front affords more cells
    if cells == "brick8":
        tube = Tube(tube.sectors, tube.rings, tube.power, quarter_points=False)
    return Density(along, layers, growth, tube)
