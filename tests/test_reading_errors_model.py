# ruff: noqa: F811 (the fixtures are imported)
"""A file that is whole, of a mesh or of numbers that cannot be evaluated, is a ReadError too.

Each check also holds that nothing is printed and that no other exception gets out.
"""

import meshio
import numpy as np
import pytest
import pyvista as pv

from front3d.errors import MeshError
from front3d.reading import load
from front3d.solid import CellBlock, Solid, Step
from tests.reading_faults import refuse  # noqa: F401
from tests.reading_models import cells, displacement, grid, mesh

# ------------------------------------------------------------------------------- the mesh


@pytest.mark.parametrize("suffix", [".vtu", ".vtk", ".vtkhdf", ".msh", ".xdmf", ".med"])
def test_shells_have_no_solid_cells(tmp_path, refuse, suffix):
    points = np.array([[0.0, 0, 0], [1, 0, 0], [1, 1, 0.5], [0, 1, 0]])
    path = tmp_path / f"a{suffix}"
    m = meshio.Mesh(points, [("quad", [[0, 1, 2, 3]])], {"u": points})
    if suffix == ".vtkhdf":
        grid(points, {9: np.array([[0, 1, 2, 3]])}).save(path)
    else:
        meshio.write(path, m, **({"file_format": "gmsh22"} if suffix == ".msh" else {}))
    refuse(path, "found 1 qua", "expected solid cells", "tetra")


@pytest.mark.parametrize("suffix", [".xdmf", ".med"])
def test_two_dimensional_models(tmp_path, refuse, suffix):
    points = np.array([[0.0, 0], [1, 0], [1, 1], [0, 1]])
    m = meshio.Mesh(points, [("quad", [[0, 1, 2, 3]])], {"u": points})
    meshio.write(tmp_path / f"a{suffix}", m)
    refuse(tmp_path / f"a{suffix}", "two-dimensional")


def test_a_mesh_without_cells_or_points(tmp_path, refuse):
    pv.UnstructuredGrid().save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", "no mesh")
    pv.PolyData(np.eye(3)).cast_to_unstructured_grid().save(tmp_path / "b.vtu")
    refuse(tmp_path / "b.vtu", "vertex", "solid")
    (tmp_path / "c.msh").write_text("$MeshFormat\n2.2 0 8\n$EndMeshFormat\n")
    refuse(tmp_path / "c.msh", "$Nodes")


@pytest.mark.parametrize("number, name", [(72, "Lagrange hexahedron"), (42, "polyhedron")])
def test_cells_that_are_not_known_are_refused_by_name(tmp_path, refuse, number, name):
    points = pv.examples.cells.Hexahedron().points
    faces = [(0, 1, 2, 3), (4, 5, 6, 7), (0, 1, 5, 4), (1, 2, 6, 5), (2, 3, 7, 6), (3, 0, 4, 7)]
    stream = [6, *(v for face in faces for v in (4, *face))] if number == 42 else range(8)
    stream = list(stream)
    pv.UnstructuredGrid([len(stream), *stream], [number], points).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", f"1 {name}", "hexahedron20")


def test_wedges_of_18_nodes_are_refused_by_name(tmp_path, refuse):
    points = np.random.default_rng(0).random((18, 3))
    m = meshio.Mesh(points, [("wedge18", np.arange(18)[None])], {"u": points})
    meshio.write(tmp_path / "a.msh", m, "gmsh22")
    refuse(tmp_path / "a.msh", "1 wedge18")


@pytest.mark.parametrize("node", [-1, 999])
def test_cells_that_name_a_missing_node(tmp_path, refuse, node):
    points, nodes = cells("tetra10")
    nodes = nodes.copy()
    nodes[1, 7] = node
    m = mesh(points, {"tetra10": nodes}, u=displacement(points))
    meshio.write(tmp_path / "a.xdmf", m)
    refuse(tmp_path / "a.xdmf", "tetra10 cell 1", str(node), f"{len(points)} points")


def test_an_unknown_node_order(tmp_path, refuse):
    points, nodes = cells("hexahedron20")
    shuffled = nodes[:, [*range(8), *(8 + np.random.default_rng(0).permutation(12))]]
    grid(points, {"hexahedron20": shuffled}, u=displacement(points)).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", "hexahedron20 cell 0", "check its node order")


