"""How far a front's figures agree among themselves: between rings, J and G, and methods."""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray
from front3d.results import MODES, FrontResult, Rings, free_surface_layer


def rings_of(front: FrontResult) -> Rings | None:
    """The rings of the first method that has any."""
    return next((m.rings for m in front.methods.values() if m.rings is not None), None)


@dataclass(frozen=True, slots=True)
class Agreement:
    """The trust figures of one front, each relative to its largest |K|, or largest G.

    Attributes
    ----------
    rings : per mode the largest ring spread; None without rings
    J_and_G : largest |J - G|; None without rings, and for sums of steps, which have no J
    methods : per method, the largest difference of any mode from the reported K, over the stations
        where that method gives a value and no free surface is near; without such a station, and
        for the method that is reported everywhere, there is none
    """

    rings: dict[str, float] | None
    J_and_G: float | None
    methods: dict[str, float]


def agreement(front: FrontResult) -> Agreement:
    """Compare rings, J with G, and methods along `front`."""
    scale = _largest(front.K)
    rings = rings_of(front)
    inside = ~free_surface_layer(front.s, front.length, front.ends)
    differences = {
        name: _largest((result.K - front.K)[inside]) / scale
        for name, result in front.methods.items()
        if set(front.sources) != {name}
    }
    methods = {name: value for name, value in differences.items() if np.isfinite(value)}
    if rings is None:
        return Agreement(None, None, methods)
    spread = rings.spread
    apart = _largest(rings.J[rings.compared].mean(axis=0) - front.G) / _largest(front.G)
    return Agreement(
        {mode: _largest(spread[:, k]) / scale for k, mode in enumerate(MODES)},
        apart if np.isfinite(apart) else None,
        methods,
    )


def _largest(values: FloatArray) -> float:
    """Largest magnitude among the finite values; nan if there is none."""
    finite = np.abs(values[np.isfinite(values)])
    return float(finite.max()) if finite.size else float("nan")
