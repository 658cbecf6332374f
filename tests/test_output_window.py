"""`front3d view`: from state to what is drawn without a window; and the window on a display."""

import os
import shutil
import subprocess
import sys
import time
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from matplotlib.image import imread

from front3d.cli import main
from front3d.output import rendering
from front3d.output.folder import write_results
from front3d.output.window.panel import Panel, asked, draw_panel
from front3d.output.window.state import (
    CHANGES,
    DEPTH,
    KEYS,
    MOST,
    at,
    first_shown,
    front_of,
    next_front,
    next_station,
    next_step,
    numbers,
)
from front3d.results import Evaluation
from tests.output_models import cracked_block, elliptic_front, evaluation_of

SIZE = (700, 820)


def two_by_two() -> Evaluation:
    fronts = [
        elliptic_front(1.6, 1.2, closed=closed, step=step, front=number)
        for step in ("tension", "bending")
        for number, closed in enumerate((False, True))
    ]
    return evaluation_of(*fronts)


def middle(box: tuple[float, float, float, float]) -> tuple[float, float]:
    return (box[0] + box[2]) / 2, (box[1] + box[3]) / 2


def test_first_the_largest_K_is_shown_at_its_station() -> None:
    evaluation = two_by_two()
    shown = first_shown(evaluation)
    front = front_of(evaluation, shown)
    assert front.K[shown.station, 0] == np.max([f.K[:, 0].max() for f in evaluation.fronts])


def test_steps_and_fronts_go_around_and_stations_as_the_front_does() -> None:
    evaluation = two_by_two()
    shown = replace(first_shown(evaluation), step=0, front=0, station=0)
    assert next_step(evaluation, next_step(evaluation, shown)) == shown
    assert next_front(evaluation, shown).front == 1
    assert next_front(evaluation, next_front(evaluation, shown)).front == 0
    assert next_station(evaluation, shown, -1).station == 0  # an open front ends
    closed = replace(shown, front=1)
    assert next_station(evaluation, closed, -1).station == 40  # a closed one goes on


def test_the_numbers_are_those_of_the_station() -> None:
    evaluation = two_by_two()
    shown = replace(first_shown(evaluation), step=0, front=0, station=7)
    front = evaluation.fronts[0]
    text = "\n".join(numbers(evaluation, shown))
    assert "station 7 of 41" in text
    for value in (*front.K[7], front.G[7], front.s[7]):
        assert f"{value:.4g}" in text


@pytest.mark.slow
def test_a_kept_chart_gives_the_same_panel_and_an_other_station_another() -> None:
    evaluation = two_by_two()
    shown = first_shown(evaluation)
    kept: dict[Any, Panel] = {}
    panels = [draw_panel(evaluation, shown, SIZE, kept) for _ in range(2)]
    assert len(kept) == 1
    assert np.array_equal(panels[0].image, draw_panel(evaluation, shown, SIZE).image)
    assert np.array_equal(panels[0].image, panels[1].image)
    other = draw_panel(evaluation, replace(shown, station=3), SIZE, kept)
    assert len(kept) == 1
    assert (other.image != panels[0].image).any(axis=2).sum() > 500


@pytest.fixture(scope="module")
def panel() -> Panel:
    evaluation = two_by_two()
    return draw_panel(evaluation, first_shown(evaluation), SIZE)


def test_every_button_does_what_its_words_say(panel: Panel) -> None:
    evaluation = two_by_two()
    shown = first_shown(evaluation)
    assert {"K_I", "K_II", "K_III", "G", "psi", "flag", "next step", "next front"} <= set(
        panel.spots
    )
    for name, box in panel.spots.items():
        wish = asked(panel, *middle(box), shown)
        assert wish == CHANGES.get(name, name)
        assert name in KEYS.values()  # and a key does, too
        if callable(wish) and name != shown.quantity:
            assert wish(evaluation, shown) != shown
    assert asked(panel, 1, 1, shown) is None


def test_a_click_on_the_curve_picks_that_station(panel: Panel) -> None:
    evaluation = two_by_two()
    shown = first_shown(evaluation)
    for i in (0, 11, 40):
        wish = asked(panel, *(panel.stations[i] + (2, -2)), shown)
        assert callable(wish)
        assert wish(evaluation, shown) == at(shown, (shown.front, i))


