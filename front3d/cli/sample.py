"""`front3d sample`: build an embedded model, solve it, and write it with its case file."""

import argparse
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING

from front3d.cli.command import Command
from front3d.cli.progress import progress_bar
from front3d.cli.words import number, table
from front3d.errors import CaseError

if TYPE_CHECKING:
    from front3d.samples import SampleSpec


def add_flags(parser: argparse.ArgumentParser) -> None:
    """A parser per sample, with a flag per parameter, from the registry."""
    from front3d.samples import CELL_KINDS, SAMPLES, WHOLE

    parser.add_argument("--list", action="store_true", help="list the samples and end")
    names = parser.add_subparsers(title="samples", metavar="NAME", dest="name")
    for name, spec in SAMPLES.items():
        sample = names.add_parser(
            name, help=spec.description, description=spec.description, allow_abbrev=False
        )
        sample.set_defaults(parser=sample)
        sample.add_argument(
            "--out", type=Path, default=Path(), metavar="DIR", help="folder (default: here)"
        )
        sample.add_argument(
            "--cells", choices=CELL_KINDS, default=CELL_KINDS[0], help="default: %(default)s"
        )
        if spec.parts:
            sample.add_argument(
                "--part",
                choices=(WHOLE, *spec.parts),
                default=WHOLE,
                help="the whole solid, or a part that ends at symmetry planes; "
                "default: %(default)s",
            )
        for parameter, about in spec.parameters.items():
            unit = f" [{about.unit}]" if about.unit else ""
            default = "" if about.default is None else f" (default: {number(about.default)})"
            sample.add_argument(
                f"--{parameter.replace('_', '-')}",
                dest=f"parameter_{parameter}",
                type=float,
                metavar="N",
                help=f"{about.meaning}{unit}{default}".replace("%", "%%"),
            )


def run(arguments: argparse.Namespace) -> int:
    from front3d.samples import SAMPLES, WHOLE

    if arguments.list or arguments.name is None:
        print("\n".join(_listing(SAMPLES)))
        return 0
    given = {
        parameter: value
        for parameter in SAMPLES[arguments.name].parameters
        if (value := getattr(arguments, f"parameter_{parameter}")) is not None
    }
    try:
        SAMPLES[arguments.name].values(given)
    except CaseError as error:
        arguments.parser.error(str(error))
    part = getattr(arguments, "part", WHOLE)
    solid, case = write(arguments.name, arguments.cells, given, arguments.out, part)
    print(f"written: {solid}, {case}\nnext: front3d evaluate {case}")
    return 0


def write(
    name: str, cells: str, given: dict[str, float], out: Path, part: str = "full"
) -> tuple[Path, Path]:
    """Build, solve and write a sample; say what it is; its result and case files."""
    from front3d.output.files import explained, results_folder
    from front3d.samples import build, write_sample

    with results_folder(out), progress_bar() as progress:
        sample = build(name, cells=cells, part=part, progress=progress, **given)
        with explained(out):
            solid, case = write_sample(sample, out)
    print(sample.description)
    return solid, case


def _listing(samples: "Mapping[str, SampleSpec]") -> list[str]:
    lines = ["samples: front3d sample NAME --help shows the parameters of each"]
    return lines + table([{"name": n, "what": spec.description} for n, spec in samples.items()])


COMMAND = Command(
    "sample",
    "build and solve an embedded cracked solid, and write it as a result file",
    add_flags,
    run,
)
