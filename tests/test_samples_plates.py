"""Corner cracks, corner cracks at a hole and embedded cracks in plates: meshes and K."""

from functools import cache

import numpy as np
import pytest
from scipy.interpolate import CubicSpline

import front3d
from front3d.crack.front import FREE_SURFACE
from front3d.elements import FACES
from front3d.errors import CaseError
from front3d.results import FrontResult
from front3d.samples import SAMPLES, Sample, build
from front3d.samples.elasticity import boundary_faces
from front3d.samples.mirror import Unfolded
from tests.reference.plate_rows import PLACES, plate_crack
from tests.test_samples_mesh import crack_faces, front_nodes, jacobian_ratio, volume

CORNER, HOLE = "corner-crack", "corner-crack-at-hole"
CELLS = ("bricks", "tetra10", "brick8")


@cache
def mesh(name: str, cells: str, **parameters: float) -> Unfolded:
    spec = SAMPLES[name]
    return spec.mesh(spec.values({"refine": 0, **parameters}), cells)


# --- meshes -----------------------------------------------------------------------------------


@pytest.mark.parametrize("cells", CELLS)
@pytest.mark.parametrize("cracks", [1, 2])
def test_volume_and_bore_of_a_plate_with_a_hole(cells: str, cracks: int) -> None:
    size = {"hole_radius": 10.0, "thickness": 12.0, "half_width": 50.0, "half_height": 80.0}
    solid = mesh(HOLE, cells, cracks=cracks, **size).solid
    whole = (4 * 50.0 * 80.0 - np.pi * 100.0) * 12.0
    # A quarter of the bore has five cells or more; straight ones miss O(h^2) of its area.
    assert volume(solid) == pytest.approx(whole, rel=2e-3 if cells == "brick8" else 1e-5)
    bore = np.hypot(solid.points[:, 0], solid.points[:, 2])
    assert bore.min() == pytest.approx(10.0, rel=1e-12)
    size = np.array([50.0, 12.0, 80.0])
    for kind, faces in boundary_faces(solid):  # bore, sides, ends, or the crack: nothing else
        x = solid.points[faces]
        planes = np.abs(np.abs(x) - size) < 1e-9 * size
        planes[..., 1] |= x[..., 1] == 0.0
        planes[..., 2] |= x[..., 2] == 0.0
        round_ = np.abs(np.hypot(x[..., 0], x[..., 2]) - 10.0) < 1e-9
        assert (planes.all(axis=1).any(axis=1) | round_.all(axis=1)).all(), kind


@pytest.mark.parametrize("cells", CELLS)
@pytest.mark.parametrize(("name", "cracks"), [(CORNER, 1), (HOLE, 1), (HOLE, 2)])
def test_the_crack_is_a_quarter_ellipse(name: str, cracks: int, cells: str) -> None:
    a, c, r = 5.0, 8.0, 9.0
    sizes = {"depth": a, "length": c, "thickness": 12.0}
    if name == HOLE:
        sizes |= {"hole_radius": r, "cracks": cracks}
    solid = mesh(name, cells, **sizes).solid
    area = 0.0
    for kind, faces in crack_faces(solid):
        xi, weights = FACES[kind].quadrature(3)
        tangents = np.einsum("fni,qnd->fqdi", solid.points[faces], FACES[kind].gradients(xi))
        normal = np.cross(tangents[:, :, 0], tangents[:, :, 1])
        area += float((np.abs(normal[:, :, 2]) * weights).sum())
    exact = cracks * np.pi * a * c / 4
    assert area / 2 == pytest.approx(exact, rel=5e-2 if cells == "brick8" else 1e-3)
    x, y, _ = solid.points[front_nodes(solid)].T
    x = np.abs(x) - r if name == HOLE else x
    np.testing.assert_allclose((x / c) ** 2 + (y / a) ** 2, 1.0, atol=1e-12)
    assert x.max() == pytest.approx(c) and y.max() == pytest.approx(a)


@pytest.mark.parametrize(
    "parameters",
    [
        {"depth": 1.0, "length": 1.0, "thickness": 10.0, "hole_radius": 2.5},
        {"depth": 1.0, "length": 5.0, "thickness": 1.25, "hole_radius": 2.5},
        {"depth": 1.0, "length": 0.5, "thickness": 1.25, "hole_radius": 5.0, "half_width": 11.0},
    ],
)
def test_extreme_holes_have_valid_cells(parameters: dict[str, float]) -> None:
    # 0.02 is common practice for a usable cell; the law is > 0.
    for cells in ("bricks", "tetra10"):
        for cylinder in (0, 1):
            part = mesh(HOLE, cells, cylinder=cylinder, **parameters).part
            assert jacobian_ratio(part) > 0.02, (cells, cylinder)