def test_a_mesh_that_changes_with_time(tmp_path, refuse):
    points, nodes = cells("tetra10")
    for k in range(2):
        moved = points + 0.01 * k
        grid(moved, {"tetra10": nodes}, u=displacement(points)).save(tmp_path / f"{k}.vtu")
    entries = "".join(f'<DataSet timestep="{k}" file="{k}.vtu"/>' for k in range(2))
    path = tmp_path / "a.pvd"
    path.write_text(f'<VTKFile type="Collection"><Collection>{entries}</Collection></VTKFile>')
    refuse(path, "the mesh at time 1.0 differs")


# ----------------------------------------------------------------------------- the numbers


@pytest.mark.parametrize("bad", [np.nan, np.inf])
@pytest.mark.parametrize("what", ["coordinates", "displacement"])
def test_numbers_that_are_not_finite_name_the_node(tmp_path, refuse, bad, what):
    points, nodes = cells("hexahedron20")
    u = displacement(points)
    node = int(nodes[1, 9])
    (points if what == "coordinates" else u)[node, 1] = bad
    grid(points, {"hexahedron20": nodes}, u=u).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", f"node {node} ", what, "finite")


def test_absurd_coordinates(tmp_path, refuse):
    points, nodes = cells("tetra10")
    points[nodes[0, 1]] = 1e300
    grid(points, {"tetra10": nodes}, u=displacement(points * 0)).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", "tetra10 cell 0")


def test_absurd_displacements(tmp_path, refuse):
    points, nodes = cells("tetra10")
    u = displacement(points)
    u[nodes[0, 1]] = 1e200
    grid(points, {"tetra10": nodes}, u=u).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", f"node {nodes[0, 1]} has the displacement", "damaged")


def test_node_data_for_some_nodes_only(tmp_path, refuse):
    """An MSH file whose node data skip a node that a solid cell uses."""
    points, nodes = cells("tetra", 1)
    lines = ["$MeshFormat", "2.2 0 8", "$EndMeshFormat", "$Nodes", "4"]
    lines += [f"{k + 1} {x} {y} {z}" for k, (x, y, z) in enumerate(points.tolist())]
    lines += ["$EndNodes", "$Elements", "1"]
    lines += ["1 4 2 1 1 " + " ".join(str(n + 1) for n in nodes[0]), "$EndElements"]
    lines += ["$NodeData", "1", '"u"', "1", "0.0", "3", "0", "3", "3"]
    lines += [f"{k} 1 2 3" for k in (4, 1, 2)] + ["$EndNodeData", ""]
    path = tmp_path / "a.msh"
    path.write_text("\n".join(lines))
    refuse(path, "node 2 has the displacement", "finite")
    path.write_text("\n".join(lines).replace("4 1 2 3", "9 1 2 3"))
    refuse(path, "names a node that is not in $Nodes")


def test_two_components_mean_a_two_dimensional_model(tmp_path, refuse):
    points, nodes = cells("tetra10")
    grid(points, {"tetra10": nodes}, u=displacement(points)[:, :2]).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", "two components")


def test_a_missing_displacement(tmp_path, refuse):
    points, nodes = cells("tetra10")
    grid(points, {"tetra10": nodes}, heat=points[:, 0]).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", "heat (1 component)", "displacement=NAME")
    refuse(tmp_path / "a.vtu", "'shift'", "heat", displacement="shift")
    solid = load(tmp_path / "a.vtu", need_displacement=False)
    assert solid.steps == () and solid.n_cells == 3


@pytest.mark.parametrize("bad", [np.nan, -np.inf])
def test_a_solid_built_by_hand_is_held_to_finite_numbers(bad):
    points, nodes = cells("tetra")
    block = CellBlock("tetra", nodes[:2])
    spare = int(nodes[2, 0])
    u = displacement(points)
    u[spare] = points[spare] = bad  # no cell has this node
    Solid(points, (block,), (Step("1", u),))
    used = int(nodes[1, 2])
    u[used, 1] = bad
    with pytest.raises(MeshError, match=rf"b: step 1: node {used} has the displacement .* finite"):
        Solid(points, (block,), (Step("1", u),), source="b")
    points[used, 0] = bad
    with pytest.raises(MeshError, match=rf"b: node {used} has the coordinates .* finite"):
        Solid(points, (block,), source="b")
