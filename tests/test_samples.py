"""Building and writing samples, and what their displacements must be."""

import tomllib
from pathlib import Path

import numpy as np
import pytest

from front3d.errors import CaseError
from front3d.samples import SAMPLES, Sample, build, write_sample


@pytest.fixture(scope="module")
def small() -> Sample:
    return build("surface-crack", cells="brick8", refine=0, bending=50)


def openings(sample: Sample, step: int = 0) -> tuple[np.ndarray, np.ndarray]:
    """Positions of the lower twins of doubled nodes, and upper minus lower displacement."""
    solid = sample.solid
    flat = np.flatnonzero(solid.points[:, 2] == 0.0)
    order = flat[np.lexsort(np.round(solid.points[flat], 9).T)]
    same = (np.abs(np.diff(solid.points[order], axis=0)) < 1e-9).all(axis=1)
    first, second = order[:-1][same], order[1:][same]
    # The upper twin is the one whose cells lie above.
    above = np.zeros(len(solid.points))
    for block in solid.blocks:
        centre = solid.points[block.nodes].mean(axis=1)[:, 2]
        np.add.at(above, block.nodes, np.repeat(centre[:, None], block.nodes.shape[1], axis=1))
    sign = np.sign(above[second] - above[first])[:, None]
    u = solid.steps[step].displacement
    return solid.points[first], sign * (u[second] - u[first])


def test_registry_describes_every_sample() -> None:
    assert {"penny", "surface-crack", "embedded-ellipse"} <= set(SAMPLES)
    for name, spec in SAMPLES.items():
        assert spec.name == name and spec.description and "\n" not in spec.description
        for parameter in spec.parameters.values():
            assert parameter.meaning and parameter.low < parameter.high
            if parameter.default is not None:
                assert parameter.low <= parameter.default <= parameter.high
        assert set(spec.values({})) == set(spec.parameters)


def test_wrong_names_are_refused() -> None:
    with pytest.raises(CaseError, match="found 'coin', expected one of surface-crack, penny"):
        build("coin")
    with pytest.raises(CaseError, match="cells: found 'hexes', expected one of bricks, tetra10"):
        build("penny", cells="hexes")
    with pytest.raises(CaseError, match="found no load, expected tension or bending other"):
        build("surface-crack", tension=0, bending=0, refine=0)


def test_sample_holds_every_parameter(small: Sample) -> None:
    assert small.parameters["half_width"] == 100.0  # 10 times the larger semi-axis
    assert [step.name for step in small.solid.steps] == ["tension", "bending"]
    assert small.material.young == 200e3
    assert "half_length 10" in small.description


def test_displacement_is_linear_in_the_load(small: Sample) -> None:
    doubled = build("surface-crack", cells="brick8", refine=0, tension=200, bending=0)
    (step,) = doubled.solid.steps
    u = small.solid.steps[0].displacement
    np.testing.assert_allclose(step.displacement, 2 * u, atol=1e-9 * np.abs(u).max())


def test_displacement_scales_with_the_size() -> None:
    # Lengths times k at equal stress and modulus: displacements times k.
    one, k = build("penny", cells="brick8", refine=0, radius=1.0), 25.4
    large = build("penny", cells="brick8", refine=0, radius=k)
    u, v = (s.solid.steps[0].displacement for s in (one, large))
    np.testing.assert_allclose(v, k * u, atol=1e-8 * np.abs(v).max())


def test_remote_strain_is_uniaxial(small: Sample) -> None:
    # Far from the crack a plate in tension stretches by sigma / E (Hooke).
    points, u = small.solid.points, small.solid.steps[0].displacement
    corner = (np.abs(points[:, 0]) == 100.0) & (points[:, 1] == 15.0)
    top, bottom = (corner & (points[:, 2] == z) for z in (100.0, -100.0))
    stretch = (u[top, 2].mean() - u[bottom, 2].mean()) / 200.0
    assert stretch == pytest.approx(100.0 / 200e3, rel=5e-3)


def test_files_hold_the_sample(small: Sample, tmp_path: Path) -> None:
    pyvista = pytest.importorskip("pyvista")
    vtu, case = write_sample(small, tmp_path / "new")
    assert sorted(p.name for p in (tmp_path / "new").iterdir()) == [case.name, vtu.name]
    grid = pyvista.read(vtu)
    np.testing.assert_array_equal(grid.points, small.solid.points)
    assert grid.n_cells == small.solid.n_cells
    assert set(grid.point_data) == {"displacement_tension", "displacement_bending"}
    for step in small.solid.steps:
        np.testing.assert_array_equal(
            grid.point_data[f"displacement_{step.name}"], step.displacement
        )
    start = 0
    for block in small.solid.blocks:
        stop = start + len(block)
        assert set(grid.celltypes[start:stop]) == {block.element.vtk_type}
        first, last = grid.cell_offsets[[start, stop]]
        np.testing.assert_array_equal(
            grid.cell_connectivity[first:last].reshape(block.nodes.shape), block.nodes
        )
        start = stop
    table = tomllib.loads(case.read_text(encoding="utf-8"))
    assert table == {
        "result": vtu.name,
        "material": {"young": 200e3, "poisson": 0.3},
        "units": {"length": "mm", "stress": "MPa"},
        "options": {},
    }


def test_a_single_step_is_written_without_its_name(tmp_path: Path) -> None:
    pyvista = pytest.importorskip("pyvista")
    vtu, _ = write_sample(build("penny", cells="brick8", refine=0), tmp_path)
    assert list(pyvista.read(vtu).point_data) == ["displacement"]


