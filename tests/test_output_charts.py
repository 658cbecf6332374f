"""The charts: what they show, read from the drawn objects and from the finished picture."""

import io
from dataclasses import replace
from typing import Any
from xml.etree import ElementTree

import matplotlib.image
import numpy as np
import pytest

from front3d.output.charts import charts_of
from front3d.output.charts.along import along_front
from front3d.output.charts.mix import mode_mix
from front3d.output.charts.style import layer_lengths, mathtext, plain_text, png, svg
from front3d.results import FrontResult, MethodResult
from front3d.units import Units
from tests.chart_models import BUSY, SURFACE, contrast_on_white, drawn, lines, steps
from tests.output_models import MILLIMETRES, STEEL, elliptic_front, evaluation_of, through_front

# --- along the front -------------------------------------------------------------------------


def test_curves_are_the_K_of_the_table_by_every_method() -> None:
    panels = along_front(BUSY, MILLIMETRES).axes
    assert len(panels) == 2  # K_III is nought throughout
    for k, axes in enumerate(panels):
        found = lines(axes)
        expected = {
            "reported (interaction integral)": BUSY.K,
            "closure": BUSY.methods["closure"].K,
            "opening profile": BUSY.methods["opening"].K,
            "Newman and Raju (1981)": BUSY.comparisons[0].K,
        }
        for name, K in expected.items():
            assert np.array_equal(found[name].get_xdata(), BUSY.s_rel)
            assert np.array_equal(found[name].get_ydata(), K[:, k], equal_nan=True)
        widths = {name: found[name].get_linewidth() for name in expected}
        assert max(widths, key=lambda name: widths[name]) == "reported (interaction integral)"


def test_a_method_looks_alike_whichever_is_reported() -> None:
    by_closure = replace(BUSY, K=BUSY.methods["closure"].K, sources=("closure",) * len(BUSY))

    def looks(front: FrontResult) -> dict[str, Any]:
        found = lines(along_front(front, MILLIMETRES).axes[0])
        return {name: (line.get_color(), line.get_marker()) for name, line in found.items()}

    one, other = looks(BUSY), looks(by_closure)
    assert one["closure"] == other["reported (closure)"]
    assert one["reported (interaction integral)"] == other["interaction integral"]
    assert one["opening profile"] == other["opening profile"]


def test_stations_by_another_method_are_marked() -> None:
    sources = ("interaction",) * 3 + ("closure",) * (len(BUSY) - 6) + ("interaction",) * 3
    figure = along_front(replace(BUSY, sources=sources), MILLIMETRES)
    marked = lines(figure.axes[0])["K from closure"]
    assert np.array_equal(marked.get_xdata(), BUSY.s_rel[3:-3])
    said = " ".join(" ".join(text.get_text() for text in figure.texts).split())
    assert f"At {len(BUSY) - 6} of {len(BUSY)} stations K is not the interaction" in said


def test_legend_stays_within_the_figure_and_names_are_whole() -> None:
    name = "Sneddon (1946), Kassir and Sih (1966), as extended"
    twice = tuple(replace(BUSY.comparisons[0], source=f"{name} {k}") for k in "ab")
    sources = ("interaction",) + ("closure",) * (len(BUSY) - 1)
    figure = along_front(replace(BUSY, sources=sources, comparisons=twice), MILLIMETRES)
    figure.draw_without_rendering()
    box, (width, _) = figure.legends[0].get_window_extent(), figure.canvas.get_width_height()
    assert box.x0 >= 0
    assert box.x1 <= width
    entries = [text.get_text() for text in figure.legends[0].get_texts()]
    assert f"{name} a" in entries


def test_a_short_front_is_shaded_at_its_ends_only() -> None:
    """Of five stations the layer holds the ends alone: it is drawn half the way to the next."""
    front = elliptic_front(1.6, 1.2, closed=False, n=5, ends=("free surface", "free surface"))
    first, last = layer_lengths(front)
    assert (first, last) == pytest.approx((front.s[1] / 2, (front.length - front.s[-2]) / 2))


