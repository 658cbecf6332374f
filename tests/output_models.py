"""Solids and evaluations built in code, with invented figures, for the tests of what is written."""

import numpy as np

from front3d.results import Evaluation, FrontResult, MethodResult, Rings, energy_release_rate
from front3d.solid import CellBlock, Material, Solid, Step
from front3d.units import Units

STEEL = Material(200e3, 0.3)
MILLIMETRES = Units("mm", "MPa")


def cracked_block(
    half_length: float, depth: float, *, embedded: bool = False, n: int = 12
) -> Solid:
    """A block of bricks 8 x 4 x 8 (z = 0 in its middle), cut at z = 0 inside an ellipse.

    The ellipse (semi-axes `half_length` along x, `depth` along y) has its centre on the face
    y = 0, or in the middle of the block. The crack's outline follows the bricks: coarse, but these
    tests draw and write, they do not evaluate.
    """
    x, y, z = np.linspace(-4, 4, 2 * n + 1), np.linspace(0, 4, n + 1), np.linspace(-4, 4, 2 * n + 1)
    grid = np.stack(np.meshgrid(x, y, z, indexing="ij"), axis=-1)
    number = np.arange(grid[..., 0].size).reshape(grid.shape[:3])
    cells = np.stack(
        [
            number[i : i - 1 or None, j : j - 1 or None, k : k - 1 or None]
            for i, j, k in (
                (0, 0, 0), (1, 0, 0), (1, 1, 0), (0, 1, 0),
                (0, 0, 1), (1, 0, 1), (1, 1, 1), (0, 1, 1),
            )
        ],
        axis=-1,
    ).reshape(-1, 8)  # fmt: skip
    points = grid.reshape(-1, 3)
    centre = 2.0 if embedded else 0.0
    radius = np.hypot(points[:, 0] / half_length, (points[:, 1] - centre) / depth)
    inside = np.flatnonzero((np.abs(points[:, 2]) < 1e-9) & (radius < 1 - 1e-9))
    twin = np.arange(len(points))
    twin[inside] = len(points) + np.arange(len(inside))
    above = points[cells].mean(axis=1)[:, 2] > 0
    cells[above] = twin[cells[above]]
    points = np.vstack([points, points[inside]])
    displacement = np.zeros_like(points)
    displacement[len(grid.reshape(-1, 3)) :, 2] = 1e-3
    return Solid(
        points,
        (CellBlock("hexahedron", cells),),
        (Step("tension", displacement),),
        source="block.vtu",
    )


def elliptic_front(
    half_length: float,
    depth: float,
    *,
    closed: bool,
    n: int = 41,
    step: str = "tension",
    front: int = 0,
    ends: tuple[str, str] = ("free surface", "symmetry plane"),
    flags: dict[int, str] | None = None,
    centre: float = 0.0,
    rings: bool = True,
) -> FrontResult:
    """A front with K_I largest at depth, K_II and K_III small, three rings 1 % apart."""
    angle = np.linspace(0, 2 * np.pi, n, endpoint=False) if closed else np.linspace(0, np.pi, n)
    zero = np.zeros(n)
    cos, sin = np.cos(angle), np.sin(angle)
    positions = np.stack([half_length * cos, centre + depth * sin, zero], axis=1)
    e1 = np.stack([depth * cos, half_length * sin, zero], axis=1)
    e1 /= np.linalg.norm(e1, axis=1, keepdims=True)
    e2 = np.tile([0.0, 0.0, 1.0], (n, 1))
    pieces = np.linalg.norm(np.diff(positions, axis=0), axis=1)
    s = np.concatenate([[0.0], np.cumsum(pieces)])
    length = float(s[-1] + (np.linalg.norm(positions[0] - positions[-1]) if closed else 0.0))
    K = np.stack([300 + 120 * sin**2, 25 * cos, 40 * sin * cos], axis=1)
    G = energy_release_rate(K, STEEL)
    ring_K = np.stack([0.97 * K, 0.995 * K, 1.005 * K])
    result = MethodResult(
        "interaction",
        K,
        {"hat_half_width": np.full(n, 0.4)},
        Rings(np.outer([0.1, 0.2, 0.3], np.ones(n)), ring_K, np.stack([G, 1.01 * G, 1.01 * G]))
        if rings
        else None,
    )
    words = tuple((flags or {}).get(i, "") for i in range(n))
    return FrontResult(
        step,
        front,
        closed,
        () if closed else ends,
        length,
        s,
        positions,
        np.stack([e1, e2, np.cross(e1, e2)], axis=1),
        K,
        G,
        words,
        {"interaction": result, "opening": MethodResult("opening", 1.02 * K)},
        ("interaction",) * n,
        ("the front is coarse",),
    )


def curve_front(
    positions: np.ndarray, normal: np.ndarray, K: np.ndarray, ends: tuple[str, str]
) -> FrontResult:
    """An open front through `positions`; it grows to the side that e1 = e2 x e3 gives."""
    steps = np.linalg.norm(np.diff(positions, axis=0), axis=1)
    s = np.concatenate([[0.0], np.cumsum(steps)])
    e3 = np.gradient(positions, s, axis=0, edge_order=2)
    e3 /= np.linalg.norm(e3, axis=1, keepdims=True)
    e2 = np.tile(normal, (len(s), 1))
    frames = np.stack([np.cross(e2, e3), e2, e3], axis=1)
    G = energy_release_rate(K, STEEL)
    rings = Rings(np.outer([1, 2, 3], np.ones(len(s))), np.stack([K, 0.99 * K, K]), [G, G, G])
    methods = {
        "interaction": MethodResult("interaction", K, {"hat_interaction": 0 * s + 0.6}, rings),
        "closure": MethodResult("closure", 1.01 * K),
    }
    flags = tuple(ends[0] if x == 0 else ends[1] if x == s[-1] else "" for x in s)
    return FrontResult(
        "tension",
        0,
        False,
        ends,
        float(s[-1]),
        s,
        positions,
        frames,
        K,
        G,
        flags,
        methods,
        ("interaction",) * len(s),
    )


def corner_front(ends: tuple[str, str] = ("free surface", "free surface")) -> FrontResult:
    """A quarter of an ellipse, 6 along x and 4 along y, from (6, 0) to (0, 4)."""
    angle = np.linspace(0, np.pi / 2, 61)
    cos, sin, zero = np.cos(angle), np.sin(angle), 0 * angle
    K = np.stack([300 + 40 * np.sin(2 * angle), 8 * cos, zero], axis=1)
    positions = np.stack([6 * cos, 4 * sin, zero], axis=1)
    return curve_front(positions, np.array([0.0, 0.0, -1.0]), K, ends)


def through_front(ends: tuple[str, str] = ("free surface", "free surface")) -> FrontResult:
    """A slightly bowed front through a thickness of 10 along z; the solid is where x is larger."""
    z = np.linspace(0, 10, 41)
    K = np.stack([500 - 3 * (z - 5) ** 2, 6 * (z - 5), 0.16 * np.abs(z - 5) ** 3], axis=1)
    positions = np.stack([3 + 0.4 * np.sin(np.pi * z / 10), 0 * z, z], axis=1)
    return curve_front(positions, np.array([0.0, 1.0, 0.0]), K, ends)


def evaluation_of(*fronts: FrontResult, units: Units = MILLIMETRES) -> Evaluation:
    return Evaluation("block.vtu", STEEL, units, fronts, {"radii": (0.1, 0.2, 0.3)}, ("check it",))
