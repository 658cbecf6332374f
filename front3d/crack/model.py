"""The cracks of a solid: surfaces and fronts found, ordered and classified."""

from dataclasses import dataclass, replace

import numpy as np

from front3d.crack.coincidence import Coincidence, find_coincidence
from front3d.crack.edges import FrontEdges, full_model_edges, half_model_edges, order_edges
from front3d.crack.ends import classify_ends, unused_planes
from front3d.crack.facetable import FaceTable
from front3d.crack.front import Front, build_front
from front3d.crack.half import find_half_patch
from front3d.crack.near import Near, cells_near, first_reach
from front3d.crack.notch import open_notch
from front3d.crack.patches import Patch, find_patches
from front3d.crack.pieces import (
    CORNER,
    GIVEN_END,
    Piece,
    given_edges,
    pieces_of,
    stations_of,
)
from front3d.crack.symmetry import find_crack_plane, found_plane_note
from front3d.errors import CrackError
from front3d.options import Options, Plane
from front3d.solid import Solid


@dataclass(frozen=True, slots=True, eq=False)
class CrackModel:
    """The cracks of a solid.

    Attributes
    ----------
    same : which nodes stand at the same place
    patches : crack surfaces that will be evaluated
    fronts : per patch, its fronts
    unopened : coincident surfaces whose sides never part: not evaluated unless asked for
    near : the cells near the fronts
    notes : what was taken for granted, for the reader
    warnings : what may make K wrong
    """

    same: Coincidence
    patches: tuple[Patch, ...]
    fronts: tuple[tuple[Front, ...], ...]
    unopened: tuple[Patch, ...]
    near: Near
    notes: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()

    @property
    def n_fronts(self) -> int:
        return sum(len(fronts) for fronts in self.fronts)


def find_cracks(solid: Solid, options: Options | None = None) -> CrackModel:
    """Cracks and fronts of a solid; CrackError with the reason if there are none to evaluate."""
    options = options or Options()
    same = find_coincidence(solid)
    if options.crack_plane is not None:
        return _half_model(solid, same, options, options.crack_plane)
    found, unmatched = find_patches(solid, same, options)
    chosen = tuple(p for p in found if p.opens or options.unopened)
    unopened = tuple(p for p in found if not (p.opens or options.unopened))
    if not chosen and (plane := find_crack_plane(solid, same)) is not None:
        return _half_model(solid, same, options, plane, unopened)
    if not found:
        raise CrackError(
            f"{solid.source}: found no crack: no coincident free faces with separate nodes, and no "
            "outer plane that is held along its normal in part, as the crack plane of a half model "
            "is (name it where it is held by springs: --crack-plane z=0); "
            "if the crack is modelled by a gap or by one merged surface, its faces must be split "
            "into coincident faces first"
            + (f"; {gap}" if (gap := open_notch(solid, same)) else "")
            + (f"; {_cut_differently(unmatched)}" if len(unmatched) else "")
        )
    if not chosen:
        if solid.steps and not any(step.displacement.any() for step in solid.steps):
            raise CrackError(
                f"{solid.source}: found displacements that are zero everywhere, expected those of "
                "a loaded solid; check which array and step were written"
            )
        raise CrackError(
            f"{solid.source}: found {len(found)} pair(s) of coincident faces, but their sides "
            "neither part nor slide in any step, so they look like unmerged parts or tied "
            "surfaces; if this is a crack, ask for it (--unopened), or check the displacements"
        )
    every = [full_model_edges(patch, same) for patch in chosen]
    fronts_of = _all_fronts(solid, chosen, every, same, options)
    if not any(fronts_of):
        raise CrackError(
            f"{solid.source}: the coincident faces have no front: their sides share no edge, so "
            "they part the solid in two; a crack needs a front where its sides join"
        )
    notes = (*_notes_on_faces(chosen), *_notes_on_pieces(fronts_of))
    members = same.place[np.concatenate([patch.upper.corners.ravel() for patch in chosen])]
    left_out = unmatched[np.asarray(np.isin(same.place[unmatched.corners], members).any(axis=1))]
    warnings = (
        *((_cut_differently(left_out),) if len(left_out) else ()),
        *unused_planes(solid, fronts_of, options.symmetry_planes),
    )
    near = _near(solid, chosen, fronts_of)
    return CrackModel(same, chosen, fronts_of, unopened, near, notes, warnings)


def _near(
    solid: Solid, patches: tuple[Patch, ...], fronts_of: tuple[tuple[Front, ...], ...]
) -> Near:
    """The cells near all the fronts."""
    fronts = [front for fronts in fronts_of for front in fronts]
    if not fronts:
        none = np.zeros(0, np.int64)
        return Near(solid, (), 0.0, tuple(none for _ in solid.blocks), none)
    reach = first_reach(solid, fronts, [patch.upper for patch in patches])
    return cells_near(solid, fronts, reach)


