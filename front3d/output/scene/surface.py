"""The boundary of a cracked solid for pictures: outside, crack faces, and how far these open."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.results import FrontResult
from front3d.solid import Solid

_SKIRT = 0.15
"""How far from the mouth the outside follows it, in diameters of the front."""


@dataclass(frozen=True, slots=True, eq=False)
class Skin:
    """The boundary of a solid as drawable surfaces: outside without crack faces, crack faces.

    Their point data `opening_0`, `opening_1`, ... are how far each point moves when the crack opens
    in each step of the fronts, (n, 3): half of the opening on the faces, nought elsewhere.
    """

    outside: Any
    crack: Any


def steps_of(fronts: Sequence[FrontResult]) -> list[str]:
    """Names of the steps in their order."""
    return list(dict.fromkeys(front.step for front in fronts))


def array_of(step: int) -> str:
    return f"opening_{step}"


def skin(solid: Solid, fronts: tuple[FrontResult, ...]) -> Skin:
    """Split the boundary faces of `solid` into outside and crack."""
    import pyvista as pv

    cells: dict[int, Any] = {}
    for block in solid.blocks:
        kind = block.element.vtk_type
        cells[kind] = np.concatenate([cells[kind], block.nodes]) if kind in cells else block.nodes
    grid = pv.UnstructuredGrid(cells, np.asarray(solid.points))
    displacements = {step.name: step.displacement for step in solid.steps}
    names = [array_of(k) for k, step in enumerate(steps_of(fronts)) if step in displacements]
    for k, step in enumerate(steps_of(fronts)):
        if step in displacements:
            grid.point_data[array_of(k)] = displacements[step]
    surface: Any = grid.extract_surface(algorithm="dataset_surface")
    triangles = np.asarray(surface.triangulate().faces).reshape(-1, 4)[:, 1:]
    moved = {name: np.asarray(surface.point_data[name], np.float64) for name in names}
    surface = pv.PolyData.from_regular_faces(surface.points, triangles)
    points = np.asarray(surface.points, np.float64)
    crack = crack_faces(points, triangles, fronts)
    if moved:
        faces = _Faces.of(points, triangles[crack], triangles[~crack], fronts)
        for name, displacement in moved.items():
            surface.point_data[name] = faces.opening(displacement).astype(np.float32)
    return Skin(as_surface(surface.extract_cells(~crack)), as_surface(surface.extract_cells(crack)))


def as_surface(cells: Any) -> Any:
    """Drawable surface of a piece of a surface."""
    return cells.extract_surface(algorithm="dataset_surface")


def crack_faces(
    points: FloatArray, triangles: IntArray, fronts: tuple[FrontResult, ...]
) -> BoolArray:
    """Which boundary triangles (m, 3) belong to crack faces, (m,), for drawing only."""
    corners = points[triangles]
    normals = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
    area = np.linalg.norm(normals, axis=1)
    normals /= np.maximum(area, 1e-300)[:, None]
    facing = _with_opposite(points, triangles, normals, np.sqrt(area))
    return facing if facing.any() else _behind_front(corners.mean(axis=1), normals, fronts)


def _with_opposite(
    points: FloatArray, triangles: IntArray, normals: FloatArray, sizes: FloatArray
) -> BoolArray:
    """Triangles whose centre lies in another one that faces the other way.

    Not by equal centres: the two sides may be cut into triangles along different diagonals.
    """
    from scipy.spatial import KDTree

    used = np.unique(triangles)
    extent = float(np.linalg.norm(np.ptp(points, axis=0)))
    twin = np.zeros(len(points), dtype=bool)
    twin[used] = np.asarray(KDTree(points[used]).query(points[used], k=2)[0])[:, 1] < 1e-6 * extent
    # One row of triangles more: a corner of the front may leave one whose points are all on it.
    twin[triangles[twin[triangles].any(axis=1)]] = True
    near = np.flatnonzero(twin[triangles].any(axis=1))
    found = np.zeros(len(triangles), dtype=bool)
    if not len(near):
        return found
    corners = points[triangles[near]]
    centres = corners.mean(axis=1)
    _, around = KDTree(centres).query(centres, k=min(16, len(near)))
    for other in np.asarray(around).T:
        normal, size = normals[near[other]], sizes[near[other]]
        offset = np.einsum("ij,ij->i", centres - corners[other, 0], normal)
        inside = np.abs(offset) < 0.05 * size
        inside &= np.einsum("ij,ij->i", normals[near], normal) < -0.9
        for k in range(3):
            side = corners[other, (k + 1) % 3] - corners[other, k]
            left = np.cross(side, centres - corners[other, k])
            inside &= np.einsum("ij,ij->i", left, normal) > -1e-9 * size**2
        found[near] |= inside
    return found


def _behind_front(
    centres: FloatArray, normals: FloatArray, fronts: tuple[FrontResult, ...]
) -> BoolArray:
    """For a half model: triangles in the plane of the nearest station, behind the front."""
    from scipy.spatial import KDTree

    positions = np.concatenate([front.positions for front in fronts])
    frames = np.concatenate([front.frames for front in fronts])
    reach, nearest = KDTree(positions).query(centres)
    e1, e2 = frames[nearest, 0], frames[nearest, 1]
    offset = centres - positions[nearest]
    in_plane = np.abs(np.einsum("ij,ij->i", offset, e2)) < 1e-3 * reach
    behind = np.einsum("ij,ij->i", offset, e1) < 0
    facing = np.abs(np.einsum("ij,ij->i", normals, e2)) > 0.99
    out: BoolArray = in_plane & behind & facing
    return out


@dataclass(frozen=True, slots=True, eq=False)
class _Faces:
    """The points of the two faces of a crack, and those of each that lie opposite.

    points : number of points of the whole surface
    sides : rows of the points of the upper and the lower face, without those of both
    opposite : per side, rows (m, 3) of the nearest points of the other, and their weights
    normal : (points, 3) of the crack at the nearest station
    skirt : per side, rows (m,) of points of the outside, of the points of the crack's mouth that
        they follow, and how far they do: without it, cells at the mouth would be turned over
    """

    points: int
    sides: tuple[IntArray, IntArray]
    opposite: tuple[tuple[IntArray, FloatArray], ...]
    normal: FloatArray
    skirt: tuple[tuple[IntArray, IntArray, FloatArray], ...]

    @classmethod
    def of(
        cls,
        points: FloatArray,
        triangles: IntArray,
        outside: IntArray,
        fronts: tuple[FrontResult, ...],
    ) -> "_Faces":
        from scipy.spatial import KDTree

        tree = KDTree(np.concatenate([front.positions for front in fronts]))
        e2 = np.concatenate([front.frames[:, 1] for front in fronts])[tree.query(points)[1]]
        corners = points[triangles]
        outwards = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
        # The solid above the crack ends at its upper face: outwards is down there.
        is_upper = np.einsum("ij,ij->i", outwards, e2[triangles[:, 0]]) < 0
        whole = [np.unique(triangles[is_upper]), np.unique(triangles[~is_upper])]
        both = np.intersect1d(whole[0], whole[1])
        opposite = []
        for own, other in zip(whole, whole[::-1], strict=True):
            rows = np.setdiff1d(own, both)
            if not len(other) or not len(rows):
                opposite.append((np.zeros((len(rows), 0), np.int64), np.zeros((len(rows), 0))))
                continue
            k = min(3, len(other))
            found = KDTree(points[other]).query(points[rows], k=range(1, k + 1))
            distance, nearest = np.asarray(found[0]), np.asarray(found[1])
            size = float(np.linalg.norm(np.ptp(points[own], axis=0)))
            # Where meshes match, the twin's weight leaves nothing to the others.
            weight = 1 / (distance + 1e-9 * size) ** 2
            opposite.append((other[nearest], weight / weight.sum(axis=1, keepdims=True)))
        sides = (np.setdiff1d(whole[0], both), np.setdiff1d(whole[1], both))
        skirt = _skirt(points, whole, np.unique(outside), e2, fronts)
        return cls(len(points), sides, tuple(opposite), e2, skirt)

    def opening(self, displacement: FloatArray) -> FloatArray:
        """(points, 3) half of the displacement against the other face; of a half model, whose other
        face is a mirror image, the displacement off the crack plane.
        """
        out = np.zeros((self.points, 3))
        for rows, (nearest, weight) in zip(self.sides, self.opposite, strict=True):
            own = displacement[rows]
            if nearest.shape[1]:
                out[rows] = (own - np.einsum("ij,ijk->ik", weight, displacement[nearest])) / 2
            else:
                normal = self.normal[rows]
                out[rows] = np.einsum("ij,ij->i", own, normal)[:, None] * normal
        for rows, lips, share in self.skirt:
            out[rows] = share[:, None] * out[lips]
        return out


def _skirt(
    points: FloatArray,
    faces: list[IntArray],
    outside: IntArray,
    e2: FloatArray,
    fronts: tuple[FrontResult, ...],
) -> tuple[tuple[IntArray, IntArray, FloatArray], ...]:
    """Points of the outside near the mouth, less and less the farther they are from it."""
    from scipy.spatial import KDTree

    positions = np.concatenate([front.positions for front in fronts])
    reach = _SKIRT * float(np.linalg.norm(np.ptp(positions, axis=0)))
    others = np.setdiff1d(outside, np.concatenate(faces))
    found = []
    for face, sign in zip(faces, (1, -1), strict=True):
        lips = np.intersect1d(face, outside)
        if not len(lips) or not len(others):
            continue
        away, nearest = KDTree(points[lips]).query(points[others])
        distance, lip = np.asarray(away), lips[nearest]
        above = np.einsum("ij,ij->i", points[others] - points[lip], e2[lip]) * sign > 0
        near = above & (distance < reach)
        found.append((others[near], lip[near], 1 - distance[near] / reach))
    return tuple(found)
