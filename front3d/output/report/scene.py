"""The scene to turn by hand: the crack's surroundings and the coloured front, inside the page."""

import asyncio
import sys
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import replace
from importlib import import_module
from importlib.util import find_spec
from pathlib import Path
from typing import Any

import numpy as np

from front3d.output.rendering import why_no_pictures
from front3d.output.report.page import Markup, join, tag
from front3d.output.report.words import NAMES, rooted
from front3d.output.saved import Saved
from front3d.output.scene import Scale, add_solid, best_view, colour_scale, colours
from front3d.output.skin import read_skin
from front3d.results import FrontResult

PACKAGE = "trame-pyvista"
"""The package that packs a scene and its viewer into one page; not needed for anything else."""

HOW = f"To get it, install the package {PACKAGE} (pip install {PACKAGE}) and make the report again."


def turnable(saved: Saved) -> tuple[Markup, str]:
    """The scene of the step with the largest K, and a sentence where it cannot be had."""
    if "skin.vtp" not in saved.files:
        reason = "The scene to turn by hand needs skin.vtp, which this evaluation did not write."
    elif find_spec("trame_pyvista") is None:
        reason = f"The scene to turn by hand is an extra. {HOW}"
    else:
        reason = why_no_pictures() or ""
    if reason:
        return tag("p", reason, class_="small"), reason
    fronts = _fronts_of_largest(saved.evaluation.fronts)
    scale = colour_scale(fronts)
    content = _viewer(saved, fronts, scale)
    frame = Markup(f'<iframe title="scene to turn by hand" srcdoc="{_quoted(content)}"></iframe>')
    words = f"To turn by hand: drag to turn, wheel to come nearer. Step {fronts[0].step}."
    return tag(
        "div", frame, _legend(saved, scale), tag("p", words, class_="sub"), class_="screen"
    ), ""


def _fronts_of_largest(fronts: tuple[FrontResult, ...]) -> tuple[FrontResult, ...]:
    largest = max(fronts, key=lambda front: float(np.nanmax(np.abs(front.K), initial=0.0)))
    return tuple(front for front in fronts if front.step == largest.step)


def _viewer(saved: Saved, fronts: tuple[FrontResult, ...], scale: Scale) -> str:
    """A page of its own with the scene and its viewer."""
    parts, box = read_skin(saved.folder / "skin.vtp")
    # Graphics work in single precision: moved to the origin, as in the still picture.
    centre = np.concatenate([front.positions for front in fronts]).mean(axis=0)
    for surface in (parts.outside, parts.crack):
        surface.points = np.asarray(surface.points) - centre
    box = (box[0] - centre, box[1] - centre)
    fronts = tuple(replace(front, positions=front.positions - centre) for front in fronts)
    corners = np.array(np.meshgrid(*zip(*box, strict=True))).reshape(3, -1).T

    async def export(path: Path) -> None:
        import pyvista as pv

        jupyter: Any = import_module("trame_pyvista.jupyter")
        await jupyter.launch_server().ready
        plotter: Any = pv.Plotter(off_screen=True, window_size=[1040, 780])
        try:
            view = best_view(fronts[0], corners)
            add_solid(plotter, parts, fronts, scale, view, box)
            # The viewer knows perspective only: as near as shows the same.
            camera = plotter.camera
            camera.parallel_projection = False
            distance = 1.15 * view.half_height / np.tan(np.radians(camera.view_angle / 2))
            camera.position = view.focus + distance * view.towards
            plotter.reset_camera_clipping_range()
            plotter.trame.export_html(str(path))
        finally:
            plotter.close()

    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "scene.html"
        with _without_download():
            asyncio.run(export(path))
        return path.read_text(encoding="utf-8")


@contextmanager
def _without_download() -> Iterator[None]:
    """Keep the package from fetching another viewer from its maker's server, which is not used
    here: it does so wherever this module is found, and says at length when it cannot.
    """
    name = "trame.widgets.vtklocal"
    before = sys.modules.get(name)
    sys.modules[name] = None  # type: ignore[assignment]  # an import of it fails
    try:
        yield
    finally:
        del sys.modules[name]
        if before is not None:
            sys.modules[name] = before


def _legend(saved: Saved, scale: Scale) -> Markup:
    """The scale of the colours, beside the scene: inside, the viewer draws none."""
    from matplotlib.colors import to_hex

    stops = ", ".join(to_hex(colours()(x)) for x in np.linspace(0, 1, 9))
    bar = tag("span", class_="bar", style=f"background: linear-gradient(to right, {stops})")
    unit = rooted(saved.evaluation.units.K_label)
    return tag(
        "div",
        join([NAMES[scale.mode], f" [{unit}] {scale.low:.4g}"]),
        bar,
        f"{scale.high:.4g}",
        class_="legend",
    )


def _quoted(content: str) -> str:
    return content.replace("&", "&amp;").replace('"', "&quot;")
