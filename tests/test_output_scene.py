"""The picture: its parts, its view and its scale; and that a lack of graphics is survived."""

import io
import subprocess
import sys
from typing import Any

import matplotlib.image
import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg

from front3d.output import rendering
from front3d.output.scene import best_view, close_up, colour_scale, colours, scene_png, skin
from front3d.output.scene.camera import pixels
from front3d.output.scene.cutting import cut_to_box
from front3d.output.scene.geometry import moved, opened, opening_factor, tube
from front3d.output.scene.labels import half_box, place_for_words
from front3d.output.scene.quantity import QUANTITIES, Scale, shown_value, values_of
from front3d.output.scene.still import Look, scene_figure, view_of
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
    assert scale.low < 99.9
    assert scale.high == K[:, 0].max()  # the peak has the last colour


def test_scatter_around_nought_has_no_colours_and_no_digits() -> None:
    K = np.zeros_like(EMBEDDED.K)
    K[:, 0] = 100.0
    K[:, 1] = 5e-3 * np.cos(np.arange(len(K)))
    front = with_K(EMBEDDED, K)
    assert colour_scale((front,), "K_II") == Scale("K_II", -1.0, 1.0)
    assert shown_value((front,), front, 0, "K_II") == 0.0


def test_a_front_under_shear_shows_the_mode_that_counts() -> None:
    K = np.zeros_like(EMBEDDED.K)
    K[:, 1] = 50.0
    assert colour_scale((with_K(EMBEDDED, K),)).mode == 1
    assert colour_scale((EMBEDDED,)).mode == 0


def test_words_stand_clear_of_the_front_and_inside_the_panel() -> None:
    angle = np.linspace(0, 2 * np.pi, 200)
    circle = np.stack([520 + 300 * np.cos(angle), 390 + 180 * np.sin(angle)], axis=1)
    half = half_box("largest $K_I$\n386.8 MPa mm12\n12.23 MPa")
    for peak in circle[::10]:
        x, y = place_for_words(peak, circle, half)
        assert half[0] - 1 <= x <= 1041 - half[0]
        assert half[1] - 1 <= y <= 781 - half[1]
        assert not (np.abs(circle - (x, y)) < half).all(axis=1).any()
        # A second box for the same place keeps off the first.
        other = place_for_words(peak, circle, half, taken=[(np.array((x, y)), half)])
        assert (np.abs(np.array(other) - (x, y)) >= 2 * half).any()


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
    # matplotlib and pyvista cost seconds: they are loaded when something is drawn.  Nor is the
    # handbook loaded before something is compared.
    costly = {
        "matplotlib", "pyvista", "front3d.output.charts", "front3d.output.scene", "front3d.handbook"
    }  # fmt: skip
    code = (
        "import sys, front3d.output.folder, front3d.pipeline; "
        f"print({costly} & set(sys.modules) or set())"
    )
    ran = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert ran.stdout.strip() == "set()"


def test_the_faces_open_by_half_the_jump_each_and_the_front_stays() -> None:
    # The block's upper points at z = 0 are moved by 1e-3 against the lower ones.
    parts = skin(cracked_block(1.6, 1.2), (SURFACE,))
    half = np.asarray(parts.crack.point_data["opening_0"])
    moved = np.abs(half[:, 2]) > 1e-9
    assert np.abs(half[moved, 2]) == pytest.approx(5e-4)
    assert set(np.sign(half[moved, 2])) == {-1.0, 1.0}
    assert np.abs(half[:, :2]).max() < 1e-12
    # The outside goes with the mouth, and does not move far from it.
    outside = np.asarray(parts.outside.point_data["opening_0"])
    mouth = np.abs(outside[:, 2]) > 4.99e-4
    assert mouth.any()
    assert np.abs(np.asarray(parts.outside.points)[mouth][:, 2]).max() < 1e-9
    assert np.abs(outside[np.abs(parts.outside.points[:, 2]) > 1.0]).max() == 0.0
    assert opened(parts, 0, 200.0).crack.bounds[5] == pytest.approx(0.1, rel=1e-5)
    assert opening_factor(1e-3, 4.0) == 200.0  # 1, 2, 5 times 10^n, 0.12 of the size at most
    assert opening_factor(0.0, 4.0) == 0.0


