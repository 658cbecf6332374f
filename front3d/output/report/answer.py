"""What was asked, and the answer: the largest K, what vouches for it, every warning."""

from typing import Any

import numpy as np

from front3d.output.charts.along import METHOD_NAMES, reported_by
from front3d.output.formats import NOUGHT, place
from front3d.output.loads import (
    ONLY_DISPLACEMENTS,
    load_words,
    material_words,
    own_constants,
)
from front3d.output.report.page import Markup, join, pairs, section, table, tag
from front3d.output.report.words import NAMES, levelled, number, percent, rooted, with_units
from front3d.output.saved import Saved
from front3d.output.trust import agreement
from front3d.results import CAUTION, FrontResult
from front3d.units import Units


def heading(saved: Saved) -> Markup:
    return join(
        [
            tag("h1", f"Stress intensity along the crack fronts of {saved.evaluation.source}"),
            tag("p", f"front3d {saved.summary['versions']['front3d']}", class_="sub"),
            tag("p", tag("strong", "Caution. "), CAUTION, class_="caution"),
        ]
    )


def answer(saved: Saved) -> Markup:
    """The largest K with its place, what vouches for it, and every warning."""
    fronts, units = saved.evaluation.fronts, saved.evaluation.units
    ranked = [(np.nanmax(np.abs(front.K)), front) for front in fronts if _has_values(front)]
    if not ranked:
        return section("Answer", tag("p", "No station has a value."), name="answer")
    front = max(ranked, key=lambda pair: pair[0])[1]
    station, mode = np.unravel_index(int(np.nanargmax(np.abs(front.K))), front.K.shape)
    i, k = int(station), int(mode)
    flag = f", flagged: {front.flags[i]}" if front.flags[i] else ""
    first = tag(
        "p",
        "Largest ",
        NAMES[k],
        " = ",
        tag("strong", with_units(front.K[i, k], units)),
        f", at station {i} of front {front.front}, s/L {front.s_rel[i]:.3f}, "
        f"({place(front.positions[i], front.length)}){_length(units)}, step {front.step}{flag}.",
        _unflagged(fronts, k, units) if flag else "",
        class_="answer",
    )
    rows = [_largest_row(f, mode, units) for f in fronts for mode in range(3)]
    head = ["front", "step", "mode", f"largest [{rooted(units.K_label)}]"]
    if units.K_factor is not None:
        head.append(f"[{rooted('MPa sqrt(m)')}]")
    head += ["s/L", "place", "flag", "largest without a flag"]
    trust = [line for front in fronts for line in _trust_sentences(front, len(fronts) > 1)]
    return section(
        "Answer",
        first,
        tag("ul", *(tag("li", line) for line in trust)),
        _warnings(saved),
        table(head, rows, numeric=False),
        tag(
            "p",
            f"None: below {100 * NOUGHT:g} % of the front's largest K. Places are (x, y, z)",
            f" in {units.length}." if units.length else ".",
            class_="small",
        ),
        name="answer",
    )


def _unflagged(fronts: tuple[FrontResult, ...], k: int, units: Units) -> Markup:
    """The largest K of the same mode at a station without a flag: beside a value that has one."""
    best: tuple[float, FrontResult, int] | None = None
    for front in fronts:
        plain = np.array([not flag for flag in front.flags]) & np.isfinite(front.K[:, k])
        if plain.any():
            i = int(np.argmax(np.where(plain, np.abs(front.K[:, k]), -1.0)))
            if best is None or abs(front.K[i, k]) > best[0]:
                best = (abs(float(front.K[i, k])), front, i)
    if best is None:
        return join([" Every station is flagged."])
    _, front, i = best
    return join(
        [
            " Largest without a flag: ",
            tag("strong", with_units(front.K[i, k], units)),
            f", at station {i} of front {front.front}, s/L {front.s_rel[i]:.3f}, step "
            f"{front.step}.",
        ]
    )


def _length(units: Units) -> str:
    return f" {units.length}".rstrip()


def _has_values(front: FrontResult) -> bool:
    return bool(np.isfinite(front.K).any())


