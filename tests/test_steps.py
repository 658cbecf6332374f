"""Several steps: combinations of load cases, several displacement arrays, several files."""

import csv
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import pyvista as pv

import front3d
import front3d.pipeline
from front3d.cli import main
from front3d.combination import Combination, parse_all
from front3d.errors import CaseError, ReadError
from front3d.reading.several import load_all
from front3d.results import FrontResult
from front3d.samples import build
from front3d.solid import CellBlock, Solid, Step
from tests.meshes.structured import curved, impose, straight
from tests.reference import exact

YOUNG, POISSON = 200e3, 0.3
ELASTIC = exact.Elastic.from_young(YOUNG, POISSON)
RADII = (0.34, 0.38)  # inside the mesh, whose outer faces are only cuts


# --- how a combination is written ------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "factors"),
    [
        ("both = 1.2*pressure + 0.8*thermal", {"pressure": 1.2, "thermal": 0.8}),
        ("b=p+t", {"p": 1, "t": 1}),
        ("b = -Case-A - .5 * Case-B", {"Case-A": -1, "Case-B": -0.5}),
        ("b = 2*load 1 - load 2", {"load 1": 2, "load 2": -1}),
        ("b = 1e-3*p + 1E+2*q", {"p": 1e-3, "q": 100}),
        ('b = 2*"a + b" - 3*"c=d"', {"a + b": 2, "c=d": -3}),
        ("b = p + p", {"p": 2}),
    ],
)
def test_a_combination_is_read_as_it_is_written(text: str, factors: dict[str, float]) -> None:
    assert dict(Combination.parse(text).factors) == factors


@pytest.mark.parametrize(
    "text",
    [
        "both",
        "=p",
        "b=",
        "b = 2*",
        "b = p ++ q",
        "b = p q*3",
        "b = 1e999*p",
        "b = p - p",
        "b = p +",
    ],
)
def test_what_is_no_combination_is_refused_with_an_example(text: str) -> None:
    with pytest.raises(CaseError, match="combination"):
        Combination.parse(text)


def test_two_combinations_of_one_name_are_refused() -> None:
    with pytest.raises(CaseError, match="twice"):
        parse_all(("b = p", "b = q"))


# --- K of a combination ----------------------------------------------------------------------


@pytest.fixture(scope="module")
def penny() -> Solid:
    """A penny crack with the exact displacements of tension and of shear in two steps."""
    mesh = curved("hexahedron20", 4, around=16)
    solids = [
        impose(mesh.solid, mesh.side, field)
        for field in (exact.penny_tension(ELASTIC, 1.0), exact.penny_shear(ELASTIC, 0.7))
    ]
    named = zip(("tension", "shear"), solids, strict=True)
    return replace(
        solids[0], steps=tuple(replace(solid.steps[0], name=name) for name, solid in named)
    )


def by_step(solid: Solid, **options: object) -> dict[str, FrontResult]:
    options = {"radii": RADII, "up": (0.0, 0.0, 1.0), **options}
    found = front3d.evaluate(solid, young=YOUNG, poisson=POISSON, **options)
    return {front.step: front for front in found.fronts}


def summed(solid: Solid, **factors: float) -> Solid:
    by_name = {step.name: step.displacement for step in solid.steps}
    total = sum(factor * by_name[name] for name, factor in factors.items())
    return replace(solid, steps=(Step("sum", np.asarray(total)),))


def apart(one: np.ndarray, other: np.ndarray) -> float:
    return float(np.abs(one - other).max() / np.abs(other).max())


def test_a_combination_is_the_sum_of_K_and_the_K_of_the_summed_displacement(penny: Solid) -> None:
    """Superposition.  On loaded faces the pressure is that of each step times its factor."""
    found = by_step(penny, combine=["both = 1.2*tension - 0.8*shear"], face_pressure=0.3)
    whole = by_step(summed(penny, tension=1.2, shear=-0.8), face_pressure=(1.2 - 0.8) * 0.3)["sum"]
    assert list(found) == ["tension", "shear", "both"]
    both = found["both"]
    assert apart(both.K, whole.K) < 1e-10
    assert apart(1.2 * found["tension"].K - 0.8 * found["shear"].K, whole.K) < 1e-10
    rings = [f.methods["interaction"].rings for f in (both, whole)]
    assert apart(rings[0].K, rings[1].K) < 1e-10  # type: ignore[union-attr]
    assert set(both.methods) == set(whole.methods) == {"interaction", "closure"}
    assert apart(both.methods["closure"].K, whole.methods["closure"].K) < 1e-10
    # J goes with the square of the load and does not follow from the steps.
    assert np.isnan(both.methods["interaction"].columns["J_interaction"]).all()


