"""The parts of a report; every figure in them is taken from the saved results."""

import re
from collections.abc import Mapping
from typing import Any

import numpy as np

from front3d.mixing import SOURCES, mix_columns
from front3d.output.charts.along import METHOD_NAMES, reported_by
from front3d.output.formats import place
from front3d.output.report.page import Markup, join, pairs, section, table, tag
from front3d.output.saved import Saved
from front3d.output.trust import agreement
from front3d.results import CAUTION, MODES, FrontResult
from front3d.units import Units

NAMES = tuple(join(["K", tag("sub", mode)]) for mode in ("I", "II", "III"))
_DIGITS = 4
_RIGHT_ANGLE = 90.0  # degrees: what angles are compared with


def number(value: float, digits: int = _DIGITS) -> str:
    return "no value" if not np.isfinite(value) else f"{value:.{digits}g}"


def levelled(value: float, largest: float, digits: int = _DIGITS) -> str:
    """`value` with as many decimals as show `largest` with `digits`: what is nought against it
    reads so.
    """
    if not np.isfinite(value) or not 0 < largest < 1e7:
        return number(value, digits)
    decimals = max(0, digits - 1 - int(np.floor(np.log10(largest))))
    return f"{round(value, decimals) + 0.0:.{decimals}f}"


def percent(value: float | None) -> str:
    if value is None or not np.isfinite(value):
        return "no value"
    return f"{100 * value:.2g}\N{NO-BREAK SPACE}%"


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
        f"({place(front.positions[i], front.length)}), step {front.step}{flag}.",
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
        name="answer",
    )


def with_units(K: float, units: Units) -> str:
    """K in the model's units, and in MPa sqrt(m) where they are named."""
    text = f"{number(K)} {rooted(units.K_label)}" if units.named else number(K)
    if units.K_factor is not None and (units.length, units.stress) != ("m", "MPa"):
        text += f" ({number(K * units.K_factor)} {rooted('MPa sqrt(m)')})"
    return text


def rooted(unit: str) -> str:
    """A unit of K with the root as a sign: MPa sqrt(mm) becomes MPa, root, mm."""
    return re.sub(r"sqrt\((\w+)\)", "\N{SQUARE ROOT}\\1", unit)


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
    stress = f" {units.stress}".rstrip()
    rows: list[tuple[Any, Any]] = [
        ("result file", evaluation.source),
        (
            "material",
            f"isotropic, E = {evaluation.material.young:g}{stress}, "
            f"Poisson's ratio {evaluation.material.poisson:g}",
        ),
        (
            "units",
            f"length in {units.length}, stress in {units.stress}, K in {rooted(units.K_label)}"
            if units.named
            else "not named: K in stress times the root of length, in the units of the file",
        ),
        ("steps", ", ".join(dict.fromkeys(front.step for front in evaluation.fronts))),
    ]
    pressure = evaluation.options.get("face_pressure")
    if isinstance(pressure, int | float) and pressure:
        rows.append(("pressure on the crack faces", f"{pressure:g}{stress}"))
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
        rows.append(
            (f"crack front {front_number}", f"{shape}; length {length}; {len(front)} stations")
        )
    return section("Question", pairs(rows), name="question")


def checks(saved: Saved) -> Markup:
    """What the results say about themselves, front by front, and what the program is held to."""
    rows = []
    names = list(dict.fromkeys(n for f in saved.evaluation.fronts for n in f.methods))
    others = [
        name for name in names if any(set(f.sources) != {name} for f in saved.evaluation.fronts)
    ]
    for front in saved.evaluation.fronts:
        trust = agreement(front)
        rings = [percent(trust.rings[m]) if trust.rings else "no rings" for m in MODES]
        methods = [percent(trust.methods[n]) if n in trust.methods else "" for n in others]
        rows.append([f"{front.front}, {front.step}", *rings, percent(trust.J_and_G), *methods])
    head: list[Any] = [
        "front, step",
        *(join([name, ", range over rings"]) for name in NAMES),
        "J and G",
        *(METHOD_NAMES.get(name, name) for name in others),
    ]
    published = [
        [
            f"{about['front']}, {about['step']}",
            one["source"],
            ", ".join(f"{key} = {value:g}" for key, value in one["arguments"].items()),
            f"{one['worst']['percent']:+.2g} %" if one.get("worst") else "no value",
            f"{one['mean_percent']:.2g} %" if one.get("mean_percent") is not None else "no value",
            one["claim"],
        ]
        for about in saved.summary["fronts"]
        for one in about.get("comparisons", ())
    ]
    children: list[Any] = [
        tag(
            "p",
            "How far the figures agree among themselves: rings and methods in parts of the front's "
            "largest K, J and G in parts of its largest G. The methods share nothing but the "
            "elements; rings share the cells at the front, and cannot show an error that all of "
            "them have. Young's modulus scales K and cannot be checked from the result.",
        ),
        table(head, rows),
    ]
    if published:
        children += [
            tag("h3", "Beside published solutions"),
            table(
                ["front, step", "source", "asked for with", "worst", "mean", "claimed accuracy"],
                published,
                numeric=False,
            ),
        ]
    notes = [note for front in saved.evaluation.fronts for note in front.notes]
    if notes:
        children.append(tag("ul", *(tag("li", note) for note in dict.fromkeys(notes))))
    children.append(
        tag(
            "p",
            "The program itself is tested against exact near-tip fields, exact solutions of penny, "
            "elliptic and collinear cracks, and published solutions of surface cracks; its README "
            "lists what was measured. That says nothing about this model: its mesh, loads and "
            "supports are for its author to verify.",
        )
    )
    return section("Verification", *children, name="verification")


