"""What a picture of a cracked solid shows: its skin, its crack faces, and from where it is seen."""

from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.results import FrontResult
from front3d.solid import Solid


@dataclass(frozen=True, slots=True, eq=False)
class Skin:
    """The boundary of a solid as drawable surfaces: outside without crack faces, crack faces."""

    outside: Any
    crack: Any


@dataclass(frozen=True, slots=True, eq=False)
class View:
    """An orthogonal view: focus (3,), unit vectors towards the viewer and up, half the height."""

    focus: FloatArray
    towards: FloatArray
    up: FloatArray
    half_height: float


def skin(solid: Solid, fronts: tuple[FrontResult, ...]) -> Skin:
    """Split the boundary faces of `solid` into outside and crack."""
    import pyvista as pv

    cells: dict[int, Any] = {}
    for block in solid.blocks:
        kind = block.element.vtk_type
        cells[kind] = np.concatenate([cells[kind], block.nodes]) if kind in cells else block.nodes
    grid = pv.UnstructuredGrid(cells, np.asarray(solid.points))
    surface: Any = grid.extract_surface(algorithm="dataset_surface")
    triangles = np.asarray(surface.triangulate().faces).reshape(-1, 4)[:, 1:]
    surface = pv.PolyData.from_regular_faces(surface.points, triangles)
    crack = crack_faces(np.asarray(surface.points, np.float64), triangles, fronts)
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


def smooth_curve(front: FrontResult, between: int = 20) -> tuple[FloatArray, FloatArray]:
    """Points (m, 3) on a cubic spline through the stations, and their arc lengths (m,)."""
    from scipy.interpolate import CubicSpline

    s, positions = front.s, front.positions
    if front.closed:
        s, positions = np.append(s, front.length), np.vstack([positions, positions[:1]])
    fine = np.interp(np.arange(between * (len(s) - 1) + 1) / between, np.arange(len(s)), s)
    return CubicSpline(s, positions, bc_type="periodic" if front.closed else "natural")(fine), fine


def best_view(front: FrontResult, points: FloatArray) -> View:
    """Look at the crack obliquely from above its plane, from the side of its mouth.

    `points` (n, 3) are to be inside the picture. A closed front, which has no mouth, is seen across
    its shorter axis.
    """
    up = _unit(front.frames[:, 1].mean(axis=0), fallback=front.frames[0, 1])
    ends = front.positions[[0, -1]].mean(axis=0)
    depth = front.positions.mean(axis=0) - ends
    depth -= depth @ up * up
    if front.closed or np.linalg.norm(depth) < 0.02 * front.length:
        flat = front.positions - front.positions.mean(axis=0)
        flat = flat - np.outer(flat @ up, up)
        _, widths, axes = np.linalg.svd(flat, full_matrices=False)
        if front.closed and widths[0] < 1.02 * widths[1]:  # round: along a coordinate axis
            axes = np.eye(3)[np.argsort(np.abs(up), kind="stable")]
            axes = axes - np.outer(axes @ up, up)
        long = axes[0] if front.closed else front.frames[:, 2].mean(axis=0)
        towards = np.cross(_unit(long, axes[0]), up)
        if not front.closed:
            towards = -front.frames[:, 0].mean(axis=0)
    else:
        towards = -depth
    towards = _unit(towards, fallback=front.frames[0, 0])
    side = np.cross(up, towards)
    # Turned by 25 degrees and raised by 35: two outer faces and the crack plane are all seen.
    turn, rise = np.radians(25.0), np.radians(35.0)
    around = np.cos(turn) * towards + np.sin(turn) * side
    eye = np.cos(rise) * around + np.sin(rise) * up
    upright = _unit(up - up @ eye * eye, fallback=side)
    focus = (points.min(axis=0) + points.max(axis=0)) / 2
    right = np.cross(upright, eye)
    offset = points - focus
    # Centred and fitted on what is seen, with the picture's shape of 4 to 3.
    u, v = offset @ right, offset @ upright
    focus = focus + (u.max() + u.min()) / 2 * right + (v.max() + v.min()) / 2 * upright
    half = max(np.ptp(v) / 2, np.ptp(u) / 2 * 0.75)
    return View(focus, eye, upright, float(half))


def peak_station(front: FrontResult, mode: int) -> int:
    """Station of the largest |K| of `mode`."""
    return int(np.nanargmax(np.abs(front.K[:, mode])))


def drawn_mode(fronts: tuple[FrontResult, ...]) -> int:
    """K_I, unless it is below a twentieth of another mode: then the largest mode."""
    largest = np.nanmax([np.nanmax(np.abs(front.K), axis=0) for front in fronts], axis=0)
    return 0 if largest[0] >= 0.05 * largest.max() else int(np.argmax(largest))


def _unit(vector: FloatArray, fallback: FloatArray) -> FloatArray:
    length = float(np.linalg.norm(vector))
    return vector / length if length > 1e-9 else fallback / np.linalg.norm(fallback)
