"""A penny crack on an unstructured tetra10 mesh whose faces go on ahead of the front.

`python -m tests.meshes.continued` meshes, solves and stores tests/data/penny_continued.vtu (gmsh,
scikit-fem, pyamg; a minute).  A larger disk in the plane of the crack makes the cells conform to
the plane on both sides of the front.  What is stored is the cells near the front.
Radius 1, E = 1, nu = 0.3, unit stresses; 66 cells around the front, about a tenth of the radius.
"""

import numpy as np

from front3d.solid import CellBlock, Solid, Step
from tests.meshes.cracked import cracked_mesh
from tests.meshes.solving import solve_tetra10
from tests.meshes.unstructured import POISSON, SHEAR_XZ, TENSION, YOUNG, _near, _stress, store

NAME, SIZE, CELLS, WIDE, REACH = "penny_continued", 0.1, 66, 8.0, 0.32


def solve() -> Solid:
    """The part that is stored, with the steps tension and shear."""

    def body(occ):
        box = occ.addBox(-WIDE, -WIDE, -WIDE, 2 * WIDE, 2 * WIDE, 2 * WIDE)
        pieces, _ = occ.fragment([(3, box)], [(2, occ.addDisk(0, 0, 0, 1.25, 1.25))])
        (volume,) = (tag for dimension, tag in pieces if dimension == 3)
        return volume

    mesh = cracked_mesh(
        body, lambda occ: occ.addDisk(0, 0, 0, 1, 1), (SIZE, 1.5 * SIZE, 0.45, 6.0),
        front_cells=CELLS,
    )  # fmt: skip

    def outer(x):
        return (np.abs(x) > WIDE * (1 - 1e-9)).any(axis=0)

    loads = {"tension": TENSION, "shear": SHEAR_XZ}
    found = solve_tetra10(
        mesh.points, mesh.cells, POISSON, [_stress(s, outer) for s in loads.values()], young=YOUNG
    )
    used, cells = np.unique(mesh.cells[_near(mesh, REACH)], return_inverse=True)
    return Solid(
        mesh.points[used],
        (CellBlock("tetra10", cells.reshape(-1, 10)),),
        tuple(Step(k, u[used]) for k, u in zip(loads, found, strict=True)),
        source=NAME,
    )


if __name__ == "__main__":
    path = store(NAME, solve())
    print(f"{path.name}: {path.stat().st_size / 1e6:.2f} MB", flush=True)