def test_ring_band_is_the_range_of_the_compared_rings() -> None:
    band = along_front(SURFACE, MILLIMETRES).axes[0].collections[0]
    (path,) = band.get_paths()
    rings = SURFACE.methods["interaction"].rings
    assert rings is not None
    assert path.vertices[:, 1].max() == rings.K[1:, :, 0].max()
    assert path.vertices[:, 1].min() == rings.K[1:, :, 0].min()


def test_a_closed_front_comes_back_to_its_start() -> None:
    front = elliptic_front(1.5, 1.0, closed=True)
    line = lines(along_front(front, Units()).axes[0])["reported (interaction integral)"]
    assert line.get_xdata()[-1] == 1.0
    assert line.get_ydata()[-1] == front.K[0, 0]


def test_units_ends_layer_and_caution_are_written() -> None:
    figure = drawn("along")
    first, *_, last = figure.axes
    assert "MPa" in first.get_ylabel() and "mm" in first.get_ylabel()
    assert "mm" in last.get_xlabel()
    assert [text.get_text() for text in last.texts] == ["free surface", "free surface"]
    assert any("engineering aid" in text.get_text() for text in figure.texts)
    entries = {text.get_text() for text in figure.legends[0].get_texts()}
    assert {"flagged", "free-surface layer", "range over rings"} <= entries
    assert "No panel for $K_{III}$: below 0.01 %" in figure.texts[1].get_text()
    unnamed = along_front(SURFACE, Units())
    assert "[" not in unnamed.axes[0].get_ylabel()


def test_the_mode_that_counts_has_the_high_panel_and_those_of_noise_have_none() -> None:
    noise = np.random.default_rng(3).normal(size=len(SURFACE)) * 1e-3
    K = np.stack([noise, 0.3 * SURFACE.K[:, 0], SURFACE.K[:, 0]], axis=1)
    front = replace(SURFACE, K=K, methods={"interaction": MethodResult("interaction", K)})
    figure = along_front(front, MILLIMETRES)
    names = [axes.get_ylabel().split("\n")[0] for axes in figure.axes]
    assert names == ["$K_{II}$", "$K_{III}$"]
    figure.draw_without_rendering()
    low, high = (axes.get_window_extent().height for axes in figure.axes)
    assert high > 1.5 * low
    # Noise by one method only is a disagreement, and is shown.
    other = MethodResult("closure", K + np.array([1.0, 0, 0]))
    figure = along_front(replace(front, methods=front.methods | {"closure": other}), MILLIMETRES)
    assert len(figure.axes) == 3


def test_a_curve_that_leaves_its_panel_is_named() -> None:
    K = np.array(SURFACE.K)
    K[0, 0] = 3 * K[:, 0].max()
    front = replace(SURFACE, methods=SURFACE.methods | {"opening": MethodResult("opening", K)})
    words = along_front(front, MILLIMETRES).texts[1].get_text()
    assert "Beyond the panel at an end of the front: opening profile." in words
    assert "Beyond" not in along_front(SURFACE, MILLIMETRES).texts[1].get_text()


def test_noise_of_K_I_and_K_II_under_mode_III_is_no_angle() -> None:
    noise = np.random.default_rng(4).normal(size=(len(SURFACE), 2)) * 1e-3
    front = replace(SURFACE, K=np.column_stack([noise, SURFACE.K[:, 0]]))
    figure = mode_mix(front, MILLIMETRES, STEEL)
    for axes, name in (
        (figure.axes[0], r"$\psi$ = atan2($K_{II}$, $K_I$)"),
        (figure.axes[1], "kink, MTS"),
    ):
        assert np.isnan(lines(axes)[name].get_ydata()).all()
    assert lines(figure.axes[1])["twist, 3D"].get_ydata() == pytest.approx(45, abs=0.01)
    assert "mode III alone" in figure.texts[1].get_text()


def test_pure_mode_I_has_a_panel_of_G_only_and_says_so() -> None:
    figure = mode_mix(replace(SURFACE, K=SURFACE.K * (1, 1e-4, 1e-4)), MILLIMETRES, STEEL)
    assert [axes.get_ylabel()[:9] for axes in figure.axes] == ["G by mode"]
    assert "Pure mode I" in figure.texts[1].get_text()


