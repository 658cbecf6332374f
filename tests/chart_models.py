"""Fronts and charts built in code, and what is read from them, for the tests of the charts."""

from collections.abc import Callable
from dataclasses import replace
from functools import cache
from typing import Any

import matplotlib.colors
import numpy as np

from front3d.output.charts.along import along_front
from front3d.output.charts.mix import mode_mix
from front3d.output.charts.stations import at_stations
from front3d.output.charts.steps import over_steps
from front3d.output.charts.through import through_thickness
from front3d.output.shape import section_of
from front3d.results import Comparison, FrontResult, MethodResult
from front3d.units import Units
from tests.output_models import MILLIMETRES, STEEL, corner_front, elliptic_front, through_front

SURFACE = elliptic_front(
    1.6, 1.2, closed=False, flags={0: "free surface"}, ends=("free surface", "free surface")
)


def busy() -> FrontResult:
    """Everything that a chart can show: three methods, one with a gap, and a published solution."""
    front = corner_front()
    gap = np.array(0.98 * front.K)
    gap[20:25] = np.nan
    methods = dict(front.methods) | {"opening": MethodResult("opening", gap)}
    published = Comparison(
        "newman-raju-corner",
        {"a": 4.0},
        "Newman and Raju (1981)",
        "5 %",
        np.stack([1.03 * front.K[:, 0], *np.full((2, len(front)), np.nan)], axis=1),
        np.degrees(np.arctan2(front.positions[:, 1] / 4, front.positions[:, 0] / 6)),
    )
    return replace(
        front, methods=methods, comparisons=(published,), step="a step with a long name, $1"
    )


BUSY = busy()


def through(front: FrontResult, units: Units = MILLIMETRES) -> Any:
    section = section_of(front)
    assert section is not None
    return through_thickness(front, section, units)


def lines(axes: Any) -> dict[str, Any]:
    return {
        line.get_label(): line for line in axes.lines if not str(line.get_label()).startswith("_")
    }


def contrast_on_white(color: Any) -> float:
    """Web Content Accessibility Guidelines 2.1, criterion 1.4.11."""
    rgb = np.array(matplotlib.colors.to_rgb(color))
    linear = np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)
    return float(1.05 / (linear @ [0.2126, 0.7152, 0.0722] + 0.05))


def steps(*factors: float) -> list[FrontResult]:
    return [replace(SURFACE, step=f"step{x}", K=x * SURFACE.K) for x in factors]


def in_time(*factors: float) -> list[FrontResult]:
    """Steps with times, and a combination, which has none."""
    timed = [replace(f, time=10.0 * k) for k, f in enumerate(steps(*factors))]
    return [*timed, replace(SURFACE, step="sum", K=3 * SURFACE.K)]


FIGURES: dict[str, Callable[[], Any]] = {
    "along": lambda: along_front(BUSY, MILLIMETRES),
    "long source": lambda: along_front(
        replace(
            BUSY,
            comparisons=(
                replace(BUSY.comparisons[0], source="Newman and Raju (1984, 1986) and others"),
            ),
        ),
        MILLIMETRES,
    ),
    "no units": lambda: along_front(SURFACE, Units()),
    "closed": lambda: along_front(elliptic_front(1.5, 1.0, closed=True), MILLIMETRES),
    "corner": lambda: through(BUSY),
    "surface": lambda: through(SURFACE),
    "shallow": lambda: through(
        elliptic_front(9.0, 0.9, closed=False, ends=("free surface", "free surface"))
    ),
    "through": lambda: through(through_front()),
    "mix": lambda: mode_mix(through_front(), MILLIMETRES, STEEL),
    "mode I alone": lambda: mode_mix(replace(SURFACE, K=SURFACE.K * (1, 0, 0)), MILLIMETRES, STEEL),
    "mode III alone": lambda: mode_mix(
        replace(SURFACE, K=SURFACE.K[:, ::-1] * (0, 0, 1)), MILLIMETRES, STEEL
    ),
    "shear": lambda: along_front(replace(SURFACE, K=SURFACE.K[:, [1, 0, 2]] * (0, 1, 1)), Units()),
    "methods take turns": lambda: along_front(
        replace(BUSY, sources=("closure", "interaction") * 30 + ("closure",)), MILLIMETRES
    ),
    "two steps": lambda: over_steps(steps(1, 0.5), MILLIMETRES),
    "seven steps": lambda: over_steps(steps(*np.linspace(1, 2, 7)), MILLIMETRES),
    "load cases": lambda: at_stations(
        [replace(f, step=f"a long name of load case {f.step}") for f in steps(1, 0.5, -0.3)],
        [0, 7, 20, 40],
        MILLIMETRES,
    ),
    "times": lambda: at_stations(in_time(1, 1.5, 0.2, 0.9), [0, 20], MILLIMETRES),
}


@cache
def drawn(name: str) -> Any:
    """A chart, laid out."""
    figure = FIGURES[name]()
    figure.draw_without_rendering()
    return figure
