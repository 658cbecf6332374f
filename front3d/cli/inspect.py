"""`front3d inspect`: what a result holds, and which cracks are found in it."""

import argparse
from collections import Counter
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from front3d.cli.command import Command
from front3d.cli.flags import add_crack_flags, add_result, case_of
from front3d.cli.words import table

if TYPE_CHECKING:
    from front3d.solid import Solid


def add_flags(parser: argparse.ArgumentParser) -> None:
    add_result(parser)
    add_crack_flags(parser)


def run(arguments: argparse.Namespace) -> int:
    case = case_of(arguments)
    assert case.result is not None
    from front3d.crack import describe
    from front3d.reading.several import load_all

    solid = load_all(
        case.results,
        displacement=case.displacement,
        displacement_file=case.displacement_file,
        need_displacement=False,
        arrays=case.arrays,
    )
    print("\n".join(describe_solid(solid)), flush=True)
    print("\n".join(describe_cracks(describe(solid, case.options))))
    return 0


def describe_solid(solid: "Solid") -> list[str]:
    """Points, cells, extent, steps and notes, one line each."""
    from front3d.output.formats import coordinate

    kinds: Counter[str] = Counter()
    for block in solid.blocks:
        kinds[block.kind] += len(block)
    low, high = solid.points.min(axis=0), solid.points.max(axis=0)
    size = float((high - low).max())
    extent = ", ".join(
        f"{axis} {coordinate(a, size)} to {coordinate(b, size)}"
        for axis, a, b in zip("xyz", low.tolist(), high.tolist(), strict=True)
    )
    lines = [
        str(solid.source),
        f"  points  {len(solid.points)}",
        f"  cells   {solid.n_cells} ({', '.join(f'{n} {kind}' for kind, n in kinds.items())})",
        f"  extent  {extent}",
        f"  steps   {', '.join(step.name for step in solid.steps) or 'no displacement found'}",
    ]
    return [*lines, *(f"  note    {note}" for note in solid.notes)]


def describe_cracks(found: Mapping[str, Sequence[Mapping[str, object]]]) -> list[str]:
    """A table per kind of thing found (crack surfaces, fronts, ..), a row for each."""
    lines: list[str] = []
    for what, rows in found.items():
        lines += ["", f"{what.replace('_', ' ')}: {len(rows) or 'none'}"]
        if rows:
            lines += table([{"no.": i, **row} for i, row in enumerate(rows)])
    return lines


COMMAND = Command(
    "inspect", "say what a result holds, and which crack fronts are found in it", add_flags, run
)
