"""Whoever looks at a chart can read it: words, legends, and curves that differ without colour."""

from collections.abc import Iterator
from typing import Any

import pytest

from tests.chart_models import FIGURES, contrast_on_white, drawn, lines

QUICK = ("along", "corner")


def some(*names: str) -> list[Any]:
    """Names of charts as parameters: to draw each takes a while, so only two are tested quickly."""
    slow = pytest.mark.slow
    return [n if n in QUICK else pytest.param(n, marks=slow) for n in names]


@pytest.mark.parametrize("name", some("along", "through", "mix", "two steps"))
def test_curves_differ_without_colour(name: str) -> None:
    figure = drawn(name)
    for axes in figure.axes:
        curves = [line for line in lines(axes).values() if line.get_linestyle() != "None"]
        styles = {(str(line._unscaled_dash_pattern), line.get_marker()) for line in curves}
        assert len(styles) == len(curves)
        for line in curves:
            assert contrast_on_white(line.get_color()) >= 3.0


def words_of(figure: Any) -> Iterator[Any]:
    """Every text that is drawn: also of ticks, second axes and legends."""
    yield from figure.texts
    for legend in figure.legends:
        yield from legend.get_texts()
    todo = list(figure.axes)
    while todo:
        axes = todo.pop()
        todo += axes.child_axes
        yield from axes.texts
        yield from axes.get_legend().get_texts() if axes.get_legend() else ()
        for axis in (axes.xaxis, axes.yaxis):
            yield axis.label
            low, high = sorted(axis.get_view_interval())
            for tick in axis.get_major_ticks():  # those beyond the limits are not drawn
                if low <= tick.get_loc() <= high:
                    yield from (tick.label1, tick.label2)


@pytest.mark.parametrize("name", some(*FIGURES))
def test_words_are_legible_inside_and_do_not_overlap(name: str) -> None:
    figure = drawn(name)
    renderer = figure._get_renderer()
    words = [text for text in words_of(figure) if text.get_visible() and text.get_text().strip()]
    # 6 points at 600 pixels over 8 inches is 6 px tall; 9 px are read with ease (common practice).
    assert min(text.get_fontsize() for text in words) * 600 / 8 / 72 >= 9
    boxes = [(text.get_text(), text.get_window_extent(renderer)) for text in words]
    assert len(boxes) > 8
    whole = figure.bbox
    for i, (text, box) in enumerate(boxes):
        assert whole.x0 <= box.x0 + 1 and box.x1 <= whole.x1 + 1, text
        assert whole.y0 <= box.y0 + 1 and box.y1 <= whole.y1 + 1, text
        for other, its_box in boxes[i + 1 :]:
            assert not box.padded(-1).overlaps(its_box.padded(-1)), (text, other)


@pytest.mark.parametrize(
    "name",
    some("along", "two steps", "seven steps", "load cases", "times", "through", "long source"),
)
def test_legends_cover_no_panel(name: str) -> None:
    figure = drawn(name)
    (legend,) = figure.legends
    box = legend.get_window_extent()
    assert figure.bbox.x0 <= box.x0 and box.x1 <= figure.bbox.x1
    for axes in figure.axes:
        assert not box.overlaps(axes.get_tightbbox())
