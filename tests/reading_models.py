"""Small models for the reading tests: cells of every type, smoothly distorted, in general position.

The displacement is a polynomial of the position, so it can be compared wherever it is interpolated.
"""

import meshio
import netCDF4
import numpy as np
import pyvista as pv

from front3d.elements import ELEMENTS, element_type

# meshio 5.3.5 knows these two types everywhere but here.
meshio._mesh.topological_dimension.update(wedge15=3, pyramid13=3)

KINDS = list(ELEMENTS)


def bend(x):
    """A smooth, invertible map that straightens nothing and keeps orientation."""
    u, v, w = x.T
    return np.stack(
        [
            u + 0.10 * v + 0.03 * v * w + 0.02 * u * u,
            1.1 * v - 0.05 * w + 0.03 * u * w,
            0.9 * w + 0.08 * u + 0.02 * v * v,
        ],
        axis=1,
    )


def displacement(x, case=1.0):
    u, v, w = x.T
    return 1e-3 * case * np.stack([u + v * w, v - 2 * w + u * u, 3 * w + u * v - 1], axis=1)


def cells(kind, count=3):
    """(points, nodes): separate distorted cells along a row, their nodes numbered at random."""
    element = element_type(kind)
    rng = np.random.default_rng(7)
    points = np.concatenate(
        [bend(0.4 * element.nodes + [1.1 * k, 0.3 * k, -0.2 * k]) for k in range(count)]
    )
    order = rng.permutation(len(points))
    shuffled = np.empty_like(points)
    shuffled[order] = points
    return shuffled, order.reshape(count, -1)


def mixed(*kinds):
    """(points, {kind: nodes}) of several kinds side by side, sharing no nodes."""
    points, blocks, start = [], {}, 0
    for row, kind in enumerate(kinds):
        x, nodes = cells(kind)
        points.append(x + np.array([0, 2.0 * row, 0]))
        blocks[kind] = nodes + start
        start += len(x)
    return np.concatenate(points), blocks


def mesh(points, blocks, **point_data):
    """A meshio mesh; its linear wedges are those of VTK mirrored, as meshio itself holds."""
    return meshio.Mesh(points, list(blocks.items()), point_data=point_data)


def volumes(points, kind, nodes):
    """Signed volume of each cell (sum of the Jacobian determinants of our reference map)."""
    element = element_type(kind)
    xi, weights = element.quadrature(3)
    jacobian = np.einsum("pnd,cnk->cpkd", element.gradients(xi), points[nodes])
    return np.linalg.det(jacobian) @ weights


def assert_same_cells(points, kind, expected, nodes, values, read_values):
    """`nodes` describe the cells `expected`, and interpolate the same positions and values.

    Two node orders describe the same cell if an affine map of the reference cell takes one to the
    other; interpolation is then compared at corresponding points.
    """
    element = element_type(kind)
    assert nodes.shape == expected.shape
    xi, _ = element.quadrature(2)
    homogeneous = np.column_stack([element.nodes, np.ones(len(element.nodes))])
    for ours, theirs in zip(nodes, expected, strict=True):
        place = {int(node): k for k, node in enumerate(theirs)}
        target = element.nodes[[place[int(node)] for node in ours]]
        affine, _, _, _ = np.linalg.lstsq(homogeneous, target, rcond=None)
        np.testing.assert_allclose(homogeneous @ affine, target, atol=1e-12)
        here = element.values(xi)
        there = element.values(np.column_stack([xi, np.ones(len(xi))]) @ affine)
        np.testing.assert_allclose(here @ points[ours], there @ points[theirs], atol=1e-12)
        np.testing.assert_allclose(here @ read_values[ours], there @ values[theirs], atol=1e-9)


def grid(points, blocks, **point_data):
    types = {ELEMENTS[k].vtk_type if k in ELEMENTS else k: n for k, n in blocks.items()}
    out = pv.UnstructuredGrid(types, points)
    for name, values in point_data.items():
        out.point_data[name] = values
    return out


