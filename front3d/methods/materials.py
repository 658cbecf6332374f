"""Which material a front runs in, and what of the loads belongs to it."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from front3d.arrays import BoolArray
from front3d.crack import CrackModel, Front
from front3d.crack.facetable import cells_with
from front3d.crack.front import on_front_mask
from front3d.errors import CaseError, MethodError
from front3d.loads import PHYSICAL_GROUP, Loads, Region
from front3d.solid import Material, Solid, Step


def material_of_front(
    solid: Solid,
    model: CrackModel,
    front: Front,
    material: Material | None,
    loads: Loads,
    steps: Sequence[Step],
) -> tuple[Material, Loads]:
    """Constants for the auxiliary fields of a front, and the loads as its material bears them.

    MethodError where cells of different regions touch the front; CaseError where no constants are
    given for what is there.
    """
    if loads.regions:
        region = _region_at(solid, model, front, loads, steps[0])
        own = {
            name: value
            for name in ("expansion", "density")
            if (value := getattr(region, name)) is not None
        }
        return Material(region.young, region.poisson), replace(loads, **own)
    return nominal(None if loads.elastic_table else material, loads), loads


def nominal(material: Material | None, loads: Loads) -> Material:
    """The constants that stand for the whole solid in what is reported."""
    if material is not None:
        return material
    if loads.elastic_table is not None:
        _, young, poisson = loads.elastic_table[len(loads.elastic_table) // 2]
        return Material(young, poisson)
    if loads.regions:
        return Material(loads.regions[0].young, loads.regions[0].poisson)
    raise CaseError("found no elastic constants, expected Young's modulus and Poisson's ratio")


def foreign_cells(solid: Solid, model: CrackModel, front: Front, loads: Loads, step: Step) -> (
    tuple[BoolArray, ...]
):  # fmt: skip
    """Per block, (n_cells,) whether a cell is of another region than those at the front."""
    if not loads.regions:
        return tuple(np.zeros(len(block), bool) for block in solid.blocks)
    numbers = _numbers(solid, loads, step)
    own = _number_of(solid, _region_at(solid, model, front, loads, step))
    return tuple(np.asarray(part != own) for part in numbers)


def _numbers(solid: Solid, loads: Loads, step: Step) -> list[np.ndarray]:
    name = loads.region_array or PHYSICAL_GROUP
    if name not in step.cell_arrays:
        raise CaseError(
            f"{solid.source}: found no cell array {name!r} for the regions, expected one number "
            "per cell (load the file with it: arrays=...)"
        )
    return [part[:, 0] for part in step.cell_arrays[name]]


def _number_of(solid: Solid, region: Region) -> float:
    if isinstance(region.region, str):
        if region.region not in solid.groups:
            known = ", ".join(solid.groups) or "none"
            raise CaseError(
                f"{solid.source}: found no physical group {region.region!r}; the file names {known}"
            )
        return float(solid.groups[region.region])
    return float(region.region)


def _region_at(solid: Solid, model: CrackModel, front: Front, loads: Loads, step: Step) -> Region:
    on_front = on_front_mask(front, model.same, model.near.nodes)
    touching = cells_with(solid, on_front, model.near.cells)
    numbers = _numbers(solid, loads, step)
    found = np.unique(
        np.concatenate([part[cells] for part, cells in zip(numbers, touching, strict=True)])
    )
    if len(found) > 1:
        raise MethodError(
            f"{solid.source}: the front runs along or through a change of material: its cells are "
            f"of the regions {', '.join(f'{n:g}' for n in found)}, expected one; at an interface "
            "the stresses do not have the form that defines K_I, K_II and K_III"
        )
    for region in loads.regions:
        if _number_of(solid, region) == found[0]:
            return region
    raise CaseError(
        f"{solid.source}: the cells at the front are of region {found[0]:g}, for which no material "
        f"is given; expected it among {', '.join(str(r.region) for r in loads.regions)}"
    )
