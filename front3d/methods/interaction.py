"""The interaction integral: K_I, K_II, K_III and J at every station, over several rings.

K_I = E' I / (2 A), K_II likewise, K_III = mu I / A, where I is the sum of the nodal forces of
`nodal_forces` times the virtual extension q, and A the crack area that q sweeps per unit
advance.  q = N_a(s) Q(r) e1(s) at the nodes, N_a the hat of station a and Q one out to the reach of
the cells that touch the front (flat first ring), then falling to zero at the ring's radius.
"""

import numpy as np
from scipy.sparse import csr_array

from front3d.arrays import FloatArray
from front3d.errors import MethodError
from front3d.methods.assembly import Assembly
from front3d.methods.context import FrontContext
from front3d.methods.hats import Hats, build_hats, default_widths
from front3d.methods.loading import station_constants
from front3d.methods.rings import N_RINGS, ring_radii
from front3d.methods.surfaces import surroundings
from front3d.methods.tube import Tube, along_front, build_tube, layer_reaches
from front3d.results import MethodResult, Rings
from front3d.solid import Constants

SMALLEST_RATIO = 1.3
"""Smallest outer radius of a ring where a surface is near, in reaches of the cells at the front."""

PLATEAU = 0.5
"""Smallest flat part of q, in ring radii: with more than the touching cells flat, the error of a
ring falls with the element size at the rate of the element's order."""


def evaluate(context: FrontContext) -> list[MethodResult]:
    """K of one front, one result per step."""
    solid, front, options = context.solid, context.front, context.options
    structured = context.cells.structured
    reaches = layer_reaches(context, 1 + N_RINGS if structured else 1)
    others = [f for fronts in context.model.fronts for f in fronts if f is not front]
    radii, notes = ring_radii(front, reaches, others, structured, options.radii, solid.source)
    tube = build_tube(context, float(radii.max()))
    around = surroundings(context, tube)
    given = options.radii is not None
    radii, more = _clear_of_surfaces(radii, reaches[0], around.clearance, given)
    radii = _in_one_material(radii, reaches[0], around.same_material, given, solid.source)
    assembly = Assembly(context, tube, around.symmetry_normals)
    assembly.add_cells()
    for term in around.terms:
        assembly.add_faces(term)
    if options.hat is None:
        width = default_widths(front, structured, reaches[0])
    else:
        width = np.full(len(front.corners), options.hat)
    hats = build_hats(solid, front, width)
    integrals = _integrals(assembly.forces, tube, hats, reaches[0], radii)
    value = np.moveaxis(integrals, 1, 0)
    if front.half:  # the half that is not modelled gives the same again, and only mode I exists
        value *= 2.0
        value[:, :, 1:3] = 0.0
    J = context.combined_squares(value[:, :, 3])
    factors = np.stack([_factors(context, here) for here in station_constants(context)])
    K = context.combined(value[:, :, :3]) * factors[:, None]
    return [_result(*found, radii, hats, (*notes, *more)) for found in zip(K, J, strict=True)]


def _factors(context: FrontContext, here: Constants) -> FloatArray:
    """(3, n_stations) K over integral: E'/2 and mu.

    The auxiliary displacements have one shear modulus all along the front, and so K too.
    """
    shear = context.material.shear_modulus
    half = np.broadcast_to(shear / (1.0 - here.poisson), (len(context.front.corners),))
    return np.stack([half, half, np.full_like(half, shear)])


def _integrals(
    forces: FloatArray, tube: Tube, hats: Hats, plateau: FloatArray, radii: FloatArray
) -> FloatArray:
    """(rings, steps, modes, stations) interaction integrals per unit of swept area."""
    _, frame, _ = hats.front.curve.frames(tube.s)
    along = np.einsum("fmnk,nk->fmn", forces, frame[:, 0])
    even, odd = hats.weights(tube.s), hats.weights(tube.s, odd=True)
    by_mode: list[csr_array] = [even, even, odd, even]
    flat = along_front(hats.front, plateau, tube.s) * (1 + 1e-9)
    rings = []
    for ring in radii:
        outer = along_front(hats.front, ring, tube.s)
        inner = np.maximum(flat, PLATEAU * outer)
        weighted = along * np.clip((outer - tube.r) / (outer - inner), 0.0, 1.0)
        rings.append(np.stack([weighted[:, m] @ w for m, w in enumerate(by_mode)], axis=1))
    return np.stack(rings)


def _clear_of_surfaces(
    radii: FloatArray, plateau: FloatArray, clearance: float, given: bool
) -> tuple[FloatArray, tuple[str, ...]]:
    """Rings that stay clear of surfaces beside the front, if the mesh allows, and what to say.

    A ring that cuts a surface takes its traction from the stresses there, which are less accurate
    than displacements.
    """
    inside = _within(radii, plateau, clearance, given)
    if inside is not None:
        return inside, ()
    reaching = radii[radii.max(axis=1) >= clearance]
    return radii, (
        f"rings of radius {reaching.max():.4g} reach a surface {clearance:.4g} from the front "
        "on which it does not end, and take the traction there from the stresses",
    )


def _in_one_material(
    radii: FloatArray, plateau: FloatArray, clearance: float, given: bool, source: str
) -> FloatArray:
    """Rings that hold one material only; MethodError where none does, or given ones do not."""
    inside = _within(radii, plateau, clearance, given)
    if inside is not None:
        return inside
    raise MethodError(
        f"{source}: another material begins {clearance:.4g} from the front, within a ring of "
        f"radius {radii.max():.4g}; expected rings inside one material: "
        + ("give smaller radii" if given else "refine the mesh around the front")
    )


def _within(
    radii: FloatArray, plateau: FloatArray, clearance: float, given: bool
) -> FloatArray | None:
    """The rings if they are smaller than `clearance`; else those that are, or smaller ones, unless
    the user gave them; None where that cannot be.
    """
    clear = radii.max(axis=1) < clearance
    if clear.all():
        return radii
    if given:
        return None
    if clear.sum() > 2:
        return radii[clear]
    room = 0.98 * clearance / float(plateau.max())
    if room > SMALLEST_RATIO:
        return np.outer(np.linspace(SMALLEST_RATIO, room, 3), plateau)
    return None


def _result(
    K: FloatArray, J: FloatArray, radii: FloatArray, hats: Hats, notes: tuple[str, ...]
) -> MethodResult:
    """Result of one step from K, (rings, modes, stations), and J, (rings, stations)."""
    K = np.moveaxis(K, 1, 2)
    rings = Rings(radii, K, J)
    if len(radii) < 2:
        notes = (*notes, "a single ring: nothing says how K depends on its radius")
    columns = {
        "J_interaction": J[rings.compared].mean(axis=0),
        "ring_spread": rings.spread.max(axis=1),
        "hat_interaction": hats.half_lengths,
    }
    mean = K[rings.compared].mean(axis=0)
    return MethodResult("interaction", mean, columns, rings, notes=notes)
