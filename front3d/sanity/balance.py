"""Nodes near a front that are out of balance: damaged numbers, or a load that nobody gave.

In a finite-element solution the forces of the cells around a node cancel, but for the loads there.
A node that stands or has moved elsewhere than it should is held by nothing: the force left there is
many times that of other nodes.  Where the analysis used other elements or another quadrature some
force is left everywhere, and it repeats along the front: so a node is compared with those that
stand like it towards the front.  What such nodes mean for K is found by putting them in balance and
evaluating once more, so that nothing is said of what K does not feel.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from scipy.sparse.linalg import LinearOperator, cg
from scipy.spatial import cKDTree

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.facetable import multiplicity, set_keys
from front3d.errors import Front3DError
from front3d.methods.closure_forces import face_forces
from front3d.methods.context import FrontContext
from front3d.methods.face_loads import loaded_faces
from front3d.methods.internal_forces import add_cells, empty_sums
from front3d.methods.loading import nodal_state
from front3d.methods.state_kernels import INITIAL, RATIO
from front3d.methods.tube import Tube, build_tube
from front3d.results import MethodResult
from front3d.units import percent

OUTLIER = 100.0
"""Force left at a node, in parts of the median of those that stand like it, above which it is out
of balance.  With exact fields imposed on all nodes, or solved with reduced quadrature, the largest
found was 81, on fronts of four cells; on longer ones 16 (`tests/test_balance.py`)."""

ALIKE = 16
"""Nodes that a node is compared with."""

SETTLED = 1e-6
"""Shift to balance, in the displacement that K makes at the rim of the rings, below which a node is
in balance to the digits of its file, single precision included."""

MOST_SETTLED, FEW_BETWEEN = 0.15, 0.1
"""Share of the nodes that are in balance so well, and share of those between them and what is felt,
at which the others are compared with nothing: a solution for the very elements and quadrature used
here, in which damage leaves a gap.  With another quadrature most nodes are between."""

FELT = 1e-4
"""The same for single nodes: smaller shifts are not felt in K."""

CHANGED = 2e-3
"""Change of K, in parts of the front's largest, from which on it is said: a tenth of the spread of
the rings that is spoken of, and less than the error of any model."""

_MOST = 3000
"""Nodes out of balance that are still put in balance: damage is not that common."""

_INSIDE = 1e-6


@dataclass(frozen=True, slots=True, eq=False)
class _Forces:
    """Forces left at the nodes of a tube; nodes of collapsed cells count as one, in a row.

    Attributes
    ----------
    tube : the cells
    rows : (nodes of the tube,) the row of each
    first : (n,) a node of the tube for each row
    left : (steps, n, 3) force of the cells less that of the loads
    shift : (steps, n) about how far a node would have to move alone to be in balance
    checked : (n,) nodes whose cells and loads are all known
    state : (steps, nodes of the tube, columns) of `nodal_state`
    stiffness : (n,) of the cells around each
    """

    tube: Tube
    rows: IntArray
    first: IntArray
    left: FloatArray
    shift: FloatArray
    checked: BoolArray
    state: FloatArray
    stiffness: FloatArray


def balance_warnings(
    context: FrontContext,
    tube: Tube,
    found: list[MethodResult],
    method: Callable[[FrontContext], list[MethodResult]],
) -> list[tuple[str, ...]]:
    """What is to be said of each result of a method, which can be asked once more."""
    quiet: list[tuple[str, ...]] = [() for _ in found]
    largest = max(float(np.abs(result.K).max(initial=0.0)) for result in found)
    if not largest > 0.0:
        return quiet
    reach = reach_of(found)
    forces = forces_left(context, tube, reach)
    factor = 1.0 if context.rows is None else float(np.abs(context.rows).max())
    scale = largest / factor / context.material.plane_strain_modulus * float(np.sqrt(reach))
    out = _out_of_balance(context, forces, scale)
    if not out.any():
        return quiet
    moves: FloatArray | None = None
    changes: list[float] | None = None
    if out.any(axis=0).sum() <= _MOST:
        moves = np.stack([_settling(context, forces, step, mine) for step, mine in enumerate(out)])
        changes = _changes(context, forces, moves, found, method)
    size = forces.shift if moves is None else np.linalg.norm(moves, axis=2)
    rows = np.eye(len(out)) if context.rows is None else context.rows
    for k, row in enumerate(rows):
        mine = out[row != 0.0].any(axis=0)
        if mine.any() and (changes is None or changes[k] > CHANGED):
            worst = int(np.argmax(np.where(mine, size[row != 0.0].max(axis=0), 0.0)))
            change = changes[k] if changes is not None else None
            quiet[k] = (_sentence(context, forces, int(mine.sum()), worst, change),)
    return quiet


def tube_of(context: FrontContext, found: list[MethodResult]) -> Tube:
    """The cells that the rings of a method hold."""
    return build_tube(context, reach_of(found))


def reach_of(found: list[MethodResult]) -> float:
    """The radius of the largest ring."""
    rings = found[0].rings
    return float(rings.radii.max()) if rings is not None else 0.0


def forces_left(context: FrontContext, tube: Tube, reach: float) -> _Forces:
    """The forces left at the nodes within `reach` of a front."""
    solid, same = context.solid, context.model.same
    nodes = tube.nodes
    entity, first, rows = np.unique(same.entity[nodes], return_index=True, return_inverse=True)
    state = nodal_state(context, nodes, tube.s)
    sums = empty_sums(len(context.displacement), len(first))
    points, displacement = solid.points[nodes], context.displacement[:, nodes]
    for block, cells in zip(solid.blocks, tube.cells, strict=True):
        local = np.searchsorted(nodes, block.nodes[cells])
        add_cells(sums, block.element, local, rows, points, displacement, state, context.material)
    left = sums.force
    if loaded_faces(context):
        for faces in filter(None, (context.patch.upper, context.patch.lower)):
            near = np.asarray(np.isin(faces.corners, nodes).any(axis=1))
            left -= face_forces(context, faces[near])[:, entity]
    side = np.zeros(len(first), np.int64)
    side[rows] = tube.side
    distance = np.zeros(len(first))
    np.maximum.at(distance, rows, tube.r)
    inside = np.linalg.norm(sums.area, axis=1) <= _INSIDE * sums.area_parts
    on_rim = np.isin(nodes[first], _rim(context))
    checked = (distance <= reach) & (inside | ((side != 0) & ~on_rim))
    shift = np.linalg.norm(left, axis=2) / np.where(sums.stiffness > 0.0, sums.stiffness, np.inf)
    return _Forces(tube, rows, first, left, shift, checked, state, sums.stiffness)


def _rim(context: FrontContext) -> IntArray:
    """Nodes on the border of the crack faces: the front and the mouth, where other surfaces are."""
    found = [np.zeros(0, np.int64)]
    for faces in filter(None, (context.patch.upper, context.patch.lower)):
        sides = faces.sides()[0].reshape(-1, 3)
        sides = sides[sides[:, 0] != sides[:, 1]]
        found.append(sides[multiplicity(set_keys(sides[:, :2])) == 1].ravel())
    return np.unique(np.concatenate(found))


def _out_of_balance(context: FrontContext, forces: _Forces, scale: float) -> BoolArray:
    """(steps, n) which nodes are."""
    out = np.zeros(forces.shift.shape, bool)
    checked = np.flatnonzero(forces.checked)
    felt = forces.shift[:, checked] > FELT * scale
    if not felt.any():
        return out
    at = _towards_front(context, forces)[checked]
    rows = np.flatnonzero(felt.any(axis=0))
    _, alike = cKDTree(at).query(at[rows], k=min(ALIKE, len(checked)))
    alike = np.asarray(alike).reshape(len(rows), -1)
    for step, shift in enumerate(forces.shift[:, checked]):
        usual = np.median(shift[alike], axis=1)
        below = np.mean(shift < SETTLED * scale)
        between = np.mean(~felt[step]) - below
        if below > MOST_SETTLED and between < FEW_BETWEEN:
            usual[:] = 0.0
        out[step, checked[rows]] = felt[step, rows] & (shift[rows] > OUTLIER * usual)
    return out


def _towards_front(context: FrontContext, forces: _Forces) -> FloatArray:
    """(n, 4) coordinates in which nodes are near that stand alike towards the front: the logarithm
    of the distance, the angle, and whether they are corners.
    """
    tube, solid = forces.tube, context.solid
    nodes = tube.nodes[forces.first]
    place, frame, _ = context.front.curve.frames(tube.s[forces.first])
    local = np.einsum("nij,nj->ni", frame, solid.points[nodes] - place)
    r = np.hypot(local[:, 0], local[:, 1])
    reach = float(r.max())
    on_front = r < 1e-9 * reach
    side = tube.side[forces.first]
    half = np.where(side != 0, np.pi * side, np.arctan2(local[:, 1], local[:, 0])) / 2.0
    corner = np.zeros(len(solid.points), bool)
    for block, cells in zip(solid.blocks, tube.cells, strict=True):
        corner[block.nodes[cells, : block.element.n_corners]] = True
    at = np.stack(
        [
            np.log2(np.where(on_front, reach, r) / reach),
            2.0 * np.cos(half),
            2.0 * np.sin(half),
            10.0 * corner[nodes],
        ],
        axis=1,
    )
    at[on_front, :3] = -50.0, 0.0, 0.0
    return at


def _changes(
    context: FrontContext,
    forces: _Forces,
    moves: FloatArray,
    found: list[MethodResult],
    method: Callable[[FrontContext], list[MethodResult]],
) -> list[float] | None:
    """Change of each K, in parts of its largest, once the nodes have moved into balance."""
    displacement = context.displacement.copy()
    displacement[:, forces.tube.nodes] += moves[:, forces.rows]
    try:
        again = method(replace(context, displacement=displacement))
    except Front3DError:
        return None
    sizes = [float(np.abs(new.K - old.K).max()) for new, old in zip(again, found, strict=True)]
    return [
        size / max(float(np.abs(old.K).max()), 1e-300)
        for size, old in zip(sizes, found, strict=True)
    ]


def _settling(context: FrontContext, forces: _Forces, step: int, mine: BoolArray) -> FloatArray:
    """(n, 3) displacements of nodes, zero but for `mine`, that take the forces left there away."""
    solid, tube, rows = context.solid, forces.tube, forces.rows
    moved = np.zeros((len(mine), 3))
    if not mine.any():
        return moved
    points = solid.points[tube.nodes]
    state = forces.state[step : step + 1].copy()
    if len(state):  # the constants alone: what acts does not change
        state[..., INITIAL:RATIO] = 0.0
    around = [
        (block.element, local[mine[rows[local]].any(axis=1)])
        for block, cells in zip(solid.blocks, tube.cells, strict=True)
        for local in [np.searchsorted(tube.nodes, block.nodes[cells])]
    ]

    def force(v: FloatArray) -> FloatArray:
        moved[mine] = v.reshape(-1, 3)
        sums = empty_sums(1, len(mine))
        for element, cells in around:
            add_cells(
                sums, element, cells, rows, points, moved[rows][None], state, context.material
            )
        return np.asarray(sums.force[0, mine].ravel())

    size = 3 * int(mine.sum())
    scaling = 1.0 / np.repeat(forces.stiffness[mine], 3)
    found, _ = cg(
        LinearOperator((size, size), matvec=force, dtype=np.float64),
        -forces.left[step, mine].ravel(),
        rtol=1e-6,
        maxiter=200,
        M=LinearOperator((size, size), matvec=lambda v: scaling * v, dtype=np.float64),
    )
    moved[:] = 0.0
    moved[mine] = found.reshape(-1, 3)
    return moved


def _sentence(
    context: FrontContext, forces: _Forces, count: int, worst: int, change: float | None
) -> str:
    node = int(forces.tube.nodes[forces.first[worst]])
    x, y, z = context.solid.points[node]
    effect = (
        f"putting them in balance changes K by {percent(change)} of its largest value, about as "
        "far as it may be off"
        if change is not None
        else "K cannot be relied on"
    )
    return (
        f"{count} nodes near the front are out of balance, most of all node {node} at ({x:.4g}, "
        f"{y:.4g}, {z:.4g}) or one next to it: the forces of the cells around them do not cancel "
        f"as they do elsewhere; {effect}: a displacement or a coordinate was damaged on its way, "
        "or a load acts there that was not given"
    )
