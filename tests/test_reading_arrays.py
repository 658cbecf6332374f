"""Arrays that loads refer to: kept by name, by point and by cell, and the groups of an MSH file."""

import meshio
import numpy as np
import pytest
import pyvista as pv

import front3d
from front3d.loads import PHYSICAL_GROUP
from tests.reading_models import cells, displacement


def grid(kind_a="tetra10", kind_b="hexahedron20"):
    """Two sorts of cells with a surface cell between them in the file."""
    (x, a), (y, b) = cells(kind_a), cells(kind_b)
    points, b = np.concatenate([x, y + 20.0]), b + len(x)
    triangle = a[:1, :3]
    types = [*[24] * len(a), 5, *[25] * len(b)]
    rows = [*a, *triangle, *b]
    flat = np.concatenate([[len(row), *row] for row in rows])
    out = pv.UnstructuredGrid(flat, np.array(types, np.uint8), points)
    out.point_data["displacement"] = displacement(points)
    out.point_data["T"] = points[:, 0]
    out.cell_data["number"] = np.arange(len(types))
    return out


def test_arrays_by_point_and_by_cell(tmp_path):
    model = grid()
    model.save(tmp_path / "a.vtu")
    solid = front3d.load(tmp_path / "a.vtu", arrays=["T", "number", "missing"])
    (step,) = solid.steps
    np.testing.assert_array_equal(step.point_arrays["T"][:, 0], solid.points[:, 0])
    by_kind = {
        block.kind: part[:, 0]
        for block, part in zip(solid.blocks, step.cell_arrays["number"], strict=True)
    }
    np.testing.assert_array_equal(by_kind["tetra10"], [0, 1, 2])
    np.testing.assert_array_equal(by_kind["hexahedron20"], [4, 5, 6])
    assert front3d.load(tmp_path / "a.vtu").steps[0].point_arrays == {}


def test_arrays_of_each_time(tmp_path):
    lines = []
    for time in (1.0, 2.0):
        model = grid()
        model.point_data["T"] = time * model.points[:, 0]
        model.save(tmp_path / f"{time:g}.vtu")
        lines.append(f'<DataSet timestep="{time}" file="{time:g}.vtu"/>')
    (tmp_path / "a.pvd").write_text(
        f'<VTKFile type="Collection"><Collection>{"".join(lines)}</Collection></VTKFile>'
    )
    steps = front3d.load(tmp_path / "a.pvd", arrays=["T"]).steps
    for step, time in zip(steps, (1.0, 2.0), strict=True):
        np.testing.assert_allclose(step.point_arrays["T"][:, 0], time * grid().points[:, 0])


def test_physical_groups_of_an_msh_file(tmp_path):
    """Version 2.2, written by meshio."""
    points, a = cells("tetra10", 4)
    numbers = np.array([3, 3, 8, 8])
    mesh = meshio.Mesh(
        points,
        [("tetra10", a)],
        point_data={"displacement": displacement(points)},
        cell_data={"gmsh:physical": [numbers], "gmsh:geometrical": [numbers]},
        field_data={"bolt": np.array([3, 3]), "nut": np.array([8, 3]), "skin": np.array([1, 2])},
    )
    mesh.write(tmp_path / "a.msh", file_format="gmsh22")
    solid = front3d.load(tmp_path / "a.msh", arrays=[PHYSICAL_GROUP])
    assert solid.groups == {"bolt": 3, "nut": 8}
    (part,) = solid.steps[0].cell_arrays[PHYSICAL_GROUP]
    np.testing.assert_array_equal(part[:, 0], numbers)


def test_physical_groups_of_version_4(tmp_path):
    """Meshed and written by gmsh: two boxes that share a face, each a group of its own."""
    gmsh = pytest.importorskip("gmsh")
    gmsh.initialize(interruptible=False)
    try:
        gmsh.option.setNumber("General.Terminal", 0)
        boxes = [gmsh.model.occ.addBox(x, 0, 0, 1, 1, 1) for x in (0, 1)]
        gmsh.model.occ.fragment([(3, boxes[0])], [(3, boxes[1])])
        gmsh.model.occ.synchronize()
        for tag, name in zip(boxes, ("left", "right"), strict=True):
            gmsh.model.addPhysicalGroup(3, [tag], name=name)
        gmsh.option.setNumber("Mesh.MeshSizeMax", 0.6)
        gmsh.model.mesh.generate(3)
        gmsh.write(str(tmp_path / "a.msh"))
    finally:
        gmsh.finalize()
    # Node data for the whole mesh, by the published layout of the format.
    count = len(meshio.read(tmp_path / "a.msh").points)
    rows = "\n".join(f"{k + 1} 0 0 0" for k in range(count))
    data = f'$NodeData\n1\n"displacement"\n1\n0.0\n3\n0\n3\n{count}\n{rows}\n$EndNodeData\n'
    with (tmp_path / "a.msh").open("a") as file:
        file.write(data)
    solid = front3d.load(tmp_path / "a.msh", arrays=[PHYSICAL_GROUP])
    (block,), (part,) = solid.blocks, solid.steps[0].cell_arrays[PHYSICAL_GROUP]
    centre = solid.points[block.nodes].mean(axis=1)[:, 0]
    np.testing.assert_array_equal(
        part[:, 0], np.where(centre < 1, solid.groups["left"], solid.groups["right"])
    )
