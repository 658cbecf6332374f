"""Flags shared by commands, what their values mean, and how they join the case file."""

import argparse
import re
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from front3d.case import Case, read_case
from front3d.errors import CaseError
from front3d.loads import Vector
from front3d.options import METHOD_NAMES, Plane, unknown_method


def join_negative_values(words: Sequence[str]) -> list[str]:
    """`--up -1,0,0` as `--up=-1,0,0`: argparse takes the value for a flag otherwise."""
    joined: list[str] = []
    for word in words:
        if joined and re.match(r"-[\d.]", word) and re.fullmatch(r"--[a-z][\w-]*", joined[-1]):
            joined[-1] += f"={word}"
        else:
            joined.append(word)
    return joined


def plane(text: str) -> Plane:
    try:
        return Plane.parse(text)
    except CaseError as error:
        raise argparse.ArgumentTypeError(str(error)) from None


def numbers(text: str) -> tuple[float, ...]:
    try:
        return tuple(float(part) for part in text.split(","))
    except ValueError:
        raise argparse.ArgumentTypeError(
            f"found {text!r}, expected numbers with commas between them"
        ) from None


def vector(text: str) -> Vector:
    parts = numbers(text)
    if len(parts) != 3:
        raise argparse.ArgumentTypeError(f"found {text!r}, expected three numbers such as 0,0,1")
    x, y, z = parts
    return (x, y, z)


def nodes(text: str) -> tuple[int, ...]:
    """Node numbers, with commas between them or in a file."""
    path = Path(text)
    words = _words_of(path) if path.is_file() else text.split(",")
    try:
        found = tuple(int(word) for word in words)
    except ValueError:
        found = ()
    if not found or min(found) < 0:
        raise argparse.ArgumentTypeError(
            f"found {text!r}, expected node numbers from 0 with commas between them, or a file of "
            "node numbers"
        )
    return found


def line(text: str) -> tuple[Vector, ...]:
    """The points of a polyline, from a file with three coordinates in each line."""
    path = Path(text)
    wrong = argparse.ArgumentTypeError(
        f"found {text!r}, expected a file with x, y, z of two points or more, a point per line"
    )
    try:
        values = [float(word) for word in _words_of(path)]
    except ValueError:
        raise wrong from None
    if len(values) < 6 or len(values) % 3:
        raise wrong
    return tuple(zip(values[0::3], values[1::3], values[2::3], strict=True))


def _words_of(path: Path) -> list[str]:
    try:
        lines = path.read_text(encoding="utf-8-sig").replace(",", " ").splitlines()
    except OSError as error:
        why = error.strerror or error
        raise argparse.ArgumentTypeError(f"{path}: cannot be read ({why})") from None
    except UnicodeDecodeError:
        raise argparse.ArgumentTypeError(f"{path}: found binary data, expected numbers") from None
    return [word for text in lines for word in text.partition("#")[0].split()]


class _Compare(argparse.Action):
    """Collects the solutions asked for; `help` lists what there is, and ends the program."""

    def __call__(
        self,
        parser: argparse.ArgumentParser,
        namespace: argparse.Namespace,
        values: Any,
        option_string: str | None = None,
    ) -> None:
        if values == "help":
            from front3d.handbook.catalogue import described

            print("\n".join(described()))
            parser.exit()
        before = getattr(namespace, self.dest) or []
        setattr(namespace, self.dest, [*before, values])


def add_result(parser: argparse.ArgumentParser) -> None:
    """The files a command is about."""
    parser.add_argument(
        "result",
        nargs="+",
        metavar="RESULT|CASE",
        help="result file, or several of one mesh, each a step or more; or a TOML case file",
    )


