"""Half, quarter and eighth models of a crack against the whole, evaluated by the tool."""

import tomllib
from functools import cache
from pathlib import Path

import numpy as np
import pytest

import front3d
from front3d.case import read_case
from front3d.cli.main import main
from front3d.crack.front import FREE_SURFACE, SYMMETRY_PLANE
from front3d.errors import CaseError
from front3d.results import FrontResult
from front3d.samples import SAMPLES, Sample, build, write_sample
from front3d.samples.elasticity import traction_load
from front3d.samples.solver import solve

AGREEMENT = 0.005  # asked for of quarter, half and full models, in parts of the front's largest K


@cache
def evaluated(name: str, part: str, cells: str, **parameters: float) -> dict[str, FrontResult]:
    sample = build(name, cells=cells, part=part, **parameters)
    material = sample.material
    result = front3d.evaluate(
        sample.solid, young=material.young, poisson=material.poisson, **sample.case["options"]
    )
    assert len(result.fronts) == len(sample.solid.steps)
    return {front.step: front for front in result.fronts}


def check(name: str, part: str, cells: str, n_free: int, **parameters: float) -> None:
    """A part's K agrees with the whole's at every station, its ends included."""
    whole = evaluated(name, "full", cells, **parameters)
    fronts = evaluated(name, part, cells, **parameters)
    assert set(fronts) == set(whole)
    for step, front in fronts.items():
        assert sorted(front.ends) == sorted(
            [FREE_SURFACE] * n_free + [SYMMETRY_PLANE] * (len(front.ends) - n_free)
        )
        gap = np.linalg.norm(front.positions[:, None] - whole[step].positions, axis=2)
        same = gap.argmin(axis=1)
        assert gap.min(axis=1).max() < 1e-9 * whole[step].length
        scale = np.abs(whole[step].K).max()
        assert np.abs(front.K - whole[step].K[same]).max() < AGREEMENT * scale, step


@pytest.mark.parametrize(
    ("part", "n_free"),
    [
        pytest.param("quarter", 1, marks=pytest.mark.slow),
        pytest.param("half", 1, marks=pytest.mark.slow),
        pytest.param("upper", 2, marks=pytest.mark.slow),
    ],
)
def test_parts_of_a_surface_crack_agree_with_the_whole(part: str, n_free: int) -> None:
    # Measured: 0.01 % of the largest K at the end on the symmetry plane, less elsewhere.
    check("surface-crack", part, "bricks", n_free, refine=0)


@pytest.mark.slow
@pytest.mark.parametrize(("part", "n_free", "cells"), [("half", 1, "tetra10")])
def test_parts_at_the_default_fineness(part: str, n_free: int, cells: str) -> None:
    check("surface-crack", part, cells, n_free)


@pytest.mark.slow
@pytest.mark.parametrize("part", ["half", "quarter", "eighth", "upper"])
def test_parts_of_inner_cracks(part: str) -> None:
    check("embedded-ellipse", part, "bricks", 0, refine=0)
    check("penny", part, "tetra10", 0, refine=0)


@pytest.mark.slow
def test_a_half_model_keeps_every_mode() -> None:
    # A tilt towards x is symmetric about y = 0: K_II and K_III, odd there, must go on right.
    check("penny", "half", "bricks", 0, refine=0, tilt=35.0)


def test_a_part_is_the_solution_of_its_own_problem() -> None:
    # The quarter, held on its planes and loaded on its end, solved by itself: the same field.
    sample = build("surface-crack", cells="brick8", refine=0, part="quarter", bending=0)
    solid, p = sample.solid, sample.parameters
    held = np.zeros(solid.points.shape, dtype=bool)
    held[:, 0] = solid.points[:, 0] == 0.0
    x, y, z = solid.points.T
    ahead = (x / p["half_length"]) ** 2 + (y / p["depth"]) ** 2 > 1.0 - 1e-9
    held[:, 2] = (z == 0.0) & ahead
    (end,) = [(block_face, nodes) for block_face, nodes in faces_at(sample, p["half_height"])]
    load = traction_load(solid.points, [end], lambda points, normals: p["tension"] * normals)
    (moved,) = solve(solid, sample.material, load[None], held)
    expected = solid.steps[0].displacement
    moved = moved - (moved - expected).mean(axis=0) * (0, 1, 0)  # free to move along y
    np.testing.assert_allclose(moved, expected, atol=1e-7 * np.abs(expected).max())


def faces_at(sample: Sample, height: float) -> list[tuple[str, np.ndarray]]:
    from front3d.samples.elasticity import boundary_faces

    out = []
    for kind, nodes in boundary_faces(sample.solid):
        top = (np.abs(sample.solid.points[nodes][:, :, 2] - height) < 1e-9 * height).all(axis=1)
        if top.any():
            out.append((kind, nodes[top]))
    return out


def test_loads_that_a_part_cannot_carry_are_refused() -> None:
    message = "found load 'shear_x', which is not symmetric about the plane x = 0"
    with pytest.raises(CaseError, match=message):
        build("embedded-ellipse", cells="brick8", refine=0, part="half", shear_x=10.0)
    build("embedded-ellipse", cells="brick8", refine=0, part="half", shear_y=10.0)
    with pytest.raises(CaseError, match="'tension', which is not symmetric about the plane z = 0"):
        build("penny", cells="brick8", refine=0, part="upper", tilt=30.0)
    build("penny", cells="brick8", refine=0, part="half", tilt=30.0)


def test_unknown_parts_are_refused() -> None:
    with pytest.raises(CaseError, match="part: found 'third', expected one of full, half, upper"):
        build("surface-crack", part="third")


def test_the_case_file_names_the_crack_plane(tmp_path: Path) -> None:
    for part, options in (("half", {}), ("quarter", {"crack_plane": "z=0"})):
        sample = build("surface-crack", cells="brick8", refine=0, part=part)
        assert f"{part} model" in sample.description
        _, path = write_sample(sample, tmp_path)
        assert tomllib.loads(path.read_text(encoding="utf-8"))["options"] == options
        assert (read_case(path).crack_plane is None) == (not options)


def test_the_command_has_the_parts(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    flags = ["sample", "surface-crack", "--cells", "brick8", "--refine", "0"]
    assert main([*flags, "--part", "quarter", "--out", str(tmp_path)]) == 0
    said = capsys.readouterr().out
    assert "quarter model" in said
    assert 'crack_plane = "z=0"' in (tmp_path / "surface-crack.toml").read_text(encoding="utf-8")


def test_every_part_is_cut_at_planes_of_its_sample() -> None:
    for spec in SAMPLES.values():
        planes = {plane.axis for plane in spec.mesh(spec.values({"refine": 0}), "brick8").planes}
        for axes in spec.parts.values():
            assert set(axes) <= planes and axes
