"""The table of all stations, and what is needed to repeat the evaluation."""

from collections.abc import Mapping
from typing import Any

import numpy as np

from front3d.output.charts.along import METHOD_NAMES
from front3d.output.formats import place
from front3d.output.report.page import Markup, join, pairs, section, table, tag
from front3d.output.report.words import NAMES, levelled, rooted
from front3d.output.saved import Saved
from front3d.results import CAUTION


def stations(saved: Saved) -> Markup:
    """Every station with the reported K, that of each method, and its flag."""
    evaluation = saved.evaluation
    names = [
        name
        for name in dict.fromkeys(n for f in evaluation.fronts for n in f.methods)
        if any(set(f.sources) != {name} for f in evaluation.fronts)
    ]
    head: list[Any] = ["station", "s/L", "x", "y", "z", *NAMES, "G", "flag"]
    for name in names:
        head += [join([symbol, f", {METHOD_NAMES.get(name, name)}"]) for symbol in NAMES]
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
            row += [
                *(_cell(K, most) for K in front.K[i]),
                _cell(front.G[i], most_G),
                front.flags[i],
            ]
            for name in names:
                K = front.methods[name].K[i] if name in front.methods else [np.nan] * 3
                row += [_cell(value, most) for value in K]
            rows.append(row)
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