def test_a_box_cuts_a_surface_and_leaves_coincident_points_apart() -> None:
    import pyvista as pv

    sheet: Any = pv.Plane(i_size=4, j_size=4, i_resolution=5, j_resolution=3).triangulate()
    sheet.point_data["value"] = np.stack([sheet.points[:, 0]] * 3, axis=1)
    both = pv.merge([sheet, sheet], merge_points=False)
    cut = cut_to_box(both, np.array([-0.7, -1.1, -1]), np.array([1.3, 0.9, 1]))
    assert cut.area == pytest.approx(2 * 2.0 * 2.0)
    assert cut.bounds[:4] == pytest.approx((-0.7, 1.3, -1.1, 0.9))
    assert cut.point_data["value"][:, 0] == pytest.approx(cut.points[:, 0], abs=1e-6)
    assert len(cut.split_bodies()) == 2


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_the_largest_value_has_the_last_colour(quantity: str) -> None:
    front = with_flags(SURFACE)
    scale = colour_scale((front,), quantity)
    drawn = tube(front, scale, 0.02)
    values = values_of(front, quantity, scale.words)
    end = 0.5 if scale.words else 0.0
    assert scale.high == pytest.approx(values.max() + end)
    assert drawn["value"].max() == pytest.approx(values.max())
    assert drawn["value"].min() == pytest.approx(values.min())


def test_the_colours_grow_darker_with_the_value() -> None:
    # So that a grey print, and a reader who is blind to colours, sees the same order.
    grey = colours()(np.linspace(0, 1, 50))[:, :3] @ (0.2126, 0.7152, 0.0722)
    assert (np.diff(grey) < 0).all()


def with_flags(front: FrontResult) -> FrontResult:
    fields = {name: getattr(front, name) for name in front.__slots__}
    flags = ("free surface", *[""] * (len(front) - 2), "free surface")
    return FrontResult(**fields | {"flags": flags})


@pytest.mark.slow
@pytest.mark.parametrize("quantity", ["K_I", "psi", "flag"])
def test_boxes_of_words_do_not_overlap_and_the_peak_is_dark(quantity: str) -> None:
    # Opened: the stepped crack of this block reaches beyond the front, and lies over it.
    look = Look(quantity, rings=True, ribbon=quantity != "K_I")
    block, front = cracked_block(1.6, 1.2), with_flags(SURFACE)
    figure = scene_figure(block, (front,), MILLIMETRES, look)
    FigureCanvasAgg(figure).draw()
    panel, *others = figure.axes
    words = [text for text in panel.texts if text.get_bbox_patch() is not None]
    assert len(words) == (0 if quantity == "flag" else 2)
    boxes = [text.get_bbox_patch().get_window_extent() for text in words]
    letters = [t for t in panel.texts if t not in words and t.get_text()]
    assert len(letters) >= (2 if quantity == "flag" else 5)
    boxes += [t.get_window_extent().padded(-2) for t in letters]
    boxes += [axes.get_tightbbox() for axes in others] + [
        t.get_window_extent() for t in figure.texts
    ]
    for i, box in enumerate(boxes):
        assert figure.bbox.containsx(box.x0) and figure.bbox.containsx(box.x1)
        assert figure.bbox.containsy(box.y0) and figure.bbox.containsy(box.y1)
        assert not any(box.overlaps(other) for other in boxes[i + 1 :])
    if quantity == "K_I":
        image = panel.images[0].get_array()
        (near,) = moved((front,), -front.positions.mean(axis=0))
        box = close_up(near.positions, block.points - front.positions.mean(axis=0))
        peak = int(np.argmax(front.K[:, 0]))
        places = pixels(near.positions, view_of((near,), box, ((0, peak),)), (1040, 780))
        around = [
            image[y - 5 : y + 6, x - 5 : x + 6].reshape(-1, 3).astype(int)
            for x, y in places.astype(int)
        ]
        # At the largest K the tube has the last colour, dark violet, as lit: blue over green.
        dark = around[peak - 3]
        assert ((dark[:, 2] - dark[:, 1] > 40) & (dark.max(axis=1) < 170)).any()
        # And nothing hides it anywhere: body, crack and arrows have less colour than its darkest.
        assert all((np.ptp(part, axis=1) > 60).any() for part in around)
        # The dots on the largest and smallest value have the colours of the ends of the scale.
        dots = [line for line in panel.lines if line.get_marker() == "o"]
        ends = colours()([1.0, 0.0])
        assert [line.get_markerfacecolor() for line in dots] == [tuple(c) for c in ends]


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
