"""The report: one HTML file that needs nothing beside it, from the folder of an evaluation."""

from pathlib import Path

from front3d.output.charts import charts_of, heads
from front3d.output.charts.style import svg
from front3d.output.report.answer import answer, heading, question
from front3d.output.report.checks import checks, mix
from front3d.output.report.page import (
    Markup,
    figure,
    join,
    page,
    png_image,
    section,
    svg_image,
    tag,
)
from front3d.output.report.repeat import end, inputs, stations
from front3d.output.report.scene import turnable
from front3d.output.saved import Saved

CAPTIONS = {
    "chart": "Stress intensity factors along the front, by every method.",
    "through_thickness": "The section of the crack, and K at the same depth.",
    "mode_mix": "How the modes mix: angles, directions of growth by published criteria, and G.",
    "steps": "The same front in all steps.",
    "stations": "K at chosen stations, step by step.",
}


def report_html(saved: Saved) -> tuple[bytes, tuple[str, ...]]:
    """The page, and sentences on what it could not show."""
    scene, notes = _scene(saved)
    body = join(
        [
            heading(saved),
            answer(saved),
            question(saved),
            scene,
            _charts(saved),
            checks(saved),
            stations(saved),
            inputs(saved),
            end(),
        ]
    )
    return page(f"front3d: {saved.evaluation.source}", body).encode(), notes


def _charts(saved: Saved) -> Markup:
    drawings: list[Markup] = []
    headings = heads(saved.evaluation)
    last = ""
    for i, (name, draw) in enumerate(charts_of(saved.evaluation).items()):
        kind, caption = next((k, words) for k, words in CAPTIONS.items() if name.startswith(k))
        head = headings.get(name.removeprefix(kind), "")
        if head != last:
            drawings.append(tag("h3", head))
            last = head
        drawings.append(figure(svg_image(svg(draw()), i, caption), caption))
    return section("Charts", *drawings, mix(saved), name="charts")


def _scene(saved: Saved) -> tuple[Markup, tuple[str, ...]]:
    pictures = [name for name in saved.files if name.startswith("scene") and name.endswith(".png")]
    stills = [
        figure(
            png_image((saved.folder / name).read_bytes(), "The solid with K along its fronts"),
            "The solid around the crack, cut free; K along the front is coloured.",
        )
        for name in pictures
    ]
    turn, note = turnable(saved)
    if not stills:
        stills = [
            tag(
                "p",
                "There is no picture of the solid: the evaluation could draw none, or was told to.",
            )
        ]
    return section("The crack", *stills, turn, name="scene"), (note,) if note else ()


def write_report(saved: Saved) -> tuple[Path, tuple[str, ...]]:
    """Write report.html into the folder; its path, and what it could not show."""
    from front3d.output.files import write_whole

    content, notes = report_html(saved)
    return write_whole(saved.folder / "report.html", content), notes
