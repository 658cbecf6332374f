"""The case file: what it holds, what it refuses and with which words."""

from dataclasses import fields, replace
from pathlib import Path

import pytest

from front3d.case import Case, as_toml, read_case
from front3d.errors import CaseError
from front3d.loads import Loads, Region
from front3d.options import Options, Plane

FULL = """
result = "model/bracket.vtu"
displacement = "U"
[material]
young = 200e3
poisson = 0.3
[units]
length = "mm"
stress = "MPa"
[options]
crack_plane = "z = 2"
face_pressure = 5
surface_pressure = -2.5
rings = [0.2, 0.4]
hat = 3
up = [0, 0, -1]
steps = ["first", "second"]
unopened = true
[load]
face_array = "traction"
face_polynomial = [5, -0.5]
depth_direction = [0, 1, 0]
depth_from = [0, 2, 0]
density = 7.85e-9
gravity = [0, 0, -9810]
rotation = 314
rotation_axis = [0, 0, 1]
rotation_point = [1, 0, 0]
initial_stress = "residual"
initial_strain = "misfit"
[temperature]
temperature = "T"
reference_temperature = 20
expansion = [[20, 1.1e-5], [300, 1.3e-5]]
[materials]
region_array = "part"
regions = [
  { region = "vessel", young = 2e5, poisson = 0.3 },
  { region = 2, young = 7e4, poisson = 0.33, density = 2.7e-9 },
]
"""


def write(folder: Path, text: str) -> Path:
    path = folder / "case.toml"
    path.write_text(text)
    return path


def test_every_key_arrives(tmp_path: Path) -> None:
    case = read_case(write(tmp_path, FULL))
    assert case.result == tmp_path / "model" / "bracket.vtu"
    assert (case.displacement, case.young, case.poisson) == ("U", 200e3, 0.3)
    assert (case.units.length, case.units.stress) == ("mm", "MPa")
    assert case.options == Options(
        crack_plane=Plane((0, 0, 1), 2.0),
        face_pressure=5.0,
        surface_pressure=-2.5,
        radii=(0.2, 0.4),
        hat=3.0,
        up=(0.0, 0.0, -1.0),
        steps=("first", "second"),
        unopened=True,
        loads=Loads(
            face_array="traction",
            face_polynomial=(5.0, -0.5),
            depth_direction=(0.0, 1.0, 0.0),
            depth_from=(0.0, 2.0, 0.0),
            density=7.85e-9,
            gravity=(0.0, 0.0, -9810.0),
            rotation=314.0,
            rotation_axis=(0.0, 0.0, 1.0),
            rotation_point=(1.0, 0.0, 0.0),
            initial_stress="residual",
            initial_strain="misfit",
            temperature="T",
            reference_temperature=20.0,
            expansion=((20.0, 1.1e-5), (300.0, 1.3e-5)),
            region_array="part",
            regions=(
                Region("vessel", 2e5, 0.3),
                Region(2, 7e4, 0.33, density=2.7e-9),
            ),
        ),
    )
    assert case.loads.arrays == ("traction", "T", "residual", "misfit", "part")


def test_what_is_not_said_takes_the_defaults(tmp_path: Path) -> None:
    case = read_case(write(tmp_path, 'result = "a.vtu"'))
    assert case.options == Options()
    assert not case.units.named


def test_flags_override_only_what_they_say(tmp_path: Path) -> None:
    case = read_case(write(tmp_path, FULL))
    changed = case.overridden_by(Case(poisson=0.25, face_pressure=0.0))
    assert changed.poisson == 0.25
    assert changed.options.face_pressure == 0.0  # a zero is said, too
    same = [f.name for f in fields(Case) if f.name not in ("poisson", "face_pressure")]
    assert all(getattr(changed, name) == getattr(case, name) for name in same)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ('result = "a.vtu"\nyuong = 1', ["yuong", "known here", "material"]),
        ('result = "a.vtu"\n[material]\nyuong = 1', ["[material]", "yuong", "mean 'young'"]),
        ('result = "a.vtu"\nyoung = 1', ["'young'", "belongs into [material]"]),
        ('[material]\nresult = "a.vtu"', ["'result'", "before the first section"]),
        ('result = "a.vtu"\n[options]\nradius = 1', ["'radius'", "rings", "crack_plane"]),
        ('result = "a.vtu"\nmaterial = 3', ["material", "found 3", "section"]),
        ("result = 3", ["result", "found 3", "a text"]),
        ('result = "a.vtu"\n[material]\nyoung = "200"', ["young", "'200'", "a number"]),
        ('result = "a.vtu"\n[material]\nyoung = true', ["young", "True", "a number"]),
        ('result = "a.vtu"\n[material]\nyoung = nan', ["young", "nan", "a number"]),
        ('result = "a.vtu"\n[options]\nrings = 0.3', ["rings", "0.3", "a list of radii"]),
        ('result = "a.vtu"\n[options]\nrings = []', ["rings", "[]", "a list of radii"]),
        ('result = "a.vtu"\n[options]\nup = [0, 1]', ["up", "three numbers"]),
        ('result = "a.vtu"\n[options]\nsteps = "a"', ["steps", "list of step names"]),
        ('result = "a.vtu"\n[options]\nunopened = 1', ["unopened", "true or false"]),
        ('result = "a.vtu"\n[options]\ncrack_plane = "q"', ["crack_plane", "'q'", "z=0"]),
        ("[material]\nyoung = 1", ["no result", 'result = "']),
        ("result = ", ["case.toml", "not a TOML file"]),
    ],
)
def test_what_is_wrong_is_named(tmp_path: Path, text: str, words: list[str]) -> None:
    with pytest.raises(CaseError) as caught:
        read_case(write(tmp_path, text))
    for word in words:
        assert word in str(caught.value)


def test_a_case_saved_with_a_byte_order_mark_and_carriage_returns_is_read(tmp_path: Path) -> None:
    path = tmp_path / "case.toml"
    path.write_bytes(FULL.replace("\n", "\r\n").encode("utf-8-sig"))
    assert read_case(path) == read_case(write(tmp_path, FULL))


def test_a_front_line_of_one_point_is_refused() -> None:
    with pytest.raises(CaseError, match="front line: found one point"):
        Options(front_line=((0.0, 0.0, 0.0),))


def test_a_missing_file_is_a_case_error(tmp_path: Path) -> None:
    with pytest.raises(CaseError, match="cannot be read"):
        read_case(tmp_path / "none.toml")


def test_a_case_written_down_reads_back_as_itself(tmp_path: Path) -> None:
    path = tmp_path / "again.toml"
    for case in (
        read_case(write(tmp_path, FULL)),
        Case(result=Path('a "strange" name.vtu'), young=1e5, poisson=0.1 + 0.2),
        Case(result=Path("b.vtu"), crack_plane=Plane.parse("1,0.1,-3=0.7"), rings=(1e-7, 2.0)),
    ):
        path.write_text(as_toml(case), encoding="utf-8")
        again = read_case(path)
        assert again.result is not None and case.result is not None
        assert again.result.name == case.result.name
        assert replace(again, result=None, source=None) == replace(case, result=None, source=None)
