"""What the commands say about an evaluation, in a few lines."""

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from front3d.units import percent

if TYPE_CHECKING:
    from front3d.output.folder import Written
    from front3d.results import Comparison, Evaluation, FrontResult


NOUGHT = 1e-4
"""A K below this part of the front's largest one is not written out."""


def number(value: float, digits: int = 4) -> str:
    return f"{value:.{digits}g}"


def table(rows: Sequence[Mapping[str, Any]]) -> list[str]:
    """Rows as aligned text under their column names."""
    names = list(dict.fromkeys(name for row in rows for name in row))
    lines = [names]
    lines += [[_cell(row.get(name, "")) for name in names] for row in rows]
    widths = [max(len(line[k]) for line in lines) for k in range(len(names))]
    return [
        "  " + "  ".join(text.ljust(w) for text, w in zip(line, widths, strict=True)).rstrip()
        for line in lines
    ]


def _cell(value: Any) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return number(value)
    if isinstance(value, list | tuple):
        return ", ".join(_cell(item) for item in value)
    return str(value)


def describe_evaluation(evaluation: "Evaluation") -> list[str]:
    """Largest K of each mode with its place, agreement and warnings of each front; the caution."""
    from front3d.results import CAUTION

    lines = [f"{evaluation.source}: {_constants(evaluation)}; K in {evaluation.units.K_label}"]
    for front in evaluation.fronts:
        lines += ["", *_describe_front(front, evaluation)]
    if evaluation.warnings:
        lines += ["", *(f"warning: {warning}" for warning in evaluation.warnings)]
    return [*lines, "", CAUTION]


def _constants(evaluation: "Evaluation") -> str:
    """Elastic constants, or where they come from."""
    loads = evaluation.options.get("loads")
    if isinstance(loads, dict) and loads.get("elastic_table"):
        return "constants by temperature"
    if isinstance(loads, dict) and loads.get("regions"):
        return "constants of the region that each front runs in"
    material, units = evaluation.material, evaluation.units
    unit = f" {units.stress}" if units.stress else ""
    return f"E = {material.young:g}{unit}, nu = {material.poisson:g}"


def _describe_front(front: "FrontResult", evaluation: "Evaluation") -> list[str]:
    import numpy as np

    from front3d.output.formats import place
    from front3d.output.trust import agreement
    from front3d.results import MODES

    units = evaluation.units
    shape = "closed" if front.closed else f"from {front.ends[0]} to {front.ends[1]}"
    length = f"{number(front.length)} {units.length}".rstrip()
    lines = [
        f"step {front.step}, front {front.front}: {shape}, length {length}, {len(front)} stations"
    ]
    for k, mode in enumerate(MODES):
        values = front.K[:, k]
        if not np.isfinite(values).any():
            lines.append(f"  {mode:<6}no value at any station")
            continue
        i = int(np.nanargmax(np.abs(values)))
        if abs(values[i]) < NOUGHT * np.nanmax(np.abs(front.K)):
            lines.append(f"  {mode:<6}none (below {percent(NOUGHT)} of the largest K)")
            continue
        other = ""
        if units.K_factor is not None:
            other = f" ({number(values[i] * units.K_factor)} MPa sqrt(m))"
        flag = f" [{front.flags[i]}]" if front.flags[i] else ""
        lines.append(
            f"  {mode:<6}largest {number(values[i])}{other} at s/L {front.s_rel[i]:.3f}, "
            f"({place(front.positions[i], front.length)}){flag}"
        )
    trust = agreement(front)
    said = []
    if trust.rings is not None:
        spread = max(trust.rings.values())
        if np.isfinite(spread):
            said.append(f"rings agree within {percent(spread)} of the largest K")
        if trust.J_and_G is not None:
            said.append(f"J and G within {percent(trust.J_and_G)} of the largest G")
    methods = [f"{name} within {percent(value)}" for name, value in trust.methods.items()]
    if methods and "free surface" in front.ends:
        methods[-1] += " (away from free surfaces)"
    said += methods
    if said:
        lines.append(f"  {'; '.join(said)}")
    notes: dict[str, None] = {}
    for comparison in front.comparisons:
        lines += describe_comparison(front, comparison)
        notes |= dict.fromkeys(comparison.notes)
    lines += [f"    note: {note}" for note in notes]
    flagged = sum(bool(flag) for flag in front.flags)
    if flagged:
        lines.append(f"  {flagged} of {len(front)} stations are flagged, see points.csv")
    lines += [f"  note: {note}" for note in front.notes]
    return [*lines, *(f"  warning: {warning}" for warning in front.warnings)]


def describe_comparison(front: "FrontResult", comparison: "Comparison") -> list[str]:
    """The solution, its source and claim; the worst deviation and its place."""
    from math import isfinite

    from front3d.output.deviation import deviation

    found = deviation(front, comparison)
    head = f"  beside {comparison.solution} ({comparison.source}; claimed: {comparison.claim}):"
    if not found.judged:
        return [head, "    no station can be compared: all are at a free surface or too near it"]
    i = found.station
    angle = comparison.angle[i]
    where = f"phi = {angle:.0f} degrees" if isfinite(angle) else f"s/L {front.s_rel[i]:.3f}"
    lines = [
        head,
        f"    worst {found.worst:+.2f} % of its largest K ({found.mode}, {where}), mean "
        f"{found.mean:.2f} %, {found.judged} of {len(front)} stations",
    ]
    if found.average is not None:
        lines.append(f"    root mean square over the whole front {found.average:+.2f} %")
    return lines


def describe_written(written: "Written") -> list[str]:
    lines = [f"note: {note}" for note in written.notes]
    return [*lines, f"written to {_short(written.folder)}: {', '.join(written.files)}"]


def _short(path: Path) -> str:
    try:
        return str(path.resolve().relative_to(Path.cwd()))
    except (ValueError, OSError):
        return str(path)
