"""The case file: an evaluation written down in TOML, so that it can be repeated.

```toml
result = "bracket.vtu"          # relative to this file; a list where steps stand in several files
displacement = "U"              # where it is not found by its name; a list for several load cases
displacement_file = "u.csv"     # a table of nodal displacements, relative to this file

[material]
young = 200e3
poisson = 0.3

[units]
length = "mm"
stress = "MPa"

[options]                       # README.md shows every key of this section and of
crack_plane = "z=0"             # [load], [temperature] and [materials]
rings = [0.4, 0.6, 0.8]
compare = ["penny:a=10,tension=100"]
```
"""

import json
import tomllib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, fields, replace
from difflib import get_close_matches
from math import isfinite
from os.path import relpath
from pathlib import Path
from typing import Any

from front3d.errors import CaseError
from front3d.loads import Loads, Region, Row, Vector
from front3d.options import Options, Plane
from front3d.units import Units


@dataclass(frozen=True, slots=True)
class Case:
    """What a case file or the flags of a command say; None where they say nothing."""

    result: Path | None = None
    more: tuple[Path, ...] | None = None  # further files with steps of the same mesh
    displacement: str | tuple[str, ...] | None = None
    displacement_file: Path | None = None
    young: float | None = None
    poisson: float | None = None
    length: str | None = None
    stress: str | None = None
    crack_plane: Plane | None = None
    symmetry_planes: tuple[Plane, ...] | None = None
    expected_stress: float | None = None
    front_nodes: tuple[int, ...] | None = None
    front_array: str | None = None
    front_line: tuple[Vector, ...] | None = None
    face_pressure: float | None = None
    surface_pressure: float | None = None
    rings: tuple[float, ...] | None = None
    hat: float | None = None
    up: Vector | None = None
    steps: tuple[str, ...] | None = None
    methods: tuple[str, ...] | None = None
    compare: tuple[str, ...] | None = None
    combine: tuple[str, ...] | None = None
    stations: tuple[float, ...] | None = None
    unopened: bool | None = None
    face_array: str | None = None
    face_polynomial: tuple[float, ...] | None = None
    depth_direction: Vector | None = None
    depth_from: Vector | None = None
    density: float | None = None
    gravity: Vector | None = None
    rotation: float | None = None
    rotation_axis: Vector | None = None
    rotation_point: Vector | None = None
    initial_stress: str | None = None
    initial_strain: str | None = None
    acts_in: tuple[str, ...] | None = None
    temperature: str | None = None
    reference_temperature: float | None = None
    expansion: float | tuple[Row, ...] | None = None
    elastic_table: tuple[Row, ...] | None = None
    region_array: str | None = None
    regions: tuple[Region, ...] | None = None
    source: Path | None = field(default=None, compare=False)

    def overridden_by(self, flags: "Case") -> "Case":
        """A case that says what `flags` says, and otherwise what this one says."""
        said = {
            name: value
            for name in (f.name for f in fields(flags))
            if (value := getattr(flags, name)) is not None
        }
        return replace(self, **said)

    @property
    def options(self) -> Options:
        """The options of the evaluation; CaseError where one is out of range."""
        return Options(
            crack_plane=self.crack_plane,
            symmetry_planes=self.symmetry_planes or (),
            expected_stress=self.expected_stress,
            front_nodes=self.front_nodes or (),
            front_array=self.front_array,
            front_line=self.front_line or (),
            face_pressure=self.face_pressure or 0.0,
            surface_pressure=self.surface_pressure or 0.0,
            loads=self.loads,
            radii=self.rings,
            hat=self.hat,
            up=self.up,
            steps=self.steps,
            unopened=bool(self.unopened),
            methods=self.methods,
            compare=self.compare or (),
            combine=self.combine or (),
            stations=self.stations,
        )

    @property
    def loads(self) -> Loads:
        """What acts besides; CaseError where one is out of range or lacks what belongs to it."""
        said = {name: getattr(self, name) for name in Loads.names()}
        return Loads(**{name: value for name, value in said.items() if value is not None})

    @property
    def own_constants(self) -> bool:
        """Whether a table or regions hold the elastic constants."""
        return bool(self.elastic_table or self.regions)

    @property
    def results(self) -> tuple[Path, ...]:
        """All result files; empty where none is named."""
        return () if self.result is None else (self.result, *(self.more or ()))

    @property
    def arrays(self) -> tuple[str, ...]:
        """Names of the arrays that the result file must hold besides the displacement."""
        return (*self.loads.arrays, *([self.front_array] if self.front_array else []))

    @property
    def units(self) -> Units:
        return Units(self.length or "", self.stress or "")


