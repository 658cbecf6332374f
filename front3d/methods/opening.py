"""The opening profile: K from how the crack opens behind its front.

K_I = lim E'/8 sqrt(2 pi / d) D_2 as d goes to 0, K_II likewise from the sliding D_1, and
K_III = lim mu/4 sqrt(2 pi / d) D_3 (Westergaard 1939, Williams 1957; extrapolation of
displacements: Chan, Tuba and Wilson 1970).  The limit is taken by a fit over the pairs from FIRST
to LAST cells behind the front, see `opening_fit`; it needs no stresses, no nodal forces and no
cells ahead of the front, so it stands on every mesh and whatever the load on the crack faces.
At a free surface the opening is not that of plane strain: K at the last stations is too high there.
"""

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.front import Front
from front3d.errors import MethodError
from front3d.methods.context import FrontContext
from front3d.methods.loading import station_constants
from front3d.methods.opening_fit import Fit, OpeningFit, build_windows
from front3d.methods.opening_pairs import Pairs, at_pairs, behind_front, cell_sizes
from front3d.results import MethodResult
from front3d.solid import Constants

FIRST, LAST = 2.0, 9.0
"""Distances used, in cells at the front.

Chosen, like the weights and the windows, by the largest errors on solved models: two pennies and an
ellipse of quadratic tetrahedra, a row, a penny of quarter-point bricks; some twenty ranges and a
dozen other forms of the fit were tried.  The errors on these models (K_I 0.9 %, K_II 1.8 % of the
largest K) are therefore no independent evidence.  On meshes not used for the choice: a fine penny
of tetrahedra 0.2 %, coarse ones K_I 1.7 % (tetrahedra) and 1.3 % (quarter-point bricks) low, an
ellipse of 36 coarse edges up to 3.5 % from the interaction integral.

Two errors partly cancel here: cells that grow away from the front open too little, and the term
of the series that is not fitted makes K_I of a penny up to 0.9 % high over 0.4 radii.
"""

MAX_TURN = 0.5
"""Largest distance in units of the front's radius of curvature."""

MAX_SHARE = 0.3
"""Largest distance in units of the way from front to front across the crack."""

WIDTH = 4.0
"""Half-width of a station's window in edges; never more than an eighth of a closed front, nor less
than MIN_WIDTH, which three corner nodes need at a free end."""

MIN_WIDTH = 2.5

VARIANT = "effective front, two terms of the opening"

SPARE = 2
"""Pairs a station needs beyond the number of its unknowns."""


def evaluate(context: FrontContext) -> list[MethodResult]:
    """K of one front, one result per step; MethodError where too few pairs lie behind it."""
    front = context.front
    pairs = behind_front(context)
    cell = cell_sizes(context)
    reach = np.minimum(LAST * cell, MAX_TURN / _curvature(front))
    d, limit = pairs.d, at_pairs(front, reach, pairs)
    near = (d > FIRST * at_pairs(front, cell, pairs)) & (d <= limit)
    near &= d <= MAX_SHARE * (d + pairs.other)
    chosen = Pairs(pairs.s[near], d[near], pairs.other[near], pairs.jump[near])
    stations = context.front.stations
    fit, count = _equations(context, chosen, cell, reach)
    variant = _variant(cell, reach)
    # The fit is not linear in the opening, so openings are combined, not K.
    jump = context.combined(np.moveaxis(chosen.jump, 1, 0))
    results = []
    for one, here in zip(jump, station_constants(context), strict=True):
        # Fitted with the constants of the first station, then each station with its own.
        first = _scale(here.at(0))
        found = fit.solve(one * first)
        results.append(_result(found, stations, count, variant, _scale(here) / first))
    return results


def _equations(
    context: FrontContext, pairs: Pairs, cell: FloatArray, reach: FloatArray
) -> tuple[OpeningFit, IntArray]:
    """The fit at the stations to report, and the number of pairs at every corner node.

    MethodError where it cannot be done.
    """
    front, n = context.front, len(context.front.corners)
    edges = len(front.edges)
    widest = edges / 8 if front.closed else WIDTH
    width = context.options.hat or WIDTH
    windows = build_windows(front, pairs.s, max(MIN_WIDTH, min(width, widest)))
    windows = windows.at(front.stations)
    count = np.bincount(windows.station, minlength=n)
    along = 2 if edges >= 4 else edges // 2
    row = windows.station
    fit = OpeningFit(windows, pairs.d[windows.pair], cell[row], reach[row], along)
    enough = count[front.stations] >= fit.n_unknowns + SPARE
    if enough.all():
        enough = fit.solvable()
    if not enough.all():
        k = int(front.stations[np.argmin(enough)])
        raise MethodError(
            f"{context.solid.source}: found {count[k]} node pairs between {FIRST * cell[k]:.3g} "
            f"and {reach[k]:.3g} behind the front at node {front.corners[k]}, expected "
            f"{fit.n_unknowns + SPARE} or more, in two rows or more; the opening profile needs a "
            "finer mesh behind the front"
        )
    return fit, count


def _curvature(front: Front) -> FloatArray:
    """(n_stations,) curvature of the front, at least a tiny one."""
    _, _, turning = front.curve.frames(front.corner_s)
    curvature: FloatArray = np.linalg.norm(turning[:, :2], axis=1) + 1e-9 / front.length
    return curvature


def _scale(material: Constants) -> FloatArray:
    """(3,) or (n_stations, 3) K over opening per square root of the distance, by mode."""
    modulus, shear = material.plane_strain_modulus, material.shear_modulus
    by_mode = np.stack([modulus / 8, modulus / 8, np.asarray(shear) / 4], axis=-1)
    scale: FloatArray = np.sqrt(2 * np.pi) * by_mode
    return scale


def _variant(cell: FloatArray, reach: FloatArray) -> str:
    """The form of the fit, and the range it is made over, which curvature may cut short."""
    least, most = (reach / cell).min(), (reach / cell).max()
    alike = least > 0.999 * most
    cells = f"{most:.2g}" if alike else f"between {least:.2g} and {most:.2g}"
    return f"{VARIANT}, from {FIRST:g} to {cells} cells behind the front"


def _result(
    fit: Fit, stations: IntArray, count: IntArray, variant: str, factor: FloatArray
) -> MethodResult:
    """Results at all corner nodes: not a number where there is no station."""
    K, residual = np.full((len(count), 3), np.nan), np.full(len(count), np.nan)
    K[stations], residual[stations] = fit.K, fit.residual
    columns = {
        "opening_residual": residual,
        "opening_eps": np.full(len(count), fit.eps[fit.leading]),
        "opening_pairs": count.astype(float),
    }
    return MethodResult("opening", K * factor, columns, variant=variant)
