"""Loads through the command line: every flag and every key of a case file once, with its K.

The fields are exact: the near-tip field of known K (Williams 1957) plus a smooth one that the load
balances, see tests/test_loads_exact.py, so that K is known whatever acts.
"""

import csv
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from front3d.case import Case, read_case
from front3d.cli import main
from front3d.cli.flags import case_of, join_negative_values
from front3d.cli.parser import build_parser
from tests.reading_models import grid
from tests.reference import exact
from tests.test_loads_exact import (
    ALPHA,
    ELASTIC,
    POISSON,
    YOUNG,
    K,
    block,
    by_body_force,
    by_initial_strain,
    by_initial_stress,
    by_rotation,
    by_table,
    by_temperature,
    graded,
)

CONSTANTS = ("--young", str(YOUNG), "--poisson", str(POISSON))
CHOICES = ("--rings", "0.5,0.75,0.9", "--hat", "1", "--up", "0,1,0", "--method", "interaction")
HEAD = """
[options]
rings = [0.5, 0.75, 0.9]
hat = 1
up = [0, 1, 0]
methods = ["interaction"]
"""
MATERIAL = f"[material]\nyoung = {YOUNG}\npoisson = {POISSON}\n"
FLEXURAL, ACROSS = (1 - POISSON**2) / YOUNG, POISSON * (1 + POISSON) / YOUNG


def bent(c0, c1):
    """The block under sigma_yy = c0 + c1 x besides (Airy; plane strain), on its crack faces too."""
    mesh = block()
    x, y, _ = mesh.solid.points.T
    u = exact.near_tip(ELASTIC, K)(mesh.solid.points, mesh.side)
    u[:, 0] -= ACROSS * (c0 * x + c1 * x**2 / 2) + FLEXURAL * c1 * y**2 / 2
    u[:, 1] += FLEXURAL * (c0 + c1 * x) * y
    return mesh.solid, {"displacement": u}


def pressed_ends(p):
    """The block, sheared so that its ends are aslant to the front, under -p across them besides:
    the surfaces on which the front ends bear it.
    """
    mesh = block()
    x = mesh.solid.points + np.outer(mesh.solid.points[:, 0], [0, 0, 0.5])
    normal = np.array([-0.5, 0, 1]) / np.hypot(0.5, 1)
    stress = -p * np.outer(normal, normal)
    strain = ((1 + POISSON) * stress - POISSON * np.trace(stress) * np.eye(3)) / YOUNG
    u = exact.near_tip(ELASTIC, K)(x, mesh.side) + x @ strain
    return replace(mesh.solid, points=x), {"displacement": u}


def of(carry):
    def model():
        solid, _ = carry(block())
        (step,) = solid.steps
        return solid, {"displacement": step.displacement, **step.point_arrays}

    return model


def in_regions():
    mesh = block()
    u = exact.near_tip(ELASTIC, K)(mesh.solid.points, mesh.side)
    return mesh.solid, {"displacement": u}


def words(loads):
    """Keywords as flags."""
    for name, value in loads.items():
        yield f"--{name.replace('_', '-')}"
        yield ",".join(map(repr, map(float, value))) if isinstance(value, tuple) else str(value)


def written(loads):
    """Keywords as lines of a case file, in its section [load] or [temperature]."""
    for name, value in loads.items():
        if isinstance(value, tuple):
            yield f"{name} = [{', '.join(map(repr, map(float, value)))}]"
        else:
            yield f'{name} = "{value}"' if isinstance(value, str) else f"{name} = {float(value)!r}"