def read_case(path: Path) -> Case:
    """Read a TOML case file; CaseError says which key is wrong and what was expected."""
    try:
        # Some editors write a byte-order mark, which TOML does not know.
        content = tomllib.loads(path.read_bytes().decode("utf-8-sig"))
    except OSError as error:
        raise CaseError(f"{path}: cannot be read ({error.strerror})") from error
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise CaseError(f"{path}: not a TOML file: {error}") from error
    values = _values(content, _KEYS, f"{path.name}: ")
    if "result" not in values:
        raise CaseError(
            f'{path.name}: found no result, expected a line such as result = "model.vtu" before '
            "the first section"
        )
    first, *more = (path.parent / name for name in _several(values["result"]))
    values["result"] = first
    if more:
        values["more"] = tuple(more)
    if "displacement_file" in values:
        values["displacement_file"] = path.parent / values["displacement_file"]
    return Case(**values, source=path)


def as_toml(case: Case) -> str:
    """`case` as the text of a case file that stands beside its result."""
    lines: list[str] = []
    sections: list[str] = []
    for key, check in _KEYS.items():
        if isinstance(check, Mapping):
            said = [_line(name, getattr(case, name)) for name in check]
            if any(said):
                sections += ["", f"[{key}]", *filter(None, said)]
        else:
            value = getattr(case, key)
            if key == "result":
                names = tuple(relpath(path, case.results[0].parent) for path in case.results)
                value = names if case.more else next(iter(names), None)
            elif isinstance(value, Path):
                value = relpath(value, case.results[0].parent)
            lines += filter(None, [_line(key, value)])
    return "\n".join([*lines, *sections]) + "\n"


def _line(key: str, value: Any) -> str:
    return "" if value is None else f"{key} = {_toml(value)}"


def _toml(value: Any) -> str:
    if isinstance(value, Plane):
        value = f"{','.join(map(repr, value.normal))}={value.offset!r}"
    if isinstance(value, Region):
        said = {f.name: getattr(value, f.name) for f in fields(value)}
        inner = (f"{key} = {_toml(v)}" for key, v in said.items() if v is not None)
        return f"{{ {', '.join(inner)} }}"
    if isinstance(value, tuple):
        return f"[{', '.join(map(_toml, value))}]"
    # JSON's texts, numbers and booleans are TOML's.
    return json.dumps(value)


# --- what each key holds --------------------------------------------------------------------

Check = Callable[[Any], Any]


class _WrongError(Exception):
    """What was expected of a value."""


def _text(value: Any) -> str:
    if not isinstance(value, str) or not value:
        raise _WrongError('a text such as "name"')
    return value


def _text_or_texts(value: Any) -> str | tuple[str, ...]:
    what = 'a text such as "name", or a list of them'
    return tuple(_list_of(_text, what)(value)) if isinstance(value, list) else _text(value)


def _several(value: str | tuple[str, ...]) -> tuple[str, ...]:
    return (value,) if isinstance(value, str) else value


def _number(value: Any) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not isfinite(value):
        raise _WrongError("a number")
    return float(value)


def _node(value: Any) -> int:
    if isinstance(value, bool) or not isinstance(value, int) or value < 0:
        raise _WrongError("a node number, from 0")
    return value


def _boolean(value: Any) -> bool:
    if not isinstance(value, bool):
        raise _WrongError("true or false")
    return value


def _plane(value: Any) -> Plane:
    if not isinstance(value, str):
        raise _WrongError('a plane such as "z=0"')
    try:
        return Plane.parse(value)
    except CaseError as error:
        raise _WrongError(str(error).partition("expected ")[2]) from None


def _list_of(check: Check, what: str) -> Check:
    def read(value: Any) -> tuple[Any, ...]:
        if not isinstance(value, list) or not value:
            raise _WrongError(what)
        try:
            return tuple(check(item) for item in value)
        except _WrongError:
            raise _WrongError(what) from None

    return read


def _vector(value: Any) -> Vector:
    what = "three numbers such as [0, 0, 1]"
    numbers = _list_of(_number, what)(value)
    if len(numbers) != 3:
        raise _WrongError(what)
    x, y, z = numbers
    return (x, y, z)


