"""A published solution at the stations of a front that was found."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from front3d.arrays import FloatArray
from front3d.errors import CaseError
from front3d.handbook.catalogue import Request
from front3d.handbook.placing import FREE, NEAR_SURFACE, FrontMismatch, FrontShape, Placed
from front3d.results import Comparison
from front3d.solid import Step

_UNLOADED = 1e-3
"""K over stress sqrt(a) up to which a crack is not loaded: directions have about three digits."""

OfFront = tuple[str, int]
"""Name of the step, number of the front."""


def compare_fronts(
    requests: Sequence[Request], steps: Sequence[Step], shapes: Sequence[FrontShape], poisson: float
) -> tuple[dict[OfFront, tuple[Comparison, ...]], dict[OfFront, tuple[str, ...]]]:
    """Every solution asked for, at every front that it is about, in the steps it is about.

    Returns
    -------
    comparisons : per step and front; a solution asked for twice is numbered from the second on
    reasons : per step and front, why a solution that suits another front does not suit this one

    Raises CaseError where a solution suits no front, or names a step that is not evaluated.
    """
    names = [step.name for step in steps]
    found: dict[OfFront, tuple[Comparison, ...]] = {}
    reasons: dict[OfFront, tuple[str, ...]] = {}
    for request in requests:
        if request.step is not None and request.step not in names:
            raise CaseError(
                f"comparison with {request.solution.name}: found step {request.step!r}, expected "
                f"one that is evaluated: {', '.join(names)}"
            )
        there = names if request.step is None else [request.step]
        unlike = {}
        for number, shape in enumerate(shapes):
            try:
                comparison = compare(request, shape, poisson)
            except FrontMismatch as reason:
                unlike[number] = str(reason)
                continue
            if len(there) > 1:
                note = "the loads were taken for every step; step=NAME names the one they belong to"
                comparison = replace(comparison, notes=(*comparison.notes, note))
            for name in there:
                found[name, number] = _numbered(found.get((name, number), ()), comparison)
        if len(unlike) == len(shapes):
            raise CaseError(
                f"comparison with {request.solution.name} suits no front: "
                + "; ".join(f"front {number}: {why}" for number, why in unlike.items())
            )
        for number, why in unlike.items():
            said = f"no comparison with {request.solution.name}: {why}"
            for name in there:
                reasons[name, number] = (*reasons.get((name, number), ()), said)
    return found, reasons


def _numbered(before: tuple[Comparison, ...], one: Comparison) -> tuple[Comparison, ...]:
    """The solutions of a front with one more: no name stands twice."""
    taken = {comparison.solution for comparison in before}
    name, number = one.solution, 2
    while name in taken:
        name, number = f"{one.solution}-{number}", number + 1
    return (*before, replace(one, solution=name))


def compare(request: Request, shape: FrontShape, poisson: float) -> Comparison:
    """The solution asked for, at the stations of the front.

    Parameters
    ----------
    shape : where the front is
    poisson : Poisson's ratio of the material

    Raises
    ------
    FrontMismatch if the front is not the one that the solution is about, with the reason;
    CaseError if the arguments are outside the solution's range.
    """
    solution = request.solution
    try:
        placed = solution.place(request.values, shape)
        K = solution.K(request.values, placed, poisson)
        _refuse_no_load(request, shape, K)
    except FrontMismatch:
        raise
    except CaseError as error:
        raise CaseError(f"comparison with {solution.name}: {error}") from None
    notes = list(solution.doubts(request.values))
    if shape.free:
        notes += solution.at_free_ends
    if solution.poisson is not None and abs(poisson - solution.poisson) > 0.005:
        notes.append(
            f"it holds for Poisson's ratio {solution.poisson:g}; the material has {poisson:g}"
        )
    notes += _left_out(shape, placed)
    return Comparison(
        solution=solution.name,
        arguments=request.numbers,
        source=solution.source,
        claim=solution.claim,
        K=K,
        angle=np.degrees(placed.phi),
        notes=tuple(notes),
        judged=placed.judged,
        average=solution.average,
    )


def _refuse_no_load(request: Request, shape: FrontShape, K: FloatArray) -> None:
    """FrontMismatch where a direction was given that does not load the crack: no K to compare with.

    The others give K only by a load that is not zero, which the request has been checked for.
    """
    solution, values = request.solution, request.values
    ways = [name for name, about in solution.arguments.items() if about.unit == "direction"]
    ways = [name for name in ways if values[name] is not None]
    stress = sum(abs(values[load]) for load in solution.loads)
    if not ways or np.nanmax(np.abs(K), initial=0.0) > _UNLOADED * stress * np.sqrt(values["a"]):
        return
    said = ", ".join(f"{name} = {_direction(values[name])}" for name in ways)
    where = f"its plane has the normal {_direction(shape.frames[:, 1].mean(axis=0))}"
    if not shape.closed:
        where += f" and its front starts along {_direction(shape.frames[0, 2])}"
    raise FrontMismatch(
        f"with {said} the load does not act on this crack, and the solution gives no K here "
        f"({where}); expected {' and '.join(solution.arguments[name].meaning for name in ways)}"
    )


def _direction(vector: FloatArray) -> str:
    return "/".join(f"{v:g}" for v in np.round(vector, 3) + 0.0)  # no -0


def _left_out(shape: FrontShape, placed: Placed) -> list[str]:
    if FREE not in shape.ends or shape.closed:
        return []
    if np.isnan(placed.phi).any():
        return [
            "worst and mean leave out the stations at a free surface, where no K exists in the "
            "strict sense; between free faces K varies through the thickness, the solution does not"
        ]
    return [
        f"worst and mean leave out stations at a free surface or within 2 phi/pi = "
        f"{NEAR_SURFACE:g} of one, where no K exists in the strict sense"
    ]
