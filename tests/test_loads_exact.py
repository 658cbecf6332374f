"""Loads in the interaction integral, on exact fields: no solver takes part.

The near-tip field of known K (Williams 1957) plus a smooth quadratic displacement v.  By the
equations of elasticity v needs a body force, or a temperature, or an initial stress, and tractions
on the crack faces; none of them changes K.  Every load in turn is made to carry v.
"""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

import front3d
import front3d.errors
from front3d.methods.terms import BODY_FORCE, FACE_LOAD, GRADIENT, without
from front3d.solid import Step
from tests.meshes.structured import straight
from tests.reference import exact

YOUNG, POISSON = 200e3, 0.3
ELASTIC = exact.Elastic.from_young(YOUNG, POISSON)
LAME = YOUNG * POISSON / ((1 + POISSON) * (1 - 2 * POISSON))
MU = YOUNG / (2 * (1 + POISSON))
K = np.array([1.0, 0.5, 0.3])
RADII = (0.5, 0.75, 0.9)
A = np.random.default_rng(0).normal(size=(3, 3, 3))
A = (A + A.swapaxes(1, 2)) / 2 * 2e-6
"""v_i = A_ijk x_j x_k / 2."""

ALPHA, WARM = 1e-5, 20.0
DIVERGENCE = LAME * np.einsum("llj->j", A) + MU * (np.einsum("ijj->i", A) + np.einsum("jij->i", A))
"""Of the stress of v: uniform."""


@cache
def block(kind="quarter_collapsed"):
    return straight(kind, 8, along=4, length=1.0)


def smooth_stress(x):
    gradient = np.einsum("ijk,nk->nij", A, x)
    strain = (gradient + gradient.swapaxes(1, 2)) / 2
    return LAME * np.trace(strain, axis1=1, axis2=2)[:, None, None] * np.eye(3) + 2 * MU * strain


def six(tensors):
    return np.stack(
        [tensors[:, i, j] for i, j in ((0, 0), (1, 1), (2, 2), (0, 1), (1, 2), (0, 2))], 1
    )


def quadratic(x):
    return np.einsum("ijk,nj,nk->ni", A, x, x) / 2


def loaded(mesh, stress_at_faces, smooth=quadratic, **arrays):
    """The block with near-tip field and v, or another smooth field, and the tractions of a stress
    on its crack faces.

    At the front itself the tractions of the two faces differ, and nothing can be said at the
    nodes: what is written there is left out on purpose.
    """
    x = mesh.solid.points
    u = exact.near_tip(ELASTIC, K)(x, mesh.side) + smooth(x)
    arrays["traction"] = -mesh.side[:, None] * stress_at_faces(x)[:, :, 1]
    return replace(mesh.solid, steps=(Step("imposed", u, 0.0, arrays),))


def rings(solid, **loads):
    """(rings, 3) K at the middle station, and J over G there."""
    front = front3d.evaluate(
        solid, young=YOUNG, poisson=POISSON, radii=RADII, hat=1.0, up=(0, 1, 0),
        face_array="traction", methods=("interaction",), **loads,
    ).fronts[0]  # fmt: skip
    middle = len(front) // 2
    found = front.methods["interaction"].rings
    return found.K[:, middle], found.J[:, middle] / front.G[middle]


def by_body_force(mesh):
    return loaded(mesh, smooth_stress), {"density": 2.0, "gravity": tuple(-DIVERGENCE / 2.0)}


SPIN_AXIS, SPIN_POINT = np.array([0.0, 0.6, 0.8]), np.array([-3.0, 1.0, 0.0])


