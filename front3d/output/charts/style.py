"""The look of all charts: colours, line styles, sizes, captions; and figures as PNG and SVG."""

import io
from collections.abc import Sequence
from itertools import pairwise
from textwrap import fill
from typing import TYPE_CHECKING, Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.results import CAUTION, FrontResult, free_surface_layer
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

# The set of Okabe and Ito (2008), which colour-blind readers can tell apart, without those of its
# colours that are too light for a line on white, and with a darker green; line styles and markers
# tell the lines apart again in a grey print.
BLUE, VERMILION, GREEN, BLACK = "#0072B2", "#D55E00", "#007C59", "#000000"
INK, MUTED, GRID = "#222222", "#555555", "#dddddd"
LAYER, BODY, CRACK = "#e7e7e7", "#dfe5ea", "#e9dcc3"

MODE_LABELS = ("$K_I$", "$K_{II}$", "$K_{III}$")
MODE_STYLES: tuple[dict[str, Any], ...] = (
    {"color": BLUE, "linestyle": "-", "marker": "o"},
    {"color": VERMILION, "linestyle": "--", "marker": "s"},
    {"color": GREEN, "linestyle": "-.", "marker": "^"},
)

WIDTH = 8.0  # inches: 1200 pixels
DPI = 150
LARGE, MEDIUM, SMALL, CAPTION = 14.0, 12.5, 11.0, 9.0  # points
LEGEND_COLUMNS = 3
_HANDLE, _HANDLE_GAP, _COLUMN_GAP = 2.8, 0.8, 1.4  # of a legend, in sizes of its letters
_MARKERS_WANTED = 18
_CAPTION_LINE, _LEGEND_ROW, _TITLE_ROW = 0.165, 0.24, 0.42  # inches
_WORDS_PER_LINE = 118


def new_figure(height: float, title: str, captions: Sequence[str], legend_rows: int) -> "Figure":
    """An empty figure: title and room for the rows of a legend above, captions and caution below.

    `height` is that of the panels with their labels, in inches.
    """
    from matplotlib.figure import Figure

    words = "\n".join(fill(text, _WORDS_PER_LINE) for text in (*captions, CAUTION))
    below = 0.1 + _CAPTION_LINE * (words.count("\n") + 1)
    above = _TITLE_ROW + _LEGEND_ROW * legend_rows
    total = below + height + above
    figure = Figure(figsize=(WIDTH, total), dpi=DPI, layout="constrained", facecolor="white")
    figure.get_layout_engine().set(  # type: ignore[union-attr]
        rect=(0.005, below / total, 0.99, height / total),  # type: ignore[call-arg]
        h_pad=0.05,
        hspace=0.03,
    )
    middle: dict[str, Any] = {"x": 0.5, "ha": "center"}
    figure.text(y=1 - 0.08 / total, s=title, fontsize=LARGE, color=INK, va="top", **middle)
    figure.text(y=0.05 / total, s=words, fontsize=CAPTION, color=MUTED, va="bottom", **middle)
    return figure


def png(figure: "Figure") -> bytes:
    """PNG, 1200 pixels wide, legible at half that width."""
    out = io.BytesIO()
    _settle(figure)
    figure.savefig(out, format="png")
    return out.getvalue()


def svg(figure: "Figure") -> bytes:
    """SVG that looks alike everywhere (letters as outlines) and is the same in every run."""
    from matplotlib import rc_context

    out = io.BytesIO()
    _settle(figure)
    with rc_context({"svg.fonttype": "path", "svg.hashsalt": "front3d"}):
        figure.savefig(out, format="svg", metadata={"Date": None})
    return out.getvalue()


def _settle(figure: "Figure") -> None:
    """Lay out once: a second time, for another format, the layout may fail, and would differ."""
    if figure.get_layout_engine() is not None:
        figure.draw_without_rendering()
        figure.set_layout_engine("none")


def dress(axes: "Axes") -> None:
    """Ticks, grid and frame."""
    axes.tick_params(labelsize=MEDIUM)
    axes.grid(True, color=GRID, linewidth=0.8)
    axes.set_axisbelow(True)
    axes.spines[["top", "right"]].set_visible(False)


def legend(figure: "Figure", axes: "Axes", columns: int = LEGEND_COLUMNS) -> None:
    """The entries of `axes` under the title, where they cover no curve."""
    handles, labels = axes.get_legend_handles_labels()
    if labels:
        figure.legend(
            handles,
            labels,
            loc="upper center",
            bbox_to_anchor=(0.5, 1 - (_TITLE_ROW - 0.06) / figure.get_figheight()),
            ncols=legend_columns(labels, columns),
            fontsize=SMALL,
            frameon=False,
            columnspacing=_COLUMN_GAP,
            handlelength=_HANDLE,
            handletextpad=_HANDLE_GAP,
            labelspacing=0.3,
            borderpad=0.2,
        )
        # Placed by hand: the layout of the panels would take it for a part of theirs.
        figure.legends[-1].set_in_layout(False)


