"""Crack closure in three dimensions: K from the work that would close the crack by one cell.

G_m = (1 / 2 A) sum_n N_a(s_n) F_m^n w_m^n for each mode m along its own axis of the local frame,
where F are the nodal forces between the cells above and below the faces ahead of the front, w
the openings mirrored from behind it, N_a the hat of the station, and A its integral over the faces
ahead.  Forces and openings are averaged each for itself, so a mode that changes sign along the
front vanishes where it does.

Where the cells below are no mirror images of those above, as in wedges and tetrahedra, the work of
all modes together is right, but K_I appears as a K_II of up to 4 % of it, and the other way round,
however fine the mesh (measured; see `signed_K`).

Sources: Rybicki and Kanninen (1977); Shivakumar, Tan and Newman (1988); Raju (1987); Krueger
(2004); Nairn (2011); Okada, Kawai and Araki (2008).
"""

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.front import SYMMETRY_PLANE, on_front_mask
from front3d.errors import MethodError
from front3d.methods.closure_columns import (
    NOT_COUNTED,
    Columns,
    column_openings,
    find_columns,
    rows_of_nodes,
)
from front3d.methods.closure_forces import (
    Ligament,
    closing_forces,
    face_nodes,
    find_ligament,
    mode_axes,
)
from front3d.methods.closure_formulas import signed_K
from front3d.methods.closure_profile import build_profile, outer_line, places_ahead
from front3d.methods.closure_variant import column_notes, variant_name
from front3d.methods.closure_weights import Tents, build_tents
from front3d.methods.context import FrontContext
from front3d.methods.hats import default_widths
from front3d.methods.loading import station_constants
from front3d.methods.tube import layer_reaches, project
from front3d.results import MethodResult

DISAGREE = 0.01
"""Part of the whole G by which the work of one mode may be negative without a word."""

UNBALANCED = 0.05
"""Part of the closing force that the two sides may leave over without a word."""


def evaluate(context: FrontContext) -> list[MethodResult]:
    """K of one front, one result per step; MethodError where no faces go on ahead, or the two
    sides are not meshed alike.
    """
    _require_alike(context)
    ligament = find_ligament(context)
    # Combined before they are multiplied: the work is no sum of the work in the steps.
    forces, imbalance = (context.combined(f) for f in closing_forces(context, ligament))
    columns = find_columns(context, ligament)
    front, options = context.front, context.options
    if options.hat is None:
        (reach,) = layer_reaches(context.solid, front, context.model.same, 1)
        width = default_widths(front, columns is not None, reach)
    else:
        width = np.full(len(front.corners), options.hat)
    tents = build_tents(context, ligament, width)
    jump = context.combined(openings(context))
    about: tuple[str, ...] = ()
    if columns is not None:
        work, opening = _work_in_columns(context, ligament, columns, tents, forces, jump)
        about = column_notes(context, columns)
    else:
        work, opening = _work_of_faces(context, ligament, tents, forces, jump)
    G = 0.5 * work
    if front.half:
        G[:, :, 1:] = 0.0
    K = [signed_K(*of_step) for of_step in zip(G, opening, station_constants(context), strict=True)]
    uneven = _unevenness(ligament, context, forces, imbalance)
    variant = variant_name(context, ligament, columns)
    return [
        MethodResult(
            "closure",
            K[step],
            {"closure_unbalance": np.full(len(K[step]), uneven[step])},
            variant=variant,
            notes=_notes(about, G[step], uneven[step]),
        )
        for step in range(len(K))
    ]


def _require_alike(context: FrontContext) -> None:
    """MethodError where mid-side nodes next to the front have no partner on the other face.

    Their openings would be missing from the work: closure was 12 to 19 % low on solved models.
    """
    patch, front = context.patch, context.front
    if not patch.unlike.any():
        return
    at_front = on_front_mask(front, context.model.same)[patch.upper.corners].any(axis=1)
    unlike = np.flatnonzero(patch.unlike & at_front)
    if len(unlike):
        raise MethodError(
            f"{context.solid.source}: mid-side nodes of {len(unlike)} pairs of crack faces next to "
            f"the front, such as at node {patch.upper.corners[unlike[0], 0]}, stand apart, "
            "expected pairs at the same places on both sides"
        )


def openings(context: FrontContext) -> FloatArray:
    """(steps, n_points, 3) upper less lower displacement at each entity of the upper crack face;
    zero elsewhere.  In a half model twice the displacement across the plane.
    """
    u, patch, entity = context.displacement, context.patch, context.model.same.entity
    upper, lower = patch.pairs.T
    out = np.zeros_like(u)
    if patch.plane is not None:
        normal = np.asarray(patch.plane.normal)
        out[:, entity[upper]] = 2.0 * (u[:, upper] @ normal)[..., None] * normal
    else:
        out[:, entity[upper]] = u[:, upper] - u[:, lower]
    return out


