"""Building, solving, evaluating and comparing the cases of the verification."""

from collections.abc import Callable, Iterator, Sequence
from functools import lru_cache
from time import perf_counter

from front3d.errors import Front3DError
from front3d.options import Options
from front3d.pipeline import evaluate_solid
from front3d.samples import Sample, build
from front3d.verification.case import Case, Outcome, Row, Run

Progress = Callable[[str, float], None]


def verify(cases: Sequence[Case], progress: Progress | None = None) -> Iterator[Row]:
    """The rows of every case, as they come; a case that cannot be done gives a row that says why.

    Consecutive cases on the same model share it.
    """
    build_once = lru_cache(maxsize=4)(_build)
    for number, case in enumerate(cases):
        if progress is not None:
            progress(case.name, number / len(cases))
        yield from _rows(case, build_once)


def _rows(case: Case, build_once: Callable[..., Sample]) -> Iterator[Row]:
    start = perf_counter()
    cells = case.runs[0].cells
    try:
        outcomes = [_outcome(run, build_once) for run in case.runs]
        found = [m for m in case.measure(outcomes) if m.method in case.allowed]
        if not found:
            raise Front3DError("nothing could be compared, expected a value at some station")
    except Front3DError as reason:
        seconds = perf_counter() - start
        yield Row(case.name, case.source, cells, None, float("nan"), seconds, str(reason))
        return
    count = sum(len(block.nodes) for block in outcomes[0].sample.solid.blocks)
    seconds = perf_counter() - start
    for measured in found:
        allowed = case.allowed[measured.method]
        yield Row(case.name, case.source, f"{cells}, {count}", measured, allowed, seconds)


def _outcome(run: Run, build_once: Callable[..., Sample]) -> Outcome:
    sample = build_once(run.sample, run.cells, run.part, tuple(run.parameters.items()))
    words = dict(sample.case["options"])
    words["compare"] = tuple(text.format_map(sample.parameters) for text in run.compare)
    options = Options.from_words(**words)
    return Outcome(run, sample, evaluate_solid(sample.solid, sample.material, options))


def _build(name: str, cells: str, part: str, parameters: tuple[tuple[str, float], ...]) -> Sample:
    return build(name, cells=cells, part=part, progress=None, **dict(parameters))
