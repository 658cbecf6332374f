"""Large meshes for measuring: a penny-shaped crack with its exact displacements, no solve.

A polar grid around the axis of the crack, radius x angle x height, graded away from the front; its
bore is far from the front.  Bricks, or six tetrahedra a brick (Kuhn 1960), which fit together
because all bricks are cut alike.  Nodes stand on a lattice of half cells, so mid-side nodes lie on
the circles.  The nodes of the crack faces are doubled.  Displacements are those of the penny under
tension in an infinite solid (tests/reference/exact.py), so K_I = 2 sigma sqrt(a / pi) is known.

The number of cells around the front, and how they look there, depend on the number of stations
only: more cells are added outside.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import permutations
from pathlib import Path

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.elements import ELEMENTS
from tests.reference.exact import Elastic, penny_tension

YOUNG, POISSON, TENSION, RADIUS = 200e3, 0.3, 100.0, 1.0
K_EXACT = 2.0 * TENSION * (RADIUS / np.pi) ** 0.5
"""Sneddon (1946)."""

INSIDE, UNIFORM = 8, 8
"""Layers of cells between the bore and the front, and layers of one size on its other sides."""

BODY = 6.0
"""Radius and half the height of the body, in crack radii, where there are cells enough."""

KINDS = ("tetra10", "hexahedron20")


@dataclass(frozen=True, slots=True)
class Size:
    """How many cells of one kind: by angle (stations), outside the front, and to either side."""

    kind: str
    stations: int
    outside: int
    beside: int

    @property
    def cells(self) -> int:
        per_brick = 6 if self.kind == "tetra10" else 1
        return per_brick * self.stations * (INSIDE + self.outside) * 2 * self.beside


def size_of(kind: str, cells: int, stations: int = 72) -> Size:
    """The size that comes nearest to a number of cells."""
    per_brick = 6 if kind == "tetra10" else 1
    across = cells / (per_brick * stations)
    beside = max(UNIFORM, round((across / 4.0) ** 0.5 * 1.1))
    outside = max(UNIFORM, round(across / (2 * beside)) - INSIDE)
    return Size(kind, stations, outside, beside)


@dataclass(frozen=True, slots=True, eq=False)
class Mesh:
    """Points (n, 3), cells (m, nodes) in VTK order, displacements (n, 3)."""

    kind: str
    points: FloatArray
    cells: IntArray
    displacement: FloatArray


def build(size: Size) -> Mesh:
    """The mesh with its displacements."""
    h = 2.0 * np.pi * RADIUS / size.stations
    inner = RADIUS - h * np.arange(INSIDE, 0, -1)
    if inner[0] <= 0.0:
        inner = RADIUS * np.linspace(0.3, 1.0, INSIDE + 1)[:-1]
    radii = np.append(inner, RADIUS + _graded(h, size.outside))
    above = _graded(h, size.beside)
    heights = np.append(-above[:0:-1], above)
    r, z = _halved(radii), _halved(heights)
    angle = np.pi / size.stations * np.arange(2 * size.stations)
    shape = (len(z), len(angle), len(r))
    used = _used(size.kind, shape)
    front, middle = 2 * INSIDE, 2 * size.beside
    # Lower side first; the upper nodes of the crack faces come last.
    number = np.full(shape, -1)
    number[used] = np.arange(used.sum())
    points = np.stack(
        [
            np.broadcast_to(r * np.cos(angle)[:, None], shape)[used],
            np.broadcast_to(r * np.sin(angle)[:, None], shape)[used],
            np.broadcast_to(z[:, None, None], shape)[used],
        ],
        axis=1,
    )
    lower = number[middle, :, :front]
    lower = lower[lower >= 0]
    side = np.zeros(len(points) + len(lower), np.int8)
    side[lower], side[len(points) :] = -1, 1
    upper = np.full(len(points), -1)
    upper[lower] = len(points) + np.arange(len(lower))
    points = np.concatenate([points, points[lower]])
    cells = np.empty((size.cells, len(ELEMENTS[size.kind].nodes)), np.int64)
    start = 0
    for layer, part in enumerate(_layers(size, number)):
        if layer == size.beside:  # the first layer above the crack
            part = np.where(upper[part] >= 0, upper[part], part)
        cells[start : start + len(part)] = part
        start += len(part)
    return Mesh(size.kind, points, cells, _displacements(points, side))


def _graded(h: float, count: int) -> FloatArray:
    """(count + 1,) places from 0: some layers of thickness h, then growing ones out to BODY."""
    rest = count - UNIFORM
    widths = np.full(count, h)
    far = BODY * RADIUS - UNIFORM * h
    if rest > 0 and rest * h < far:
        low, high = 1.0, 3.0
        for _ in range(60):
            ratio = 0.5 * (low + high)
            grown = h * ratio * (ratio**rest - 1.0) / (ratio - 1.0)
            low, high = (ratio, high) if grown < far else (low, ratio)
        widths[UNIFORM:] = h * low ** np.arange(1, rest + 1)
    return np.concatenate([[0.0], np.cumsum(widths)])


def _halved(places: FloatArray) -> FloatArray:
    """With the middles between them."""
    return np.interp(np.arange(2 * len(places) - 1) / 2.0, np.arange(len(places)), places)


def _used(kind: str, shape: tuple[int, int, int]) -> np.ndarray:
    """Which places of the lattice have a node: of tetrahedra all, of 20-node bricks those with at
    most one odd index.
    """
    if kind == "tetra10":
        return np.ones(shape, bool)
    odd = sum(np.arange(n).reshape([-1 if k == j else 1 for j in range(3)]) % 2
              for k, n in enumerate(shape))  # fmt: skip
    return np.asarray(odd <= 1)


def _layers(size: Size, number: IntArray) -> Iterator[IntArray]:
    """Cells of each layer of bricks, from below."""
    places = _places(size.kind)
    nr, n = INSIDE + size.outside, size.stations
    j, i = (2 * v.ravel() for v in np.meshgrid(np.arange(n), np.arange(nr), indexing="ij"))
    for k in range(0, 4 * size.beside, 2):
        flat = number[k : k + 3]
        cells = [
            flat[dk, (j[:, None] + dj) % (2 * n), i[:, None] + di]
            for di, dj, dk in places.transpose(0, 2, 1)
        ]
        yield np.stack(cells, axis=1).reshape(-1, places.shape[1])


def _places(kind: str) -> IntArray:
    """(cells of a brick, nodes, 3) places of the nodes in the brick's own half cells."""
    element = ELEMENTS[kind]
    if kind == "hexahedron20":
        return np.rint(element.nodes + 1.0).astype(np.int64)[None]
    cells = []
    for order in permutations(range(3)):
        corners = np.zeros((4, 3))
        for step, axis in enumerate(order):
            corners[step + 1 :, axis] = 2.0
        if np.linalg.det(corners[1:]) < 0.0:
            corners[[1, 2]] = corners[[2, 1]]
        local = element.nodes  # affine: barycentric coordinates carry the mid-side nodes over
        weights = np.column_stack([1.0 - local.sum(axis=1), local])
        cells.append(np.rint(weights @ corners).astype(np.int64))
    return np.stack(cells)