def test_the_slider_opens_from_nought_to_its_most(panel: Panel) -> None:
    evaluation = two_by_two()
    shown = first_shown(evaluation)
    left, top, right, bottom = panel.slider
    for part in (0.0, 0.25, 1.0):
        wish = asked(panel, left + part * (right - left), (top + bottom) / 2, shown)
        assert callable(wish)
        assert wish(evaluation, shown).opening == pytest.approx(part * MOST)


@pytest.mark.slow
@pytest.mark.parametrize("quantity", ["K_I", "G", "psi", "flag"])
@pytest.mark.parametrize("against", ["position", DEPTH])
def test_no_words_of_the_panel_overlap_or_are_cut(quantity: str, against: str) -> None:
    evaluation = two_by_two()
    shown = replace(first_shown(evaluation), quantity=quantity, against=against, front=0)
    below, over = draw_panel(evaluation, shown, SIZE).figures
    boxes = [text.get_window_extent() for text in (*below.texts, *over.texts)]
    boxes += [text.get_window_extent() for text in below.axes[1].texts]
    boxes.append(below.axes[0].get_tightbbox())
    for i, box in enumerate(boxes):
        assert box.x0 >= 0 and box.x1 <= SIZE[0] and box.y0 >= 0 and box.y1 <= SIZE[1]
        assert not any(box.overlaps(other) for other in boxes[i + 1 :])


def written(folder: Path) -> Path:
    """Results of a block with a crack, with everything that `view` needs but no pictures' files."""
    fronts = [elliptic_front(1.6, 1.2, closed=False, step=step) for step in ("tension", "bending")]
    solid = cracked_block(1.6, 1.2)
    step = solid.steps[0]
    solid = replace(solid, steps=(step, replace(step, name="bending")))
    write_results(evaluation_of(*fronts), solid, folder)
    return folder


