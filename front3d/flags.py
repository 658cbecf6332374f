"""What a reader must know about single stations, and about a front as a whole."""

from collections.abc import Mapping

import numpy as np

from front3d.crack.front import FREE_SURFACE, Front
from front3d.evidence import J_TOLERANCE, REPORTED, RING_TOLERANCE, Evidence
from front3d.results import MethodResult, energy_release_rate
from front3d.solid import Constants
from front3d.units import percent

OVERLAP = 0.01
"""Negative K_I, in parts of the front's largest K, below which scatter may be the reason and
nothing is said."""


def station_flags(
    front: Front, methods: Mapping[str, MethodResult], evidence: Evidence
) -> tuple[str, ...]:
    """One text per station, parts joined by "; ", empty where nothing is to be said."""
    interaction, K = methods[REPORTED], evidence.K
    n = len(K)
    parts: list[list[str]] = [[] for _ in range(n)]
    for where, end in zip((0, n - 1), front.ends, strict=False):
        if end == FREE_SURFACE:
            parts[where].append("free surface")
    largest = float(np.abs(K).max())
    for i in np.flatnonzero(K[:, 0] < -OVERLAP * largest):
        parts[i].append("faces overlap (K_I < 0)")
    spread = interaction.columns["ring_spread"]
    for i in np.flatnonzero(spread > RING_TOLERANCE * largest):
        source = evidence.source[i]
        parts[i].append("rings disagree" + (f", K by {source}" if source != REPORTED else ""))
    for i in np.flatnonzero(evidence.apart):
        parts[i].append("methods disagree")
    return tuple("; ".join(p) for p in parts)


def front_warnings(
    front: Front, methods: Mapping[str, MethodResult], evidence: Evidence, material: Constants
) -> tuple[str, ...]:
    """Sentences about the whole front.

    A wrong Young's modulus cannot be seen: it scales K and leaves J equal to G.
    """
    interaction, K = methods[REPORTED], evidence.K
    warnings = [note for method in methods.values() for note in method.notes]
    warnings += evidence.warnings
    largest = float(np.abs(K).max())
    overlap = int((K[:, 0] < -OVERLAP * largest).sum())
    if overlap:
        warnings.append(
            f"K_I is negative at {overlap} of {len(K)} stations: the crack faces overlap there, "
            "and contact would change all three modes"
        )
    inside = np.ones(len(K), bool)
    if not front.closed:
        inside[[0, -1]] = False
    G = energy_release_rate(K, material)
    own = inside & (np.array(evidence.source) == REPORTED)  # J is of the integral's own domain
    apart = np.where(own, np.abs(interaction.columns["J_interaction"] - G), 0.0)
    if (apart > J_TOLERANCE * G.max()).any():
        warnings.append(
            f"J and G from K differ by up to {percent(apart.max() / G.max())} of the largest G "
            f"at {int((apart > J_TOLERANCE * G.max()).sum())} stations: Poisson's ratio may not be "
            "that of the analysis, a load may be missing, or the mesh is too coarse around the "
            "front"
        )
    spread = interaction.columns["ring_spread"]
    if largest > 0 and float(spread[inside].max(initial=0.0)) > RING_TOLERANCE * largest:
        warnings.append(
            f"K differs between rings by up to {percent(float(spread[inside].max()) / largest)} "
            "of the largest K: a load may be missing (on the crack faces, on a surface, in the "
            "body), or the mesh around the front or the radii do not suit"
        )
    return tuple(warnings)
