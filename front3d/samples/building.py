"""From a name and parameters to a solved sample."""

from collections.abc import Mapping
from types import MappingProxyType

import numpy as np

from front3d.errors import CaseError
from front3d.samples.cells import check_cells
from front3d.samples.collinear_row import COLLINEAR_ROW
from front3d.samples.compact import COMPACT_SPECIMEN
from front3d.samples.corner_crack import CORNER_CRACK
from front3d.samples.corner_crack_at_hole import CORNER_CRACK_AT_HOLE
from front3d.samples.cylinder_crack import CYLINDER_CRACK
from front3d.samples.elasticity import boundary_faces, traction_load
from front3d.samples.embedded_ellipse import EMBEDDED_ELLIPSE
from front3d.samples.parts import CRACK_AXIS, WHOLE, check_symmetry, part_axes, take_part
from front3d.samples.penny import PENNY
from front3d.samples.round_bar import ROUND_BAR
from front3d.samples.sample import Sample, SampleSpec
from front3d.samples.slanted_crack import SLANTED_CRACK
from front3d.samples.solver import Progress, solve_unfolded
from front3d.samples.surface_crack import SURFACE_CRACK
from front3d.samples.through_crack import THROUGH_CRACK
from front3d.solid import Material, Solid, Step

SAMPLES: Mapping[str, SampleSpec] = MappingProxyType(
    {
        spec.name: spec
        for spec in (
            SURFACE_CRACK,
            PENNY,
            EMBEDDED_ELLIPSE,
            CORNER_CRACK,
            CORNER_CRACK_AT_HOLE,
            THROUGH_CRACK,
            COLLINEAR_ROW,
            SLANTED_CRACK,
            ROUND_BAR,
            COMPACT_SPECIMEN,
            CYLINDER_CRACK,
        )
    }
)


def sample_spec(name: str) -> SampleSpec:
    """The sample called `name`; CaseError if there is none."""
    try:
        return SAMPLES[name]
    except KeyError:
        raise CaseError(f"sample: found {name!r}, expected one of {', '.join(SAMPLES)}") from None


def build(
    name: str,
    *,
    cells: str = "bricks",
    part: str = WHOLE,
    progress: Progress | None = None,
    **parameters: float,
) -> Sample:
    """Mesh, load and solve a sample.

    Parameters
    ----------
    name : a key of SAMPLES
    cells : "bricks" (20 nodes, quarter-point wedges at the front), "tetra10", "brick8", "brick20"
        (mid-side nodes in the middle at the front, too) or "tetra4"
    part : "full", or one of the sample's parts that end at symmetry planes
    progress : called with (stage, fraction of the stage)
    parameters : those of SAMPLES[name], in its units

    Raises
    ------
    CaseError for a wrong name or parameter, or a load that a part cannot carry; MeshError or
    MethodError when the mesh cannot be solved.
    """
    return build_from(sample_spec(name), cells=cells, part=part, progress=progress, **parameters)


def build_from(
    spec: SampleSpec,
    *,
    cells: str = "bricks",
    part: str = WHOLE,
    progress: Progress | None = None,
    **parameters: float,
) -> Sample:
    """`build`, of a sample that need not be in SAMPLES."""
    name = spec.name
    check_cells(cells)
    axes = part_axes(name, spec.parts, part)
    values = spec.values(parameters)
    if progress:
        progress("meshing", 0.0)
    model = spec.mesh(values, cells)
    whole = model.solid
    material = Material(values["young"], values["poisson"])
    loads = spec.loads(values)
    faces = boundary_faces(whole)
    forces = np.stack(
        [
            traction_load(
                whole.points,
                [(kind, nodes[load.on(whole.points[nodes])]) for kind, nodes in faces],
                load.traction,
            )
            for load in loads
        ]
    )
    check_symmetry(name, model, axes, forces, [load.name for load in loads])
    held = spec.held(values, model.part.points)
    moved = solve_unfolded(model, material, forces, progress, held)
    solid, moved = take_part(model, axes, moved)
    steps = tuple(Step(load.name, u) for load, u in zip(loads, moved, strict=True))
    solid = Solid(solid.points, solid.blocks, steps, source=f"sample {name}")
    about = _description(spec, part, cells, values)
    plane = {"crack_plane": "z=0"} if CRACK_AXIS in axes else {}
    case = _case(material, {**spec.options(values), **plane})
    return Sample(name, solid, material, about, case, values)


def _description(spec: SampleSpec, part: str, cells: str, values: Mapping[str, float]) -> str:
    numbers = ", ".join(f"{k} {v:g}" for k, v in values.items())
    kept = "" if part == WHOLE else f"{part} model; "
    return f"{spec.description}; {kept}{cells}; {numbers}"


def _case(material: Material, options: Mapping[str, object]) -> dict[str, Mapping[str, object]]:
    return {
        "material": {"young": material.young, "poisson": material.poisson},
        "units": {"length": "mm", "stress": "MPa"},
        "options": options,
    }
