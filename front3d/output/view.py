"""What a picture of a cracked solid shows: its skin, its crack faces, and from where it is seen."""

from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import BoolArray, FloatArray
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
    centres = surface.cell_centers().points
    normals = surface.compute_normals(
        point_normals=False, auto_orient_normals=False, consistent_normals=False
    ).cell_data["Normals"]
    crack = crack_faces(np.asarray(centres, float), np.asarray(normals, float), fronts)
    return Skin(as_surface(surface.extract_cells(~crack)), as_surface(surface.extract_cells(crack)))


def as_surface(cells: Any) -> Any:
    """Drawable surface of a piece of a surface."""
    return cells.extract_surface(algorithm="dataset_surface")


def crack_faces(
    centres: FloatArray, normals: FloatArray, fronts: tuple[FrontResult, ...]
) -> BoolArray:
    """Which boundary faces are crack faces, (faces,), for drawing only.

    In a full model they are the faces that coincide in pairs; in a half model there are none,
    and the faces are taken that lie in the plane of the nearest station, behind its front.
    """
    from scipy.spatial import KDTree

    size = float(np.linalg.norm(np.ptp(centres, axis=0)))
    paired = np.asarray(KDTree(centres).query(centres, k=2)[0])[:, 1] < 1e-6 * size
    if paired.any():
        return np.asarray(paired)
    positions = np.concatenate([front.positions for front in fronts])
    frames = np.concatenate([front.frames for front in fronts])
    reach, nearest = KDTree(positions).query(centres)
    e1, e2 = frames[nearest, 0], frames[nearest, 1]
    offset = centres - positions[nearest]
    in_plane = np.abs(np.einsum("ij,ij->i", offset, e2)) < 1e-3 * reach
    behind = np.einsum("ij,ij->i", offset, e1) < 0
    facing = np.abs(np.einsum("ij,ij->i", normals, e2)) > 0.99
    return np.asarray(in_plane & behind & facing)


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
        axes = np.linalg.svd(flat, full_matrices=False)[2]
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