def by_rotation(mesh):
    """V = c rho^2 rho_vec around an axis: div v = 4 c rho^2, and what balances its stress is a
    force of -8 c (lame + 2 mu) rho_vec (the rotating disc of Timoshenko and Goodier, plane strain).
    """
    c, density = -2e-7, 2.0
    across = np.eye(3) - np.outer(SPIN_AXIS, SPIN_AXIS)

    def square(d):
        return np.sum(d * d, axis=1)[:, None]

    def stress(x):
        d = (x - SPIN_POINT) @ across
        strain = c * (square(d)[..., None] * across + 2.0 * d[:, :, None] * d[:, None, :])
        return LAME * 4.0 * c * square(d)[..., None] * np.eye(3) + 2.0 * MU * strain

    def moved(x):
        d = (x - SPIN_POINT) @ across
        return c * square(d) * d

    return loaded(mesh, stress, smooth=moved), {
        "density": density,
        "rotation": np.sqrt(-8.0 * c * (LAME + 2.0 * MU) / density),
        "rotation_axis": tuple(3.0 * SPIN_AXIS),
        "rotation_point": tuple(SPIN_POINT),
    }


def by_temperature(mesh):
    """Sigma = C : (eps - alpha (T - T0) I), in equilibrium for a linear T."""
    bulk = 3 * LAME + 2 * MU
    slope = DIVERGENCE / (bulk * ALPHA)

    def stress(x):
        return smooth_stress(x) - bulk * ALPHA * (x @ slope)[:, None, None] * np.eye(3)

    solid = loaded(mesh, stress, T=WARM + mesh.solid.points @ slope)
    return solid, {"temperature": "T", "expansion": ALPHA, "reference_temperature": WARM}


def by_table(mesh):
    """The same with a mean coefficient that varies: T such that alpha(T) (T - T0) is linear."""
    solid, loads = by_temperature(mesh)
    strain = ALPHA * (solid.steps[0].point_arrays["T"][:, 0] - WARM)
    # alpha = ALPHA (1 + b (T - T0)) in a table of two rows, so T solves a quadratic equation.
    b = 0.2 / np.abs(strain / ALPHA).max()
    T = WARM + (np.sqrt(1 + 4 * b * strain / ALPHA) - 1) / (2 * b)
    ends = np.array([WARM - 0.5 / b, WARM + 0.5 / b])
    table = [(t, ALPHA * (1 + b * (t - WARM))) for t in ends]
    arrays = {**solid.steps[0].point_arrays, "T": T}
    solid = replace(solid, steps=(replace(solid.steps[0], point_arrays=arrays),))
    return solid, {**loads, "expansion": table}


def by_initial_stress(mesh):
    """Sigma = C : eps + sigma0 with sigma0 = - stress of v: nothing acts on the faces."""
    x = mesh.solid.points
    return loaded(mesh, lambda x: 0 * smooth_stress(x), S=-six(smooth_stress(x))), {
        "initial_stress": "S"
    }


def by_initial_strain(mesh):
    x = mesh.solid.points
    gradient = np.einsum("ijk,nk->nij", A, x)
    strain = (gradient + gradient.swapaxes(1, 2)) / 2
    return loaded(mesh, lambda x: 0 * smooth_stress(x), E=strain.reshape(-1, 9)), {
        "initial_strain": "E"
    }


CARRIED = (
    *(by_body_force, by_rotation, by_temperature),
    *(by_table, by_initial_stress, by_initial_strain),
)
TERM = {by_body_force: BODY_FORCE, by_rotation: BODY_FORCE}


@pytest.mark.parametrize("carry", CARRIED)
@pytest.mark.parametrize(
    "kind", ["quarter_collapsed", pytest.param("hexahedron20", marks=pytest.mark.slow)]
)
def test_loads_leave_k_as_it_is_on_every_ring(carry, kind):
    solid, loads = carry(block(kind))
    found, energy = rings(solid, **loads)
    allowed = 5e-4 if "quarter" in kind else 0.004
    np.testing.assert_allclose(found, np.broadcast_to(K, found.shape), atol=allowed)
    # Without quarter-points J of the near-tip field alone changes by 0.5 % over these rings.
    np.testing.assert_allclose(energy, 1.0, atol=0.002 if "quarter" in kind else 0.01)


