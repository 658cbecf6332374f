"""Which steps an evaluation is about: those of the file, and linear combinations of them."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from front3d.arrays import FloatArray, frozen_floats
from front3d.combination import Combination, parse_all
from front3d.errors import CaseError
from front3d.loads import Loads
from front3d.solid import Solid, Step

_AS_A_SUM = "; in a combination blanks stand around a minus, and brackets are not read"


@dataclass(frozen=True, slots=True, eq=False)
class Chosen:
    """The steps to report, and how each follows from the steps to compute.

    Attributes
    ----------
    computed : steps of the file that are reported, or that a combination needs
    reported : steps of the file that were asked for, then the combinations
    rows : (reported, computed) factors; None where nothing is combined
    """

    computed: tuple[Step, ...]
    reported: tuple[Step, ...]
    rows: FloatArray | None


def choose(solid: Solid, names: Sequence[str] | None, combine: Sequence[str]) -> Chosen:
    """The steps called `names` (of the file, or of a combination; None for all), and every
    combination.

    Raises CaseError where the file has no steps, lacks one, or a combination takes a step's name.
    """
    if not solid.steps:
        raise CaseError(f"{solid.source}: holds no displacements, expected at least one step")
    combinations = parse_all(tuple(combine))
    by_name = {step.name: step for step in solid.steps}
    own = [one.name for one in combinations]
    for name in own:
        if name in by_name:
            raise CaseError(
                f"combination {name}: {solid.source} has a step of this name, expected another"
            )
    wanted = [name for name in (by_name if names is None else names) if name not in own]
    needed = [step for one in combinations for step, _ in one.factors]
    for name in (*wanted, *needed):
        if name not in by_name:
            raise CaseError(
                f"{solid.source}: found no step {name!r}; the steps are {', '.join(by_name)}"
                + (_AS_A_SUM if name in needed and set(name) & set("()[]-/") else "")
            )
    # The steps reported stand first.
    order = list(dict.fromkeys([*wanted, *needed]))
    reported = [by_name[name] for name in wanted] + [_sum(one, by_name) for one in combinations]
    rows = None
    if combinations:
        rows = np.zeros((len(reported), len(order)))
        rows[np.arange(len(wanted)), [order.index(name) for name in wanted]] = 1.0
        for k, one in enumerate(combinations, len(wanted)):
            for name, factor in one.factors:
                rows[k, order.index(name)] = factor
        rows = frozen_floats(rows)
    return Chosen(tuple(by_name[name] for name in order), tuple(reported), rows)


def require_steps_of_loads(solid: Solid, loads: Loads) -> None:
    """CaseError where a load is said to act in a step that the solid has not."""
    known = [step.name for step in solid.steps]
    for load, names in loads.steps_of_loads.items():
        for name in names:
            if name not in known:
                raise CaseError(
                    f"acts in: {load.replace('_', ' ')}: found no step {name!r} in {solid.source}, "
                    f"expected one of {', '.join(known)}"
                )


def with_combinations(solid: Solid, combine: Sequence[str]) -> Solid:
    """The solid with a step for each combination, for pictures of it."""
    if not combine:
        return solid
    by_name = {step.name: step for step in solid.steps}
    more = [_sum(one, by_name) for one in parse_all(tuple(combine))]
    return replace(solid, steps=(*solid.steps, *more))


def _sum(one: Combination, by_name: dict[str, Step]) -> Step:
    displacement = sum(factor * by_name[name].displacement for name, factor in one.factors)
    return Step(one.name, np.asarray(displacement), float("nan"))