def add_crack_flags(parser: argparse.ArgumentParser) -> None:
    """What decides which crack is found."""
    parser.add_argument(
        "--displacement",
        action="append",
        metavar="NAME",
        help="point array of the displacement, if not found (repeated: a load case for each)",
    )
    parser.add_argument(
        "--displacement-file",
        type=Path,
        metavar="FILE",
        help="table (CSV) of nodal displacements, for a mesh file that holds none; columns node or "
        "x,y,z, then ux,uy,uz, and step where there are several",
    )
    parser.add_argument(
        "--crack-plane",
        type=plane,
        metavar="PLANE",
        help="symmetry plane that holds the crack of a half model, e.g. z=0, if not found",
    )
    parser.add_argument(
        "--symmetry-plane",
        type=plane,
        action="append",
        dest="symmetry_planes",
        metavar="PLANE",
        help="symmetry plane on which a front ends, if not found (may be repeated)",
    )
    parser.add_argument(
        "--up", type=vector, metavar="X,Y,Z", help="direction from lower to upper crack face"
    )
    parser.add_argument(
        "--front-nodes",
        type=nodes,
        metavar="N1,N2,..|FILE",
        help="only the part of the fronts that has these nodes (numbered from 0, in any order)",
    )
    parser.add_argument(
        "--front-array",
        metavar="NAME",
        help="only the part of the fronts at whose nodes this point array is not zero",
    )
    parser.add_argument(
        "--front-line",
        type=line,
        metavar="FILE",
        help="only the part of the fronts along this polyline: x, y, z of a point per line",
    )
    parser.add_argument(
        "--unopened",
        action="store_true",
        default=None,
        help="take coincident faces that never part for a crack, too",
    )


def add_evaluation_flags(parser: argparse.ArgumentParser) -> None:
    """What decides how K is computed."""
    parser.add_argument("--young", type=float, metavar="E", help="Young's modulus")
    parser.add_argument("--poisson", type=float, metavar="NU", help="Poisson's ratio")
    add_crack_flags(parser)
    parser.add_argument(
        "--face-pressure", type=float, metavar="P", help="pressure on the crack faces, + opens"
    )
    parser.add_argument(
        "--surface-pressure",
        type=float,
        metavar="P",
        help="pressure on the surface on which the front ends, + pushes",
    )
    add_load_flags(parser)
    parser.add_argument(
        "--rings", type=numbers, metavar="R1,R2,..", help="radii of the integration domains"
    )
    parser.add_argument(
        "--hat", type=float, metavar="CELLS", help="half-width of a station's weight, in cells"
    )
    parser.add_argument(
        "--step",
        action="append",
        dest="steps",
        metavar="NAME",
        help="evaluate this step only (may be repeated)",
    )
    parser.add_argument(
        "--combine",
        action="append",
        metavar="TEXT",
        help="a further step, as a sum of others, e.g. 'both = 1.2*pressure + 0.8*thermal' (may be "
        "repeated)",
    )
    parser.add_argument(
        "--stations",
        type=numbers,
        metavar="S1,S2,..",
        help="places along the front, in parts of its length, whose K is put against the steps",
    )
    parser.add_argument(
        "--method",
        action="append",
        dest="methods",
        metavar="NAME",
        help="apply this one beside the interaction integral: closure or opening (may be repeated; "
        "default: all that apply; interaction: no other)",
    )
    parser.add_argument(
        "--compare",
        action=_Compare,
        dest="compare",
        metavar="SOLUTION:NAME=VALUE,..",
        help="put a published solution beside K, e.g. penny:a=10,tension=100 (may be repeated); "
        "--compare help lists the solutions with their arguments",
    )
    parser.add_argument(
        "--expected-stress",
        type=float,
        metavar="S",
        help="remote stress; says when K is a power of ten off what it would give",
    )
    parser.add_argument("--length-unit", dest="length", metavar="UNIT", help="e.g. mm")
    parser.add_argument("--stress-unit", dest="stress", metavar="UNIT", help="e.g. MPa")


