"""`front3d demo`: the whole job on an embedded model, beside the published solution."""

import argparse
from typing import TYPE_CHECKING

from front3d.case import read_case
from front3d.cli.command import Command
from front3d.cli.evaluate import add_output_flags, evaluate_case
from front3d.cli.sample import write
from front3d.cli.words import describe_evaluation, describe_written, table

if TYPE_CHECKING:
    from front3d.results import Evaluation, FrontResult


SAMPLE = "surface-crack"
ANGLES = (15.0, 30.0, 45.0, 60.0, 75.0, 90.0)


def add_flags(parser: argparse.ArgumentParser) -> None:
    add_output_flags(parser)


def run(arguments: argparse.Namespace) -> int:
    _, case = write(SAMPLE, "bricks", {}, arguments.out)
    evaluation, written = evaluate_case(
        read_case(case), arguments.out, pictures=not arguments.no_pictures
    )
    lines = [
        *describe_evaluation(evaluation),
        "",
        *compare(evaluation),
        "",
        *describe_written(written),
        f"again: front3d evaluate {case} --out {arguments.out}",
    ]
    print("\n".join(lines))
    return 0


def compare(evaluation: "Evaluation") -> list[str]:
    """K_I at some angles beside the fitted equation of Newman and Raju, for each load.

    The free surface itself is left out: the equation is not meant for it, and no K exists there
    in the strict sense.
    """
    from front3d.samples import SAMPLES

    values = SAMPLES[SAMPLE].values({})
    a, c = values["depth"], values["half_length"]
    lines = [
        "K_I beside Newman and Raju (1981), an equation fitted to finite elements and claimed",
        f"within 5 % of them; a = {a:g}, c = {c:g}, t = {values['thickness']:g}; "
        "90 degrees is the deepest point",
    ]
    for front in evaluation.fronts:
        lines += [f"step {front.step}", *table(_rows(front, values))]
    return lines


def _rows(front: "FrontResult", values: dict[str, float]) -> list[dict[str, float | str]]:
    import numpy as np

    from front3d.handbook import surface_crack

    a, c, t, b = (values[k] for k in ("depth", "half_length", "thickness", "half_width"))
    x, y, _ = front.positions.T
    phi = np.arctan2(np.maximum(y, 0.0) / a, x / c)
    nearest = [int(np.argmin(np.abs(np.degrees(phi) - angle))) for angle in ANGLES]
    published = surface_crack(phi, a, c, t, b, **{front.step: values[front.step]})
    return [
        {
            "degrees": f"{np.degrees(phi[i]):.1f}",
            "K_I": f"{front.K[i, 0]:.2f}",
            "published": f"{published[i]:.2f}",
            "difference": f"{100 * (front.K[i, 0] / published[i] - 1):+.2f} %",
        }
        for i in nearest
    ]


COMMAND = Command(
    "demo",
    "build a plate with a surface crack, evaluate it, and compare with the published solution",
    add_flags,
    run,
)