def _regions(value: Any) -> tuple[Region, ...]:
    what = "a list such as [{ region = 1, young = 200e3, poisson = 0.3 }]"
    if not isinstance(value, list) or not value:
        raise _WrongError(what)
    try:
        return Loads(regions=tuple(value)).regions
    except (CaseError, TypeError) as error:
        raise _WrongError(f"{what}; {error}") from None


def _expansion(value: Any) -> float | tuple[Row, ...]:
    if isinstance(value, list):
        return _rows(value)
    return _number(value)


_ROWS = "rows of numbers such as [[20, 1.1e-5], [300, 1.3e-5]]"
_numbers = _list_of(_number, "a list of numbers such as [5.0, -0.1]")


def _rows(value: Any) -> tuple[Row, ...]:
    found: tuple[Row, ...] = _list_of(_list_of(_number, _ROWS), _ROWS)(value)
    return found


_KEYS: Mapping[str, Any] = {
    "result": _text_or_texts,
    "displacement": _text_or_texts,
    "displacement_file": _text,
    "material": {"young": _number, "poisson": _number},
    "units": {"length": _text, "stress": _text},
    "options": {
        "crack_plane": _plane,
        "expected_stress": _number,
        "front_nodes": _list_of(_node, "a list of node numbers such as [4, 9, 11]"),
        "front_array": _text,
        "front_line": _list_of(_vector, "a list of points such as [[0, 0, 0], [0, 1, 0]]"),
        "symmetry_planes": _list_of(_plane, 'a list of planes such as ["x=0"]'),
        "face_pressure": _number,
        "surface_pressure": _number,
        "rings": _list_of(_number, "a list of radii such as [0.2, 0.4]"),
        "hat": _number,
        "up": _vector,
        "steps": _list_of(_text, 'a list of step names such as ["step 1"]'),
        "methods": _list_of(_text, 'a list of method names such as ["closure"]'),
        "compare": _list_of(_text, 'a list of texts such as ["penny:a=10,tension=100"]'),
        "combine": _list_of(_text, 'a list of texts such as ["both = 1.2*pressure + thermal"]'),
        "stations": _list_of(_number, "a list of parts of the length such as [0, 0.5, 1]"),
        "unopened": _boolean,
    },
    "load": {
        "face_array": _text,
        "face_polynomial": _numbers,
        "depth_direction": _vector,
        "depth_from": _vector,
        "density": _number,
        "gravity": _vector,
        "rotation": _number,
        "rotation_axis": _vector,
        "rotation_point": _vector,
        "initial_stress": _text,
        "initial_strain": _text,
        "acts_in": _list_of(_text, 'a list of texts such as ["face_pressure = pressure"]'),
    },
    "temperature": {
        "temperature": _text,
        "reference_temperature": _number,
        "expansion": _expansion,
        "elastic_table": _rows,
    },
    "materials": {"region_array": _text, "regions": _regions},
}


def _values(content: Mapping[str, Any], keys: Mapping[str, Any], where: str) -> dict[str, Any]:
    """Checked values of all keys, sections flattened; their names are unique on purpose."""
    values: dict[str, Any] = {}
    for key, value in content.items():
        if key not in keys:
            raise CaseError(_unknown(key, keys, where))
        check = keys[key]
        if isinstance(check, Mapping):
            if not isinstance(value, dict):
                raise CaseError(f"{where}{key}: found {value!r}, expected a section [{key}]")
            values |= _values(value, check, f"{where}[{key}] ")
            continue
        try:
            values[key] = check(value)
        except _WrongError as wrong:
            raise CaseError(f"{where}{key}: found {value!r}, expected {wrong}") from None
    return values


def _unknown(key: str, keys: Mapping[str, Any], where: str) -> str:
    near = get_close_matches(key, keys, n=1, cutoff=0.5)
    hint = f"; did you mean {near[0]!r}?" if near else ""
    elsewhere = [
        name for name, inner in _KEYS.items() if isinstance(inner, Mapping) and key in inner
    ]
    if elsewhere:
        hint = f"; it belongs into [{elsewhere[0]}]"
    elif key in _KEYS:
        hint = "; it belongs before the first section"
    return f"{where}unknown key {key!r}{hint} (known here: {', '.join(keys)})"
