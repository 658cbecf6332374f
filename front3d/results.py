"""What an evaluation gives: K along each front, per method and ring, with flags and warnings."""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray, frozen_floats
from front3d.caution import CAUTION as CAUTION
from front3d.crack.front import FREE_SURFACE
from front3d.errors import MethodError
from front3d.solid import Constants, Material
from front3d.units import Units

MODES = ("K_I", "K_II", "K_III")


@dataclass(frozen=True, slots=True, eq=False)
class Rings:
    """K and J of each ring (integration domain) of the interaction integral.

    Attributes
    ----------
    radii : (n_rings, n) outer radius of each ring at each station
    K : (n_rings, n, 3) K_I, K_II, K_III
    J : (n_rings, n) the J-integral over the same domain, an independent check of G
    """

    radii: FloatArray
    K: FloatArray
    J: FloatArray

    def __post_init__(self) -> None:
        _freeze(self, ("radii", "K", "J"))
        shape = self.radii.shape
        if self.K.shape != (*shape, 3) or self.J.shape != shape:
            raise MethodError(
                f"rings: found radii {shape}, K {self.K.shape}, J {self.J.shape}; expected "
                "(rings, stations), (rings, stations, 3), (rings, stations)"
            )

    def at(self, rows: IntArray) -> "Rings":
        """At some of the stations."""
        return Rings(self.radii[:, rows], self.K[:, rows], self.J[:, rows])

    @property
    def compared(self) -> slice:
        """The rings that are averaged and compared: beyond the first where there are three.

        The first one leans on the cells at the front, where any mesh is at its worst (leaving the
        first contour out is common practice).
        """
        return slice(1, None) if len(self.radii) > 2 else slice(None)

    @property
    def spread(self) -> FloatArray:
        """(n, 3) largest less smallest K of the compared rings; NaN for a single ring."""
        if len(self.radii) < 2:
            return np.full(self.K.shape[1:], np.nan)
        return np.ptp(self.K[self.compared], axis=0)


@dataclass(frozen=True, slots=True, eq=False)
class MethodResult:
    """K at every station by one method.

    Attributes
    ----------
    method : its name in the registry, e.g. "interaction"
    K : (n, 3) K_I, K_II, K_III
    columns : further numbers per station, (n,) each, by column name
    rings : for the interaction integral
    variant : which form of the method the mesh allows, for the reader; empty where there is one
    notes : what the reader must be warned of, about this method on this front
    """

    method: str
    K: FloatArray
    columns: Mapping[str, FloatArray] = field(default_factory=dict)
    rings: Rings | None = None
    variant: str = ""
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        _freeze(self, ("K",))

    def at(self, rows: IntArray) -> "MethodResult":
        """At some of the stations."""
        columns = {name: values[rows] for name, values in self.columns.items()}
        rings = self.rings.at(rows) if self.rings else None
        return replace(self, K=self.K[rows], columns=columns, rings=rings)


@dataclass(frozen=True, slots=True, eq=False)
class Comparison:
    """A published solution at the stations of one front.

    Attributes
    ----------
    solution : its name in the handbook, e.g. "newman-raju-surface"
    arguments : the numbers and directions it was asked for with
    source : author and year
    claim : the accuracy its authors claim, in words
    K : (n, 3) its K_I, K_II, K_III; NaN where it says nothing
    angle : (n,) parametric angle of the ellipse at the stations, degrees; NaN where there is none
    notes : what the reader must be warned of: range, known deviations and their evidence
    judged : (n,) stations far enough from a free surface to be compared; all by default
    average : whether the solution is one of the whole front, as for a test specimen
    """

    solution: str
    arguments: Mapping[str, float | tuple[float, ...]]
    source: str
    claim: str
    K: FloatArray
    angle: FloatArray
    notes: tuple[str, ...] = ()
    judged: BoolArray = field(default_factory=lambda: np.zeros(0, dtype=bool))
    average: bool = False

    def __post_init__(self) -> None:
        _freeze(self, ("K", "angle"))
        n = len(self.angle)
        judged = np.array(self.judged, dtype=bool) if len(self.judged) else np.ones(n, dtype=bool)
        judged.flags.writeable = False
        object.__setattr__(self, "judged", judged)
        if self.K.shape != (n, 3) or judged.shape != (n,):
            raise MethodError(
                f"comparison with {self.solution}: found K of shape {self.K.shape} and "
                f"{len(judged)} stations judged for {n} angles"
            )