# Node order of HEX20 and HEX27 in the Exodus II manual (Sandia, SAND92-2137): the vertical
# edges come before the top ones; the centre of HEX27 is its 21st node.
EXODUS = {
    "hexahedron20": ("HEX20", [*range(12), 16, 17, 18, 19, 12, 13, 14, 15]),
    "hexahedron27": (
        "HEX27",
        [*range(12), 16, 17, 18, 19, 12, 13, 14, 15, 26, 24, 25, 20, 21, 22, 23],
    ),
    "tetra10": ("TETRA10", list(range(10))),
    "hexahedron": ("HEX8", list(range(8))),
    "tetra": ("TETRA4", list(range(4))),
    "wedge": ("WEDGE6", list(range(6))),
    "wedge15": ("WEDGE15", [*range(9), 12, 13, 14, 9, 10, 11]),
    "pyramid": ("PYRAMID5", list(range(5))),
}


def write_ensight(path, data):
    """EnSight Gold ("C Binary") by VTK's own writer; `path` is that of the case file."""
    from vtkmodules.vtkIOParallel import vtkEnSightWriter

    data = data.copy()
    if "BlockId" not in data.cell_data:  # the number of the part
        data.cell_data["BlockId"] = np.ones(data.n_cells, dtype=np.int32)
    writer = vtkEnSightWriter()
    writer.SetInputData(data)
    writer.SetFileName(str(path.with_suffix("")))
    writer.SetPath(str(path.parent))
    writer.SetBaseName(path.stem)
    writer.Write()
    writer.WriteCaseFile(1)
    path.with_name(f"{path.stem}.0.case").replace(path)


def write_exodus(path, points, blocks, steps, real="f8"):
    """The Exodus II layout (netCDF names as in its manual)."""
    with netCDF4.Dataset(path, "w", format="NETCDF3_64BIT_OFFSET") as file:
        file.api_version = np.float32(5.1)
        file.version = np.float32(5.1)
        file.floating_point_word_size = np.int32(int(real[1]))
        file.file_size = np.int32(1)
        file.title = "test"
        file.createDimension("len_string", 33)
        file.createDimension("len_name", 33)
        file.createDimension("four", 4)
        file.createDimension("time_step", None)
        file.createDimension("num_dim", 3)
        file.createDimension("num_nodes", len(points))
        file.createDimension("num_elem", sum(len(nodes) for nodes in blocks.values()))
        file.createDimension("num_el_blk", len(blocks))
        file.createDimension("num_nod_var", 3)
        file.createVariable("time_whole", real, ("time_step",))
        file.createVariable("eb_prop1", "i4", ("num_el_blk",)).setncattr("name", "ID")
        file["eb_prop1"][:] = np.arange(1, len(blocks) + 1)
        file.createVariable("eb_status", "i4", ("num_el_blk",))[:] = 1
        for axis, name in enumerate(["coordx", "coordy", "coordz"]):
            file.createVariable(name, real, ("num_nodes",))[:] = points[:, axis]
        names = np.zeros((3, 33), dtype="S1")
        for k, name in enumerate(["DISPLX", "DISPLY", "DISPLZ"]):
            names[k, :6] = list(name)
        file.createVariable("name_nod_var", "S1", ("num_nod_var", "len_name"))[:] = names
        for number, (kind, nodes) in enumerate(blocks.items(), 1):
            name, order = EXODUS[kind]
            file.createDimension(f"num_el_in_blk{number}", len(nodes))
            file.createDimension(f"num_nod_per_el{number}", nodes.shape[1])
            shape = (f"num_el_in_blk{number}", f"num_nod_per_el{number}")
            connect = file.createVariable(f"connect{number}", "i4", shape)
            connect.elem_type = name
            connect[:] = nodes[:, order] + 1
        for k in range(3):
            file.createVariable(f"vals_nod_var{k + 1}", real, ("time_step", "num_nodes"))
        for row, (time, u) in enumerate(steps.items()):
            file["time_whole"][row] = time
            for k in range(3):
                file[f"vals_nod_var{k + 1}"][row] = u[:, k]