def _displacements(points: FloatArray, side: np.ndarray) -> FloatArray:
    field = penny_tension(Elastic.from_young(YOUNG, POISSON), TENSION, RADIUS)
    out = np.empty_like(points)
    for start in range(0, len(points), 1 << 17):
        part = slice(start, start + (1 << 17))
        out[part] = field(points[part], side[part])
    return out


def write_vtu(mesh: Mesh, path: Path) -> None:
    """VTU, appended raw, double precision and 64-bit connectivity, arrays written as they lie."""
    _write(path, mesh.kind, mesh.points, mesh.cells, {"displacement": mesh.displacement})


def write_pvtu(mesh: Mesh, path: Path, pieces: int) -> None:
    """The mesh in pieces, by runs of cells, with global node numbers on their borders."""
    names = []
    for k, cells in enumerate(np.array_split(mesh.cells, pieces)):
        nodes, local = np.unique(cells, return_inverse=True)
        name = f"{path.stem}_{k}.vtu"
        arrays = {"displacement": mesh.displacement[nodes], "GlobalNodeIds": nodes}
        _write(path.with_name(name), mesh.kind, mesh.points[nodes], local.reshape(cells.shape),
               arrays)  # fmt: skip
        names.append(name)
    sources = "".join(f'<Piece Source="{name}"/>' for name in names)
    path.write_text(
        '<VTKFile type="PUnstructuredGrid" version="1.0" byte_order="LittleEndian">'
        '<PUnstructuredGrid GhostLevel="0"><PPointData>'
        '<PDataArray type="Float64" Name="displacement" NumberOfComponents="3"/>'
        '<PDataArray type="Int64" Name="GlobalNodeIds"/></PPointData>'
        '<PPoints><PDataArray type="Float64" NumberOfComponents="3"/></PPoints>'
        f"{sources}</PUnstructuredGrid></VTKFile>\n"
    )


def _write(
    path: Path, kind: str, points: FloatArray, cells: IntArray, fields: dict[str, np.ndarray]
) -> None:
    count, width = cells.shape
    arrays: list[tuple[str, str, np.ndarray]] = [
        ("PointData", name, values) for name, values in fields.items()
    ]
    arrays += [
        ("Points", "Points", points),
        ("Cells", "connectivity", cells),
        ("Cells", "offsets", np.arange(width, width * (count + 1), width)),
        ("Cells", "types", np.full(count, ELEMENTS[kind].vtk_type, np.uint8)),
    ]
    types = {"f8": "Float64", "i8": "Int64", "u1": "UInt8"}
    offset, sections = 0, {"PointData": "", "Points": "", "Cells": ""}
    for section, name, values in arrays:
        parts = values.shape[1] if values.ndim == 2 and section != "Cells" else 1
        sections[section] += (
            f'<DataArray type="{types[values.dtype.str[1:]]}" Name="{name}" format="appended" '
            f'NumberOfComponents="{parts}" offset="{offset}"/>'
        )
        offset += 8 + values.nbytes
    body = "".join(f"<{s}>{text}</{s}>" for s, text in sections.items())
    with path.open("wb") as file:
        file.write(
            '<VTKFile type="UnstructuredGrid" version="1.0" byte_order="LittleEndian" '
            'header_type="UInt64"><UnstructuredGrid>'
            f'<Piece NumberOfPoints="{len(points)}" NumberOfCells="{count}">{body}</Piece>'
            '</UnstructuredGrid><AppendedData encoding="raw">_'.encode()
        )
        for _, _, values in arrays:
            file.write(np.uint64(values.nbytes).tobytes())
            np.ascontiguousarray(values).tofile(file)
        file.write(b"</AppendedData></VTKFile>\n")
