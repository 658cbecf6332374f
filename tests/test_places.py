"""Which nodes stand at one place, and which near others, against a search tree of scipy."""

import numpy as np
import pytest
from scipy.spatial import cKDTree

import front3d
from benchmarks.mesh import POISSON, YOUNG, Size, build
from front3d.arrays import extent, frozen_floats
from front3d.crack import near
from front3d.places import coincident_pairs, within
from front3d.solid import CellBlock, Solid, Step


def as_set(first, second):
    return {tuple(sorted(pair)) for pair in zip(first.tolist(), second.tolist(), strict=True)}


@pytest.mark.parametrize("spread", [1.0, 1e-3])  # few share a voxel, or most do
def test_coincident_pairs_are_those_of_a_search_tree(spread):
    rng = np.random.default_rng(1)
    points = rng.random((3000, 3)) * spread
    points[2000:] = points[:1000] + rng.normal(size=(1000, 3)) * 3e-5
    points[7], points[9] = np.nan, 1e9
    tolerance = rng.uniform(1e-5, 1e-4, 3000)
    tolerance[[7, 11]] = -1.0
    used = np.flatnonzero(tolerance > 0)
    pairs = used[cKDTree(points[used]).query_pairs(1e-4, output_type="ndarray")]
    a, b = pairs.T
    close = np.linalg.norm(points[a] - points[b], axis=1) <= np.minimum(tolerance[a], tolerance[b])
    found = coincident_pairs(frozen_floats(points), frozen_floats(tolerance))
    assert close.sum() > 100
    assert as_set(*found) == as_set(a[close], b[close])


def test_points_within_reach_are_all_found_and_few_others():
    rng = np.random.default_rng(2)
    points, places = rng.random((20000, 3)), rng.random((5, 3))
    away, _ = cKDTree(places).query(points)
    found = within(points, places, 0.1)
    assert found[away <= 0.1].all()
    assert not found[away > 0.2].any()


@pytest.mark.parametrize("count", [1, 255, 256, 1000])
def test_the_extent_is_that_of_numpy(count):
    values = np.random.default_rng(3).normal(size=(count, 3))
    np.testing.assert_array_equal(extent(values), np.ptp(values, axis=0))


@pytest.mark.parametrize("kind", [pytest.param("tetra10", marks=pytest.mark.slow), "hexahedron20"])
def test_K_does_not_depend_on_which_cells_are_first_called_near(kind, monkeypatch):
    mesh = build(Size(kind, stations=24, outside=10, beside=9))
    solid = Solid(
        mesh.points, (CellBlock(kind, mesh.cells),), (Step("1", mesh.displacement),), "penny"
    )
    found = []
    for span in (0.2, near.SPAN, 1e3):
        monkeypatch.setattr(near, "SPAN", span)
        model = front3d.find_fronts(solid)
        found.append(front3d.evaluate(solid, young=YOUNG, poisson=POISSON).fronts[0])
        all_cells = len(model.near.cells[0]) == solid.n_cells
        assert all_cells == (span == 1e3)
    for other in found[1:]:
        for name, method in found[0].methods.items():
            np.testing.assert_array_equal(other.methods[name].K, method.K)
