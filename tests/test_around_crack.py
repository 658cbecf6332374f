"""Of a large solid in pieces only the cells around the crack are kept, and K is the same."""

import numpy as np
import pytest

import front3d
from benchmarks.mesh import K_EXACT, POISSON, YOUNG, Size, build, write_pvtu, write_vtu
from front3d.reading import around_crack

SMALL = Size("hexahedron20", stations=24, outside=20, beside=14)


def evaluated(path):
    solid = front3d.load(path)
    (front,) = front3d.evaluate(solid, young=YOUNG, poisson=POISSON).fronts
    return solid, front


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    folder = tmp_path_factory.mktemp("pieces")
    mesh = build(SMALL)
    write_vtu(mesh, folder / "whole.vtu")
    write_pvtu(mesh, folder / "parts.pvtu", 4)
    return folder


def test_the_tube_of_pieces_gives_the_K_of_the_whole(folder, monkeypatch):
    whole, expected = evaluated(folder / "whole.vtu")
    monkeypatch.setattr(around_crack, "LARGE", 0)
    solid, front = evaluated(folder / "parts.pvtu")
    assert solid.n_cells < 0.8 * whole.n_cells
    assert "read piece by piece" in solid.notes[0]
    for name, method in expected.methods.items():
        np.testing.assert_allclose(front.methods[name].K, method.K, rtol=0, atol=1e-10 * K_EXACT)
    assert front.K[:, 0] == pytest.approx(K_EXACT, rel=0.01)  # Sneddon (1946)


def test_small_solids_are_kept_whole(folder):
    assert front3d.load(folder / "parts.pvtu").n_cells == SMALL.cells