FACES = {"face_array": "traction"}
POLYNOMIAL = {"face_polynomial": (-0.5, 2.0), "depth_direction": (-2, 0, 0)}
MECHANICAL = {
    "gravity": (of(by_body_force), {**FACES, **by_body_force(block())[1]}),
    "rotation": (of(by_rotation), {**FACES, **by_rotation(block())[1]}),
    "initial stress": (of(by_initial_stress), {**FACES, **by_initial_stress(block())[1]}),
    "initial strain": (of(by_initial_strain), {**FACES, **by_initial_strain(block())[1]}),
    "polynomial": (lambda: bent(-1.5, 2.0), {**POLYNOMIAL, "depth_from": (1.0, 0, 0)}),
    "uniform and polynomial": (
        lambda: bent(3.0, 2.0),
        {"face_pressure": -2.5, **POLYNOMIAL, "depth_from": (0, 0, 7.0)},
    ),
}
IN_OPTIONS = ("face_pressure", "surface_pressure")


def result(folder: Path, model, **more) -> Path:
    solid, arrays = model()
    blocks = {b.kind: b.nodes for b in solid.blocks}
    data = grid(solid.points, blocks, **arrays)
    for name, values in more.items():
        data.cell_data[name] = values
    path = folder / "block.vtu"
    data.save(path)
    return path


def run(*call: object) -> dict[str, np.ndarray]:
    """K of the only front by step, (stations, 3)."""
    out = Path(str(call[0])).parent / "out"
    assert main(["evaluate", *map(str, call), "--no-pictures", "--out", str(out)]) == 0
    found: dict[str, list[list[float]]] = {}
    with (out / "points.csv").open(newline="") as stream:
        for row in csv.DictReader(stream):
            found.setdefault(row["step"], []).append(
                [float(row[f"K_{mode}"]) for mode in ("I", "II", "III")]
            )
    return {step: np.array(rows) for step, rows in found.items()}


def assert_known(found: np.ndarray, factor: float = 1.0) -> None:
    """K inside; at its ends the block has cut surfaces and no free ones."""
    inside = found[1:-1]
    np.testing.assert_allclose(inside, np.broadcast_to(factor * K, inside.shape), atol=5e-4)


def parsed(*call: str) -> Case:
    words = join_negative_values(["evaluate", *call])
    return case_of(build_parser(words).parse_args(words))


@pytest.mark.slow
@pytest.mark.parametrize("name", MECHANICAL)
def test_mechanical_loads_by_flags_and_by_a_case_file(tmp_path: Path, name: str) -> None:
    model, loads = MECHANICAL[name]
    path = result(tmp_path, model)
    flags = tuple(words(loads))
    assert_known(run(path, *CONSTANTS, *CHOICES, *flags)["1"])
    case = tmp_path / "case.toml"
    own = {key: loads[key] for key in loads if key in IN_OPTIONS}
    rest = {key: loads[key] for key in loads if key not in IN_OPTIONS}
    case.write_text(
        "\n".join(
            (f'result = "{path.name}"', MATERIAL, HEAD, *written(own), "[load]", *written(rest))
        )
    )
    by_flags = parsed(str(path), *CONSTANTS, *CHOICES, *flags)
    assert read_case(case).options == by_flags.options


@pytest.mark.slow
def test_temperature_by_flags_and_a_table_by_a_case_file(tmp_path: Path) -> None:
    loads = {**FACES, **by_temperature(block())[1]}
    path = result(tmp_path, of(by_temperature))
    assert_known(run(path, *CONSTANTS, *CHOICES, *words(loads))["1"])
    _, table = by_table(block())
    rows = [list(map(float, row)) for row in table["expansion"]]
    path = result(tmp_path, of(by_table))
    case = tmp_path / "case.toml"
    case.write_text(
        f'result = "{path.name}"\n{MATERIAL}{HEAD}[load]\nface_array = "traction"\n[temperature]\n'
        f'temperature = "T"\nreference_temperature = {table["reference_temperature"]}\n'
        f"expansion = {rows}\n"
    )
    assert_known(run(case)["1"])
    # A flag stands above the file, and need not make sense without it.
    assert np.abs(run(case, "--expansion", 5 * ALPHA)["1"][2] - K).max() > 0.1


