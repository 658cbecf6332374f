"""How the modes mix along a front: angles, directions of growth, and the split of G."""

from typing import TYPE_CHECKING, Any

import numpy as np

from front3d.mixing import energy_by_mode, principal, tangential
from front3d.output.charts.panels import layer_entry, position_panels
from front3d.output.charts.style import (
    BLACK,
    BLUE,
    GREEN,
    MEDIUM,
    SMALL,
    VERMILION,
    closed_up,
    in_unit,
    mark_every,
    new_figure,
    plain_text,
    widen,
)
from front3d.results import FrontResult
from front3d.solid import Constants
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_LEAST_DEGREES = 10.0
_STRAIGHT = 0.1
"""Degrees below which all angles are nought: pure mode I, and nothing to draw of them."""

_TINTS = ("#8fbfe0", "#f2b48a", "#8cc7b3")
_HATCHES = ("", "///", "...")


def mode_mix(front: FrontResult, units: Units, material: Constants) -> "Figure":
    """Three panels over s/L: mode angles, kink and twist, G by mode."""
    captions = [
        "Kink turns the growth from e1 towards e2, twist the normal of the new surface towards e3. "
        "MTS: Erdogan and Sih (1963); 3D: Schollmann, Richard, Kullmer and Fulland (2002)."
    ]
    kink_mts, _ = tangential(front.K)
    kink, twist, _ = principal(front.K)
    psi, mode_III = front.mode_angles.T
    title = f"Mode mix along front {front.front}, step {plain_text(front.step)}"
    drawn = np.stack([psi, mode_III, kink_mts, kink, twist])
    if np.isfinite(drawn).all() and np.abs(drawn).max() < _STRAIGHT:
        captions = [
            f"Pure mode I: mode angles, and kink and twist by both criteria, are below "
            f"{_STRAIGHT:g}\N{DEGREE SIGN} at all stations."
        ]
        figure = new_figure(3.4, title, captions, 0)
        (energy,) = position_panels(figure, front, units, (1,))
        _energy(energy, front, units, material)
        layer_entry(energy, front)
        _legend(energy)
        return figure
    without = int(np.isnan(kink).sum())
    if without:
        captions.append(
            f"{without} of {len(front)} stations have no direction: $K_I$ < 0 (faces closed) or no "
            "load."
        )
    torn = int(np.isnan(psi).sum())
    if torn:
        captions.append(
            rf"No $\psi$ and no kink by MTS at {torn} of {len(front)} stations: mode III alone."
        )
    figure = new_figure(6.9, title, captions, 0)
    angles, ways, energy = position_panels(figure, front, units, (1, 1, 1))
    _curves(
        angles,
        front,
        {
            r"$\psi$ = atan2($K_{II}$, $K_I$)": (psi, BLUE, "-", "o"),
            "mode-III angle": (mode_III, GREEN, "-.", "^"),
        },
        "mode angle [\N{DEGREE SIGN}]",
    )
    _curves(
        ways,
        front,
        {
            "kink, MTS": (kink_mts, VERMILION, "--", "x"),
            "kink, 3D": (kink, BLUE, "-", "o"),
            "twist, 3D": (twist, GREEN, "-.", "^"),
        },
        "direction [\N{DEGREE SIGN}]",
    )
    _energy(energy, front, units, material)
    layer_entry(angles, front)
    for axes in (angles, ways, energy):
        _legend(axes)
    figure.align_ylabels()
    return figure


def _legend(axes: "Axes") -> None:
    axes.legend(
        loc="upper left",
        bbox_to_anchor=(0.0, 1.0, 1.0, 0.0),
        mode="expand",
        ncols=4 if len(axes.get_legend_handles_labels()[1]) <= 4 else 5,
        fontsize=SMALL,
        frameon=False,
        borderaxespad=0.2,
    )


def _curves(
    axes: "Axes", front: FrontResult, curves: dict[str, tuple[Any, str, str, str]], label: str
) -> None:
    x = closed_up(front.s_rel, front, 1.0)
    for name, (values, color, style, marker) in curves.items():
        axes.plot(
            x,
            closed_up(values, front),
            color=color,
            linestyle=style,
            marker=marker,
            markersize=4.5,
            markerfacecolor="none",
            markevery=mark_every(front),
            linewidth=1.8,
            label=name,
        )
    drawn = np.concatenate([values for values, *_ in curves.values()])
    finite = drawn[np.isfinite(drawn)]
    low, high = (finite.min(), finite.max()) if finite.size else (0.0, 0.0)
    _limits_below_legend(axes, *widen(float(low), float(high), _LEAST_DEGREES))
    axes.set_ylabel(label, fontsize=MEDIUM)


def _energy(axes: "Axes", front: FrontResult, units: Units, material: Constants) -> None:
    x = closed_up(front.s_rel, front, 1.0)
    split = np.stack([closed_up(g, front) for g in energy_by_mode(front.K, material).T])
    top = np.cumsum(split, axis=0)
    bottom = top - split
    for k, name in enumerate(("$G_I$", "$G_{II}$", "$G_{III}$")):
        axes.fill_between(
            x,
            bottom[k],
            top[k],
            facecolor=_TINTS[k],
            edgecolor="#555555",
            linewidth=0.4,
            hatch=_HATCHES[k],
            label=name,
        )
    axes.plot(x, top[-1], color=BLACK, linewidth=1.6, label="G, sum")
    largest = float(np.nanmax(top[-1])) if np.isfinite(top[-1]).any() else 1.0
    _limits_below_legend(axes, 0.0, 1.07 * (largest or 1.0))
    unit = f"{units.stress} {units.length}" if units.named else ""
    axes.set_ylabel(in_unit("G by mode", unit), fontsize=MEDIUM)


def _limits_below_legend(axes: "Axes", low: float, high: float) -> None:
    axes.set_ylim(low, high + 0.22 * (high - low))
