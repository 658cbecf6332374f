"""Graded quadrature on faces at the front."""

import numpy as np
import pytest

from front3d.elements import FACES
from front3d.methods.face_rules import PLAIN, graded_rule

AREA = {"triangle3": 0.5, "triangle6": 0.5, "quad4": 4.0, "quad8": 4.0, "quad9": 4.0}


def cases():
    for name, face in FACES.items():
        yield from ((name, how) for how in (PLAIN, *range(face.n_corners)))
        yield from ((name, 4 + k) for k in range(face.n_corners))


@pytest.mark.parametrize(("name", "how"), list(cases()))
def test_every_rule_integrates_polynomials(name, how):
    face = FACES[name]
    points, weights = graded_rule(face, how, 6)
    plain, plain_weights = face.quadrature(6)
    assert weights.sum() == pytest.approx(AREA[name], rel=1e-13)
    for power in range(4):
        value = weights @ (1 + points @ [0.4, -0.3]) ** power
        assert value == pytest.approx(plain_weights @ (1 + plain @ [0.4, -0.3]) ** power, rel=1e-12)


@pytest.mark.parametrize(("name", "how"), [(n, h) for n, h in cases() if h != PLAIN])
def test_the_inverse_root_of_the_distance_is_integrated(name, how):
    """Against the same integral on far more points."""
    face = FACES[name]
    corners = face.nodes[: face.n_corners]
    if how < 4:
        a, b = corners[how], corners[(how + 1) % len(corners)]
        normal = np.array([a[1] - b[1], b[0] - a[0]]) / np.linalg.norm(b - a)

        def distance(x):
            return np.abs((x - a) @ normal)
    else:

        def distance(x):
            return np.linalg.norm(x - corners[how % 4], axis=1)

    found, reference = (
        w @ (1.0 / np.sqrt(distance(x)))
        for x, w in (graded_rule(face, how, 8), graded_rule(face, how, 60))
    )
    assert found == pytest.approx(reference, rel=1e-6)
    if how < 4:  # what grading is for
        x, w = face.quadrature(8)
        assert abs(w @ (1 / np.sqrt(distance(x))) / reference - 1) > 0.01
