"""A small cracked block with known displacements, and the K that every file of it must give."""

from dataclasses import replace
from functools import cache

import numpy as np

import front3d
from front3d.reading import load
from front3d.solid import Solid, Step
from tests.meshes.held import near_tip_block
from tests.reading_models import grid

KIND = "hexahedron20"
YOUNG, POISSON = 200e3, 0.3


@cache
def block() -> Solid:
    """48 bricks of 20 nodes around a straight front along z, all three modes held around it."""
    solid = near_tip_block(KIND, 4, YOUNG, POISSON, along=3)
    u = sum(k * s.displacement for k, s in zip((100, 30, 20), solid.steps, strict=True))
    # Two scales: lengths in the hundreds show what single precision does to a format.
    return replace(solid, points=100 * solid.points, steps=(Step("1", u),))


def parts():
    """Points, nodes and displacements of the model."""
    solid = block()
    return solid.points, solid.blocks[0].nodes, solid.steps[0].displacement


def whole_grid():
    points, nodes, u = parts()
    return grid(points, {KIND: nodes}, displacement=u)


@cache
def block_K() -> np.ndarray:
    return K_along(block())


def K_along(solid: Solid, **options) -> np.ndarray:
    """(1 or more steps, stations, 6): z and K, then flags as they come, of the one front."""
    result = front3d.evaluate(solid, young=YOUNG, poisson=POISSON, up=(0, 1, 0), **options)
    assert {front.front for front in result.fronts} == {0}
    found = []
    for front in result.fronts:
        order = np.argsort(front.positions[:, 2])
        found.append(np.column_stack([front.positions, front.K])[order])
    return np.array(found)


def assert_same_K(path, relative=1e-9, steps=1, **options) -> Solid:
    """The file gives the K of the block in its only step; returns what was read."""
    solid = load(path, **options)
    found, expected = K_along(solid), block_K()
    assert found.shape == (steps, *expected.shape[1:])
    for k in range(steps):
        np.testing.assert_allclose(found[k, :, :3], expected[0, :, :3], atol=2e-5)
        largest = np.abs(expected[0, :, 3:]).max()
        np.testing.assert_allclose(
            found[k, :, 3:], (k + 1) * expected[0, :, 3:], atol=(k + 1) * relative * largest
        )
    return solid
