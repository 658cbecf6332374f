"""The cracks of a solid: surfaces and fronts found, ordered and classified."""

from dataclasses import dataclass

import numpy as np

from front3d.crack.coincidence import Coincidence, find_coincidence
from front3d.crack.edges import Chain, full_model_edges, half_model_edges, order_edges
from front3d.crack.ends import classify_ends
from front3d.crack.front import Front, build_front
from front3d.crack.half import find_half_patch
from front3d.crack.patches import Patch, find_patches
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
    notes : what was taken for granted, for the reader
    """

    same: Coincidence
    patches: tuple[Patch, ...]
    fronts: tuple[tuple[Front, ...], ...]
    unopened: tuple[Patch, ...]
    notes: tuple[str, ...] = ()

    @property
    def n_fronts(self) -> int:
        return sum(len(fronts) for fronts in self.fronts)


def find_cracks(solid: Solid, options: Options | None = None) -> CrackModel:
    """Cracks and fronts of a solid; CrackError with the reason if there are none to evaluate."""
    options = options or Options()
    same = find_coincidence(solid)
    if options.crack_plane is not None:
        return _half_model(solid, same, options, options.crack_plane)
    found = find_patches(solid, same, options)
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
        )
    if not chosen:
        raise CrackError(
            f"{solid.source}: found {len(found)} pair(s) of coincident faces, but their sides "
            "neither part nor slide in any step, so they look like unmerged parts or tied "
            "surfaces; if this is a crack, ask for it (--unopened), or check the displacements"
        )
    fronts_of = []
    for patch in chosen:
        edges = full_model_edges(patch, same)
        chains = order_edges(edges, same, solid.points, solid.source)
        fronts_of.append(_fronts(solid, patch, same, chains, options))
    if not any(fronts_of):
        raise CrackError(
            f"{solid.source}: the coincident faces have no front: their sides share no edge, so "
            "they part the solid in two; a crack needs a front where its sides join"
        )
    _refuse_meeting(solid, same, [front for fronts in fronts_of for front in fronts])
    return CrackModel(same, chosen, tuple(fronts_of), unopened)


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
    chains = order_edges(edges, same, solid.points, solid.source)
    fronts = _fronts(solid, patch, same, chains, options)
    notes = () if options.crack_plane is not None else (found_plane_note(patch, ligament),)
    return CrackModel(same, (patch,), (fronts,), unopened, notes)


def _refuse_meeting(solid: Solid, same: Coincidence, fronts: list[Front]) -> None:
    """CrackError if two fronts share a node: K has no meaning where they meet."""
    nodes = np.concatenate([np.unique(same.entity[front.nodes]) for front in fronts])
    shared, count = np.unique(nodes, return_counts=True)
    if np.any(count > 1):
        raise CrackError(
            f"{solid.source}: two crack fronts meet at node {shared[np.argmax(count)]}; expected "
            "fronts that keep apart"
        )


def _fronts(
    solid: Solid,
    patch: Patch,
    same: Coincidence,
    chains: tuple[Chain, ...],
    options: Options,
) -> tuple[Front, ...]:
    return tuple(
        classify_ends(
            solid,
            build_front(solid, chain, patch.upper, patch.half),
            patch,
            same,
            options.symmetry_planes,
        )
        for chain in chains
    )