def legend_rows(labels: Sequence[str], columns: int = LEGEND_COLUMNS) -> int:
    """Rows of the legend with these entries."""
    return -(-len(labels) // legend_columns(labels, columns)) if labels else 0


def legend_columns(labels: Sequence[str], most: int = LEGEND_COLUMNS) -> int:
    """The most columns, up to `most`, that leave every entry whole within the figure."""
    widths = [text_width(label, SMALL) + (_HANDLE + _HANDLE_GAP) * SMALL for label in labels]
    for columns in range(min(most, len(labels)), 1, -1):
        rows, longer = divmod(len(labels), columns)
        stops = np.cumsum([0] + [rows + (k < longer) for k in range(columns)])
        total = sum(max(widths[a:b]) for a, b in pairwise(stops))
        if total + _COLUMN_GAP * SMALL * (columns - 1) <= 0.97 * 72 * WIDTH:
            return columns
    return 1


def text_width(text: str, size: float) -> float:
    """Points that one line of letters of `size` takes, mathematics included."""
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import TextToPath

    math = "$" in text.replace(r"\$", "")
    font = FontProperties(size=size)
    return float(TextToPath().get_text_width_height_descent(text, font, ismath=math)[0])


def second_unit(axes: "Axes", units: Units, *, on_top: bool = False) -> None:
    """K in MPa sqrt(m) on the right or on top, where units are named and are others."""
    factor = units.K_factor
    if factor is None or (units.length, units.stress) == ("m", "MPa"):
        return
    scale = float(factor)
    functions = (lambda K: np.multiply(K, scale), lambda K: np.divide(K, scale))
    label = f"[{mathtext('MPa sqrt(m)')}]"
    if on_top:
        other = axes.secondary_xaxis("top", functions=functions)
        other.set_xlabel(label, fontsize=MEDIUM)
    else:
        other = axes.secondary_yaxis("right", functions=functions)
        other.set_ylabel(label, fontsize=MEDIUM)
    other.tick_params(labelsize=MEDIUM)
    other.spines[["top" if on_top else "right"]].set_color(GRID)


def mark_every(front: FrontResult) -> int:
    """Stations from one marker to the next."""
    return max(1, len(front) // _MARKERS_WANTED)


def mathtext(unit: str) -> str:
    """A unit of K with a drawn root: "MPa sqrt(mm)" becomes MPa times the root of mm."""
    stress, root, length = unit.partition("sqrt(")
    return f"{stress}$\\sqrt{{\\mathrm{{{length.rstrip(')')}}}}}$" if root else unit


def plain_text(text: str, most: int = 60) -> str:
    """A name from a file as a chart can show it: no mathematics, one line, not endless."""
    text = " ".join(text.split()).replace("$", r"\$")
    return text if len(text) <= most else text[: most - 3] + "..."


def in_unit(what: str, unit: str, between: str = " ") -> str:
    """A quantity with its unit in brackets, if it has a name."""
    return f"{what}{between}[{unit}]" if unit else what


def closed_up(values: FloatArray, front: FrontResult, last: float | None = None) -> FloatArray:
    """`values` with the first station repeated at the end of a closed front."""
    if not front.closed:
        return values
    return np.append(values, values[0] if last is None else last)


def widen(low: float, high: float, least: float) -> tuple[float, float]:
    """Limits at least `least` apart around the same middle, with a margin: scatter of a small
    figure must not look like a variation.
    """
    if not np.isfinite([low, high]).all():
        return -1.0, 1.0
    short = max(0.0, least - (high - low)) / 2
    low, high = low - short, high + short
    margin = 0.07 * (high - low) or 1.0
    return low - margin, high + margin


def layer_lengths(front: FrontResult) -> tuple[float, float]:
    """Arc lengths from the start and from the end of a front up to the last station at which a free
    surface is felt; 0 at other ends.  Where that is the end alone, half the way to the next one.
    """
    if front.closed:
        return 0.0, 0.0
    found = []
    for end, reach in ((0, front.s), (1, front.length - front.s)):
        ends = tuple(name if i == end else "" for i, name in enumerate(front.ends))
        layer = free_surface_layer(front.s, front.length, ends)
        if layer.sum() == 1 and len(reach) > 1:
            found.append(float(np.sort(reach)[1]) / 2)
        else:
            found.append(float(reach[layer].max(initial=0.0)))
    return found[0], found[1]
