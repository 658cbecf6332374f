"""Cracks that start from a re-entrant corner of the part: the foot of a step."""

from dataclasses import replace

import numpy as np
import pytest

import front3d
from front3d.methods import surfaces
from front3d.results import energy_release_rate
from front3d.solid import CellBlock, Material
from tests.meshes.flat_step import POISSON, step_G, step_solid
from tests.meshes.structured import impose, straight
from tests.reference import exact


@pytest.mark.slow
def test_a_crack_from_the_corner_of_a_step_in_plane_strain():
    """The lower crack face goes on in the ledge of the step.  G is that of the release of one edge
    more in two dimensions, by general libraries; the methods must agree on how it is shared.

    Measured: 0.3 % below G (integral, closure; it falls with the cells), 0.2 % above (opening);
    K_I and K_II of the methods within 0.3 %.
    """
    (front,) = front3d.evaluate(step_solid(0.04), young=1.0, poisson=POISSON).fronts
    assert front.ends == ("symmetry plane", "symmetry plane") and not front.warnings
    G, K = step_G(0.04), front.methods["interaction"].K
    assert (K[:, 1] > 0.15 * K[:, 0]).all()  # both modes are there
    for name in ("interaction", "closure", "opening"):
        method = front.methods[name]
        np.testing.assert_allclose(
            energy_release_rate(method.K, Material(1.0, POISSON)), G, rtol=0.01, err_msg=name
        )
        np.testing.assert_allclose(method.K, K, atol=0.01 * K.max(), err_msg=name)


def test_a_ledge_in_the_crack_plane_is_a_surface_on_which_the_front_ends(monkeypatch):
    """Above the crack plane the block ends earlier than below it.  The ledge touches the front's
    end: it is free, and no surface beside the front that rings should keep clear of.
    """
    mesh = straight("hexahedron20", 8, along=5, length=1.25)
    (block,) = mesh.solid.blocks
    _, y, z = mesh.solid.points[block.nodes].mean(axis=1).T
    used, nodes = np.unique(block.nodes[(y < 0) | (z > 0.25)], return_inverse=True)
    kept = (CellBlock(block.kind, nodes.reshape(-1, 20)),)
    solid = replace(mesh.solid, points=mesh.solid.points[used], blocks=kept)
    elastic = exact.Elastic.from_young(1000.0, 0.3)
    stepped = impose(solid, mesh.side[used], exact.near_tip(elastic, (1.0, 0.5, 0.3)))

    def evaluated():
        found = front3d.evaluate(
            stepped, young=1000.0, poisson=0.3, up=(0, 1, 0), radii=(0.5, 0.75), hat=1.0,
            methods="interaction",
        )  # fmt: skip
        return found.fronts[0]

    front = evaluated()
    assert front.positions[0, 2] == pytest.approx(0.25)
    np.testing.assert_allclose(front.K[1:-1], np.tile([1.0, 0.5, 0.3], (3, 1)), atol=0.005)
    assert not any("reach a surface" in text for text in front.warnings)
    monkeypatch.setattr(
        surfaces, "_from_the_ends", lambda context, faces: np.zeros(len(faces), bool)
    )
    assert any("reach a surface 0 from the front" in text for text in evaluated().warnings)
