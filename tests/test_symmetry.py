"""Symmetry planes: found by the displacements, or named; and what looks like one and is none."""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

import front3d
from front3d.case import read_case
from front3d.crack import describe
from front3d.errors import CrackError
from front3d.options import Plane
from front3d.samples import build
from front3d.solid import CellBlock, Solid, Step

AGREEMENT = 0.005  # asked for of a quarter and a full model, in parts of the largest K


@cache
def surface_crack(part, cells="brick8"):
    return build("surface-crack", cells=cells, refine=0, part=part)


def k_of(sample, **options):
    material = sample.material
    found = front3d.evaluate(
        sample.solid,
        young=material.young,
        poisson=material.poisson,
        methods="interaction",
        **options,
    )
    return {front.step: front for front in found.fronts}


def check_against_full(cells):
    """At every station, ends included, and nobody named a plane."""
    whole = k_of(surface_crack("full", cells))
    for step, front in k_of(surface_crack("quarter", cells)).items():
        gap = np.linalg.norm(front.positions[:, None] - whole[step].positions, axis=2)
        assert gap.min(axis=1).max() < 1e-9 * front.length
        apart = front.K - whole[step].K[gap.argmin(axis=1)]
        assert np.abs(apart).max() < AGREEMENT * np.abs(whole[step].K).max()
        assert front.ends == ("symmetry plane", "free surface")
        assert "crack plane z=0 was found, not named" in front.notes[0]


def test_a_quarter_model_equals_the_full_one_without_a_word_about_its_planes():
    check_against_full("brick8")  # measured: 0.03 % of the largest K


@pytest.mark.slow
@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
def test_quarter_models_of_quadratic_cells_equal_the_full_ones(cells):
    check_against_full(cells)  # measured: 0.01 %; tetrahedra 0.1 %


@pytest.mark.parametrize(
    ("name", "part"), [("penny", "eighth"), ("penny", "upper"), ("corner-crack-at-hole", "upper")]
)
def test_the_plane_found_gives_the_front_of_the_plane_named(name, part):
    solid = build(name, cells="tetra4", refine=0, part=part).solid
    (found,), (named,) = (
        front3d.find_fronts(solid, **option).fronts for option in ({}, {"crack_plane": "z=0"})
    )
    assert len(found) == len(named) > 0
    for a, b in zip(found, named, strict=True):
        np.testing.assert_array_equal(a.nodes, b.nodes)
        assert a.ends == b.ends
    assert "was found" in describe(solid)["notes"][0]["note"]
    assert not front3d.find_fronts(solid, crack_plane="z=0").notes


def test_an_oblique_crack_plane_is_found_too():
    solid = surface_crack("quarter").solid
    turn = np.linalg.qr(np.random.default_rng(3).normal(size=(3, 3)))[0]
    turn *= np.sign(np.linalg.det(turn))
    steps = tuple(replace(s, displacement=s.displacement @ turn.T) for s in solid.steps)
    moved = replace(solid, points=solid.points @ turn.T + [5.0, -3.0, 2.0], steps=steps)
    model = front3d.find_fronts(moved)
    plane = model.patches[0].plane
    assert abs(np.asarray(plane.normal) @ turn[:, 2]) == pytest.approx(1.0, abs=1e-9)
    np.testing.assert_array_equal(
        model.fronts[0][0].nodes, front3d.find_fronts(solid).fronts[0][0].nodes
    )
    assert model.fronts[0][0].ends == ("symmetry plane", "free surface")


def block(n=4):
    """A cube of n^3 bricks."""
    axis = np.arange(n + 1.0)
    points = np.stack(np.meshgrid(axis, axis, axis, indexing="ij"), axis=-1).reshape(-1, 3)
    i, j, k = (a.ravel() for a in np.meshgrid(*[np.arange(n)] * 3, indexing="ij"))
    corner = [(0, 0, 0), (1, 0, 0), (1, 1, 0), (0, 1, 0)]
    corner += [(a, b, 1) for a, b, _ in corner]
    cells = [((i + a) * (n + 1) + j + b) * (n + 1) + k + c for a, b, c in corner]
    return Solid(points, (CellBlock("hexahedron", np.stack(cells, axis=1)),), (), "block")


def with_field(solid, field):
    return replace(solid, steps=(Step("one", field(*solid.points.T)),))


def test_a_clamped_foot_is_no_symmetry_plane():
    def clamped(x, y, z):
        lift = np.where((z == 0) & (x <= 2), 0.0, 1.0 + x)
        return np.stack([lift * 0.1, lift * 0.2, lift], axis=1)

    def rollers(x, y, z):
        return clamped(x, y, z) + np.stack([0.1 * x, 0 * x, 0 * x], axis=1)

    with pytest.raises(CrackError, match="found no crack"):
        front3d.find_fronts(with_field(block(), clamped))
    model = front3d.find_fronts(with_field(block(), rollers))
    assert "if it is a support and no symmetry plane" in model.notes[0]


def test_a_surface_that_leaves_its_plane_slowly_is_no_crack():
    """Bending: a face stays in its plane over a part, and leaves it gently."""

    def bent(x, y, z):
        return np.stack([0.3 * y, 0.1 * x, np.where(x <= 2, 0.0, 5e-3) + (z > 0) * x], 1)

    def lifts_far_away(x, y, z):
        moved = bent(x, y, z)
        moved[(z == 0) & (x == 4) & (y == 4), 2] = 1.0
        return moved

    assert front3d.find_fronts(with_field(block(), bent)).notes  # all that moves opens alike
    with pytest.raises(CrackError, match="found no crack"):
        front3d.find_fronts(with_field(block(), lifts_far_away))


def test_where_two_planes_would_do_the_user_decides():
    def twice(x, y, z):
        u_z = np.where((z == 0) & (x <= 2), 0.0, np.where(z == 0, 1.0, 2.0))
        u_y = np.where((y == 0) & (z >= 2), 0.0, np.where(y == 0, 1.0, 2.0))
        return np.stack([x, u_y, u_z], axis=1)

    solid = with_field(block(), twice)
    with pytest.raises(CrackError, match=r"2 planes .*\((z=0; y=0|y=0; z=0)\).*--crack-plane"):
        front3d.find_fronts(solid)
    assert front3d.find_fronts(solid, crack_plane="y=0").n_fronts == 1


def test_a_symmetry_plane_held_by_springs_can_be_named(tmp_path):
    """A penalty support gives way a little, so that its plane is not found."""
    sample = surface_crack("half")
    (step,) = sample.solid.steps[:1]
    soft = step.displacement.copy()
    on_plane = sample.solid.points[:, 0] == 0.0
    soft[on_plane, 0] += 1e-3 * soft[on_plane, 2]
    solid = replace(sample.solid, steps=(replace(step, displacement=soft),))
    assert front3d.find_fronts(solid).fronts[0][0].ends == ("free surface", "free surface")
    model = front3d.find_fronts(solid, symmetry_planes="x=0")
    assert sorted(model.fronts[0][0].ends) == ["free surface", "symmetry plane"]
    assert model.warnings == ()
    (said,) = front3d.find_fronts(solid, symmetry_planes=("x=0", "y=3")).warnings
    assert "symmetry plane y=3: no front ends" in said
    case = tmp_path / "half.toml"
    case.write_text('result = "half.vtu"\n[options]\nsymmetry_planes = ["x=0"]\n')
    assert read_case(case).options.symmetry_planes == (Plane((1.0, 0.0, 0.0), 0.0),)