def _half_model(
    solid: Solid,
    same: Coincidence,
    options: Options,
    plane: Plane,
    unopened: tuple[Patch, ...] = (),
) -> CrackModel:
    """The crack in a symmetry plane, named or found."""
    patch, ligament = find_half_patch(solid, same, plane)
    edges = half_model_edges(patch, ligament, same)
    fronts = _all_fronts(solid, (patch,), [edges], same, options)
    notes = () if options.crack_plane is not None else (found_plane_note(patch, ligament),)
    near = _near(solid, (patch,), fronts)
    notes = (*notes, *_notes_on_pieces(fronts))
    warnings = unused_planes(solid, fronts, options.symmetry_planes)
    return CrackModel(same, (patch,), fronts, unopened, near, notes, warnings)


def _all_fronts(
    solid: Solid,
    patches: tuple[Patch, ...],
    edges: list[FrontEdges],
    same: Coincidence,
    options: Options,
) -> tuple[tuple[Front, ...], ...]:
    """The fronts of each patch, from the edges where its faces join."""
    patch_of = np.repeat(np.arange(len(edges)), [len(e.ends) for e in edges])
    joined = FrontEdges(
        np.concatenate([e.ends for e in edges]), np.arange(sum(len(e.ends) for e in edges))
    )
    chosen, goes_on = given_edges(solid, joined, same, options)
    found = []
    for number, (patch, own) in enumerate(zip(patches, edges, strict=True)):
        first = int(np.searchsorted(patch_of, number))
        here = chosen.face[patch_of[chosen.face] == number] - first
        chains = order_edges(
            FrontEdges(own.ends[here], own.face[here]), same, solid.points, solid.source
        )
        pieces = [p for c in chains for p in pieces_of(c, solid.points, same.entity, goes_on)]
        fronts = [_front(solid, patch, same, piece, options) for piece in pieces]
        found.append(tuple(front for front in fronts if front is not None))
        if fronts and not any(found):
            short = pieces[0].chain.edges
            raise CrackError(
                f"{solid.source}: the front from node {short[0, 0]} to node {short[-1, 1]} has "
                f"{len(short)} edges between its corners, or the ends of the nodes given: too few "
                "for a station away from both; refine the mesh along it, or give more nodes"
            )
    _refuse_meeting(solid, same, [front for fronts in found for front in fronts])
    return tuple(found)


def _front(
    solid: Solid, patch: Patch, same: Coincidence, piece: Piece, options: Options
) -> Front | None:
    """The front of a piece; None if it is too short for a station away from its ends."""
    front = build_front(solid, piece.chain, patch.upper, patch.half)
    if front.closed:
        return front
    front = classify_ends(solid, front, patch, same, options.symmetry_planes)
    ends = tuple(
        why or end for why, end in zip((piece.starts, piece.stops), front.ends, strict=True)
    )
    stations = stations_of(solid, front, piece, same, options)
    if not len(stations):
        return None
    return replace(front, ends=ends, stations=stations)


def _cut_differently(faces: FaceTable) -> str:
    """Say that faces have no partner."""
    return (
        f"{len(faces)} crack faces, such as at node {faces.corners[0, 0]}, lie on faces of the "
        "other side that are cut differently and are left out, with the front at them; expected "
        "faces that coincide one by one: mesh both sides alike"
    )


def _notes_on_faces(patches: tuple[Patch, ...]) -> tuple[str, ...]:
    """Faces that are paired though the two sides are not meshed alike."""
    unlike = sum(int(patch.unlike.sum()) for patch in patches)
    if not unlike:
        return ()
    return (
        f"{unlike} of {sum(len(p.upper) for p in patches)} pairs of crack faces have mid-side "
        "nodes that stand apart (a quarter-point on one side only, or an edge that is straight on "
        "one side): they are paired by their corners",
    )


def _notes_on_pieces(fronts: tuple[tuple[Front, ...], ...]) -> tuple[str, ...]:
    """Where stations were left out, and why."""
    left_out = sorted(
        {
            f"{end} at node {node}"
            for front in (front for group in fronts for front in group)
            for end, node in zip(front.ends, front.corners[[0, -1]], strict=False)
            if end in (CORNER, GIVEN_END)
        }
    )
    if not left_out:
        return ()
    return (
        f"fronts end inside the solid ({', '.join(left_out)}): there is no K at a corner, and "
        "stations within a few cells of these ends are left out",
    )


def _refuse_meeting(solid: Solid, same: Coincidence, fronts: list[Front]) -> None:
    """CrackError if two fronts share a node: K has no meaning where they meet."""
    inner = [
        np.setdiff1d(
            same.entity[front.nodes],
            [same.entity[n] for n, end in zip(front.corners[[0, -1]], front.ends, strict=False)
             if end == CORNER],
        )
        for front in fronts
    ]  # fmt: skip
    shared, count = np.unique(np.concatenate([*inner, np.zeros(0, int)]), return_counts=True)
    if np.any(count > 1):
        raise CrackError(
            f"{solid.source}: two crack fronts meet at node {shared[np.argmax(count)]}; expected "
            "fronts that keep apart"
        )