def test_parametric_angle_stands_above_where_the_front_is_an_ellipse() -> None:
    (angles,) = [
        child
        for child in drawn("along").axes[0].child_axes
        if "angle" in child.xaxis.label.get_text()
    ]
    labels = [label.get_text() for label in angles.get_xticklabels()]
    ticks = dict(zip(labels, angles.get_xticks(), strict=True))
    assert list(ticks) == [f"{angle}\N{DEGREE SIGN}" for angle in range(0, 91, 15)]
    # at the station whose angle on the ellipse is 45 degrees
    angle = np.arctan2(BUSY.positions[:, 1] / 4, BUSY.positions[:, 0] / 6)
    nearest = int(np.argmin(np.abs(angle - np.pi / 4)))
    assert ticks["45\N{DEGREE SIGN}"] == pytest.approx(BUSY.s_rel[nearest], abs=0.01)
    straight = along_front(through_front(), MILLIMETRES).axes[0].child_axes
    assert not [child for child in straight if "angle" in child.xaxis.label.get_text()]


def test_scatter_of_a_small_mode_is_not_blown_up() -> None:
    """A mode of 1 % of the largest K takes a tenth of its panel at the most."""
    K = np.array(SURFACE.K)
    K[:, 1] = 4 * np.cos(40 * SURFACE.s_rel)
    front = replace(SURFACE, K=K)
    low, high = along_front(front, MILLIMETRES).axes[1].get_ylim()
    assert high - low >= 0.1 * np.abs(K).max()


# --- over the depth --------------------------------------------------------------------------


def test_depth_chart_shares_its_depth_with_the_section() -> None:
    figure = drawn("surface")
    section, chart = figure.axes
    assert section.get_ylim() == chart.get_ylim()
    assert section.get_ylim()[0] > section.get_ylim()[1]  # downwards
    assert section.get_position().y0 == chart.get_position().y0
    assert section.get_position().height == chart.get_position().height
    down, up = (line for name, line in lines(chart).items() if name.startswith("$K_I$"))
    front = elliptic_front(1.6, 1.2, closed=False)
    joined = np.concatenate([down.get_xdata(), up.get_xdata()[1:]])
    assert np.array_equal(joined, front.K[:, 0])
    depth = np.concatenate([down.get_ydata(), up.get_ydata()[1:]])
    assert depth == pytest.approx(front.positions[:, 1], abs=1e-12)


def test_section_is_true_to_scale_or_says_how_far_it_is_not() -> None:
    for name in ("corner", "surface"):
        figure = drawn(name)
        axes = figure.axes[0]
        box = axes.get_window_extent()
        width = box.width / np.ptp(axes.get_xlim())
        height = box.height / abs(np.ptp(axes.get_ylim()))
        label = axes.get_xlabel()
        if "narrower" in label:
            said = float(label.split("drawn ")[1].split(" ")[0])
            assert height / width == pytest.approx(said, rel=0.05)
        else:
            assert height / width == pytest.approx(1.0, abs=0.021)
    assert "narrower" in drawn("surface").axes[0].get_xlabel()
    assert "narrower" not in drawn("corner").axes[0].get_xlabel()


# --- mode mix and steps ----------------------------------------------------------------------


def test_mix_chart_shows_angles_and_a_split_that_sums_to_G() -> None:
    front = through_front()
    figure = mode_mix(front, MILLIMETRES, STEEL)
    angles, ways, energy = figure.axes
    psi = lines(angles)[r"$\psi$ = atan2($K_{II}$, $K_I$)"]
    assert psi.get_ydata() == pytest.approx(np.degrees(np.arctan2(front.K[:, 1], front.K[:, 0])))
    assert set(lines(ways)) == {"kink, MTS", "kink, 3D", "twist, 3D"}
    assert lines(energy)["G, sum"].get_ydata() == pytest.approx(front.G)
    assert "MPa mm" in energy.get_ylabel()
    words = figure.texts[1].get_text().replace("\n", " ")
    assert "Erdogan and Sih (1963)" in words and "Kullmer and Fulland (2002)" in words