def add_load_flags(parser: argparse.ArgumentParser) -> None:
    """Loads beside uniform pressures; tables and regions stand in a case file only."""
    group = parser.add_argument_group("loads that K depends on, beside the displacements")
    for flag, kind, metavar, meaning in (
        ("face-array", str, "NAME", "point or cell array: pressure or traction on the crack faces"),
        ("face-polynomial", numbers, "C0,C1,..", "pressure on the crack faces, C0 + C1 d + .."),
        ("depth-direction", vector, "X,Y,Z", "direction of the depth d"),
        ("depth-from", vector, "X,Y,Z", "a point where d = 0 (default: the origin)"),
        ("density", float, "RHO", "mass per volume"),
        ("gravity", vector, "X,Y,Z", "acceleration; the body force is RHO times it"),
        ("rotation", float, "OMEGA", "angular speed, radians per unit of time"),
        ("rotation-axis", vector, "X,Y,Z", "direction of the axis"),
        ("rotation-point", vector, "X,Y,Z", "a point of the axis (default: the origin)"),
        ("temperature", str, "NAME", "point array of the temperature"),
        ("reference-temperature", float, "T0", "temperature without thermal strain (default: 0)"),
        ("expansion", float, "ALPHA", "coefficient of thermal expansion"),
        ("initial-stress", str, "NAME", "point or cell array: xx, yy, zz, xy, yz, xz"),
        ("initial-strain", str, "NAME", "likewise, tensor components"),
    ):
        group.add_argument(f"--{flag}", type=kind, metavar=metavar, help=meaning)
    group.add_argument(
        "--acts-in",
        action="append",
        metavar="LOAD=STEP,..",
        help="a load acts in these steps only, e.g. face_pressure=pressure (may be repeated; "
        "default: every load acts in every step)",
    )


def case_of(arguments: argparse.Namespace) -> Case:
    """The case: from the file named on the command line, if it is one, under the flags.

    A value out of range is a wrong call (exit 2) when a flag gave it, and a wrong input
    (CaseError) when the case file did.
    """
    flags = flags_said(arguments)
    path, *more = (Path(name) for name in arguments.result)
    if more and any(p.suffix.lower() == ".toml" for p in (path, *more)):
        arguments.parser.error("found a case file among several files, expected it alone")
    if path.suffix.lower() == ".toml":
        return _joined(arguments, path, flags)
    _require(arguments, flags)
    return Case(result=path, more=tuple(more) or None).overridden_by(flags)


def flags_said(arguments: argparse.Namespace) -> Case:
    """What the flags say, which need not make sense without a case file."""
    said = {
        name: value
        for name in Case.__dataclass_fields__
        if name not in ("result", "source")
        and (value := getattr(arguments, name, None)) is not None
    }
    for name in ("steps", "methods", "compare", "combine", "symmetry_planes", "acts_in"):
        if name in said:
            said[name] = tuple(said[name])
    if "displacement" in said:
        first, *others = said["displacement"]
        said["displacement"] = (first, *others) if others else first
    return Case(**said)


def _joined(arguments: argparse.Namespace, path: Path, flags: Case) -> Case:
    """A case file under the flags, which need not make sense without it."""
    case = read_case(path)
    joined = case.overridden_by(flags)
    try:
        check_case(joined)
    except CaseError as error:
        try:
            check_case(case)
        except CaseError as own:
            raise CaseError(f"{path}: {own}") from None
        arguments.parser.error(str(error))
    return joined


def _require(arguments: argparse.Namespace, flags: Case) -> None:
    """A wrong call where the flags do not make sense."""
    try:
        check_case(flags)
    except CaseError as error:
        arguments.parser.error(str(error))


def require_constants(arguments: argparse.Namespace) -> None:
    """An elastic constant out of range is a wrong call when a flag gave it."""
    from front3d.solid import Material

    try:
        Material(
            1.0 if arguments.young is None else arguments.young,
            0.0 if arguments.poisson is None else arguments.poisson,
        )
    except CaseError as error:
        arguments.parser.error(str(error))


def check_case(case: Case) -> None:
    """CaseError where an option is out of range or a solution is not asked for as it should be."""
    _ = case.options, case.units
    for name in case.methods or ():
        if name not in METHOD_NAMES:
            raise unknown_method(name, METHOD_NAMES)
    if case.compare:
        from front3d.handbook.catalogue import parse

        for text in case.compare:
            parse(text)