@pytest.mark.slow
@pytest.mark.parametrize("refine", [0, 1])
@pytest.mark.parametrize("cells", ["tetra10"])
def test_holes_of_the_whole_range_have_valid_cells(cells: str, refine: int) -> None:
    n = 0
    for a_c in (0.2, 1.0, 2.0):
        for a_t in (0.1, 0.3, 0.8):
            for r_t in (0.25, 1.0, 5.0):
                for shape in ({"cylinder": 1.0}, {}, {"narrow": 1.0}):
                    r, c = r_t / a_t, 1.0 / a_c
                    if not 0.5 <= r / c <= 10.0:
                        continue
                    sizes = {"depth": 1.0, "length": c, "thickness": 1 / a_t, "hole_radius": r}
                    if "narrow" in shape:
                        sizes |= {"half_width": 2.0 * (r + c), "half_height": 6.0 * (r + c)}
                    elif shape:
                        sizes |= shape
                    part = mesh(HOLE, cells, refine=refine, **sizes).part
                    assert jacobian_ratio(part) > 0.02, sizes
                    n += 1
    assert n > 30


@pytest.mark.parametrize(
    ("name", "parameters", "message"),
    [
        (CORNER, {"thickness": 6.5}, "depth / thickness = 0.9231, expected 0.1 to 0.8"),
        (CORNER, {"width": 15.0}, "width / length = 1.5, expected 2 to 50"),
        (HOLE, {"hole_radius": 2.0}, "hole_radius / length = 0.3333, expected 0.5 to 10"),
        (HOLE, {"half_width": 30.0}, "half_width / .hole_radius . length. = 1.667, expected 2"),
        (HOLE, {"cracks": 3.0}, "cracks: found 3.0, expected a whole number from 1 to 2"),
        ("embedded-ellipse", {"thickness": 11.0}, "2 semi_y / thickness = 0.9091, expected"),
    ],
)
def test_sizes_out_of_range_are_refused(
    name: str, parameters: dict[str, float], message: str
) -> None:
    with pytest.raises(CaseError, match=message):
        SAMPLES[name].values(parameters)


def test_one_crack_at_a_hole_has_no_half_model() -> None:
    message = "cut at x = 0, but with these parameters the solid is not symmetric"
    with pytest.raises(CaseError, match=message):
        build(HOLE, cells="brick8", refine=0, cracks=1, part="half")


# --- K ------------------------------------------------------------------------------------------


def evaluated(sample: Sample) -> dict[str, FrontResult]:
    """By step, the front on the positive side of x."""
    material = sample.material
    result = front3d.evaluate(
        sample.solid, young=material.young, poisson=material.poisson, **sample.case["options"]
    )
    return {f.step: f for f in result.fronts if f.positions[:, 0].mean() > -1e-6 * f.length}


def at_places(front: FrontResult, a: float, c: float, x0: float = 0.0) -> np.ndarray:
    """K_I at PLACES, between stations by a spline."""
    angle = np.arctan2(front.positions[:, 1] / a, (front.positions[:, 0] - x0) / c)
    angle = np.round(2 * angle / np.pi, 9)
    order = np.argsort(angle)
    order = order[(angle[order] >= 0.0) & (angle[order] <= 1.0)]
    values: np.ndarray = CubicSpline(angle[order], front.K[order, 0])(PLACES)
    return values


def deviation(kind: str, a_c: float, a_t: float, cells: str, refine: int) -> dict[str, float]:
    """Largest deviation from the table by load, in parts of the largest K in it."""
    a = 6.0
    c, t = a / a_c, a / a_t
    sizes = {
        "surface": {"depth": a, "half_length": c, "thickness": t},
        "corner": {"depth": a, "length": c, "thickness": t},
        "embedded": {"semi_x": c, "semi_y": a, "thickness": 2 * t},
        "hole": {"depth": a, "length": c, "thickness": t, "hole_radius": t, "cylinder": 1},
    }[kind]
    name = {"surface": "surface-crack", "embedded": "embedded-ellipse", "hole": HOLE}.get(
        kind, CORNER
    )
    if kind == "hole":
        sizes["bending"] = 0.0  # the table has tension only
    sample = build(name, cells=cells, refine=refine, **sizes)
    out = {}
    for load, front in evaluated(sample).items():
        exact = plate_crack(kind, load, a_c, a_t, a, 100.0)
        K = at_places(front, a, c, t if kind == "hole" else 0.0)
        out[load] = float(np.abs(K - exact).max() / np.abs(exact).max())
    return out


