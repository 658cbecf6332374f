"""Tension and bending of a plate 0 <= y <= t by its ends or by all its outer faces."""

from collections.abc import Callable

from front3d.arrays import BoolArray, FloatArray
from front3d.samples.sample import Load, Parameter, Values, acting


def load_parameters() -> dict[str, Parameter]:
    """The two stresses."""
    return {
        "tension": Parameter("remote tension, step 1", 100.0, -1e12, 1e12, "stress"),
        "bending": Parameter(
            "remote bending stress at the cracked surface y = 0, step 2",
            100.0, -1e12, 1e12, "stress",
        ),
    }  # fmt: skip


def plate_loads(
    sample: str, values: Values, on: Callable[[FloatArray], BoolArray]
) -> tuple[Load, ...]:
    """Tractions of s_zz = tension, and of s_zz = bending (1 - 2 y / thickness)."""
    t = values["thickness"]

    def tension(points: FloatArray, normals: FloatArray) -> FloatArray:
        return values["tension"] * normals * (0, 0, 1)

    def bending(points: FloatArray, normals: FloatArray) -> FloatArray:
        return values["bending"] * (1.0 - 2.0 * points[:, 1:2] / t) * normals * (0, 0, 1)

    return acting(
        sample,
        {
            "tension": (values["tension"], Load("tension", tension, on)),
            "bending": (values["bending"], Load("bending", bending, on)),
        },
    )
