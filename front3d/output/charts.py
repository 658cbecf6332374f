"""The chart of K_I, K_II and K_III against the position along a front."""

import io
from textwrap import fill
from typing import TYPE_CHECKING, Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.formats import place
from front3d.output.trust import rings_of
from front3d.results import CAUTION, FrontResult
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.axes import Axes

# Colours of the Okabe-Ito set (2008), which colour-blind readers can tell apart; line style and
# marker tell the modes apart again in a grey print.
_STYLES: dict[str, dict[str, Any]] = {
    "$K_I$": {"color": "#0072B2", "linestyle": "-", "marker": "o"},
    "$K_{II}$": {"color": "#D55E00", "linestyle": "--", "marker": "s"},
    "$K_{III}$": {"color": "#007C59", "linestyle": "-.", "marker": "^"},
}
_INK, _MUTED = "#222222", "#555555"
_MARKERS_WANTED = 24


def chart_png(front: FrontResult, units: Units) -> bytes:
    """PNG, 1200 pixels wide, legible at half that width."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(8.0, 5.6), dpi=150, layout="constrained", facecolor="white")
    figure.get_layout_engine().set(rect=(0, 0.075, 1, 0.925))  # type: ignore[union-attr,call-arg]
    axes = figure.add_subplot()
    _draw_modes(axes, front)
    _draw_ends(axes, front)
    _label(axes, front, units)
    figure.text(
        0.5,
        0.008,
        fill(CAUTION, 110),
        fontsize=9,
        color=_MUTED,
        ha="center",
        va="bottom",
    )
    out = io.BytesIO()
    figure.savefig(out, format="png")
    return out.getvalue()


def _draw_modes(axes: "Axes", front: FrontResult) -> None:
    x = _closed(front.s_rel, front, 1.0)
    rings = rings_of(front)
    for k, (name, style) in enumerate(_STYLES.items()):
        if rings is not None:
            compared = rings.K[rings.compared, :, k]
            axes.fill_between(
                x,
                _closed(compared.min(axis=0), front),
                _closed(compared.max(axis=0), front),
                color=style["color"],
                alpha=0.25,
                linewidth=0,
                label="range of rings" if k == 0 else None,
            )
        axes.plot(
            x,
            _closed(front.K[:, k], front),
            linewidth=2,
            markersize=6,
            markevery=max(1, len(front) // _MARKERS_WANTED),
            label=name,
            **style,
        )
    flagged = np.array([bool(flag) for flag in front.flags])
    if flagged.any():
        # On the largest mode only: three circles a station would hide the curves.
        K = front.K[flagged]
        largest = np.argmax(np.nan_to_num(np.abs(K)), axis=1)
        axes.plot(
            front.s_rel[flagged],
            K[np.arange(len(K)), largest],
            linestyle="none",
            marker="o",
            markersize=11,
            markerfacecolor="none",
            markeredgecolor=_INK,
            label="flagged",
        )


def _draw_ends(axes: "Axes", front: FrontResult) -> None:
    axes.set_xlim(-0.03, 1.03)
    axes.axhline(0.0, color=_MUTED, linewidth=0.8, zorder=0)
    for x, end, side in zip((0.0, 1.0), front.ends, ("left", "right"), strict=False):
        axes.axvline(x, color=_INK, linewidth=1, linestyle=(0, (2, 2)), zorder=0)
        axes.annotate(
            end,
            (x, 1.0),
            xycoords=axes.get_xaxis_transform(),
            xytext=(0, 5),
            textcoords="offset points",
            ha=side,
            va="bottom",
            fontsize=12,
            color=_INK,
        )


def _label(axes: "Axes", front: FrontResult, units: Units) -> None:
    length_unit = f" {units.length}" if units.length else ""
    axes.set_xlabel(
        f"position along the front, s / L  (L = {front.length:.4g}{length_unit}; "
        f"s = 0 at {place(front.positions[0], front.length)})",
        fontsize=12.5,
    )
    axes.set_ylabel(f"K  [{mathtext(units.K_label)}]", fontsize=14)
    axes.set_title(title(front), fontsize=14, pad=28 if front.ends else 12, color=_INK)
    axes.tick_params(labelsize=12.5)
    axes.grid(True, color="#dddddd", linewidth=0.8)
    axes.spines[["top", "right"]].set_visible(False)
    factor = units.K_factor
    if factor is not None and (units.length, units.stress) != ("m", "MPa"):
        scale = float(factor)
        other = axes.secondary_yaxis(
            "right",
            functions=(lambda K: np.multiply(K, scale), lambda K: np.divide(K, scale)),
        )
        other.set_ylabel(f"K  [{mathtext('MPa sqrt(m)')}]", fontsize=14)
        other.tick_params(labelsize=12.5)
    low, high = axes.get_ylim()
    axes.set_ylim(low, high + 0.16 * (high - low))  # room for the legend above the curves
    axes.legend(loc="upper center", ncols=5, fontsize=12, frameon=False, columnspacing=1.4)


def title(front: FrontResult) -> str:
    """One line that says which front, in which step."""
    shape = "closed" if front.closed else "open"
    return f"Stress intensity along front {front.front} ({shape}), step {front.step}"


def mathtext(unit: str) -> str:
    """A unit of K with a drawn root: "MPa sqrt(mm)" becomes MPa times the root of mm."""
    stress, root, length = unit.partition("sqrt(")
    return f"{stress}$\\sqrt{{\\mathrm{{{length.rstrip(')')}}}}}$" if root else unit


def _closed(values: FloatArray, front: FrontResult, last: float | None = None) -> FloatArray:
    """`values` with the first station repeated at the end of a closed front."""
    if not front.closed:
        return values
    return np.append(values, values[0] if last is None else last)
