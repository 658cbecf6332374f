"""Solved models on unstructured tetra10 meshes without quarter-points, kept in tests/data.

`python -m tests.meshes.unstructured [name ...]` meshes, solves and stores them (gmsh, scikit-fem,
pyamg; a minute or two each).  What is stored is the part that K needs: every cell within `reach`
of the front or at the crack faces.  Its cut faces are inside the body and carry traction.
Young's modulus is 1, Poisson's ratio 0.3, unit stresses, so K is F sqrt(pi a) at once.
"""

import sys
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from front3d.solid import CellBlock, Solid, Step
from tests.meshes.cracked import CrackedMesh, cracked_mesh
from tests.meshes.solving import solve_tetra10

DATA = Path(__file__).parent.parent / "data"
YOUNG, POISSON = 1.0, 0.3
FAR = 10.0  # half-width of the "infinite" body over the longer semi-axis
ROW_HALF_PERIOD, ROW_HALF_CRACK, ROW_WIDTH, ROW_HEIGHT = 2.0, 1.0, 0.6, 8.0


@dataclass(frozen=True)
class Model:
    """How one stored model is made.

    Attributes
    ----------
    mesh : () -> CrackedMesh
    loads : name of the step -> traction on the outer boundary, (normals, positions) -> (3, ...)
    held : (CrackedMesh) -> (nodes, component) pairs that stay in a symmetry plane
    reach : cells farther than this from the front, and away from the faces, are not stored
    """

    mesh: Callable[[], CrackedMesh]
    loads: dict[str, Callable]
    held: Callable = lambda mesh: ()
    reach: float = 0.6


def _stress(sigma, outer):
    """Traction of a uniform stress on the part of the boundary where `outer(x)` holds."""
    sigma = np.asarray(sigma, dtype=float)
    return lambda n, x: np.einsum("ij,j...->i...", sigma, n) * outer(x)


TENSION = [[0, 0, 0], [0, 0, 0], [0, 0, 1]]
SHEAR_XZ = [[0, 0, 1], [0, 0, 0], [1, 0, 0]]


def embedded(a, c, size, front_cells, loads, reach):
    """Ellipse, semi-axes c along x and a along y, in a cube of half-width FAR c."""
    wide = FAR * c

    def outer(x):
        return (np.abs(x) > wide * (1 - 1e-9)).any(axis=0)

    return Model(
        mesh=lambda: cracked_mesh(
            lambda occ: occ.addBox(-wide, -wide, -wide, 2 * wide, 2 * wide, 2 * wide),
            lambda occ: occ.addDisk(0, 0, 0, c, a),
            size,
            front_cells=front_cells,
        ),
        loads={name: _stress(s, outer) for name, s in loads.items()},
        reach=reach,
    )


def surface(a_c, a_t, size, reach):
    """Semi-ellipse of depth a = 1 along y in a plate 0 < y < t, half-width and half-height 10 c:
    the plate of handbook/tables/fe3d_surface.csv.  Bending: sigma_zz = 1 - 2 y/t at the ends.
    """
    a, c, t = 1.0, 1.0 / a_c, 1.0 / a_t
    wide = 10 * max(a, c)

    def end(x):
        return np.abs(x[2]) > wide * (1 - 1e-9)

    def pull(n, x, profile):
        return np.stack([0 * x[0], 0 * x[0], np.sign(x[2]) * profile(x[1]) * end(x)])

    return Model(
        mesh=lambda: cracked_mesh(
            lambda occ: occ.addBox(-wide, 0, -wide, 2 * wide, t, 2 * wide),
            lambda occ: occ.addDisk(0, 0, 0, c, a),
            size,
            front_lines=lambda middle: middle[1] > 0.01 * a,
        ),
        loads={
            "tension": lambda n, x: pull(n, x, lambda y: 1 + 0 * y),
            "bending": lambda n, x: pull(n, x, lambda y: 1 - 2 * y / t),
        },
        reach=reach,
    )


def row(size, reach):
    """One crack |x| < 1 of a row of period 4 along x: a slice between the symmetry planes
    x = -2, x = 2 and y = 0, y = 0.6 (plane strain), pulled at z = -8, z = 8.
    """
    b, a, w, high = ROW_HALF_PERIOD, ROW_HALF_CRACK, ROW_WIDTH, ROW_HEIGHT

    def held(mesh):
        x, y, z = mesh.points.T
        corner = np.argmin(x + y + z)
        return (
            (np.flatnonzero(np.abs(x) > b - 1e-9), 0),
            (np.flatnonzero((y < 1e-9) | (y > w - 1e-9)), 1),
            (np.array([corner]), 2),
        )

    return Model(
        mesh=lambda: cracked_mesh(
            lambda occ: occ.addBox(-b, 0, -high, 2 * b, w, 2 * high),
            lambda occ: occ.addRectangle(-a, 0, 0, 2 * a, w),
            size,
            front_lines=lambda middle: abs(abs(middle[0]) - a) < 1e-6,
        ),
        loads={"tension": _stress(TENSION, lambda x: np.abs(x[2]) > high - 1e-9)},
        held=held,
        reach=reach,
    )