@dataclass(frozen=True, slots=True, eq=False)
class FrontResult:
    """K along one front in one step.

    Attributes
    ----------
    step, front : name of the step, number of the front (from 0)
    closed : whether the front is a closed curve
    ends : per end of an open front "free surface" or "symmetry plane"; empty when closed
    length : arc length of the front
    s : (n,) arc length of the stations from the start of the front, along e3
    positions : (n, 3) coordinates of the stations
    frames : (n, 3, 3) rows e1, e2, e3 of the local frame
    K : (n, 3) K_I, K_II, K_III: the values front3d stands behind
    G : (n,) energy release rate from K: (K_I^2 + K_II^2) / E' + K_III^2 / (2 mu)
    flags : (n,) text per station, empty where nothing is to be said
    methods : the result of each method that was applied
    sources : (n,) the method K is taken from, see `front3d.evidence`
    warnings : sentences for the reader, about the whole front
    notes : what the reader may want to know, nothing to worry about
    comparisons : published solutions asked for, at the same stations
    material : the constants along the front; None where they are those of the whole evaluation
    time : of the step; NaN where the result has none, and for combinations of steps
    """

    step: str
    front: int
    closed: bool
    ends: tuple[str, ...]
    length: float
    s: FloatArray
    positions: FloatArray
    frames: FloatArray
    K: FloatArray
    G: FloatArray
    flags: tuple[str, ...]
    methods: Mapping[str, MethodResult]
    sources: tuple[str, ...]
    warnings: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    comparisons: tuple[Comparison, ...] = ()
    material: Constants | None = None
    time: float = float("nan")

    def __post_init__(self) -> None:
        _freeze(self, ("s", "positions", "frames", "K", "G"))
        n = len(self.s)
        found = (self.positions.shape, self.frames.shape, self.K.shape, self.G.shape)
        words = (len(self.flags), len(self.sources))
        if found != ((n, 3), (n, 3, 3), (n, 3), (n,)) or words != (n, n):
            raise MethodError(
                f"front {self.front}: found arrays of shapes {found} and {words} flags and "
                f"sources for {n} stations"
            )

    def __len__(self) -> int:
        return len(self.s)

    @property
    def s_rel(self) -> FloatArray:
        """Arc length over the length of the front, (n,)."""
        return self.s / self.length

    @property
    def method_spread(self) -> FloatArray:
        """(n, 3) largest less smallest K of the methods; NaN where fewer than two have a value."""
        K = np.stack([method.K for method in self.methods.values()])
        several = np.isfinite(K).sum(axis=0) > 1
        high = np.where(np.isfinite(K), K, -np.inf).max(axis=0)
        low = np.where(np.isfinite(K), K, np.inf).min(axis=0)
        return np.where(several, high - np.where(several, low, 0.0), np.nan)

    @property
    def mode_angles(self) -> FloatArray:
        """(n, 2) in degrees: psi = atan2(K_II, K_I), and the mode-III angle
        atan2(K_III, hypot(K_I, K_II)).  In pure mode III there is no psi: NaN.
        """
        k1, k2, k3 = self.K.T
        psi = np.where(pure_tearing(self.K), np.nan, np.arctan2(k2, k1))
        return np.degrees(np.stack([psi, np.arctan2(k3, np.hypot(k1, k2))], axis=1))


@dataclass(frozen=True, slots=True, eq=False)
class Evaluation:
    """All fronts in all steps, with what is needed to repeat the run."""

    source: str
    material: Material
    units: Units
    fronts: tuple[FrontResult, ...]
    options: Mapping[str, object] = field(default_factory=dict)
    warnings: tuple[str, ...] = ()


NO_PSI = 0.01
"""K_I and K_II together, in parts of the station's own |K|, up to which they are taken for scatter
around nought (common practice): the angle between them would be that of noise.
"""


def pure_tearing(K: FloatArray) -> BoolArray:
    """(n,) whether K (n, 3) is of mode III alone, or nought."""
    inside: BoolArray = np.hypot(K[:, 0], K[:, 1]) <= NO_PSI * np.linalg.norm(K, axis=1)
    return inside


def energy_release_rate(K: FloatArray, material: Constants) -> FloatArray:
    """G = (K_I^2 + K_II^2) / E' + K_III^2 / (2 mu), (n,), from K, (n, 3); Irwin (1957)."""
    k1, k2, k3 = np.moveaxis(K, -1, 0)
    return (k1**2 + k2**2) / material.plane_strain_modulus + k3**2 / (2.0 * material.shear_modulus)


def free_surface_layer(s: FloatArray, length: float, ends: tuple[str, ...]) -> BoolArray:
    """(n,) the stations at which a free surface, where no K exists, is felt.

    Within three stations (a quarter of a short front) or 5 % of the front's length of such an end:
    common practice, and where the methods were seen to part.

    Parameters
    ----------
    s : (n,) arc lengths of the stations; length : of the front; ends : what its ends lie on
    """
    number = np.arange(len(s))
    few = min(3, max(1, len(s) // 4))
    layer = np.zeros(len(s), bool)
    for end, stations, distance in zip(ends, (number, number[::-1]), (s, length - s), strict=False):
        if end == FREE_SURFACE:
            layer |= (distance < 0.05 * length) | (stations < few)
    return layer


def _freeze(record: object, names: tuple[str, ...]) -> None:
    for name in names:
        object.__setattr__(record, name, frozen_floats(getattr(record, name)))