def _largest_row(front: FrontResult, k: int, units: Units) -> list[Any]:
    values = front.K[:, k]
    start: list[Any] = [front.front, front.step, NAMES[k]]
    if not np.isfinite(values).any():
        return [*start, "no value"]
    i = int(np.nanargmax(np.abs(values)))
    most = float(np.nanmax(np.abs(front.K)))
    row = [*start, levelled(values[i], most)]
    if units.K_factor is not None:
        row.append(levelled(values[i] * units.K_factor, most * units.K_factor))
    if abs(values[i]) < NOUGHT * most:
        return [*start, "none", *([""] if units.K_factor is not None else []), "", "", "", ""]
    row += [f"{front.s_rel[i]:.3f}", place(front.positions[i], front.length), front.flags[i]]
    plain = np.array([not flag for flag in front.flags]) & np.isfinite(values)
    inside = np.where(plain, np.abs(values), -1.0)
    j = int(np.argmax(inside))
    if j == i:
        return [*row, "the same"]
    if not plain.any():
        return [*row, "every station is flagged"]
    return [*row, f"{levelled(values[j], most)} at s/L {front.s_rel[j]:.3f}"]


def _trust_sentences(front: FrontResult, named: bool) -> list[str]:
    who = f"Front {front.front}, step {front.step}: " if named else ""
    trust = agreement(front)
    said = [f"reported is the K of the {reported_by(front)}"]
    if trust.rings is not None:
        spread = max(trust.rings.values())
        if np.isfinite(spread):
            said.append(f"its rings agree within {percent(spread)} of the largest K")
    if trust.methods:
        methods = [
            f"{METHOD_NAMES.get(name, name)} within {percent(value)}"
            for name, value in trust.methods.items()
        ]
        said.append(", ".join(methods) + " of it")
    else:
        said.append("no second method vouches for it")
    flagged = sum(bool(flag) for flag in front.flags)
    if flagged:
        said.append(f"{flagged} of {len(front)} stations are flagged")
    text = "; ".join(said) + "."
    return [who + text if who else text[0].upper() + text[1:]]


def _warnings(saved: Saved) -> Markup:
    evaluation = saved.evaluation
    several = len(evaluation.fronts) > 1
    lines = [
        (f"Front {front.front}, step {front.step}: " if several else "") + warning
        for front in evaluation.fronts
        for warning in front.warnings
    ]
    lines += evaluation.warnings
    if not lines:
        return tag("p", "No warnings.")
    return join(
        [
            tag("p", tag("strong", f"Warnings: {len(lines)}")),
            tag("ul", *(tag("li", line) for line in lines), class_="warnings"),
        ]
    )


def question(saved: Saved) -> Markup:
    """File, material, units, load, and the cracks that were found."""
    evaluation, units = saved.evaluation, saved.evaluation.units
    rows: list[tuple[Any, Any]] = [
        ("result file", evaluation.source),
        *material_words(evaluation.options, evaluation.material, units),
        (
            "units",
            f"length in {units.length}, stress in {units.stress}, K in {rooted(units.K_label)}"
            if units.named
            else "not named: K in stress times the root of length, in the units of the file",
        ),
        ("steps", ", ".join(dict.fromkeys(front.step for front in evaluation.fronts))),
    ]
    combined: Any = evaluation.options.get("combine") or ()
    rows += [("combination of steps", text) for text in combined]
    rows += load_words(evaluation.options, units) or [("loads", ONLY_DISPLACEMENTS)]
    found: dict[int, FrontResult] = {front.front: front for front in reversed(evaluation.fronts)}
    for front_number, front in sorted(found.items()):
        shape = (
            "closed"
            if front.closed
            else f"open, from {front.ends[0]} to {front.ends[1]}"
            if len(front.ends) == 2
            else "open"
        )
        length = f"{number(front.length)} {units.length}".rstrip()
        words = f"{shape}; length {length}; {len(front)} stations"
        if own_constants(front.material, evaluation.material):
            words += f"; along it {_range(front, units)}"
        rows.append((f"crack front {front_number}", words))
    return section("Question", pairs(rows), name="question")


def _range(front: FrontResult, units: Units) -> str:
    """The elastic constants along a front that has its own."""
    own = front.material
    assert own is not None
    said = []
    for name, values, unit in (
        ("E", own.young, units.stress),
        ("Poisson's ratio", own.poisson, ""),
    ):
        low, high = float(np.min(values)), float(np.max(values))
        text = f"{low:g}" if low == high else f"{low:g} to {high:g}"
        said.append(f"{name} {text} {unit}".rstrip())
    return ", ".join(said)
