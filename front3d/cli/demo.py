"""`front3d demo`: the whole job on an embedded model, beside the published solution."""

import argparse
from typing import TYPE_CHECKING

from front3d.case import Case, read_case
from front3d.cli.command import Command
from front3d.cli.evaluate import add_output_flags, evaluate_case
from front3d.cli.sample import write
from front3d.cli.words import describe_evaluation, describe_written, table

if TYPE_CHECKING:
    from front3d.results import Comparison, Evaluation, FrontResult


SAMPLE = "surface-crack"
ANGLES = (15.0, 30.0, 45.0, 60.0, 75.0, 90.0)


def add_flags(parser: argparse.ArgumentParser) -> None:
    add_output_flags(parser)


def run(arguments: argparse.Namespace) -> int:
    from front3d.samples import SAMPLES

    _, case = write(SAMPLE, "bricks", {}, arguments.out)
    asked = comparisons(SAMPLES[SAMPLE].values({}))
    evaluation, written = evaluate_case(
        read_case(case).overridden_by(Case(compare=asked)),
        arguments.out,
        pictures=not arguments.no_pictures,
    )
    flags = "".join(f" --compare {text}" for text in asked)
    lines = [
        *describe_evaluation(evaluation),
        "",
        *compare(evaluation),
        "",
        *describe_written(written),
        f"again: front3d evaluate {case} --out {arguments.out}{flags}",
    ]
    print("\n".join(lines))
    return 0


def comparisons(values: dict[str, float]) -> tuple[str, ...]:
    """The published solution as `--compare` takes it, for each step of the sample."""
    sizes = {"a": "depth", "c": "half_length", "t": "thickness", "b": "half_width"}
    crack = ",".join(f"{symbol}={values[name]:g}" for symbol, name in sizes.items())
    return tuple(
        f"newman-raju-surface:{crack},{load}={values[load]:g},step={load}"
        for load in ("tension", "bending")
    )


def compare(evaluation: "Evaluation") -> list[str]:
    """K_I at some angles beside the fitted equation of Newman and Raju, for each load.

    The free surface itself is left out: the equation is not meant for it, and no K exists there
    in the strict sense.
    """
    lines = []
    for front in evaluation.fronts:
        for published in front.comparisons:
            lines.append(
                f"step {front.step}: K_I beside {published.source}; 90 degrees is the deepest point"
            )
            lines += table(_rows(front, published))
    return lines


def _rows(front: "FrontResult", published: "Comparison") -> list[dict[str, float | str]]:
    import numpy as np

    rows: list[dict[str, float | str]] = []
    for angle in ANGLES:
        i = int(np.argmin(np.abs(published.angle - angle)))
        found, expected = front.K[i, 0], published.K[i, 0]
        rows.append(
            {
                "degrees": f"{published.angle[i]:.1f}",
                "K_I": f"{found:.2f}",
                "published": f"{expected:.2f}",
                "difference": f"{100 * (found / expected - 1):+.2f} %",
            }
        )
    return rows


COMMAND = Command(
    "demo",
    "build a plate with a surface crack, evaluate it, and compare with the published solution",
    add_flags,
    run,
)
