"""How far a front's figures agree among themselves: between rings, J and G, and methods."""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray
from front3d.evidence import REPORTED
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
    J_and_G : largest |J - G| where K is the integral's; None where it never is, and for sums of
        steps, which have no J
    methods : per method, the largest difference of any mode from the reported K, over the stations
        where K comes from another one, this one gives a value, and no free surface is near;
        without such a station there is none
    """

    rings: dict[str, float] | None
    J_and_G: float | None
    methods: dict[str, float]


def agreement(front: FrontResult) -> Agreement:
    """Compare rings, J with G, and methods along `front`."""
    scale = _largest(front.K)
    rings = rings_of(front)
    inside = ~free_surface_layer(front.s, front.length, front.ends)
    sources = np.array(front.sources)
    differences = {
        name: _largest((result.K - front.K)[inside & (sources != name)]) / scale
        for name, result in front.methods.items()
    }
    methods = {name: value for name, value in differences.items() if np.isfinite(value)}
    if rings is None:
        return Agreement(None, None, methods)
    spread = rings.spread
    own = sources == REPORTED  # J belongs to the domain of the integral
    J = rings.J[rings.compared].mean(axis=0)
    apart = _largest((J - front.G)[own]) / _largest(front.G)
    return Agreement(
        {mode: _largest(spread[:, k]) / scale for k, mode in enumerate(MODES)},
        apart if np.isfinite(apart) else None,
        methods,
    )


def _largest(values: FloatArray) -> float:
    """Largest magnitude among the finite values; nan if there is none."""
    finite = np.abs(values[np.isfinite(values)])
    return float(finite.max()) if finite.size else float("nan")
