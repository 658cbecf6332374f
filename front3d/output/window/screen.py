"""The window: a thin layer that hands events to the state and draws what comes of them."""

from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np

from front3d.output.files import file_names, write_whole
from front3d.output.saved import Saved
from front3d.output.scene.camera import MARGIN, View, pixels
from front3d.output.scene.drawing import (
    Place,
    add_body,
    add_extras,
    add_fronts,
    bring_forward,
    look_from,
)
from front3d.output.scene.surface import steps_of
from front3d.output.window.model import Drawn, body_of, drawn_of, model_of, opened_parts
from front3d.output.window.overlay import Overlay, draw_overlay
from front3d.output.window.panel import Panel, asked, draw_panel, png_of
from front3d.output.window.state import CHANGES, KEYS, Change, Shown, at, first_shown

SIZE = (1400, 820)
_NEAR = 25.0  # pixels from a station at which a click means it
_STILL = 4.0  # pixels a click may move and be no drag


class Window:
    """The scene on the left, the panel on the right.

    Open it with `show`; without a display, make it with `off_screen` and only `save`.
    """

    def __init__(self, saved: Saved, *, off_screen: bool = False) -> None:
        import pyvista as pv

        self.saved = saved
        self.model = model_of(saved)
        self.shown = first_shown(saved.evaluation)
        self.written: list[Path] = []
        plotter: Any = pv.Plotter(
            shape=(1, 2),
            off_screen=off_screen,
            window_size=list(SIZE),
            border=False,
            title=f"front3d: {saved.evaluation.source}",
        )
        self.plotter = plotter
        # Several samples a pixel would switch off the sorting of translucent layers.
        self.plotter.ren_win.SetMultiSamples(0)
        self.plotter.subplot(0, 0)
        self.plotter.enable_depth_peeling(4)
        self._images: dict[str, Any] = {}
        self._body: list[Any] = []
        self._body_of: tuple[int, float] | None = None
        self._tubes: list[Any] = []
        self._extras: list[Any] = []
        plotter.set_background("white")
        plotter.renderers[0].AddObserver("StartEvent", lambda *_: self._forward())
        self._pressed: tuple[int, int] | None = None
        self._kept: tuple[dict[Any, Any], dict[Any, Any]] = ({}, {})
        self._scene(self.model.view(self.shown, self._half()))
        self._side()

    # What is drawn.

    def change(self, change: Change) -> None:
        """Show something else, from where it is seen now."""
        self.look(change(self.saved.evaluation, self.shown))

    def look(self, shown: Shown) -> None:
        if shown != self.shown:
            self.shown = shown
            self._scene(self.view)
            self._side()
            self.plotter.render()

    @property
    def view(self) -> View:
        """From where the scene is seen now."""
        camera = self.plotter.renderers[0].camera
        focus, eye = np.array(camera.focal_point), np.array(camera.position)
        towards = (eye - focus) / np.linalg.norm(eye - focus)
        up = np.array(camera.up) - np.dot(camera.up, towards) * towards
        return View(focus, towards, up / np.linalg.norm(up), camera.parallel_scale / MARGIN)

    def save(self) -> Path:
        """The window as a PNG in the folder of the results."""
        self.plotter.render()
        image = self.plotter.screenshot(None, return_img=True)
        steps = steps_of(self.saved.evaluation.fronts)
        step = file_names(steps)[steps[self.shown.step]]
        name = f"view_{self.shown.quantity}_{step}_front{self.shown.front}.png"
        path = write_whole(self.saved.folder / name, png_of(image))
        self.written.append(path)
        return path

    def _half(self) -> tuple[int, int]:
        width, height = self.plotter.window_size
        return width // 2, height

    def _scene(self, view: View) -> None:
        """Draw what changed: the body with the step and the opening alone."""
        self.plotter.subplot(0, 0)
        renderer = self.plotter.renderer
        self.drawn: Drawn = drawn_of(self.model, self.shown)
        drawn = self.drawn
        if self._body_of != body_of(self.shown):
            self._body_of = body_of(self.shown)
            for actor in self._body:
                renderer.RemoveViewProp(actor)
            parts = opened_parts(self.model, self.shown)
            self._body = add_body(self.plotter, parts, self.model.box) if parts else []
        for actor in (*self._tubes, *self._extras):
            renderer.RemoveViewProp(actor)
        self._tubes = add_fronts(self.plotter, drawn.fronts, drawn.scale, view, drawn.extras)
        self._extras = add_extras(self.plotter, drawn.fronts, view, drawn.extras)
        look_from(self.plotter, view)
        self._words()

    def _forward(self) -> None:
        """Before each drawing: opened faces must not hide the fronts from where they are seen."""
        bring_forward(self._tubes, self.drawn.fronts, self.view.towards)

    def _words(self) -> None:
        units = self.saved.evaluation.units
        self.overlay: Overlay = draw_overlay(
            self.drawn, self.view, units, self._half(), self._kept[0]
        )
        self._put("scene", 0, self.overlay.image)

    def _side(self) -> None:
        self.panel: Panel = draw_panel(
            self.saved.evaluation, self.shown, self._half(), self._kept[1]
        )
        self._put("panel", 1, self.panel.image)

    def _put(self, name: str, number: int, image: Any) -> None:
        """Lay an image, pixel on pixel, over one half of the window."""
        from vtkmodules.util.numpy_support import numpy_to_vtk
        from vtkmodules.vtkCommonDataModel import vtkImageData
        from vtkmodules.vtkFiltersSources import vtkPlaneSource
        from vtkmodules.vtkRenderingCore import vtkPolyDataMapper2D, vtkTexture, vtkTexturedActor2D

        height, width, channels = image.shape
        data = vtkImageData()
        data.SetDimensions(width, height, 1)
        rows = np.ascontiguousarray(image[::-1]).reshape(-1, channels)
        data.GetPointData().SetScalars(numpy_to_vtk(rows, deep=True))  # type: ignore[no-untyped-call]
        plane = vtkPlaneSource()
        plane.SetOrigin(0, 0, 0)
        plane.SetPoint1(width, 0, 0)
        plane.SetPoint2(0, height, 0)
        mapper = vtkPolyDataMapper2D()
        mapper.SetInputConnection(plane.GetOutputPort())
        texture = vtkTexture()
        texture.SetInputData(data)
        actor = vtkTexturedActor2D()
        actor.SetMapper(mapper)
        actor.SetTexture(texture)
        renderer = self.plotter.renderers[number]
        if name in self._images:
            renderer.RemoveViewProp(self._images[name])
        renderer.AddViewProp(actor)
        self._images[name] = actor

    # What is done to it.

    def key(self, name: str) -> None:
        """A key was pressed."""
        wish = KEYS.get(name)
        if wish is not None:
            self.do(CHANGES.get(wish, wish))

    def do(self, wish: Change | str | None) -> None:
        if wish == "save picture":
            self.save()
        elif wish == "look again":
            self._scene(self.model.view(self.shown, self._half()))
            self.plotter.render()
        elif wish == "close":
            self.plotter.iren.terminate_app()
        elif callable(wish):
            self.change(wish)

    def click(self, x: float, y: float) -> None:
        """At a pixel from the window's upper left corner."""
        width, _ = self._half()
        if x >= width:
            self.do(asked(self.panel, x - width, y, self.shown))
            return
        place = self.station_at(x, y)
        if place is not None:
            self.look(at(self.shown, place))

    def station_at(self, x: float, y: float) -> Place | None:
        """The station drawn next to a pixel of the scene, if one is near."""
        best, least = None, _NEAR
        for number, front in enumerate(self.drawn.fronts):
            away = np.hypot(*(pixels(front.positions, self.view, self._half()) - (x, y)).T)
            i = int(np.argmin(away))
            if away[i] < least:
                best, least = (number, i), float(away[i])
        return best

    def show(self) -> None:
        """Open the window and wait until it is closed."""
        self.plotter.show(interactive=False, auto_close=False)
        self.attach()
        try:
            self.plotter.iren.start()
        finally:
            self.plotter.close()

    def attach(self) -> None:
        """Listen to mouse and keys, in place of the library's own keys."""
        interactor = self.plotter.iren.interactor
        style = interactor.GetInteractorStyle()
        style.AddObserver("CharEvent", lambda *_: None)  # else "w" would draw wires, "e" end it all
        interactor.AddObserver("KeyPressEvent", lambda *_: self.key(interactor.GetKeySym()))
        interactor.AddObserver("LeftButtonPressEvent", lambda *_: self._press(), 1.0)
        # Between press and release the style alone hears of the mouse, and says so by these.
        style.AddObserver("InteractionEvent", lambda *_: self._move())
        style.AddObserver("EndInteractionEvent", lambda *_: self._release())
        self.plotter.ren_win.AddObserver("WindowResizeEvent", lambda *_: self._resized())

    def _mouse(self) -> tuple[int, int]:
        x, y = self.plotter.iren.interactor.GetEventPosition()
        return x, self.plotter.window_size[1] - 1 - y

    def _press(self) -> None:
        self._pressed = self._mouse()

    def _move(self) -> None:
        """Dragging the slider's knob; or the scene, whose words no longer fit."""
        width, _ = self._half()
        if self._pressed is None:
            return
        if self._pressed[0] < width:
            self._images["scene"].SetVisibility(False)
            return
        left, top, right, bottom = self.panel.slider
        if left <= self._pressed[0] - width <= right and top <= self._pressed[1] <= bottom:
            x = min(max(self._mouse()[0] - width, left), right)
            self.do(asked(self.panel, x, (top + bottom) / 2, self.shown))

    def _release(self) -> None:
        """After a click, or after the scene was turned or brought nearer."""
        pressed, self._pressed = self._pressed, None
        x, y = self._mouse()
        if pressed is not None and np.hypot(x - pressed[0], y - pressed[1]) <= _STILL:
            self.click(x, y)
        elif pressed is None or pressed[0] < self._half()[0]:
            self._words()
            self.plotter.render()

    def _resized(self) -> None:
        if tuple(self.panel.image.shape[1::-1]) != self._half():
            self._words()
            self._side()


def picture_without_window(saved: Saved, shown: Shown | None = None) -> Path:
    """What the window would show, as a PNG."""
    window = Window(saved, off_screen=True)
    try:
        if shown is not None:
            window.look(replace(shown))
        return window.save()
    finally:
        window.plotter.close()
