"""What the two faces of a crack do to each other: part, touch, overlap; and K against a stress."""

import numpy as np

from front3d.arrays import FloatArray
from front3d.crack.patches import Patch
from front3d.methods.context import FrontContext
from front3d.solid import Solid
from front3d.units import percent

OVERLAP = 0.01
"""Overlap of a node pair, in parts of the largest jump between the faces, that is spoken of."""

TOUCH = 1e-6
"""Opening of a node pair, in parts of the largest jump, below which its sides touch."""

TOUCHING = 0.02
"""Share of the pairs that must touch: single nodes are held for other reasons."""

OFF = 30.0
"""K over stress sqrt(pi a) beyond which a power of ten is missing: shape and bending change it by
a few times at the most."""


def face_warnings(
    patch: Patch, normals: FloatArray, displacement: FloatArray
) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Warnings and notes on one crack in one step, from the opening of its node pairs.

    normals : those of `pair_normals`; displacement : (n_points, 3)
    """
    opening, size = _openings(patch, normals, displacement)
    largest, n = float(size.max(initial=0.0)), len(opening)
    if largest == 0.0:
        return (), ("the crack faces do not move against each other in this step: K is zero",)
    if float(np.abs(opening).max()) <= TOUCH * largest:
        return (), (
            "the crack faces slide and do not open: pure shear, or a crack closed by contact; "
            "pressure and friction between its faces are not counted",
        )
    said = []
    overlap = opening < -OVERLAP * largest
    if overlap.any():
        depth = -float(opening.min())
        said.append(
            f"the crack faces overlap at {int(overlap.sum())} of {n} node pairs, by up to "
            f"{depth:.3g} ({percent(depth / largest)} of their largest movement): in the part "
            "they would touch there; give the model contact between its faces, or look at this "
            "load together with one that opens the crack"
        )
    touch = np.abs(opening) <= TOUCH * largest
    if touch.sum() > TOUCHING * n:
        said.append(
            f"the crack faces touch at {int(touch.sum())} of {n} node pairs, closed by contact it "
            "seems: pressure and friction between them are not counted, so K near them and J are "
            "off (the opening method is not: it needs no load on the faces)"
        )
    return tuple(said), ()


def _openings(
    patch: Patch, normals: FloatArray, displacement: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """(n,) opening along the crack normal, and size of the jump, of each node pair."""
    upper, lower = patch.pairs.T
    if patch.plane is not None:
        opening = 2.0 * np.einsum("nk,nk->n", displacement[upper], normals)
        return opening, np.abs(opening)
    jump = displacement[upper] - displacement[lower]
    opening = np.einsum("nk,nk->n", jump, normals)
    return opening, np.linalg.norm(jump, axis=1)


def pair_normals(solid: Solid, patch: Patch) -> FloatArray:
    """(n, 3) unit normals at the upper node of each pair, from the lower face to the upper."""
    faces = patch.upper
    area = -faces.area_vectors(solid.points)
    out = np.zeros(solid.points.shape)
    np.add.at(out, faces.nodes.ravel(), np.repeat(area, faces.nodes.shape[1], axis=0))
    at_pairs = out[patch.pairs[:, 0]]
    size = np.linalg.norm(at_pairs, axis=1, keepdims=True)
    normals: FloatArray = at_pairs / np.where(size > 0, size, 1.0)
    return normals


def stress_warnings(context: FrontContext, K: FloatArray) -> tuple[str, ...]:
    """K, (n, 3), against the remote stress that the user expects.

    The size of the crack is its area over the length of its fronts, half the radius of a penny
    and the half-length of a through crack: near enough for a power of ten.
    """
    stress, model = context.options.expected_stress, context.model
    if not stress:
        return ()
    fronts = model.fronts[model.patches.index(context.patch)]
    front_length = sum(front.length for front in fronts)
    area_vectors = context.patch.upper.area_vectors(context.solid.points)
    area = float(np.linalg.norm(area_vectors, axis=1).sum())
    expected = abs(stress) * float(np.sqrt(np.pi * area / front_length))
    found = float(np.abs(K).max())
    if expected / OFF <= found <= expected * OFF:
        return ()
    power = round(np.log10(found / expected)) if found > 0 else -np.inf
    return (
        f"the largest K is {found:.3g}, expected about {expected:.3g} from the stress "
        f"{stress:g} that was given, times sqrt(pi a) with a = {area / front_length:.3g} "
        "(the area of the crack over the length of its front, its size to the order): it is "
        f"off by about 10^{power:g}; check the units of displacements, coordinates and Young's "
        "modulus",
    )
