"""The whole job of one case: read it, evaluate it, write its folder of results."""

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

from front3d.case import Case, as_toml
from front3d.errors import CaseError

if TYPE_CHECKING:
    from front3d.output.folder import Written
    from front3d.results import Evaluation
    from front3d.solid import Solid

Progress = Callable[[str, float], None]


def check_constants(case: Case) -> None:
    """CaseError where nothing says what the elastic constants are."""
    if not case.own_constants and (case.young is None or case.poisson is None):
        raise CaseError(
            f"{case.source or case.result}: found no elastic constants, expected young and poisson "
            "in the section [material], or --young and --poisson"
        )


def inputs_of(case: Case) -> list[Path]:
    """The files that the case is read from, the case file among them."""
    return [path for path in (*case.results, case.displacement_file, case.source) if path]


def read_solid(case: Case) -> "Solid":
    """The solid that the case's files hold, with the arrays that the case names."""
    from front3d.reading.several import load_all

    return load_all(
        case.results,
        displacement=case.displacement,
        arrays=case.arrays,
        displacement_file=case.displacement_file,
    )


def run_case(
    case: Case,
    out: Path,
    *,
    pictures: bool,
    progress: Progress | None = None,
    solid: "Solid | None" = None,
) -> "tuple[Evaluation, Written]":
    """Read, evaluate and write what was found into the folder `out`, which is there already.

    `solid` is what `read_solid` gives, where it was read before.
    Raises Front3DError where the case, its files or the solid do not allow it.
    """
    check_constants(case)
    from front3d.output.folder import write_results
    from front3d.pipeline import evaluate_solid
    from front3d.solid import Material

    material = None
    if case.young is not None and case.poisson is not None:
        material = Material(case.young, case.poisson)
    if solid is None:
        if progress is not None and case.result is not None:
            progress(f"reading {case.result.name}", 0.0)
        solid = read_solid(case)
    evaluation = evaluate_solid(solid, material, case.options, case.units, progress)
    written = write_results(
        evaluation,
        solid,
        out,
        inputs=inputs_of(case),
        case_file=as_toml(case),
        pictures=pictures,
        progress=progress,
    )
    return evaluation, written
