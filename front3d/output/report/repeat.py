"""The table of all stations, and what is needed to repeat the evaluation."""

from collections.abc import Mapping
from typing import Any

import numpy as np

from front3d.output.charts.along import METHOD_NAMES
from front3d.output.formats import NOUGHT, place
from front3d.output.report.page import Markup, join, pairs, section, table, tag
from front3d.output.report.words import NAMES, levelled, rooted
from front3d.output.saved import Saved
from front3d.results import CAUTION, FrontResult

_FEW = 12
"""Columns up to which the table is printed in larger letters."""


def stations(saved: Saved) -> Markup:
    """Every station with the reported K, that of each method, and its flag."""
    evaluation = saved.evaluation
    others = [
        (name, k)
        for name in dict.fromkeys(n for f in evaluation.fronts for n in f.methods)
        if any(set(f.sources) != {name} for f in evaluation.fronts)
        for k in range(3)
        if any(_matters(f, name, k) for f in evaluation.fronts)
    ]
    head: list[Any] = ["station", "s/L", "x", "y", "z", *NAMES, "G", "flag"]
    head += [join([NAMES[k], f", {METHOD_NAMES.get(name, name)}"]) for name, k in others]
    children: list[Any] = [
        tag(
            "p",
            "K in ",
            rooted(evaluation.units.K_label),
            f". Without columns of other methods that are below {100 * NOUGHT:g} % of the largest "
            "K throughout. The file points.csv has these figures with all digits, and more "
            "columns.",
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
            row += [
                _cell(front.methods[name].K[i, k] if name in front.methods else np.nan, most)
                for name, k in others
            ]
            rows.append(row)
        if len(evaluation.fronts) > 1:
            children.append(tag("h3", f"Front {front.front}, step {front.step}"))
        kind = "stations" if len(head) > _FEW else "stations few"
        children.append(table(head, rows, kind=kind))
    return section("Table", *children, name="table")


def _matters(front: FrontResult, name: str, k: int) -> bool:
    """Whether a method gives a mode that is not nought against the front's largest K."""
    if name not in front.methods:
        return False
    largest = float(np.nanmax(np.abs(front.K), initial=0.0))
    reach = float(np.nanmax(np.abs(front.methods[name].K[:, k]), initial=0.0))
    return k == 0 or reach > NOUGHT * largest


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