def mix(saved: Saved) -> Markup:
    """Largest angles and equivalent K by the published criteria, front by front."""
    units = saved.evaluation.units
    rows = []
    for front in saved.evaluation.fronts:
        columns = mix_columns(front.K, saved.evaluation.material)
        largest = float(np.nanmax(np.abs(front.K), initial=0.0))
        kink, K_eq = columns["kink_deg_mts"], columns["K_eq_mts"]
        kink3, twist = columns["kink_deg_schollmann"], columns["twist_deg_schollmann"]
        rows.append(
            [
                f"{front.front}, {front.step}",
                *(
                    _extreme(values, most)
                    for values, most in (
                        (kink, _RIGHT_ANGLE),
                        (K_eq, largest),
                        (kink3, _RIGHT_ANGLE),
                        (twist, _RIGHT_ANGLE),
                        (columns["K_eq_schollmann"], largest),
                    )
                ),
                int(np.isnan(kink3).sum()),
            ]
        )
    unit = f" [{rooted(units.K_label)}]"
    head = [
        "front, step",
        "kink, MTS [deg]",
        "K equivalent, MTS" + unit,
        "kink, 3D [deg]",
        "twist, 3D [deg]",
        "K equivalent, 3D" + unit,
        "stations without",
    ]
    return join(
        [
            tag("h3", "Directions and equivalent K: the values of largest magnitude"),
            table(head, rows),
            tag(
                "p",
                f"MTS: {SOURCES['mts']}. 3D: {SOURCES['schollmann']}. Without a value where K_I is "
                "negative: there the faces are closed, and no criterion applies.",
                class_="small",
            ),
        ]
    )


def _extreme(values: Any, largest: float) -> str:
    if not np.isfinite(values).any():
        return "no value"
    return levelled(float(values[int(np.nanargmax(np.abs(values)))]), largest)


def stations(saved: Saved) -> Markup:
    """Every station with the reported K, that of each method, and its flag."""
    evaluation = saved.evaluation
    names = [
        name
        for name in dict.fromkeys(n for f in evaluation.fronts for n in f.methods)
        if any(set(f.sources) != {name} for f in evaluation.fronts)
    ]
    head: list[Any] = ["station", "s/L", "x", "y", "z", *NAMES, "G"]
    for name in names:
        head += [join([symbol, f", {METHOD_NAMES.get(name, name)}"]) for symbol in NAMES]
    head.append("flag")
    children: list[Any] = [
        tag(
            "p",
            "K in ",
            rooted(evaluation.units.K_label),
            ". The file points.csv has these figures with all digits, and more columns.",
            class_="small",
        )
    ]
    for front in evaluation.fronts:
        rows = []
        most = float(np.nanmax(np.abs(front.K), initial=0.0))
        most_G = float(np.nanmax(front.G, initial=0.0))
        x = [place(p, front.length).split(", ") for p in front.positions]
        for i in range(len(front)):
            row: list[Any] = [i, f"{front.s_rel[i]:.4f}", *x[i]]
            row += [*(_cell(K, most) for K in front.K[i]), _cell(front.G[i], most_G)]
            for name in names:
                K = front.methods[name].K[i] if name in front.methods else [np.nan] * 3
                row += [_cell(value, most) for value in K]
            rows.append([*row, front.flags[i]])
        if len(evaluation.fronts) > 1:
            children.append(tag("h3", f"Front {front.front}, step {front.step}"))
        children.append(table(head, rows, kind="stations"))
    return section("Table", *children, name="table")


def _cell(value: float, largest: float) -> str:
    return levelled(value, largest, 5) if np.isfinite(value) else ""


def inputs(saved: Saved) -> Markup:
    """What is needed to repeat the evaluation."""
    summary = saved.summary
    files = [(item["file"], tag("code", f"SHA-256 {item['sha256']}")) for item in summary["inputs"]]
    children: list[Any] = [pairs(files)] if files else []
    case = str(summary.get("case_file") or "")
    if case:
        children += [
            tag("p", "The evaluation as a case file, to be put beside the result file:"),
            tag("pre", tag("code", case)),
            tag("pre", tag("code", "front3d evaluate case.toml --out out\nfront3d report out")),
        ]
    else:
        children.append(pairs([(k, _plain(v)) for k, v in summary["options"].items()]))
    versions: Mapping[str, str] = summary["versions"]
    children.append(
        tag("p", "Versions: ", ", ".join(f"{k} {v}" for k, v in versions.items()), class_="small")
    )
    return section("To repeat it", *children, name="inputs")


def _plain(value: Any) -> str:
    return "as the mesh suggests" if value is None else str(value)


def end() -> Markup:
    return section("Caution", tag("p", CAUTION, class_="caution"), name="caution")