def test_a_combination_is_the_sum_in_every_method() -> None:
    """The opening's fit is not linear.  Measured: 1e-15 (integral, closure), 5e-12 (opening)."""
    mesh = straight("quarter_collapsed", 8, along=3, length=0.75)
    solid = mesh.solid
    for name, K in (("pull", (1.0, 0.1, 0.0)), ("slide", (-0.3, 0.6, 0.4))):
        # A smooth field besides, so that the opening's effective front is not the true one.
        solid = impose(solid, mesh.side, exact.near_tip(ELASTIC, K), name)
        bent = 1e-6 * mesh.side[:, None] * solid.points[:, :1] ** 2 * [0.3, 1.0, 0.2]
        step = replace(solid.steps[-1], displacement=solid.steps[-1].displacement + bent)
        solid = replace(solid, steps=(*solid.steps[:-1], step))
    about = {"radii": (0.5, 0.75), "up": (0.0, 1.0, 0.0)}
    both = by_step(solid, combine=["both = 1.2*pull - 0.8*slide"], steps=["both"], **about)["both"]
    whole = by_step(summed(solid, pull=1.2, slide=-0.8), **about)["sum"]
    assert set(both.methods) == {"interaction", "closure", "opening"}
    for name, method in both.methods.items():
        assert apart(method.K, whole.methods[name].K) < 1e-10, name
    assert apart(both.K, whole.K) < 1e-10
    eps = both.methods["opening"].columns["opening_eps"]
    assert np.abs(eps).min() > 1e-3 and np.abs(eps).max() < 0.29  # inside the range looked at


def test_a_multiple_of_one_step_has_its_J_too(penny: Solid) -> None:
    found = by_step(penny, combine=["more = -3*shear"], methods=["interaction"])
    J = {
        name: front.methods["interaction"].columns["J_interaction"] for name, front in found.items()
    }
    assert apart(J["more"], 9 * J["shear"]) < 1e-12
    assert apart(found["more"].K, -3 * found["shear"].K) < 1e-12


def test_steps_are_chosen_and_the_crack_is_found_once(
    penny: Solid, monkeypatch: pytest.MonkeyPatch
) -> None:
    calls: list[object] = []
    find = front3d.pipeline.find_cracks
    monkeypatch.setattr(
        front3d.pipeline, "find_cracks", lambda *about: calls.append(about) or find(*about)
    )
    how = {"combine": ["a = tension + shear", "b = shear - tension"], "methods": ["interaction"]}
    assert list(by_step(penny, steps=["shear"], **how)) == ["shear", "a", "b"]
    assert list(by_step(penny, steps=["a"], **how)) == ["a", "b"]
    assert len(calls) == 2  # once a run
    for wrong, words in (
        ({"combine": ["a = tension + torsion"]}, "no step 'torsion'; the steps are tension, shear"),
        ({"combine": ["shear = 2*tension"]}, "has a step of this name"),
        ({"steps": ["torsion"]}, "no step 'torsion'"),
        ({"stations": [0.5, 1.5]}, "from 0 to 1"),
    ):
        with pytest.raises(CaseError, match=words):
            by_step(penny, **wrong)


# --- arrays and files ------------------------------------------------------------------------


def block(offset: float = 0.0) -> Solid:
    points = np.array(np.meshgrid([0, 1, 2], [0, 1], [0, 1], indexing="ij"), float).reshape(3, -1).T
    first = np.array([0, 4, 6, 2, 1, 5, 7, 3])
    return Solid(points + offset, (CellBlock("hexahedron", np.stack([first, first + 4])),))


def write(path: Path, solid: Solid, **arrays: np.ndarray) -> Path:
    grid = pv.UnstructuredGrid({12: solid.blocks[0].nodes}, solid.points)
    for name, values in arrays.items():
        grid.point_data[name] = values
    path.parent.mkdir(exist_ok=True)
    grid.save(path)
    return path


U = np.linspace(0, 1, 36).reshape(12, 3)


def test_arrays_named_are_load_cases(tmp_path: Path) -> None:
    path = write(tmp_path / "a.vtu", block(), push=U, heat=2 * U, displacement=3 * U)
    solid = front3d.load(path, displacement=["heat", "push"])
    assert [step.name for step in solid.steps] == ["heat", "push"]
    for step, factor in zip(solid.steps, (2, 1), strict=True):
        np.testing.assert_array_equal(step.displacement, factor * U)
    assert [step.name for step in front3d.load(path, displacement=["push"]).steps] == ["1"]
    with pytest.raises(ReadError, match=r"named 'pull'; found the point arrays: push"):
        front3d.load(path, displacement=["push", "pull"])


def test_files_of_one_mesh_are_steps_called_after_them(tmp_path: Path) -> None:
    one = write(tmp_path / "cold.vtu", block(), displacement=U)
    two = write(tmp_path / "hot.vtk", block(), displacement_a=2 * U, displacement_b=3 * U)
    solid = front3d.load(one, two)
    assert [step.name for step in solid.steps] == ["cold", "hot a", "hot b"]
    np.testing.assert_array_equal(solid.steps[2].displacement, 3 * U)
    assert solid.source == "cold.vtu, hot.vtk"
    alike = [write(tmp_path / day / "r.vtu", block(), u=U) for day in ("monday", "tuesday")]
    assert [step.name for step in load_all(alike).steps] == ["monday/r", "tuesday/r"]
    with pytest.raises(ReadError, match="named twice"):
        load_all([one, one])