def test_a_coarse_corner_crack_has_the_computed_K() -> None:
    # Measured 0.5 %.  See plate_rows for what the table is: computed, not published.
    assert max(deviation("corner", 1.0, 0.2, "bricks", 0).values()) < 0.015


@pytest.mark.slow
@pytest.mark.parametrize(
    ("kind", "a_c", "a_t", "cells", "refine"),
    [
        ("corner", 0.4, 0.2, "bricks", 0),
        ("corner", 0.4, 0.5, "bricks", 0),
        ("corner", 1.0, 0.5, "tetra10", 0),
        ("embedded", 1.0, 0.8, "bricks", 0),
        ("embedded", 0.4, 0.8, "bricks", 1),
        ("hole", 0.5, 0.2, "bricks", 0),
        ("hole", 1.0, 0.5, "bricks", 0),
        ("hole", 1.0, 0.5, "tetra10", 0),
        ("hole", 0.5, 0.8, "bricks", 1),
        ("surface", 0.4, 0.8, "bricks", 1),
    ],
)
def test_plates_have_the_computed_K(
    kind: str, a_c: float, a_t: float, cells: str, refine: int
) -> None:
    found = deviation(kind, a_c, a_t, cells, refine)
    assert max(found.values()) < 0.015, found


@pytest.mark.slow
def test_one_crack_at_a_hole_by_shahs_conversion() -> None:
    # Shah (1976), as used by Newman and Raju (1984), from memory: K of one crack over K of two is
    # sqrt((4/pi + u/2) / (4/pi + u)), u = a c / (t r).  A conversion by area that takes too much
    # off: for through cracks with c = r/2 it gives 0.927, and the exact factors of Bowie (1956,
    # from memory: 1.73 and 1.83) 0.945.  Measured here: 1.6 to 2.2 % above it.
    sizes = {"depth": 6.0, "length": 6.0, "thickness": 12.0, "hole_radius": 12.0, "bending": 0.0}
    fronts = {n: evaluated(build(HOLE, refine=0, cracks=n, **sizes))["tension"] for n in (1, 2)}
    ratio = at_places(fronts[1], 6.0, 6.0, 12.0) / at_places(fronts[2], 6.0, 6.0, 12.0)
    u = 36.0 / 144.0
    expected = np.sqrt((4 / np.pi + u / 2) / (4 / np.pi + u))
    assert (ratio < 1.0).all()
    np.testing.assert_allclose(ratio, expected, rtol=0.03)
    assert (ratio > expected).all()


@pytest.mark.slow
def test_half_of_two_cracks_at_a_hole() -> None:
    # The half model holds one front, whose ends are free; the quarter one face of it.
    whole = evaluated(build(HOLE, refine=0))
    for part in ("half", "quarter"):
        for step, front in evaluated(build(HOLE, refine=0, part=part)).items():
            assert front.ends == (FREE_SURFACE, FREE_SURFACE)
            gap = np.linalg.norm(front.positions[:, None] - whole[step].positions, axis=2)
            same = gap.argmin(axis=1)
            scale = np.abs(whole[step].K).max()
            assert gap.min(axis=1).max() < 1e-9 * front.length
            assert np.abs(front.K - whole[step].K[same]).max() < 0.005 * scale


@pytest.mark.slow
@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
def test_a_plate_with_a_hole_bends_as_a_plate(cells: str) -> None:
    # Far from the hole the ends turn as those of a plate without one: u_z = s_b z / E at y = 0
    # (beam theory, exact for the plate without hole and crack).  The hole costs some of it:
    # measured 0.983 on bricks; tetrahedra whose cutting diagonals were bent gave 0.60.
    sample = build(HOLE, cells=cells, refine=0, tension=0.0)
    p, points = sample.parameters, sample.solid.points
    (u,) = (step.displacement for step in sample.solid.steps)
    corner = np.abs(points - (p["half_width"], 0.0, p["half_height"])).max(axis=1) < 1e-6
    assert corner.sum() == 1
    turned = u[corner, 2].item() / (p["bending"] / p["young"] * p["half_height"])
    assert turned == pytest.approx(1.0, abs=0.03)


@pytest.mark.slow
def test_cylinder_and_plate_agree_far_from_the_hole() -> None:
    # r/W = 1/13: in tension the outer boundary counts for 0.4 % (finite-width factor
    # sqrt(sec(pi r / 2 W)) of Newman and Raju, from memory).
    plate, cylinder = (
        at_places(evaluated(build(HOLE, refine=0, bending=0.0, cylinder=k))["tension"], 6, 6, 12)
        for k in (0, 1)
    )
    np.testing.assert_allclose(plate, cylinder, rtol=0.005)
