"""What an embedded model is: its parameters, and what building it gives."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from math import isfinite

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.errors import CaseError
from front3d.samples.elasticity import Traction
from front3d.samples.mirror import Unfolded
from front3d.samples.parts import Parts
from front3d.solid import Material, Solid

Values = dict[str, float]


@dataclass(frozen=True, slots=True)
class Parameter:
    """A number the user may choose.

    Attributes
    ----------
    default : its value; None when it follows from the others (`meaning` says how)
    low, high : the range allowed, both ends included
    unit : "length", "stress", "force" (stress times squared length), "degrees" or "" for a pure
        number
    whole : only whole numbers
    """

    meaning: str
    default: float | None
    low: float
    high: float
    unit: str = ""
    whole: bool = False

    def check(self, sample: str, name: str, value: float) -> float:
        """The value as a float; CaseError outside the range."""
        try:
            number = float(value)
        except (TypeError, ValueError):
            number = float("nan")
        kind = "a whole number" if self.whole else "a number"
        if (
            not isfinite(number)
            or not self.low <= number <= self.high
            or (self.whole and number != int(number))
        ):
            raise CaseError(
                f"sample {sample}, parameter {name}: found {value!r}, expected {kind} from "
                f"{self.low:g} to {self.high:g} ({self.meaning})"
            )
        return number


@dataclass(frozen=True, slots=True, eq=False)
class Sample:
    """A cracked solid, loaded and solved.

    Attributes
    ----------
    name : its name in the registry
    solid : mesh and displacements, one step per load
    material : elastic constants
    description : one sentence with the values of the parameters
    case : what goes into the case file (tables material, units, options)
    parameters : every parameter with the value used
    """

    name: str
    solid: Solid
    material: Material
    description: str
    case: Mapping[str, Mapping[str, object]]
    parameters: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Load:
    """One step: tractions on a part of the boundary.

    Attributes
    ----------
    name : name of the step
    traction : (points (n, 3), outward unit normals (n, 3)) -> (n, 3)
    on : nodes of boundary faces, (faces, m, 3) -> (faces,) true where the traction acts
    """

    name: str
    traction: Traction
    on: Callable[[FloatArray], BoolArray]


def nothing_held(values: Values, points: FloatArray) -> BoolArray:
    """No displacement is held, (n, 3)."""
    return np.zeros(points.shape, dtype=bool)


def no_options(values: Values) -> Mapping[str, object]:
    """The defaults of an evaluation suit the sample."""
    return {}


@dataclass(frozen=True, slots=True)
class SampleSpec:
    """An entry of the registry.

    Attributes
    ----------
    description : one line
    parameters : by name
    complete : fills the parameters whose default is None, and checks ratios between them
    mesh : (values, cells) -> solid without steps, and the part it is unfolded from
    loads : values -> one or more loads, each in equilibrium or carried by what is held
    held : (values, points of the part (n, 3)) -> (n, 3) components kept from moving, besides those
        that symmetry holds
    options : values -> the options that an evaluation of the sample needs
    parts : parts that the sample may be reduced to, beside the whole
    """

    name: str
    description: str
    parameters: Mapping[str, Parameter]
    complete: Callable[[Mapping[str, float | None]], Values]
    mesh: Callable[[Values, str], Unfolded]
    loads: Callable[[Values], tuple[Load, ...]]
    parts: Parts = field(default_factory=dict)
    held: Callable[[Values, FloatArray], BoolArray] = nothing_held
    options: Callable[[Values], Mapping[str, object]] = no_options

    def values(self, given: Mapping[str, float]) -> Values:
        """All parameters, checked; CaseError for an unknown name or a bad value."""
        unknown = sorted(set(given) - set(self.parameters))
        if unknown:
            raise CaseError(
                f"sample {self.name}: found parameter {unknown[0]!r}, expected one of "
                f"{', '.join(self.parameters)}"
            )
        merged = {
            name: p.check(self.name, name, given[name]) if name in given else p.default
            for name, p in self.parameters.items()
        }
        complete = self.complete(merged)
        return {n: self.parameters[n].check(self.name, n, v) for n, v in complete.items()}


def common_parameters() -> dict[str, Parameter]:
    """Material and fineness, the same for every sample."""
    return {
        "young": Parameter("Young's modulus", 200e3, 1e-12, 1e15, "stress"),
        "poisson": Parameter("Poisson's ratio", 0.3, 0.0, 0.49),
        "refine": Parameter("fineness: 0 coarse, 1 normal, 2 fine", 1, 0, 2, whole=True),
    }


def required(values: Mapping[str, float | None], name: str) -> float:
    """A parameter that always has a value."""
    value = values[name]
    if value is None:
        raise CaseError(f"parameter {name}: found no value, expected a number")
    return value


def uniform(stress: FloatArray) -> Traction:
    """The tractions of a uniform stress tensor, (3, 3)."""
    return lambda points, normals: normals @ stress


def outside(faces: FloatArray) -> BoolArray:
    """All boundary faces, (faces, m, 3) -> (faces,), but those of a crack in z = 0."""
    return np.abs(faces[:, :, 2]).max(axis=1) > 0.0


def on_ends(height: float) -> Callable[[FloatArray], BoolArray]:
    """The faces in z = +- height: nodes of faces, (faces, m, 3) -> (faces,)."""

    def ends(faces: FloatArray) -> BoolArray:
        gap: FloatArray = np.abs(np.abs(faces[:, :, 2]) - height).max(axis=1)
        return gap < 1e-9 * height

    return ends


def acting(sample: str, loads: Mapping[str, tuple[float, Load]]) -> tuple[Load, ...]:
    """The loads whose stress (by parameter) is not zero; CaseError when none is left."""
    out = tuple(load for stress, load in loads.values() if stress != 0.0)
    if not out:
        raise CaseError(
            f"sample {sample}: found no load, expected {' or '.join(loads)} other than zero"
        )
    return out


def check_ratio(sample: str, what: str, value: float, low: float, high: float) -> None:
    """CaseError unless low <= value <= high."""
    if not low <= value <= high:
        raise CaseError(
            f"sample {sample}: found {what} = {value:.4g}, expected {low:g} to {high:g}"
        )