@pytest.mark.parametrize(
    "carry",
    [*(pytest.param(c, marks=pytest.mark.slow) for c in CARRIED[:1] + CARRIED[3:]), *CARRIED[1:3]],
)
def test_without_its_term_a_load_makes_k_depend_on_the_radius(carry):
    solid, loads = carry(block())
    with without(TERM.get(carry, GRADIENT)):
        found, _ = rings(solid, **loads)
    assert np.ptp(found, axis=0).max() > 0.015


@pytest.mark.slow
@pytest.mark.parametrize("carry", [by_body_force, by_temperature])
def test_without_the_tractions_on_the_faces_k_is_off(carry):
    solid, loads = carry(block())
    with without(FACE_LOAD):
        found, _ = rings(solid, **loads)
    assert np.abs(found - K).max() > 0.02


GRADE = 0.4


def graded():
    """Mode III in a solid whose modulus varies across the front, and K_III = 1 exactly.

    With mu = mu0 f^2 and w = g / f the antiplane equation div(mu grad w) = 0 is f lap g = g lap f:
    it holds for f = 1 + GRADE x1 and the harmonic near-tip g, whose faces stay free because f does
    not change across them (own derivation; substitution is the check).
    """
    mesh = block()
    x = mesh.solid.points
    u = exact.near_tip(ELASTIC, (0.0, 0.0, 1.0))(x, mesh.side) / (1 + GRADE * x[:, :1])
    step = Step("graded", u, 0.0, {"T": x[:, 0]})
    table = [(t, YOUNG * (1 + GRADE * t) ** 2, POISSON) for t in np.linspace(-1, 1, 401)]
    return replace(mesh.solid, steps=(step,)), {"temperature": "T", "elastic_table": table}


def graded_rings():
    solid, loads = graded()
    front = front3d.evaluate(solid, radii=RADII, hat=1.0, up=(0, 1, 0), **loads).fronts[0]
    middle = len(front) // 2
    rings = front.methods["interaction"].rings
    return rings.K[:, middle], rings.J[:, middle] / front.G[middle]


def test_a_modulus_that_varies_with_temperature():
    found, energy = graded_rings()
    np.testing.assert_allclose(found, [[0.0, 0.0, 1.0]] * 3, atol=1e-3)
    np.testing.assert_allclose(energy, 1.0, atol=2e-3)


def test_without_the_gradient_of_the_modulus_k_depends_on_the_radius():
    with without(GRADIENT):
        found, _ = graded_rings()
    assert np.ptp(found[:, 2]) > 0.03


def test_temperatures_beyond_the_table_are_refused():
    solid, loads = graded()
    loads["elastic_table"] = loads["elastic_table"][100:300]
    with pytest.raises(front3d.errors.MethodError, match=r"expected -0\.5 to"):
        front3d.evaluate(solid, radii=RADII, hat=1.0, up=(0, 1, 0), **loads)


def test_cell_data_of_a_linear_initial_stress():
    """Values at the cells' centres, carried to the nodes, in place of values at the nodes.

    Around the front, cells of 0.1 hold the variation within a cell: K within half a per cent.
    """
    mesh = block()
    solid, _ = by_initial_stress(mesh)
    parts = tuple(
        -six(smooth_stress(mesh.solid.points[cells.nodes].mean(axis=1))) for cells in solid.blocks
    )
    step = replace(solid.steps[0], point_arrays={}, cell_arrays={"S": parts})
    step = replace(step, point_arrays={"traction": 0.0 * solid.points})
    found, _ = rings(replace(solid, steps=(step,)), initial_stress="S")
    np.testing.assert_allclose(found, np.broadcast_to(K, found.shape), atol=0.005)


REGION = {"region_array": "part", "regions": [{"region": 1, "young": YOUNG, "poisson": POISSON}]}