def test_stations_without_a_direction_are_counted() -> None:
    front = through_front()
    K = np.array(front.K)
    K[:3, 0] = -400
    figure = mode_mix(replace(front, K=K), MILLIMETRES, STEEL)
    assert f"3 of {len(front)} stations have no direction" in figure.texts[1].get_text()
    assert np.isnan(lines(figure.axes[1])["kink, 3D"].get_ydata()[:3]).all()


@pytest.mark.slow
def test_steps_are_a_family_from_light_to_dark() -> None:
    figure = drawn("seven steps")
    family = [line for line in figure.axes[0].lines if len(line.get_xdata()) == len(SURFACE)]
    assert len(family) == 7
    contrasts = [contrast_on_white(line.get_color()) for line in family]
    assert contrasts == sorted(contrasts)
    entries = [text.get_text() for text in figure.legends[0].get_texts()]
    assert entries[:3] == [
        "step 1 of 7: step1.0",
        "step 4 of 7: step1.5",
        "step 7 of 7: step2.0",
    ]


def test_stations_stand_against_time_or_against_load_cases_without_order() -> None:
    times, cases = drawn("times"), drawn("load cases")
    (curve,) = (c for label, c in lines(times.axes[0]).items() if label.startswith("s/L 0.500"))
    expected = [factor * SURFACE.K[20, 0] for factor in (1, 1.5, 0.2, 0.9)]
    np.testing.assert_allclose(curve.get_xdata(), [0, 10, 20, 30])  # the combination is left out
    np.testing.assert_allclose(curve.get_ydata(), expected)
    assert any("combinations have no time: 1" in text.get_text() for text in times.texts)
    for points in lines(cases.axes[0]).values():
        assert points.get_linestyle() == "None"
        assert len(points.get_xdata()) == 3


# --- files -----------------------------------------------------------------------------------


def test_which_charts_an_evaluation_gets() -> None:
    alone = set(charts_of(evaluation_of(SURFACE)))
    assert alone == {"chart", "through_thickness", "mode_mix"}
    assert "through_thickness" not in charts_of(evaluation_of(elliptic_front(1, 1, closed=True)))
    two = set(charts_of(evaluation_of(SURFACE, replace(SURFACE, step="bending"))))
    assert "steps" in two
    assert {name for name in two if name.startswith("chart")} == {
        "chart_front0_tension",
        "chart_front0_bending",
    }


def test_png_is_1200_pixels_wide_and_not_blank() -> None:
    picture = matplotlib.image.imread(io.BytesIO(png(drawn("along"))))
    assert picture.shape[1] == 1200
    blue = np.abs(picture[..., :3] - matplotlib.colors.to_rgb("#0072B2")).max(axis=-1) < 0.02
    assert blue.sum() > 1000  # the reported curve


def test_of_many_steps_the_worst_has_its_own_charts() -> None:
    found = charts_of(evaluation_of(*steps(1, 1.1, 1.2, 1.5, 1.4, 1.3, 1.2)))
    assert set(found) == {
        "steps",
        "stations",
        *(f"{kind}_front0_step1.5" for kind in ("chart", "through_thickness", "mode_mix")),
    }


@pytest.mark.slow
def test_svg_is_a_picture_that_is_the_same_in_every_run() -> None:
    first, second = (svg(along_front(SURFACE, MILLIMETRES)) for _ in range(2))
    assert first == second
    root = ElementTree.fromstring(first)
    assert root.tag.endswith("svg")
    assert len(root.findall(".//{http://www.w3.org/2000/svg}path")) > 30


@pytest.mark.slow
def test_both_formats_have_the_same_layout() -> None:
    figure = along_front(BUSY, MILLIMETRES)
    png(figure)
    after = svg(figure)
    assert after == svg(along_front(BUSY, MILLIMETRES))


def test_names_from_files_are_shown_as_they_are() -> None:
    assert mathtext("MPa sqrt(mm)") == r"MPa $\sqrt{\mathrm{mm}}$"
    assert plain_text("cost in $\nper $x") == r"cost in \$ per \$x"
    assert plain_text("x" * 99).endswith("...")
