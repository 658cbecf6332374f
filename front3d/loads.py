"""What acts on the solid besides what its displacements show: loads that K depends on.

Everything is in the model's own consistent units.  Arrays are named, and stand in the result file.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from itertools import pairwise
from math import isfinite
from typing import Any

from front3d.errors import CaseError

Vector = tuple[float, float, float]
Row = tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Region:
    """Material of the cells whose number (or physical group by name) is `region`.

    `expansion` and `density` stand in place of those of `Loads`.
    """

    region: str | float
    young: float
    poisson: float
    expansion: float | tuple[Row, ...] | None = None
    density: float | None = None

    def __post_init__(self) -> None:
        if not isinstance(self.region, str):
            _number("region", self.region)
        _elastic("region", _number("young", self.young), _number("poisson", self.poisson))
        if self.expansion is not None:
            object.__setattr__(self, "expansion", _expansion(self.expansion))
        if self.density is not None and _number("density", self.density) < 0:
            raise CaseError(f"density: found {self.density:g}, expected zero or more")


@dataclass(frozen=True, slots=True)
class Loads:
    """Loads beside the uniform pressures of `Options`; by default there are none.

    Attributes
    ----------
    face_array : point or cell array of what acts on the crack faces: a pressure (one component,
        positive when it opens), or a traction (three) on the face its nodes or cells belong to
    face_polynomial : pressure on the crack faces c0 + c1 d + c2 d^2 + ..., d the depth
    depth_direction : the depth is the distance from `depth_from` along this direction
    depth_from : a point where the depth is zero
    density : mass per volume
    gravity : acceleration vector; the body force is density times it
    rotation : angular speed in radians per unit of time; the body force is density times
        rotation^2 times the distance vector from the axis
    rotation_axis, rotation_point : direction of the axis, and a point on it
    temperature : point array of the temperature
    reference_temperature : where there is no thermal strain
    expansion : coefficient of thermal expansion, or rows (temperature, coefficient): the mean
        coefficient between the reference and that temperature
    initial_stress : point or cell array, six components xx, yy, zz, xy, yz, xz or nine: the stress
        that is there without strain
    initial_strain : likewise, tensor components: the strain that is there without stress
    elastic_table : rows (temperature, Young's modulus, Poisson's ratio), in place of the constants
    regions : the materials of a solid of several
    region_array : cell array of the numbers of the regions; None: the physical groups of the file
    acts_in : loads that act in some steps only, such as "face_pressure = pressure, upset"; all
        others act in every step
    """

    face_array: str | None = None
    face_polynomial: tuple[float, ...] | None = None
    depth_direction: Vector | None = None
    depth_from: Vector = (0.0, 0.0, 0.0)
    density: float | None = None
    gravity: Vector | None = None
    rotation: float | None = None
    rotation_axis: Vector | None = None
    rotation_point: Vector = (0.0, 0.0, 0.0)
    temperature: str | None = None
    reference_temperature: float = 0.0
    expansion: float | tuple[Row, ...] | None = None
    initial_stress: str | None = None
    initial_strain: str | None = None
    elastic_table: tuple[Row, ...] | None = None
    regions: tuple[Region, ...] = ()
    region_array: str | None = None
    acts_in: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        for name in _VECTORS:
            value = getattr(self, name)
            if value is not None:
                object.__setattr__(self, name, _vector(name, value))
        for name in ("depth_direction", "rotation_axis"):
            if getattr(self, name) is not None and not any(getattr(self, name)):
                raise CaseError(f"{_words(name)}: found a zero vector, expected a direction")
        for name in ("density", "rotation", "reference_temperature"):
            value = getattr(self, name)
            if value is not None:
                object.__setattr__(self, name, _number(name, value))
        if self.density is not None and self.density < 0:
            raise CaseError(f"density: found {self.density:g}, expected zero or more")
        if self.face_polynomial is not None:
            found = tuple(_number("face_polynomial", c) for c in _row(self.face_polynomial))
            if not found:
                raise CaseError("face polynomial: found no coefficients, expected c0, c1, ...")
            object.__setattr__(self, "face_polynomial", found)
        regions = tuple(r if isinstance(r, Region) else _region(r) for r in self.regions)
        object.__setattr__(self, "regions", regions)
        object.__setattr__(self, "acts_in", _texts(self.acts_in))
        self._check_tables()
        self._check_partners()

    def _check_tables(self) -> None:
        if self.expansion is not None:
            object.__setattr__(self, "expansion", _expansion(self.expansion))
        if self.elastic_table is not None:
            names = ("temperature", "Young's modulus", "Poisson's ratio")
            table = _table("elastic_table", self.elastic_table, names)
            for _, young, poisson in table:
                _elastic("elastic table", young, poisson)
            object.__setattr__(self, "elastic_table", table)

    def _check_partners(self) -> None:
        """CaseError where one is given without another that it needs."""
        for name, partner in (
            ("face_polynomial", "depth_direction"),
            ("depth_direction", "face_polynomial"),
            ("gravity", "density"),
            ("rotation", "density"),
            ("rotation", "rotation_axis"),
            ("rotation_axis", "rotation"),
            ("expansion", "temperature"),
            ("elastic_table", "temperature"),
            ("region_array", "regions"),
        ):
            if getattr(self, name) is not None and getattr(self, partner) in (None, ()):
                if partner == "density" and any(r.density is not None for r in self.regions):
                    continue
                if name == "face_polynomial" and len(self.face_polynomial or ()) == 1:
                    continue
                raise CaseError(f"found {_words(name)} without {_words(partner)}, expected both")
        depends = (self.expansion, self.elastic_table, *(r.expansion for r in self.regions))
        if self.temperature and not any(value is not None for value in depends):
            raise CaseError(
                "found a temperature that nothing depends on, expected an expansion or an elastic "
                "table"
            )
        if self.elastic_table and self.regions:
            raise CaseError(
                "found an elastic table and regions, expected one of them: a table for each region "
                "is not supported"
            )
        if self.density and self.gravity is None and self.rotation is None:
            raise CaseError("found a density alone, expected gravity or rotation")
        for name in self.steps_of_loads:
            if name not in _PRESSURES and getattr(self, name) is None:
                raise CaseError(f"acts in: found {_words(name)}, which is not given, expected both")
            if name == "temperature" and self.elastic_table:
                raise CaseError(
                    "acts in: found a temperature of some steps only, and constants that depend on "
                    "it, expected the temperature in every step"
                )

    @property
    def steps_of_loads(self) -> dict[str, tuple[str, ...]]:
        """The steps in which a load acts, of the loads that do not act in all."""
        return dict(acting(text) for text in self.acts_in)

    def acts(self, load: str, step: str) -> bool:
        """Whether a load, by the name of its option, acts in a step."""
        return step in self.steps_of_loads.get(load, (step,))

    @property
    def arrays(self) -> tuple[str, ...]:
        """Names of the arrays that the result file must hold."""
        named = (self.face_array, self.temperature, self.initial_stress, self.initial_strain)
        regions = (self.region_array or PHYSICAL_GROUP,) if self.regions else ()
        return tuple(dict.fromkeys(name for name in (*named, *regions) if name))

    @property
    def on_faces(self) -> bool:
        """Whether more than a uniform pressure acts on the crack faces."""
        return self.face_array is not None or self.face_polynomial is not None

    @property
    def in_volume(self) -> bool:
        """Whether stresses do not follow from the strains by one pair of constants, or a body
        force acts.
        """
        named = (self.temperature, self.initial_stress, self.initial_strain)
        return bool(any(named) or self.gravity is not None or self.rotation)

    @classmethod
    def names(cls) -> tuple[str, ...]:
        return tuple(field.name for field in fields(cls))


PHYSICAL_GROUP = "physical group"
"""Name of the cell array with the numbers of the groups that a file names itself."""

_PRESSURES = ("face_pressure", "surface_pressure")
"""Loads that stand in `Options`."""

_SCOPED = (
    *_PRESSURES,
    *("face_polynomial", "face_array", "gravity", "rotation"),
    *("temperature", "initial_stress", "initial_strain"),
)

_VECTORS = ("depth_direction", "depth_from", "gravity", "rotation_axis", "rotation_point")


def _words(name: str) -> str:
    return name.replace("_", " ")


def _texts(value: Any) -> tuple[str, ...]:
    return (value,) if isinstance(value, str) else tuple(value)


def acting(text: str) -> tuple[str, tuple[str, ...]]:
    """Name of a load and of the steps in which it acts; CaseError where it is not put so."""
    name, equals, rest = text.partition("=")
    load = name.strip().replace("-", "_").replace(" ", "_")
    steps = tuple(part.strip() for part in rest.split(","))
    if not equals or load not in _SCOPED or not all(steps):
        raise CaseError(
            f"acts in: found {text!r}, expected a load and its steps, such as 'face_pressure = "
            f"pressure, upset'; loads are {', '.join(_SCOPED)}"
        )
    return load, steps


def _number(name: str, value: Any) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not isfinite(value):
        raise CaseError(f"{_words(name)}: found {value!r}, expected a number")
    return float(value)


def _elastic(where: str, young: float, poisson: float) -> None:
    if not (young > 0 and -1.0 < poisson < 0.5):
        raise CaseError(
            f"{where}: found E = {young:g}, nu = {poisson:g}, expected a positive modulus and a "
            "ratio above -1 and below 0.5"
        )


def _expansion(value: Any) -> float | tuple[Row, ...]:
    if isinstance(value, int | float):
        return _number("expansion", value)
    return _table("expansion", value, ("temperature", "coefficient"))


def _region(value: Any) -> Region:
    """From a mapping, as a case file has it."""
    known = [field.name for field in fields(Region)]
    if not isinstance(value, Mapping) or not {*known[:3]} <= {*value} <= {*known}:
        raise CaseError(
            f"regions: found {value!r}, expected region, young and poisson, and if need be "
            "expansion and density"
        )
    return Region(**value)


def _row(value: Any) -> tuple[Any, ...]:
    return (value,) if isinstance(value, int | float) else tuple(value)


def _vector(name: str, value: Sequence[float]) -> Vector:
    parts = tuple(_number(name, v) for v in value)
    if len(parts) != 3:
        raise CaseError(f"{_words(name)}: found {len(parts)} numbers, expected three")
    x, y, z = parts
    return (x, y, z)


def _table(name: str, rows: Any, columns: tuple[str, ...]) -> tuple[Row, ...]:
    """Rows of numbers, the first of which grows."""
    table = tuple(tuple(_number(name, v) for v in _row(row)) for row in rows)
    if not table or any(len(row) != len(columns) for row in table):
        raise CaseError(f"{_words(name)}: expected rows of {', '.join(columns)}")
    if any(b[0] <= a[0] for a, b in pairwise(table)):
        raise CaseError(f"{_words(name)}: expected rows in order of rising temperature")
    return table
