"""The pipeline from a solid to K along its fronts: order of steps, no mathematics."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import asdict, replace
from typing import TYPE_CHECKING

import numpy as np

from front3d.arrays import FloatArray
from front3d.crack import CrackModel, Front, find_cracks
from front3d.errors import CaseError, Front3DError, MeshError, MethodError
from front3d.evidence import REPORTED, weigh
from front3d.flags import front_warnings, station_flags
from front3d.methods import METHODS, FrontContext
from front3d.methods.loading import station_constants
from front3d.methods.materials import foreign_cells, material_of_front, nominal
from front3d.options import Options, unknown_method
from front3d.results import (
    Comparison,
    Evaluation,
    FrontResult,
    MethodResult,
    energy_release_rate,
)
from front3d.sanity.balance import balance_warnings, tube_of
from front3d.sanity.cells import cell_warnings
from front3d.sanity.conformity import conformity_warnings
from front3d.sanity.displacements import (
    constant_warnings,
    displacement_warnings,
    refuse_coordinates,
)
from front3d.sanity.faces import face_warnings, pair_normals, stress_warnings
from front3d.solid import Constants, Material, Solid, Step
from front3d.steps import choose, require_steps_of_loads
from front3d.units import Units

if TYPE_CHECKING:
    from front3d.handbook.catalogue import Request

Progress = Callable[[str, float], None]


def evaluate_solid(
    solid: Solid,
    material: Material | None,
    options: Options | None = None,
    units: Units | None = None,
    progress: Progress | None = None,
) -> Evaluation:
    """K_I, K_II and K_III at every station of every front, in every step.

    Parameters
    ----------
    solid : the result, with at least one step
    material : elastic constants in the units of the model; None where the options have a table or
        regions
    options : choices; the defaults suit most results
    units : names of the model's units, for reports
    progress : called with a stage and the fraction done

    Raises
    ------
    CaseError if the steps asked for are not there; CrackError, MeshError, MethodError where the
    solid has no crack that can be evaluated.
    """
    options, units = options or Options(), units or Units()
    report = progress or _silent
    _check_methods(options)
    requests = _requests(options)
    chosen = choose(solid, options.steps, options.combine)
    steps = chosen.reported
    require_steps_of_loads(solid, options.loads)
    timed = len({step.time for step in solid.steps}) > 1
    refuse_coordinates(solid, steps)
    report("finding the crack", 0.0)
    model = find_cracks(solid, options)
    if options.combine and options.loads.elastic_table:
        raise CaseError(
            "found combinations of steps with constants by temperature, expected one of them: K is "
            "not linear in steps whose constants differ"
        )
    reported = nominal(material, options.loads)
    published, unlike = _published(requests, steps, model, reported.poisson)
    displacement = _stacked(chosen.computed)
    results: list[FrontResult] = []
    left_out: list[tuple[int, Front3DError]] = []
    normals = [pair_normals(solid, patch) for patch in model.patches]
    for number, (crack, front) in enumerate(_fronts(model)):
        report(f"front {number + 1} of {model.n_fronts}", number / model.n_fronts)
        try:
            own, loads = material_of_front(
                solid, model, front, material, options.loads, chosen.computed
            )
            foreign = foreign_cells(solid, model, front, loads, chosen.computed[0])
            context = FrontContext(
                solid, model, model.patches[crack], front, own, options, displacement,
                chosen.rows, chosen.computed, loads, foreign,
            )  # fmt: skip
            by_method, refused = _apply_methods(context)
            constants = station_constants(context)
            doubts = _doubts(context, by_method[REPORTED])
        except (MethodError, MeshError) as reason:
            if model.n_fronts == 1:
                raise
            left_out.append((number, reason))
            continue
        for index, step in enumerate(steps):
            methods = {name: found[index] for name, found in by_method.items()}
            _require_finite(step, number, methods[REPORTED])
            results.append(
                _front_result(
                    step,
                    timed,
                    number,
                    context,
                    normals[crack],
                    constants[index],
                    methods,
                    published.get((step.name, number), ()),
                    refused,
                    unlike.get((step.name, number), ()) + doubts[index],
                )
            )
    if not results:
        raise left_out[0][1]
    report("done", 1.0)
    warnings = _warnings(solid, model)
    warnings += constant_warnings(reported, units) + displacement_warnings(solid, steps, model)
    warnings += tuple(f"front {front} was left out: {reason}" for front, reason in left_out)
    return Evaluation(solid.source, reported, units, tuple(results), asdict(options), warnings)


def _stacked(steps: Sequence[Step]) -> FloatArray:
    """(steps, n_points, 3) displacements; of a single step no copy."""
    if len(steps) == 1:
        return steps[0].displacement[None]
    return np.stack([step.displacement for step in steps])


def _silent(stage: str, fraction: float) -> None:
    """Progress nobody asked for."""


def _fronts(model: CrackModel) -> Iterator[tuple[int, Front]]:
    """Every front, in the order of their numbers, with the number of its crack."""
    for crack, fronts in enumerate(model.fronts):
        yield from ((crack, front) for front in fronts)


def _requests(options: Options) -> "tuple[Request, ...]":
    """The published solutions asked for; the handbook is only loaded where there are any."""
    if not options.compare:
        return ()
    from front3d.handbook.catalogue import parse

    return tuple(parse(text) for text in options.compare)


def _published(
    requests: "Sequence[Request]", steps: Sequence[Step], model: CrackModel, poisson: float
) -> tuple[dict[tuple[str, int], tuple[Comparison, ...]], dict[tuple[str, int], tuple[str, ...]]]:
    """What `compare_fronts` gives for all fronts, in their order."""
    if not requests:
        return {}, {}
    from front3d.handbook.comparing import compare_fronts
    from front3d.handbook.placing import FrontShape

    shapes = []
    for _, front in _fronts(model):
        s = front.corner_s[front.stations]
        positions, frames, _ = front.curve.frames(s)
        shapes.append(FrontShape(positions, frames, s, front.length, front.closed, front.ends))
    return compare_fronts(requests, steps, shapes, poisson)


def _apply_methods(context: FrontContext) -> tuple[dict[str, list[MethodResult]], tuple[str, ...]]:
    """Results of the interaction integral and the further methods, and the reasons of those that
    do not apply to this front.  The interaction integral must apply.
    """
    chosen = context.options.methods
    by_method = {REPORTED: METHODS[REPORTED](context)}
    refused = []
    for name, method in METHODS.items():
        if name == REPORTED or not (chosen is None or name in chosen):
            continue
        try:
            by_method[name] = method(context)
        except (MethodError, MeshError) as reason:
            refused.append(f"{name} does not apply: {reason}")
    return by_method, tuple(refused)


def _doubts(context: FrontContext, found: list[MethodResult]) -> list[tuple[str, ...]]:
    """What must be said of the cells and the displacements around a front, for each result."""
    tube = tube_of(context, found)
    gaping = conformity_warnings(context, tube)
    unbalanced = balance_warnings(context, tube, found, METHODS[REPORTED])
    return [gaping + mine for mine in unbalanced]


def _require_finite(step: Step, number: int, result: MethodResult) -> None:
    """No comparison of K notices what is not a number."""
    bad = np.flatnonzero(~np.isfinite(result.K).all(axis=1))
    if len(bad):
        raise MethodError(
            f"step {step.name}, front {number}: K is not finite at {len(bad)} of {len(result.K)} "
            "stations; the displacements or the coordinates at the front are not those of a result"
        )


def _check_methods(options: Options) -> None:
    unknown = [name for name in options.methods or () if name not in METHODS]
    if unknown:
        raise unknown_method(unknown[0], METHODS)


def _front_result(
    step: Step,
    timed: bool,
    number: int,
    context: FrontContext,
    normals: FloatArray,
    material: Constants,
    methods: Mapping[str, MethodResult],
    published: tuple[Comparison, ...],
    refused: tuple[str, ...],
    unmatched: tuple[str, ...],
) -> FrontResult:
    front = context.front
    if len(front.stations) < len(front.corners):
        methods = {name: found.at(front.stations) for name, found in methods.items()}
        front = replace(
            front, corner_s=front.corner_s[front.stations], stations=np.arange(len(front.stations))
        )
    positions, frames, _ = front.curve.frames(front.corner_s)
    evidence = weigh(front, context.cells, methods, material)
    said, noted = face_warnings(context.patch, normals, step.displacement)
    said += stress_warnings(context, evidence.K)
    return FrontResult(
        step=step.name,
        front=number,
        closed=front.closed,
        ends=front.ends,
        length=front.length,
        s=front.corner_s,
        positions=positions,
        frames=frames,
        material=material,
        K=evidence.K,
        G=energy_release_rate(evidence.K, material),
        flags=station_flags(front, methods, evidence),
        methods=methods,
        sources=evidence.source,
        warnings=(
            *unmatched,
            *front_warnings(front, methods, evidence, material),
            *said,
            *cell_warnings(context.cells, front.half),
        ),
        notes=(
            *context.model.notes,
            *(f"{m.method}: {m.variant}" for m in methods.values() if m.variant),
            *refused,
            *noted,
        ),
        comparisons=published,
        time=step.time if timed else float("nan"),
    )


def _warnings(solid: Solid, model: CrackModel) -> tuple[str, ...]:
    notes = [*solid.notes, *model.warnings]
    for patch in model.unopened:
        notes.append(
            f"{len(patch.upper)} pairs of coincident faces whose sides never part were left alone "
            "(--unopened evaluates them)"
        )
    return tuple(notes)