@pytest.mark.slow
def test_without_a_display_it_says_so_and_saves_a_picture(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.delenv("DISPLAY", raising=False)
    folder = written(tmp_path)
    assert main(["view", str(folder)]) == 0
    out = capsys.readouterr().out
    assert "there is no display" in out
    image = imread(folder / "view_K_I_tension_front0.png")[:, :, :3]
    left = image[130:700, :580].reshape(-1, 3)
    assert (np.ptp(left, axis=1) > 0.3).sum() > 800  # the coloured front
    assert (left.min(axis=1) < 0.9).mean() > 0.1  # the body
    assert (image[:, 700:].min(axis=2) < 0.5).sum() > 3000  # the chart

    # Without the skin it draws the front alone; without a graphics library, the chart alone.
    (folder / "skin.vtp").unlink()
    assert main(["view", str(folder)]) == 0
    monkeypatch.setattr(rendering, "why_no_pictures", lambda: "no graphics library")
    assert main(["view", str(folder)]) == 0
    assert "no graphics library" in capsys.readouterr().out
    assert (folder / "view_K_I.png").stat().st_size > 10_000


@pytest.fixture
def display() -> Iterator[str]:
    """A virtual display; Xvfb chooses a free number and says which."""
    program = shutil.which("Xvfb")
    if program is None:
        pytest.skip("Xvfb is not installed (Debian: apt-get install xvfb)")
    reading, writing = os.pipe()
    server = subprocess.Popen(
        [program, "-displayfd", str(writing), "-screen", "0", "1600x1000x24", "-nolisten", "tcp"],
        pass_fds=(writing,),
        stderr=subprocess.DEVNULL,
    )
    os.close(writing)
    try:
        with os.fdopen(reading) as stream:
            yield f":{stream.readline().strip()}"
    finally:
        server.terminate()
        server.wait(timeout=20)


def environment_of(display: str) -> dict[str, str]:
    """That of a process on a display; this one may have been set to draw without any."""
    kept = {k: v for k, v in os.environ.items() if k != "VTK_DEFAULT_OPENGL_WINDOW"}
    return kept | {"DISPLAY": display}


DRIVE = """
import sys
from pathlib import Path
from front3d.output.saved import read_saved
from front3d.output.scene.camera import pixels
from front3d.output.window.display import why_no_window
from front3d.output.window.screen import Window

assert why_no_window() is None
window = Window(read_saved(Path(sys.argv[1])))
window.plotter.show(interactive=False, auto_close=False)
window.attach()
interactor = window.plotter.iren.interactor
height = window.plotter.window_size[1]

def click(x, y):
    interactor.SetEventInformation(int(x), int(height - 1 - y))
    interactor.InvokeEvent("LeftButtonPressEvent")
    interactor.InvokeEvent("LeftButtonReleaseEvent")

def press(name):
    interactor.SetKeySym(name)
    interactor.InvokeEvent("KeyPressEvent")
    interactor.InvokeEvent("CharEvent")

half = window.plotter.window_size[0] // 2
left, top, right, bottom = window.panel.spots["K_II"]
click(half + (left + right) / 2, (top + bottom) / 2)
assert window.shown.quantity == "K_II", window.shown
before = window.shown
x, y = pixels(window.drawn.fronts[0].positions[9], window.view, (half, height))
click(x, y)  # a station, in the scene
assert window.shown.station == 9 != before.station, window.shown
click(half + window.panel.stations[30][0], window.panel.stations[30][1])  # and in the chart
assert window.shown.station == 30, window.shown
press("n")
assert window.shown.step == 1, window.shown

def drag(*way):
    for event, (x, y) in zip(("LeftButtonPressEvent", "MouseMoveEvent", "MouseMoveEvent"), way):
        interactor.SetEventInformation(int(x), int(height - 1 - y))
        interactor.InvokeEvent(event)
    hidden.append(not window._images["scene"].GetVisibility())
    interactor.InvokeEvent("LeftButtonReleaseEvent")

# The slider's knob: what is drawn follows it, up to the end of the slider.
hidden = []
left, top, right, bottom = window.panel.slider
middle, knob = (top + bottom) / 2, half + (left + right) / 2
flat = window._body
drag((knob, middle), (knob + 30, middle + 5), (half + right + 40, middle))
assert window.shown.opening == 2.0, window.shown
assert window._body is not flat and hidden == [False], hidden

# Turning the scene: its words are hidden meanwhile, and come back where they belong.
eye = window.view.towards
drag((200, 400), (230, 420), (260, 430))
assert hidden[-1] and window._images["scene"].GetVisibility()
assert abs(window.view.towards @ eye) < 0.9999

# A smaller window: the panel is drawn anew, and its buttons are where they are drawn.
window.plotter.ren_win.SetSize(1200, 760)
window.plotter.ren_win.Render()
interactor.SetSize(1200, 760)
interactor.ProcessEvents()
half, height = window.plotter.window_size[0] // 2, window.plotter.window_size[1]
assert (half, height) == (600, 760), (half, height)
assert window.panel.image.shape[:2] == (760, 600), window.panel.image.shape
left, top, right, bottom = window.panel.spots["G"]
click(half + (left + right) / 2, (top + bottom) / 2)
assert window.shown.quantity == "G", window.shown
press("2")
press("s")
print("saved", window.written[0].name)
window.plotter.close()
"""


@pytest.mark.slow
def test_the_window_opens_and_is_driven_by_clicks_and_keys(tmp_path: Path, display: str) -> None:
    folder = written(tmp_path)
    ran = subprocess.run(
        [sys.executable, "-c", DRIVE, str(folder)],
        env=environment_of(display),
        capture_output=True,
        text=True,
        timeout=300,
    )
    assert ran.returncode == 0, ran.stderr
    name = "view_K_II_bending_front0.png"
    assert f"saved {name}" in ran.stdout
    image = imread(folder / name)[:, :, :3]
    assert (np.ptp(image[130:700, :580], axis=2) > 0.3).sum() > 800


@pytest.mark.slow
def test_the_command_keeps_its_window_open_until_it_is_closed(tmp_path: Path, display: str) -> None:
    running = subprocess.Popen(
        [sys.executable, "-m", "front3d", "view", str(written(tmp_path))],
        env=environment_of(display),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    try:
        time.sleep(20)
        assert running.poll() is None, running.communicate()
    finally:
        running.kill()
        running.communicate()