def test_files_of_other_meshes_are_refused(tmp_path: Path) -> None:
    one = write(tmp_path / "one.vtu", block(), displacement=U)
    moved = write(tmp_path / "moved.vtu", block(1e-3), displacement=U)
    with pytest.raises(ReadError, match=r"moved.vtu: found node 0 at .* 0.001 from its place"):
        load_all([one, moved])
    small = Solid(block().points[:8], (CellBlock("hexahedron", block().blocks[0].nodes[:1]),))
    other = write(tmp_path / "small.vtu", small, displacement=U[:8])
    with pytest.raises(ReadError, match=r"small.vtu: found 8 points, the first file has 12"):
        load_all([one, other])
    turned = Solid(block().points, (CellBlock("hexahedron", block().blocks[0].nodes[::-1]),))
    third = write(tmp_path / "turned.vtu", turned, displacement=U)
    with pytest.raises(ReadError, match="hexahedron cells with other nodes"):
        load_all([one, third])


def test_single_precision_is_the_same_mesh(tmp_path: Path) -> None:
    solid = block(1 / 3)
    one = write(tmp_path / "one.vtu", solid, displacement=U)
    rough = replace(solid, points=solid.points.astype(np.float32).astype(float))
    grid = pv.UnstructuredGrid({12: rough.blocks[0].nodes}, rough.points.astype(np.float32))
    grid.point_data["displacement"] = U
    grid.save(tmp_path / "two.vtu")
    assert len(load_all([one, tmp_path / "two.vtu"]).steps) == 2


# --- the whole run ---------------------------------------------------------------------------


def rows(path: Path) -> list[dict[str, str]]:
    with path.open(newline="") as stream:
        return list(csv.DictReader(stream))


@pytest.mark.slow
def test_two_files_their_combination_and_the_table_of_steps(tmp_path: Path) -> None:
    sample = build("surface-crack", cells="bricks", part="quarter", refine=0)
    files = []
    for step in sample.solid.steps:
        grid = pv.UnstructuredGrid(
            {block.element.vtk_type: block.nodes for block in sample.solid.blocks},
            sample.solid.points,
        )
        grid.point_data["displacement"] = step.displacement
        files.append(tmp_path / f"{step.name}.vtu")
        grid.save(files[-1])
    out = tmp_path / "out"
    words = ["evaluate", *map(str, files), "--young", "200e3", "--poisson", "0.3"]
    words += ["--crack-plane", "z=0", "--combine", "both = 1.2*tension + 0.8*bending"]
    assert main([*words, "--stations", "0.5,1", "--out", str(out)]) == 0
    table = rows(out / "steps.csv")
    assert [row["step"] for row in table] == ["tension", "bending", "both"] * 2
    points = {(row["step"], row["station"]): row for row in rows(out / "points.csv")}
    for row in table:
        same = points[row["step"], row["station"]]
        assert all(row[name] == same[name] for name in ("K_I", "G", "s_rel", "x", "flag"))
    for station in {row["station"] for row in table}:
        K = {step: float(points[step, station]["K_I"]) for step in ("tension", "bending", "both")}
        assert K["both"] == pytest.approx(1.2 * K["tension"] + 0.8 * K["bending"], rel=1e-10)
    summary = json.loads((out / "summary.json").read_text())
    assert [item["file"] for item in summary["inputs"]] == ["tension.vtu", "bending.vtu"]
    pictures = {"steps.png", "stations.svg", "steps.csv", "scene_both.png"}
    assert pictures <= set(summary["files"])
    # The case file in the summary repeats the run.
    (tmp_path / "again.toml").write_text(summary["case_file"])
    again = tmp_path / "again"
    assert (
        main(["evaluate", str(tmp_path / "again.toml"), "--no-pictures", "--out", str(again)]) == 0
    )
    assert (again / "points.csv").read_bytes() == (out / "points.csv").read_bytes()
    assert main(["report", str(out)]) == 0
    assert "K at chosen stations" in (out / "report.html").read_text()


@pytest.mark.slow
def test_every_method_gives_a_combination_the_K_of_its_displacement() -> None:
    solid = build("surface-crack", cells="bricks", part="quarter", refine=0).solid
    half = {"radii": None, "crack_plane": "z=0", "up": None}
    found = by_step(solid, combine=["both = 1.2*tension + 0.8*bending"], face_pressure=10, **half)
    whole = by_step(summed(solid, tension=1.2, bending=0.8), face_pressure=2.0 * 10, **half)["sum"]
    both = found["both"]
    assert set(both.methods) == {"interaction", "closure", "opening"}
    for name in ("interaction", "closure"):
        assert apart(both.methods[name].K, whole.methods[name].K) < 1e-10, name
    # The effective front of the opening is the place of a minimum, which rounding moves by about
    # the root of the machine's precision.
    assert apart(both.methods["opening"].K, whole.methods["opening"].K) < 1e-6
    assert apart(both.K, whole.K) < 1e-10