MODELS: dict[str, Model] = {
    "penny": embedded(
        a=1.0,
        c=1.0,
        size=(0.035, 0.05, 0.4, 6.0),
        front_cells=105,
        loads={"tension": TENSION, "shear": SHEAR_XZ},
        reach=0.5,
    ),
    "ellipse": embedded(
        a=1.0,
        c=2.0,
        size=(0.036, 0.05, 0.45, 12.0),
        front_cells=120,
        loads={"tension": TENSION, "shear": SHEAR_XZ},
        reach=0.5,
    ),
    "surface_06_04": surface(0.6, 0.4, (0.06, 0.15, 0.35, 6.0), reach=0.6),
    "surface_10_06": surface(1.0, 0.6, (0.05, 0.12, 0.35, 6.0), reach=0.6),
    "row": row((0.03, 0.08, 0.35, 1.0), 0.35),
}


def solve(name) -> Solid:
    """Mesh and solve one model: the part that is stored, with one step per load."""
    model = MODELS[name]
    mesh = model.mesh()
    print(f"{name}: {len(mesh.points)} nodes, {len(mesh.cells)} cells", flush=True)
    found = solve_tetra10(
        mesh.points, mesh.cells, POISSON, model.loads.values(), model.held(mesh), young=YOUNG
    )
    cells = mesh.cells[_near(mesh, model.reach)]
    used, cells = np.unique(cells, return_inverse=True)
    return Solid(
        mesh.points[used],
        (CellBlock("tetra10", cells.reshape(-1, 10)),),
        tuple(Step(k, u[used]) for k, u in zip(model.loads, found, strict=True)),
        source=name,
    )


def _near(mesh, reach):
    from scipy.spatial import cKDTree

    distance, _ = cKDTree(mesh.points[mesh.front]).query(mesh.points)
    near = (distance[mesh.cells[:, :4]] < reach).any(axis=1)
    return near | np.isin(mesh.cells, np.concatenate([mesh.upper, mesh.lower])).any(axis=1)


def store(name, solid) -> Path:
    """Write tests/data/NAME.vtu: point data `displacement_STEP`, zlib, appended."""
    import pyvista as pv
    from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridWriter

    cells = solid.blocks[0].nodes
    grid = pv.UnstructuredGrid({pv.CellType.QUADRATIC_TETRA: cells}, solid.points)
    for step in solid.steps:
        # Digits below the solver's own tolerance do not compress: clear them.
        kept = np.round(step.displacement * 2.0**34) / 2.0**34
        grid.point_data[f"displacement_{step.name}"] = kept
    writer = vtkXMLUnstructuredGridWriter()
    path = DATA / f"{name}.vtu"
    writer.SetFileName(str(path))
    writer.SetInputData(grid)
    writer.SetDataModeToAppended()
    writer.SetEncodeAppendedData(False)
    writer.SetCompressorTypeToZLib()
    writer.SetCompressionLevel(9)
    if writer.Write() != 1:
        raise OSError(f"could not write {path}")
    return path


def load(name) -> Solid:
    """The stored model, one step per load."""
    import pyvista as pv

    grid = pv.read(DATA / f"{name}.vtu")
    prefix = "displacement_"
    return Solid(
        np.array(grid.points),
        (CellBlock("tetra10", grid.cells_dict[pv.CellType.QUADRATIC_TETRA]),),
        tuple(
            Step(key.removeprefix(prefix), grid.point_data[key], time=float(i))
            for i, key in enumerate(k for k in grid.point_data if k.startswith(prefix))
        ),
        source=f"{name}.vtu",
    )


def combined(solid, name, **factors) -> Solid:
    """The solid with one step: a sum of its steps, each times its factor."""
    steps = {step.name: step.displacement for step in solid.steps}
    total = sum(factor * steps[key] for key, factor in factors.items())
    return replace(solid, steps=(Step(name, total),))


def main(names) -> None:
    DATA.mkdir(exist_ok=True)
    for name in names or MODELS:
        path = store(name, solve(name))
        print(f"{path.name}: {path.stat().st_size / 1e6:.2f} MB", flush=True)


if __name__ == "__main__":
    main(sys.argv[1:])
