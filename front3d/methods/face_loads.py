"""What acts on crack faces: uniform pressure, a polynomial of the depth, and named arrays."""

import numpy as np
from scipy.spatial import cKDTree

from front3d.arrays import BoolArray, FloatArray, IntArray, frozen_floats
from front3d.crack.facetable import FaceTable
from front3d.crack.front import on_front_mask
from front3d.methods.context import FrontContext
from front3d.methods.named import at_cells, at_nodes
from front3d.solid import Step


def face_pressure(context: FrontContext, x: FloatArray) -> FloatArray:
    """(steps, ...) pressure at points x, (..., 3), of the crack faces that does not come from an
    array.
    """
    loads = context.loads
    uniform = acting(context, "face_pressure") * context.options.face_pressure
    pressure = np.multiply.outer(uniform, np.ones(x.shape[:-1]))
    if loads.face_polynomial is not None:
        direction = np.array(loads.depth_direction or (0.0, 0.0, 1.0))
        depth = (x - np.array(loads.depth_from)) @ (direction / np.linalg.norm(direction))
        varying = np.polynomial.polynomial.polyval(depth, loads.face_polynomial)
        pressure += np.multiply.outer(acting(context, "face_polynomial"), varying)
    return pressure


def acting(context: FrontContext, load: str) -> FloatArray:
    """(steps,) one where a load acts, else zero."""
    return np.array([float(context.loads.acts(load, step.name)) for step in context.steps])


def gauss_load(
    context: FrontContext, block: int, local: int, cells: IntArray, values: FloatArray
) -> FloatArray:
    """(len(cells), steps, q, 4) pressure and traction at Gauss points of crack faces.

    `values`, (q, nodes), are the cell's shape functions at the points of its face `local`.
    """
    solid, name = context.solid, context.loads.face_array
    members = solid.blocks[block].nodes[cells]
    x = np.einsum("qn,fnk->fqk", values, solid.points[members])
    out = np.zeros((len(cells), len(context.steps), len(values), 4))
    out[..., 0] = np.moveaxis(face_pressure(context, x), 0, 1)
    if name is None:
        return frozen_floats(out)
    # On a face only its own nodes count, and the others may be without a value.
    on_face = list(solid.blocks[block].element.faces[local][1])
    by_step = []
    for step in context.steps:
        if not context.loads.acts("face_array", step.name):
            by_step.append(np.zeros_like(out[:, 0]))
            continue
        own = at_cells(solid, step, name, block, cells, (1, 3))
        if own is None:
            at = _at_face_nodes(context, step, name, members[:, on_face])
            there = np.einsum("qn,fnk->fqk", values[:, on_face], at)
        else:
            there = np.broadcast_to(own[:, None], (len(cells), len(values), own.shape[1]))
        by_step.append(split_load(there))
    return frozen_floats(out + np.stack(by_step, axis=1))


def loaded_faces(context: FrontContext) -> bool:
    return bool(context.options.face_pressure) or context.loads.on_faces


def split_load(values: FloatArray) -> FloatArray:
    """(..., 4), pressure and traction, of an array of one or three components."""
    out = np.zeros((*values.shape[:-1], 4))
    if values.shape[-1] == 1:
        out[..., 0] = values[..., 0]
    else:
        out[..., 1:] = values
    return out


def array_load(
    context: FrontContext,
    step: Step,
    faces: FaceTable,
    nodes: IntArray,
    values: FloatArray,
    ahead: bool,
) -> FloatArray:
    """(n, q, 4) pressure and traction that an array gives at Gauss points of faces of one block.

    `nodes`, (n, m), are those of the faces, `values`, (q, m), their shape functions.  Ahead of the
    front: the value of the nearest node, or the cell of the nearest face, of the upper face.
    """
    solid, name = context.solid, context.loads.face_array
    if name is None or not context.loads.acts("face_array", step.name):
        return np.zeros((1, 1, 4))
    if name not in step.point_arrays:
        own = _of_cells(context, step, name, faces, ahead)
        return split_load(np.repeat(own[:, None], len(values), axis=1))
    if ahead:
        upper = np.unique(context.patch.upper.nodes)
        if step.point_arrays[name].shape[1] == 3:
            # The front's nodes belong to both faces, and no traction can be told there.
            upper = upper[~on_front_mask(context.front, context.model.same)[upper]]
        _, nearest = cKDTree(solid.points[upper]).query(solid.points[nodes])
        at = at_nodes(solid, step, name, upper, (1, 3))[nearest]
    else:
        at = _at_face_nodes(context, step, name, nodes)
    return split_load(np.einsum("qn,fnk->fqk", values, at))


def _of_cells(
    context: FrontContext, step: Step, name: str, faces: FaceTable, ahead: bool
) -> FloatArray:
    """(n, components) of a cell array at faces; ahead of the front, at the nearest upper face."""
    solid = context.solid
    if ahead:
        upper = context.patch.upper
        tree = cKDTree(solid.points[upper.corners].mean(axis=1))
        faces = upper[np.asarray(tree.query(solid.points[faces.corners].mean(axis=1))[1])]
    out: FloatArray | None = None
    for block in np.unique(faces.block):
        mine = faces.block == block
        own = at_cells(solid, step, name, int(block), faces.cell[mine], (1, 3))
        if own is not None:
            out = np.zeros((len(faces), own.shape[1])) if out is None else out
            out[mine] = own
    return np.zeros((len(faces), 1)) if out is None else out


def _at_face_nodes(context: FrontContext, step: Step, name: str, nodes: IntArray) -> FloatArray:
    """(n, m, components) of an array at the nodes of faces of one kind.

    The nodes of the front belong to both faces, whose tractions differ: there the traction is
    carried on from the other nodes of the face.
    """
    at = at_nodes(context.solid, step, name, nodes.ravel(), (1, 3)).reshape(*nodes.shape, -1)
    if at.shape[2] == 1:
        return at
    shared = on_front_mask(context.front, context.model.same)[nodes]
    for pattern in np.unique(shared, axis=0):
        if pattern.any() and not pattern.all():
            rows = (shared == pattern).all(axis=1)
            x = context.solid.points[nodes[rows]]
            at[np.ix_(rows, pattern)] = _carried(x, at[rows], pattern)
    return at


def _carried(x: FloatArray, values: FloatArray, missing: BoolArray) -> FloatArray:
    """Values at the missing nodes of faces with nodes at x, (n, m, 3), from (n, m, components): by
    the linear function nearest to those at the others.
    """
    known = x[:, ~missing]
    centre = known.mean(axis=1, keepdims=True)
    size = np.abs(known - centre).max(axis=(1, 2), keepdims=True)
    basis = np.concatenate([np.ones((*x.shape[:2], 1)), (x - centre) / size], axis=2)
    # Faces are nearly flat: what little they bend must not tell a slope across them.
    solve = np.linalg.pinv(basis[:, ~missing], rcond=0.05)
    return np.asarray(basis[:, missing] @ (solve @ values[:, ~missing]), dtype=np.float64)