def test_a_failed_write_leaves_the_old_files(
    small: Sample, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    old = write_sample(small, tmp_path)
    before = [path.read_bytes() for path in old]

    def full(*_: object, **__: object) -> None:
        raise OSError("no space left on device")

    monkeypatch.setattr(Path, "write_text", full)
    with pytest.raises(OSError, match="no space left"):
        write_sample(small, tmp_path)
    assert [path.read_bytes() for path in old] == before
    assert sorted(tmp_path.iterdir()) == sorted(old)


# Sneddon (1946): opening 8 (1 - nu^2) sigma / (pi E) sqrt(a^2 - r^2) of a penny crack in an
# infinite solid; the normal stress here is sigma cos^2(tilt).  Sliding under shear tau, Eshelby
# (1957), Kassir and Sih (1975): 16 (1 - nu^2) tau / (pi (2 - nu) E) sqrt(a^2 - r^2).  Both from
# memory; they give K_I = 2 sigma sqrt(a / pi) and K_II = 4 tau sqrt(a / pi) / (2 - nu).
def penny_error(sample: Sample, tilt: float, nearest: float = 0.0) -> tuple[float, float]:
    """Largest error of opening and of sliding from `nearest` to 0.5 a behind the front.

    Relative to the opening that the whole stress would cause at the same place.
    """
    x, jump = openings(sample)
    p, angle = sample.parameters, np.radians(tilt)
    a, nu, stress = p["radius"], p["poisson"], p["tension"]
    root = np.sqrt(a**2 - np.minimum(x[:, 0] ** 2 + x[:, 1] ** 2, a**2))
    compliance = (1 - nu**2) / (np.pi * p["young"])
    opening = 8 * compliance * stress * np.cos(angle) ** 2 * root
    sliding = 16 * compliance / (2 - nu) * stress * np.sin(angle) * np.cos(angle) * root
    behind = a - np.hypot(x[:, 0], x[:, 1])
    near = (behind > nearest) & (behind < 0.5 * a)
    assert near.sum() > 50
    out = []
    for component, exact in ((2, opening), (0, sliding)):
        size = 8 * compliance * stress * root
        out.append(float((np.abs(jump[:, component] - exact) / size)[near].max()))
    return out[0], out[1]


def test_coarse_penny_opens_and_slides_as_the_exact_solution() -> None:
    opening, sliding = penny_error(build("penny", refine=0, tilt=40.0), 40.0)
    assert opening < 0.02 and sliding < 0.02


@pytest.mark.slow
@pytest.mark.parametrize(
    ("cells", "allowed", "tilt"), [("bricks", 5e-3, 45.0), ("tetra10", 2.2e-2, 0.0)]
)
def test_penny_opens_and_slides_as_the_exact_solution(
    cells: str, allowed: float, tilt: float
) -> None:
    sample = build("penny", cells=cells, tilt=tilt)
    # Without quarter-points the front of quadratic tetrahedra seems to lie 0.12 of a cell further
    # back (measured on other meshes), here 0.0044 a: 2.2 % of the opening at 0.1 a.
    nearest = 0.1 * sample.parameters["radius"] if cells == "tetra10" else 0.0
    errors = penny_error(sample, tilt, nearest)
    assert max(errors) < allowed


@pytest.mark.slow
def test_embedded_ellipse_opens_as_the_exact_solution() -> None:
    # Green and Sneddon (1950): 4 (1 - nu^2) sigma a / (E E(k)) sqrt(1 - x^2/c^2 - y^2/a^2).
    from scipy.special import ellipe

    sample = build("embedded-ellipse")
    x, jump = openings(sample)
    p = sample.parameters
    c, a = p["semi_x"], p["semi_y"]
    inside = 1 - (x[:, 0] / c) ** 2 - (x[:, 1] / a) ** 2
    size = 4 * (1 - p["poisson"] ** 2) * p["tension"] * a / p["young"]
    exact = size / ellipe(1 - (a / c) ** 2) * np.sqrt(np.maximum(inside, 0.0))
    near = (inside > 1e-6) & (inside < 0.75)
    assert near.sum() > 100
    assert (np.abs(jump[:, 2] / exact - 1.0)[near]).max() < 7e-3


@pytest.mark.slow
def test_surface_crack_opens_at_its_deepest_point() -> None:
    # F of K_I = F sigma sqrt(pi a) / E(k) at a/c 0.6, a/t 0.4, c/b 0.1, deepest point: tension
    # 1.138, bending 0.560, from order-3 finite elements made for this project (computed, not
    # published).  K here from the opening at the quarter-point nodes (Shih, de Lorenzi and German
    # 1976, from memory); 1 % for that estimate is common practice.
    from scipy.special import ellipe

    sample = build("surface-crack")
    p, modulus = sample.parameters, sample.material.plane_strain_modulus
    a = p["depth"]
    for step, F in enumerate((1.1384, 0.5602)):
        x, jump = openings(sample, step)
        line = np.flatnonzero(x[:, 0] == 0.0)
        quarter, end = line[np.argsort(a - x[line, 1])[:2]]
        length = a - x[end, 1]
        assert a - x[quarter, 1] == pytest.approx(length / 4)
        opening = 4 * jump[quarter, 2] - jump[end, 2]
        K_I = modulus / 8 * np.sqrt(2 * np.pi / length) * opening
        expected = F * 100.0 * np.sqrt(np.pi * a) / ellipe(1 - 0.6**2)
        assert pytest.approx(expected, rel=0.01) == K_I
