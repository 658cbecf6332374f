"""What the results say about themselves, and the directions of the published criteria."""

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from front3d.mixing import SOURCES, mix_columns
from front3d.output.charts.along import METHOD_NAMES
from front3d.output.report.page import Markup, join, section, table, tag
from front3d.output.report.words import NAMES, levelled, percent, rooted
from front3d.output.saved import Saved
from front3d.output.trust import agreement
from front3d.results import MODES

_RIGHT_ANGLE = 90.0  # degrees: what angles are compared with


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
        [f"{about['front']}, {about['step']}", *_compared(one)]
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
    notes += [
        f"{one.source}: {note}"
        for front in saved.evaluation.fronts
        for one in front.comparisons
        for note in one.notes
    ]
    if notes:
        children.append(tag("ul", *(tag("li", note) for note in dict.fromkeys(notes))))
    children.append(
        tag(
            "p",
            "The program itself is tested against exact near-tip fields, exact solutions of penny, "
            "elliptic and collinear cracks, and published solutions of surface cracks; its README "
            "lists what was measured, and ",
            tag("code", "front3d verify"),
            " measures it again. That says nothing about this model: its mesh, loads and "
            "supports are for its author to verify.",
        )
    )
    return section("Verification", *children, name="verification")


def _compared(one: Mapping[str, Any]) -> list[str]:
    """A published solution and how far the reported K is from it, as the summary has it."""
    worst, mean = (one.get("worst") or {}).get("percent"), one.get("mean_percent")
    return [
        one["source"],
        ", ".join(f"{key} = {_argument(value)}" for key, value in one["arguments"].items()),
        "no value" if worst is None else f"{worst:+.2f}\N{NO-BREAK SPACE}%",
        "no value" if mean is None else f"{mean:.2f}\N{NO-BREAK SPACE}%",
        one["claim"],
    ]


def _argument(value: float | Sequence[float]) -> str:
    """A number, or a direction as a user writes it."""
    return "/".join(f"{v:g}" for v in value) if isinstance(value, Sequence) else f"{value:g}"


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
                f"MTS: {SOURCES['mts']}. 3D: {SOURCES['schollmann']}. Without a value where ",
                NAMES[0],
                " is negative: there the faces are closed, and no criterion applies; and by MTS "
                "where there is mode III alone.",
                class_="small",
            ),
        ]
    )


def _extreme(values: Any, largest: float) -> str:
    if not np.isfinite(values).any():
        return "no value"
    return levelled(float(values[int(np.nanargmax(np.abs(values)))]), largest)
