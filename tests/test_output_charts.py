"""The chart: what it shows, read from the drawn objects and from the finished picture."""

import io
from typing import Any

import matplotlib
import matplotlib.figure
import matplotlib.image
import numpy as np
import pytest

from front3d.output.charts import chart_png, mathtext
from front3d.results import FrontResult
from front3d.units import Units
from tests.output_models import MILLIMETRES, elliptic_front


@pytest.fixture
def drawn(monkeypatch: pytest.MonkeyPatch) -> list[Any]:
    """The figures that are drawn, in order."""
    figures: list[Any] = []
    real = matplotlib.figure.Figure.savefig

    def keep(self: Any, *arguments: Any, **named: Any) -> Any:
        figures.append(self)
        return real(self, *arguments, **named)

    monkeypatch.setattr(matplotlib.figure.Figure, "savefig", keep)
    return figures


def curves(figure: Any) -> dict[str, Any]:
    (axes,) = figure.axes
    return {line.get_label(): line for line in axes.lines if line.get_label().startswith("$")}


def chart(front: FrontResult, units: Units, drawn: list[Any]) -> Any:
    image = matplotlib.image.imread(io.BytesIO(chart_png(front, units)))
    assert image.shape[1] == 1200
    return drawn[-1]


def test_curves_are_the_K_of_the_table(drawn: list[Any]) -> None:
    front = elliptic_front(1.6, 1.2, closed=False)
    lines = curves(chart(front, MILLIMETRES, drawn))
    assert list(lines) == ["$K_I$", "$K_{II}$", "$K_{III}$"]
    for k, line in enumerate(lines.values()):
        assert np.array_equal(line.get_xdata(), front.s_rel)
        assert np.array_equal(line.get_ydata(), front.K[:, k])


def test_modes_differ_without_colour(drawn: list[Any]) -> None:
    lines = curves(chart(elliptic_front(1.6, 1.2, closed=False), Units(), drawn)).values()
    assert len({line.get_linestyle() for line in lines}) == 3
    assert len({line.get_marker() for line in lines}) == 3
    # and in brightness none is so light that a grey print loses it (contrast 3:1 on white,
    # Web Content Accessibility Guidelines 2.1, criterion 1.4.11)
    for line in lines:
        rgb = np.array(matplotlib.colors.to_rgb(line.get_color()))
        linear = np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)
        assert 1.05 / (linear @ [0.2126, 0.7152, 0.0722] + 0.05) >= 3.0


def test_a_closed_front_comes_back_to_its_start(drawn: list[Any]) -> None:
    front = elliptic_front(1.0, 1.0, closed=True)
    line = curves(chart(front, Units(), drawn))["$K_I$"]
    assert line.get_xdata()[-1] == 1.0
    assert line.get_ydata()[-1] == front.K[0, 0]


def test_units_ends_and_caution_are_written(drawn: list[Any]) -> None:
    front = elliptic_front(1.6, 1.2, closed=False, flags={0: "flagged"})
    figure = chart(front, MILLIMETRES, drawn)
    (axes,) = figure.axes
    assert "MPa" in axes.get_ylabel()
    assert "mm" in axes.get_ylabel()
    assert "mm" in axes.get_xlabel()
    words = {text.get_text() for text in axes.texts}
    assert {"free surface", "symmetry plane"} <= words
    assert any("engineering aid" in text.get_text() for text in figure.texts)
    assert "flagged" in {text.get_text() for text in axes.get_legend().get_texts()}
    smallest = min(text.get_fontsize() for text in [*figure.texts, *axes.texts])
    # 6 points at 600 pixels over 8 inches is 6 px tall: the least that is read (common practice).
    assert smallest * 600 / 8 / 72 >= 9


def test_words_do_not_overlap(drawn: list[Any]) -> None:
    front = elliptic_front(1.6, 1.2, closed=False, flags={0: "flagged"}, step="a step with a name")
    figure = chart(front, MILLIMETRES, drawn)
    (axes,) = figure.axes
    words = [*figure.texts, *axes.texts, axes.title, axes.xaxis.label, axes.yaxis.label]
    boxes = [text.get_window_extent() for text in words] + [axes.get_legend().get_window_extent()]
    whole = figure.bbox
    for i, box in enumerate(boxes):
        assert whole.x0 <= box.x0 and box.x1 <= whole.x1
        assert whole.y0 <= box.y0 and box.y1 <= whole.y1
        assert not any(box.overlaps(other) for other in boxes[i + 1 :])


def test_the_root_is_drawn() -> None:
    assert mathtext("MPa sqrt(mm)") == r"MPa $\sqrt{\mathrm{mm}}$"
