"""The state of the solid at nodes: constants, initial stress and body force there."""

import numpy as np

from front3d.arrays import FloatArray, IntArray, frozen_floats
from front3d.errors import MethodError
from front3d.loads import Loads, Row
from front3d.methods.context import FrontContext
from front3d.methods.named import at_nodes
from front3d.methods.state_kernels import BODY, INITIAL, LAME, N_COLUMNS, RATIO, SHEAR
from front3d.methods.terms import BODY_FORCE, included
from front3d.methods.tube import along_front
from front3d.solid import Constants, LocalMaterial, Step

_SYMMETRIC = ((0, 0), (1, 1), (2, 2), (0, 1), (1, 2), (0, 2))


def nodal_state(
    context: FrontContext, nodes: IntArray, s: FloatArray, free: FloatArray | None = None
) -> FloatArray:
    """(steps, len(nodes), N_COLUMNS), see `state_kernels`; empty where nothing acts or varies.

    `s` is the arc length of the front's point nearest to each node; `free`, (steps,), an even
    extension that the displacements were freed of, and that thermal strain is counted from.
    """
    loads = context.loads
    if not loads.in_volume:
        return frozen_floats(np.zeros((0, 0, N_COLUMNS)))
    out = np.zeros((len(context.steps), len(nodes), N_COLUMNS))
    if free is None:
        free = np.zeros(len(out))
    for step, here, counted_from in zip(context.steps, out, free, strict=True):
        T = None
        if loads.temperature is not None and loads.acts("temperature", step.name):
            T = at_nodes(context.solid, step, loads.temperature, nodes, (1,))[:, 0]
        young, poisson = _elastic(context, T)
        here[:, LAME] = young * poisson / ((1.0 + poisson) * (1.0 - 2.0 * poisson))
        here[:, SHEAR] = young / (2.0 * (1.0 + poisson))
        here[:, INITIAL:BODY] = _initial_stress(
            context, step, nodes, _thermal_strain(context, T) - counted_from, here
        )
        if included(BODY_FORCE):
            here[:, BODY:RATIO] = body_force(context, step, nodes)
        here[:, RATIO] = context.material.poisson
        if loads.elastic_table is not None:
            local = local_material(context, step)
            here[:, RATIO] = along_front(context.front, local.poisson, s)
    return frozen_floats(out)


def station_constants(context: FrontContext) -> tuple[Constants, ...]:
    """The constants along the front in each result; by temperature no steps are combined."""
    if context.loads.elastic_table is None:
        count = len(context.displacement) if context.rows is None else len(context.rows)
        return (context.material,) * count
    return tuple(local_material(context, step) for step in context.steps)


def varying_ratio(loads: Loads) -> bool:
    """Whether Poisson's ratio varies in space."""
    return loads.elastic_table is not None and len({row[2] for row in loads.elastic_table}) > 1


def local_material(context: FrontContext, step: Step) -> LocalMaterial:
    """Constants by the elastic table at the front's corner nodes."""
    loads = context.loads
    T = at_nodes(context.solid, step, loads.temperature or "", context.front.corners, (1,))[:, 0]
    return LocalMaterial(*_elastic(context, T))


def body_force(context: FrontContext, step: Step, nodes: IntArray) -> FloatArray:
    """(len(nodes), 3) force per volume by gravity and rotation, in one step."""
    loads, x = context.loads, context.solid.points[nodes]
    acceleration = np.zeros_like(x)
    if loads.gravity is not None and loads.acts("gravity", step.name):
        acceleration += loads.gravity
    turns = loads.acts("rotation", step.name)
    if loads.rotation and loads.rotation_axis is not None and turns:
        axis = np.array(loads.rotation_axis) / np.linalg.norm(loads.rotation_axis)
        arm = x - np.array(loads.rotation_point)
        arm = arm - (arm @ axis)[:, None] * axis
        acceleration += loads.rotation**2 * arm
    return (loads.density or 0.0) * acceleration


def _elastic(context: FrontContext, T: FloatArray | None) -> tuple[FloatArray, FloatArray]:
    """Young's modulus and Poisson's ratio at temperatures T."""
    table = context.loads.elastic_table
    if table is None or T is None:
        material = context.material
        return np.asarray(material.young), np.asarray(material.poisson)
    return _look_up(context, table, 1, T), _look_up(context, table, 2, T)


def _look_up(context: FrontContext, table: tuple[Row, ...], column: int, T: FloatArray) -> (
    FloatArray
):  # fmt: skip
    known = [row[0] for row in table]
    slack = 1e-9 * (known[-1] - known[0] + abs(known[0]))
    if len(known) > 1 and (T.min() < known[0] - slack or T.max() > known[-1] + slack):
        raise MethodError(
            f"{context.solid.source}: found temperatures from {T.min():g} to {T.max():g} near the "
            f"front, expected {known[0]:g} to {known[-1]:g}, the range of the table"
        )
    return np.interp(T, known, [row[column] for row in table])


def free_extension(context: FrontContext, nodes: IntArray) -> FloatArray:
    """(steps,) mean thermal strain at nodes.

    A solid that extends evenly by it has no stress, and K does not depend on it: taken off the
    displacements it does not do so through rounding and quadrature either.
    """
    out = np.zeros(len(context.displacement))
    name = context.loads.temperature
    if name is not None and context.loads.expansion is not None:
        for k, step in enumerate(context.steps):
            if not context.loads.acts("temperature", step.name):
                continue
            T = at_nodes(context.solid, step, name, nodes, (1,))[:, 0]
            out[k] = np.mean(_thermal_strain(context, T))
    return out


def _thermal_strain(context: FrontContext, T: FloatArray | None) -> FloatArray:
    loads = context.loads
    if T is None or loads.expansion is None:
        return np.zeros(())
    rise = T - loads.reference_temperature
    if isinstance(loads.expansion, float):
        return loads.expansion * rise
    return _look_up(context, loads.expansion, 1, T) * rise


def _initial_stress(
    context: FrontContext, step: Step, nodes: IntArray, thermal: FloatArray, state: FloatArray
) -> FloatArray:
    """(len(nodes), 6): given stress, less C : (thermal and given strain)."""
    loads, solid = context.loads, context.solid
    stress = np.zeros((len(nodes), 6))
    strain = np.zeros((len(nodes), 6))
    if loads.initial_stress is not None and loads.acts("initial_stress", step.name):
        stress += _six(at_nodes(solid, step, loads.initial_stress, nodes, (6, 9)))
    if loads.initial_strain is not None and loads.acts("initial_strain", step.name):
        strain += _six(at_nodes(solid, step, loads.initial_strain, nodes, (6, 9)))
    strain[:, :3] += thermal[..., None]
    stress -= 2.0 * state[:, SHEAR, None] * strain
    stress[:, :3] -= (state[:, LAME] * strain[:, :3].sum(axis=1))[:, None]
    return stress


def _six(values: FloatArray) -> FloatArray:
    """xx, yy, zz, xy, yz, xz of symmetric tensors given by six or nine components."""
    if values.shape[1] == 6:
        return values
    return np.stack([0.5 * (values[:, 3 * i + j] + values[:, 3 * j + i]) for i, j in _SYMMETRIC], 1)
