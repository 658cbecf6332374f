"""The picture: its parts, its view and its scale; and that a lack of graphics is survived."""

import io
import subprocess
import sys
from typing import Any

import matplotlib.image
import numpy as np
import pytest

from front3d.output import rendering
from front3d.output.scene import close_up, colour_scale, place_for_words, scene_png
from front3d.output.view import best_view, skin
from front3d.results import FrontResult
from tests.output_models import MILLIMETRES, cracked_block, elliptic_front

SURFACE = elliptic_front(1.6, 1.2, closed=False)
EMBEDDED = elliptic_front(1.6, 1.2, closed=True, centre=2.0)


def with_K(front: FrontResult, K: Any) -> FrontResult:
    fields = {name: getattr(front, name) for name in front.__slots__}
    return FrontResult(**fields | {"K": K})


def test_crack_faces_are_parted_from_the_outside() -> None:
    # 8 x 4 x 8 block: the outside has 2 (8 4 + 8 8 + 4 8) = 256 of area; the crack is flat.
    parts = skin(cracked_block(1.6, 1.2), (SURFACE,))
    assert parts.outside.area == pytest.approx(256.0)
    assert np.abs(parts.crack.points[:, 2]).max() < 1e-12
    both = parts.crack.area
    # Both faces of a half ellipse, stepped outwards by less than a brick of 1/3.
    assert np.pi * 1.6 * 1.2 < both < np.pi * (1.6 + 0.34) * (1.2 + 0.34)


def test_crack_faces_of_a_half_model() -> None:
    whole = cracked_block(1.6, 1.2)
    above = [b.nodes[whole.points[b.nodes].mean(axis=1)[:, 2] > 0] for b in whole.blocks]
    block = type(whole.blocks[0])("hexahedron", above[0])
    half = type(whole)(whole.points, (block,), source="half")
    parts = skin(half, (SURFACE,))
    assert parts.crack.n_cells > 0
    assert np.abs(parts.crack.points[:, 2]).max() < 1e-12
    # The plane z = 0 holds the crack and the ligament: only the former is taken.
    assert 0.8 < parts.crack.area / (np.pi * 1.6 * 1.2 / 2) < 1.2


def test_surface_crack_is_seen_from_its_mouth_and_from_above() -> None:
    corners = cracked_block(1.6, 1.2).points
    view = best_view(SURFACE, corners)
    assert view.towards[1] < -0.5  # the mouth lies in y = 0, the solid in y > 0
    assert 0.3 < view.towards[2] < 0.9
    assert view.towards @ view.up == pytest.approx(0.0, abs=1e-12)


@pytest.mark.parametrize("front", [SURFACE, EMBEDDED])
@pytest.mark.parametrize("flat", [1.0, 0.1], ids=["block", "thin"])  # height, width govern
def test_everything_fits_into_the_picture(front: FrontResult, flat: float) -> None:
    low, high = close_up(front.positions, cracked_block(1.6, 1.2).points * (1, 1, flat))
    points = np.array(np.meshgrid(*zip(low, high, strict=True))).reshape(3, -1).T
    view = best_view(front, points)
    right = np.cross(view.up, view.towards)
    across, upwards = (points - view.focus) @ right, (points - view.focus) @ view.up
    assert np.abs(upwards).max() <= view.half_height * (1 + 1e-9)
    assert np.abs(across).max() <= view.half_height * 4 / 3 * (1 + 1e-9)
    assert (low <= front.positions.min(axis=0)).all()


def test_scatter_does_not_fill_the_colour_scale() -> None:
    K = np.zeros_like(EMBEDDED.K)
    K[:, 0] = 100.0 + 0.1 * np.cos(np.arange(len(K)))
    scale = colour_scale((with_K(EMBEDDED, K),))
    assert scale.high - scale.low >= 10.0
    assert scale.low < 99.9 < 100.1 < scale.high


def test_a_front_under_shear_shows_the_mode_that_counts() -> None:
    K = np.zeros_like(EMBEDDED.K)
    K[:, 1] = 50.0
    assert colour_scale((with_K(EMBEDDED, K),)).mode == 1
    assert colour_scale((EMBEDDED,)).mode == 0


def test_words_stand_clear_of_the_front_and_inside_the_panel() -> None:
    angle = np.linspace(0, 2 * np.pi, 200)
    circle = np.stack([520 + 300 * np.cos(angle), 390 + 180 * np.sin(angle)], axis=1)
    for peak in circle[::10]:
        x, y = place_for_words(peak, circle, lines=3)
        # 3 lines of words of 13 points are about 300 x 150 pixels of the panel of 1040 x 780.
        assert 150 <= x <= 890
        assert 75 <= y <= 705
        assert not ((np.abs(circle - (x, y)) < (150, 75)).all(axis=1)).any()


def test_without_a_graphics_library_a_sentence_says_what_to_install(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    crash = "import os, signal; os.kill(os.getpid(), signal.SIGSEGV)"
    monkeypatch.setattr(rendering, "_TRIAL", crash)
    rendering.why_no_pictures.cache_clear()
    try:
        reason = rendering.why_no_pictures()
    finally:
        rendering.why_no_pictures.cache_clear()
    assert reason is not None
    assert "crashed" in reason
    assert "apt-get install libegl1 libgl1-mesa-dri libx11-6" in reason


def test_importing_the_output_draws_nothing() -> None:
    # matplotlib and pyvista cost seconds: they are loaded when something is drawn.
    code = "import sys, front3d.output.folder; print({'matplotlib', 'pyvista'} & set(sys.modules))"
    ran = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert ran.stdout.strip() == "set()"


@pytest.mark.slow
@pytest.mark.parametrize(("front", "embedded"), [(SURFACE, False), (EMBEDDED, True)])
def test_the_picture_shows_body_crack_and_coloured_front(
    front: FrontResult, embedded: bool
) -> None:
    assert rendering.why_no_pictures() is None
    png = scene_png(cracked_block(1.6, 1.2, embedded=embedded), (front,), MILLIMETRES)
    image = matplotlib.image.imread(io.BytesIO(png))[:, :, :3]
    assert image.shape == (900, 1200, 3)
    panel = image[90:820, :900].reshape(-1, 3)
    colourful = np.ptp(panel, axis=1)
    assert (panel.min(axis=1) < 0.97).mean() > 0.1  # not an empty page
    assert (colourful > 0.3).sum() > 1500  # the tube
    warm = (panel[:, 0] - panel[:, 2] > 0.08) & (colourful < 0.3)
    assert warm.sum() > 10_000  # the crack faces
