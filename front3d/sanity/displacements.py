"""Displacements that cannot be those of a small deformation, and constants of no known solid."""

from collections.abc import Sequence

import numpy as np

from front3d.arrays import FloatArray
from front3d.crack.model import CrackModel
from front3d.crack.patches import Patch
from front3d.errors import CaseError
from front3d.solid import Material, Solid, Step
from front3d.units import STRESSES, Units, percent

LIKE_COORDINATES = 0.1
"""Difference of the mean gradient of a displacement from one, below which it is a position."""

_LOOKED_AT = 4000
"""Cells that are looked at for it, or up to twice as many."""

MAX_ROTATION, MAX_STRAIN = 5.0, 0.1
"""Mean rotation (degrees) and strain around a crack above which small-strain theory is left:
common practice."""

YOUNG_RANGE = (0.01, 1300.0)
"""GPa: from soft rubber and foam to diamond, about 1 200 (general knowledge, from memory)."""

POISSON_RANGE = (0.0, 0.49)
"""Auxetic solids and nearly incompressible ones exist, but are rare in cracked parts."""


def refuse_coordinates(solid: Solid, steps: Sequence[Step]) -> None:
    """CaseError where the displacements of a step are the deformed positions.

    Positions have a gradient of one, strains of 100 per cent, whatever the deformation: nodes of
    some cells from all over the solid tell.
    """
    every = max(1, solid.n_cells // _LOOKED_AT)
    nodes = np.unique(np.concatenate([block.nodes[::every].ravel() for block in solid.blocks]))
    x = solid.points[nodes]
    for step in steps:
        gradient = mean_gradient(x, step.displacement[nodes])
        if np.linalg.norm(gradient - np.eye(3), 2) < LIKE_COORDINATES:
            raise CaseError(
                f"{solid.source}: step {step.name}: found displacements that follow the "
                f"coordinates (their mean gradient is one within "
                f"{np.linalg.norm(gradient - np.eye(3), 2):.2g}), expected a small deformation: "
                "they look like deformed positions; give the displacements themselves "
                "(--displacement names another array)"
            )


def mean_gradient(x: FloatArray, u: FloatArray) -> FloatArray:
    """(3, 3) du_i/dx_j of the linear field nearest to displacements u, (n, 3), at x, (n, 3)."""
    centred = x - x.mean(axis=0)
    # Normal equations: every node of a solid goes in, and three columns need no more digits.
    moments = centred.T @ (u - u.mean(axis=0))
    found, *_ = np.linalg.lstsq(centred.T @ centred, moments, rcond=1e-14)
    gradient: FloatArray = found.T
    return gradient


def displacement_warnings(
    solid: Solid, steps: Sequence[Step], model: CrackModel
) -> tuple[str, ...]:
    """Large rotation or strain around a crack, in any step."""
    said = []
    for number, patch in enumerate(model.patches):
        nodes = _around(solid, patch)
        for step in steps:
            gradient = mean_gradient(solid.points[nodes], step.displacement[nodes])
            spin = 0.5 * (gradient - gradient.T)
            turn = float(np.degrees(np.linalg.norm([spin[2, 1], spin[0, 2], spin[1, 0]])))
            strain = float(np.abs(np.linalg.eigvalsh(0.5 * (gradient + gradient.T))).max())
            where = f"step {step.name}, crack {number}: "
            if turn > MAX_ROTATION:
                said.append(
                    f"{where}the cells around it turn by {turn:.3g} degrees on the average, "
                    f"expected less than {MAX_ROTATION:g}: stresses are those of small rotations; "
                    "take the rigid motion out of the displacements, and if the part deforms as "
                    "much, K from this model is not meaningful"
                )
            if strain > MAX_STRAIN:
                said.append(
                    f"{where}the cells around it are strained by {percent(strain)} on the "
                    f"average, expected less than {100 * MAX_STRAIN:g} %: check that "
                    "displacements and coordinates are in one unit (millimetres, metres) and "
                    "that the displacements are not magnified for display"
                )
    return tuple(said)


def _around(solid: Solid, patch: Patch) -> np.ndarray:
    """Nodes of the cells that have a crack face."""
    nodes = []
    for faces in filter(None, (patch.upper, patch.lower)):
        for b, block in enumerate(solid.blocks):
            nodes.append(block.nodes[faces.cell[faces.block == b]].ravel())
    return np.unique(np.concatenate(nodes))


def constant_warnings(material: Material, units: Units) -> tuple[str, ...]:
    """Elastic constants out of the range of solids, where the unit of stress is named."""
    said = []
    if units.stress:
        young = material.young * STRESSES[units.stress] / 1e3
        low, high = YOUNG_RANGE
        if not low <= young <= high:
            said.append(
                f"Young's modulus: found {material.young:g} {units.stress} ({young:.3g} GPa), "
                f"expected {low:g} to {high:g} GPa: check the unit of stress"
            )
    low, high = POISSON_RANGE
    if not low <= material.poisson <= high:
        said.append(
            f"Poisson's ratio: found {material.poisson:g}, expected {low:g} to {high:g} of most "
            "solids: check it; near 0.5 most elements lock, and K with them"
        )
    return tuple(said)
