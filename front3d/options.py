"""What a user may choose about an evaluation; the defaults come from the mesh."""

from collections.abc import Iterable
from dataclasses import dataclass, field, fields
from difflib import get_close_matches
from math import isfinite
from typing import Any

from front3d.combination import parse_all
from front3d.errors import CaseError
from front3d.loads import Loads, Vector

METHOD_NAMES = ("interaction", "closure", "opening")
"""Names of the methods, for a check that loads no numerical library; front3d.methods has them."""


def unknown_method(name: str, known: Iterable[str]) -> CaseError:
    """What is wrong with the name of a method, and what comes nearest."""
    names = list(known)
    near = get_close_matches(name, names, n=1, cutoff=0.7)
    nearest = f", did you mean {near[0]!r}?" if near else ""
    return CaseError(f"method: found {name!r}{nearest} (expected one of {', '.join(names)})")


@dataclass(frozen=True, slots=True)
class Plane:
    """The plane normal . x = offset."""

    normal: Vector
    offset: float

    @classmethod
    def parse(cls, text: str) -> "Plane":
        """Read "z=0", "x = 12.5" or "1,0,1=2" (a normal of any length, and its product with x)."""
        left, equals, right = text.partition("=")
        axes: dict[str, Vector] = {"x": (1, 0, 0), "y": (0, 1, 0), "z": (0, 0, 1)}
        try:
            if not equals:
                raise ValueError
            name = left.strip().lower()
            parts = axes[name] if name in axes else tuple(float(v) for v in left.split(","))
            offset = float(right)
            length = sum(v * v for v in parts) ** 0.5
            if len(parts) != 3 or not (isfinite(length) and length > 0 and isfinite(offset)):
                raise ValueError
        except ValueError:
            raise CaseError(
                f"plane: found {text!r}, expected an axis and a coordinate such as z=0, or a "
                "normal and its product with the position such as 1,0,1=2.5"
            ) from None
        nx, ny, nz = (v / length for v in parts)
        return cls((nx, ny, nz), offset / length)

    def __str__(self) -> str:
        """As `parse` reads it."""
        for name, value in zip("xyz", self.normal, strict=True):
            if value == 1.0:
                return f"{name}={self.offset:g}"
        return ",".join(f"{v:.6g}" for v in self.normal) + f"={self.offset:g}"


@dataclass(frozen=True, slots=True)
class Options:
    """Choices of an evaluation.

    Attributes
    ----------
    crack_plane : symmetry plane that holds the crack, for a half model; None finds it by its
        displacements where there are no coincident faces
    front_nodes, front_array, front_line : nodes of the front, or a point array that is not zero
        there, or a polyline along it, where only this part of the fronts is wanted
    expected_stress : remote stress that K is checked against, to a power of ten; None does not
    symmetry_planes : planes on which fronts end by symmetry; others are found by displacements
    face_pressure : pressure on the crack faces, positive when it opens them
    surface_pressure : pressure on the surface on which a front ends, positive when it pushes
    loads : what acts besides: on the crack faces, in the volume, by temperature
    radii : outer radii of the rings; None takes them from the mesh
    hat : half-width, in cells along the front, of the weight of one station; None takes it from
        the mesh
    up : direction that decides which of the two faces is the upper one; None takes the dominant
        coordinate axis of the crack normal
    steps : names of the steps to evaluate; None takes all
    combine : linear combinations of steps, each a further step, as front3d.combination reads them,
        such as "both = 1.2*pressure + 0.8*thermal"
    stations : places along a front, in parts of its length, whose K is put against the steps; None
        takes its ends, its middle and where K is largest
    unopened : evaluate coincident faces that never part in any step, too
    methods : the methods beside the interaction integral, which is always applied; None takes all
        that apply
    compare : published solutions to put beside the fronts, as front3d.handbook.catalogue reads
        them, such as "penny:a=10,tension=100"
    """

    crack_plane: Plane | None = None
    face_pressure: float = 0.0
    surface_pressure: float = 0.0
    loads: Loads = field(default_factory=Loads)
    radii: tuple[float, ...] | None = None
    hat: float | None = None
    up: Vector | None = None
    steps: tuple[str, ...] | None = None
    unopened: bool = False
    methods: tuple[str, ...] | None = None
    compare: tuple[str, ...] = ()
    symmetry_planes: tuple[Plane, ...] = ()
    expected_stress: float | None = None
    front_nodes: tuple[int, ...] = ()
    front_array: str | None = None
    front_line: tuple[Vector, ...] = ()
    combine: tuple[str, ...] = ()
    stations: tuple[float, ...] | None = None

    @classmethod
    def from_words(cls, **words: Any) -> "Options":
        """Options as a person writes them: a plane as "z=0", a single radius, step, method, and
        the fields of `Loads` beside the others.
        """
        known = [entry.name for entry in fields(cls)]
        loads = {name: words.pop(name) for name in Loads.names() if name in words}
        for name in words:
            if name not in known:
                names = ", ".join([*known, *Loads.names()])
                raise CaseError(f"unknown option {name!r}, expected one of {names}")
        if loads:
            words["loads"] = Loads(**loads)
        if isinstance(plane := words.get("crack_plane"), str):
            words["crack_plane"] = Plane.parse(plane)
        if isinstance(planes := words.get("symmetry_planes", ()), str):
            planes = (planes,)
        if planes:
            words["symmetry_planes"] = tuple(
                Plane.parse(p) if isinstance(p, str) else p for p in planes
            )
        if isinstance(radius := words.get("radii"), int | float):
            words["radii"] = (float(radius),)
        if isinstance(place := words.get("stations"), int | float):
            words["stations"] = (float(place),)
        for name in ("steps", "methods", "compare", "combine"):
            if isinstance(words.get(name), str):
                words[name] = (words[name],)
        return cls(**words)

    def __post_init__(self) -> None:
        parse_all(tuple(self.combine))
        if len(self.front_line) == 1:
            raise CaseError(
                f"front line: found one point, {self.front_line[0]}, expected two or more"
            )
        if self.stations is not None and (
            not self.stations or any(not 0.0 <= place <= 1.0 for place in self.stations)
        ):
            raise CaseError(
                f"stations: found {self.stations}, expected parts of the front's length from 0 to 1"
            )
        if self.radii is not None and (
            not self.radii or any(not (isfinite(r) and r > 0) for r in self.radii)
        ):
            raise CaseError(f"ring radii: found {self.radii}, expected positive lengths")
        if self.hat is not None and not (isfinite(self.hat) and self.hat >= 1):
            raise CaseError(f"hat half-width: found {self.hat:g} cells, expected 1 or more")
        for name in ("face_pressure", "surface_pressure"):
            if not isfinite(value := getattr(self, name)):
                raise CaseError(
                    f"{name.replace('_', ' ')}: found {value}, expected a number in the stress unit"
                )
        for name in self.loads.steps_of_loads:
            if getattr(self, name, None) == 0.0:
                raise CaseError(
                    f"acts in: found {name.replace('_', ' ')}, which is not given, expected both"
                )
        if self.expected_stress is not None and not (
            isfinite(self.expected_stress) and self.expected_stress != 0
        ):
            raise CaseError(
                f"expected stress: found {self.expected_stress:g}, expected the remote stress in "
                "the stress unit"
            )
        if self.up is not None and not any(self.up):
            raise CaseError("up: found a zero vector, expected a direction such as 0,0,1")