def in_parts(numbers, radii=None, **more):
    """Evaluation of the near-tip field, the number of each cell by its centre."""
    mesh = block("hexahedron20")
    x = mesh.solid.points
    parts = tuple(numbers(x[cells.nodes].mean(axis=1)) for cells in mesh.solid.blocks)
    u = exact.near_tip(ELASTIC, K)(x, mesh.side)
    solid = replace(mesh.solid, steps=(Step("1", u, 0.0, {}, {"part": parts}),))
    return front3d.evaluate(solid, radii=radii, hat=1.0, up=(0, 1, 0), **{**REGION, **more})


def test_rings_stay_inside_the_material_of_the_front():
    """The other material begins 0.75 from the front; Young's modulus comes from the region."""
    result = in_parts(lambda x: 1 + (np.abs(x[:, 0]) > 0.75))
    front = result.fronts[0]
    assert front.methods["interaction"].rings.radii.max() <= 0.75
    np.testing.assert_allclose(front.K[len(front) // 2], K, atol=0.005)


def test_rings_given_into_another_material_are_refused():
    with pytest.raises(front3d.errors.MethodError, match=r"another material begins 0\.75"):
        in_parts(lambda x: 1 + (np.abs(x[:, 0]) > 0.75), radii=(0.5, 0.9))


@pytest.mark.parametrize("axis", [0, 1, 2])
def test_a_front_along_or_through_a_change_of_material_is_refused(axis):
    with pytest.raises(front3d.errors.MethodError, match="along or through a change of material"):
        in_parts(lambda x: 1 + (x[:, axis] > (0.5 if axis == 2 else 0.0)))


def test_a_region_without_a_material_is_refused():
    with pytest.raises(front3d.errors.CaseError, match="region 3, for which no material"):
        in_parts(lambda x: 3 + 0 * x[:, 0])


@pytest.mark.parametrize(
    ("loads", "said"),
    [
        ({"temperature": "warmth", "expansion": 1e-5}, "no array 'warmth'"),
        ({"temperature": "T"}, "nothing depends on"),
        ({"gravity": (0, 0, 1)}, "gravity without density"),
        ({"density": 1.0, "rotation": 2.0}, "rotation without rotation axis"),
        ({"face_polynomial": (1.0, 2.0)}, "face polynomial without depth direction"),
        ({"temperature": "T", "elastic_table": [(0, 1.0, 0.7)]}, "nu = 0.7"),
        ({"temperature": "T", "expansion": [(1, 1e-5), (0, 2e-5)]}, "rising temperature"),
        ({"initial_stress": "traction"}, "has 3 components, expected 6 or 9"),
    ],
)
def test_what_is_wrong_with_a_load_is_said(loads, said):
    solid, _ = by_body_force(block("hexahedron20"))
    with pytest.raises(front3d.errors.Front3DError, match=said):
        front3d.evaluate(solid, young=YOUNG, poisson=POISSON, radii=RADII, hat=1.0, **loads)


def test_a_combination_of_steps_combines_their_loads():
    """Each step has its own temperatures and tractions; "cold" is all of them without a crack's
    field, so 2 hot - cold has twice the K.
    """
    mesh = block("hexahedron20")
    solid, loads = by_temperature(mesh)
    hot = solid.steps[0]
    u = hot.displacement - exact.near_tip(ELASTIC, K)(mesh.solid.points, mesh.side)
    steps = (replace(hot, name="hot"), replace(hot, name="cold", displacement=u))
    front = front3d.evaluate(
        replace(solid, steps=steps), young=YOUNG, poisson=POISSON, radii=RADII, hat=1.0,
        up=(0, 1, 0), face_array="traction", methods=("interaction",), steps="hot",
        combine="both = 2*hot - cold", **loads,
    ).fronts[1]  # fmt: skip
    np.testing.assert_allclose(front.K[len(front) // 2], 2 * K, atol=0.008)
    with pytest.raises(front3d.errors.CaseError, match="constants by temperature"):
        front3d.evaluate(
            replace(solid, steps=steps), temperature="T", elastic_table=[(0, 1.0, 0.3)],
            combine="both = 2*hot - cold",
        )  # fmt: skip