def _nodes_ahead(context: FrontContext, ligament: Ligament) -> IntArray:
    """Nodes of the faces ahead, one per entity."""
    members = [nodes.ravel() for _, nodes in face_nodes(context.solid, ligament.ahead)]
    nodes = np.unique(np.concatenate(members))
    return nodes[np.unique(context.model.same.entity[nodes], return_index=True)[1]]


def _work_in_columns(
    context: FrontContext,
    ligament: Ligament,
    columns: Columns,
    tents: Tents,
    forces: FloatArray,
    jump: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """(steps, n_stations, 3) work, twice over, and opening, where nodes stand in columns."""
    mirrored, far = column_openings(context, context.front, columns, jump)
    row = rows_of_nodes(context, ligament, columns)
    nodes = _nodes_ahead(context, ligament)
    work = np.zeros_like(far)
    for k in range(NOT_COUNTED):
        mine = nodes[row[nodes] == k]
        if not len(mine):
            continue
        s, local = _local_forces(context, mine, forces)
        for mode in range(3):
            summed = local[..., mode] @ tents.weights(s, odd=mode == 2)
            work[..., mode] += summed * mirrored[:, :, k, mode]
    return work, far


def _work_of_faces(
    context: FrontContext,
    ligament: Ligament,
    tents: Tents,
    forces: FloatArray,
    jump: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """(steps, n_stations, 3) work, twice over, and opening, on faces of any shape."""
    front = context.front
    outer, s_outer, reach = outer_line(context, ligament)
    nodes = _nodes_ahead(context, ligament)
    nodes = nodes[~outer[nodes]]
    s, ahead = places_ahead(context, nodes)
    ahead[ligament.on_front[nodes]] = 0.0
    period = front.length if front.closed else None
    distance = np.interp(s, s_outer, reach, period=period) - ahead
    profile = build_profile(context, ligament, tents, jump, float(max(reach.max(), distance.max())))
    _, local = _local_forces(context, nodes, forces)
    n = len(front.corners)
    work = np.zeros((len(jump), n, 3))
    for mode in range(3):
        weights = tents.weights(s, odd=mode == 2).tocoo()
        mirrored = profile.at(weights.col.astype(np.int64), distance[weights.row])[..., mode]
        part = weights.data * local[:, weights.row, mode] * mirrored
        for step in range(len(jump)):
            work[step, :, mode] = np.bincount(weights.col, part[step], n)
    last = np.full(n, profile.distance[-1])
    return work, profile.at(np.arange(n), last)


def _local_forces(
    context: FrontContext, nodes: IntArray, forces: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Arc lengths, (n,), and forces, (steps, n, 3), of nodes along the axes of the modes."""
    s, _ = project(context.front, context.solid.points[nodes])
    _, axes = mode_axes(context.front, s)
    at = forces[:, context.model.same.entity[nodes]]
    return s, np.einsum("tnk,nik->tni", at, axes)


def _unevenness(
    ligament: Ligament, context: FrontContext, forces: FloatArray, imbalance: FloatArray
) -> FloatArray:
    """(steps,) root mean square of what the sides leave over at the front, over that of forces.

    A symmetry plane at an end of the front holds the node there along e3; that is no imbalance.
    """
    front, entity = context.front, context.model.same.entity
    at = np.unique(entity[front.nodes])
    left = imbalance[:, at].copy()
    for k, kind in zip((0, -1), front.ends, strict=False):
        if kind == SYMMETRY_PLANE:
            _, axes = mode_axes(front, front.corner_s[[k]])
            row = np.searchsorted(at, entity[front.corners[k]])
            left[:, row] -= (left[:, row] @ axes[0, 2])[:, None] * axes[0, 2]
    left, whole = (np.sqrt((f**2).sum(axis=(1, 2))) for f in (left, forces[:, at]))
    return left / np.maximum(whole, 1e-300)


def _notes(about: tuple[str, ...], G: FloatArray, uneven: float) -> tuple[str, ...]:
    notes = list(about)
    total = G.sum(axis=1, keepdims=True)
    negative = (G + DISAGREE * np.abs(total) < 0.0).any(axis=1)
    if negative.any():
        notes.append(
            f"closure: at {int(negative.sum())} of {len(G)} stations the force ahead and the "
            "opening behind have opposite signs in some mode, which is given as zero there"
        )
    if uneven > UNBALANCED:
        notes.append(
            f"closure: the cells above and below the front leave {100 * uneven:.0f} % of the "
            "closing force unbalanced, as with a Poisson's ratio other than that of the analysis, "
            "a body force or thermal strain that was not given, or another rule of integration; "
            "it is shared between them by volume"
        )
    return tuple(notes)