@pytest.mark.slow
def test_constants_by_temperature_and_by_region_in_a_case_file(tmp_path: Path, capsys) -> None:
    solid, loads = graded()
    (step,) = solid.steps
    arrays = {"displacement": step.displacement, **step.point_arrays}
    path = result(tmp_path, lambda: (solid, arrays))
    case = tmp_path / "case.toml"
    rows = [list(map(float, row)) for row in loads["elastic_table"]]
    case.write_text(
        f'result = "{path.name}"\n{HEAD}[temperature]\ntemperature = "T"\nelastic_table = {rows}\n'
    )
    found = run(case)["1"][1:-1]
    np.testing.assert_allclose(found, np.broadcast_to([0, 0, 1.0], found.shape), atol=2e-3)
    assert "block.vtu: constants by temperature; K in" in capsys.readouterr().out
    solid, _ = in_regions()
    centre = np.concatenate([solid.points[b.nodes].mean(axis=1) for b in solid.blocks])
    path = result(tmp_path, in_regions, part=1.0 + (centre[:, 0] > 0.95))
    case.write_text(
        f'result = "{path.name}"\n{HEAD.replace("0.5, 0.75, 0.9", "0.5, 0.75")}[materials]\n'
        f'region_array = "part"\nregions = [{{ region = 1, young = {YOUNG}, poisson = {POISSON} }}'
        ", { region = 2, young = 1.0, poisson = 0.0 }]\n"
    )
    assert_known(run(case)["1"])
    assert "constants of the region that each front runs in" in capsys.readouterr().out


@pytest.mark.slow
def test_pressure_on_the_surfaces_on_which_the_front_ends(tmp_path: Path) -> None:
    """K at the ends is that without the pressure on them, which moves it by a tenth otherwise."""
    p = 2.0
    bare = run(result(tmp_path, lambda: pressed_ends(0.0)), *CONSTANTS, *CHOICES)["1"]
    path = result(tmp_path, lambda: pressed_ends(p))
    pressed = run(path, *CONSTANTS, *CHOICES, "--surface-pressure", p)["1"]
    np.testing.assert_allclose(pressed, bare, atol=1e-3)
    assert np.abs(run(path, *CONSTANTS, *CHOICES)["1"] - bare)[[0, -1]].max() > 0.05


def test_a_load_that_acts_in_one_of_two_files(tmp_path: Path, capsys) -> None:
    """Pressure on the faces in one step only; in a combination it counts with that step's factor.

    What acts in the other step as well makes K wrong there.
    """

    def stored(name: str, model) -> Path:
        (tmp_path / name).mkdir()
        path = result(tmp_path / name, model)
        return path.rename(tmp_path / f"{name}.vtu")

    files = stored("free", in_regions), stored("pressed", lambda: bent(2.5, 0.0))
    call = (*files, *CONSTANTS, *CHOICES, "--face-pressure", "-2.5")
    both = ("--combine", "both = 2*free - 0.5*pressed")
    found = run(*call, "--acts-in", "face-pressure=pressed", *both)
    assert set(found) == {"free", "pressed", "both"}
    for step, factor in (("free", 1.0), ("pressed", 1.0), ("both", 1.5)):
        assert_known(found[step], factor)
    everywhere = run(*call, *both)
    assert_known(everywhere["pressed"])
    assert np.abs(everywhere["free"][1:-1] - K).max() > 0.5
    capsys.readouterr()
    wrong = ("evaluate", *map(str, call), "--acts-in")
    assert main([*wrong, "face_pressure=presed"]) == 1
    assert "found no step 'presed'" in capsys.readouterr().err
    assert main([*wrong, "gravity=pressed"]) == 2
    assert "found gravity, which is not given" in capsys.readouterr().err
    assert main([*wrong, "weather=pressed"]) == 2
    assert "expected a load and its steps" in capsys.readouterr().err
