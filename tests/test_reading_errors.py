"""Everything that can be wrong with a file is a ReadError that says what to do.

Each check also holds that nothing is printed and that no other exception gets out.
"""

import os

import h5py
import meshio
import netCDF4
import numpy as np
import pytest
import pyvista as pv

from front3d.errors import MeshError, ReadError
from front3d.reading import FORMATS, load
from front3d.reading.guard import vtk_library
from front3d.solid import CellBlock, Solid, Step
from tests.reading_models import cells, displacement, grid, mesh, mixed, write_ensight, write_exodus

SUFFIXES = [form.suffixes[0] for form in FORMATS]
WHOLE = [suffix for suffix in SUFFIXES if suffix not in (".pvd", ".pvtu", ".case")]


@pytest.fixture
def refuse(capfd):
    """Load, expect a ReadError that names the file and holds all words; nothing is printed."""

    def check(path, *words, **options):
        capfd.readouterr()
        with pytest.raises(ReadError) as caught:
            load(path, **options)
        message = str(caught.value)
        assert str(path) in message
        for word in words:
            assert word in message, message
        assert "Traceback" not in message and "0x" not in message
        assert capfd.readouterr() == ("", "")
        return message

    return check


def write(path, points, blocks, **arrays):
    """A good file of any format."""
    suffix = path.suffix
    if suffix in (".vtu", ".vtk", ".vtkhdf"):
        grid(points, blocks, **arrays).save(path)
    elif suffix == ".case":
        write_ensight(path, grid(points, blocks, **arrays))
    elif suffix in (".pvd", ".pvtu"):
        grid(points, blocks, **arrays).save(path.with_suffix(".vtu"))
        name = path.with_suffix(".vtu").name
        path.write_text(
            f'<VTKFile type="PUnstructuredGrid"><PUnstructuredGrid><Piece Source="{name}"/>'
            "</PUnstructuredGrid></VTKFile>"
            if suffix == ".pvtu"
            else '<VTKFile type="Collection"><Collection><DataSet timestep="0" part="0" '
            f'file="{name}"/></Collection></VTKFile>'
        )
    elif suffix == ".e":
        write_exodus(path, points, blocks, {1.0: next(iter(arrays.values()))})
    else:
        meshio.write(
            path,
            mesh(points, blocks, **arrays),
            **({"file_format": "gmsh22"} if suffix == ".msh" else {}),
        )


@pytest.fixture
def good(tmp_path):
    def make(suffix):
        points, blocks = mixed("hexahedron20")
        path = tmp_path / f"good{suffix}"
        write(path, points, blocks, displacement=displacement(points))
        load(path)
        return path

    return make


# ------------------------------------------------------------------------------- the file


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_missing_file(tmp_path, refuse, suffix):
    refuse(tmp_path / f"no{suffix}", "no such file", "check the name")


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_empty_file(tmp_path, refuse, suffix):
    (tmp_path / f"a{suffix}").write_bytes(b"")
    refuse(tmp_path / f"a{suffix}", "empty")


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_directory(tmp_path, refuse, suffix):
    (tmp_path / f"a{suffix}").mkdir()
    refuse(tmp_path / f"a{suffix}", "directory")


def test_no_permission(good, refuse, monkeypatch):
    path = good(".vtu")
    if os.geteuid() == 0:  # the superuser may read everything
        real = type(path).open

        def forbid(self, *args, **options):
            if self == path:
                raise PermissionError(13, "Permission denied", str(self))
            return real(self, *args, **options)

        monkeypatch.setattr(type(path), "open", forbid)
    else:
        path.chmod(0)
    refuse(path, "no permission")


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_binary_noise(tmp_path, refuse, suffix):
    path = tmp_path / f"a{suffix}"
    path.write_bytes(np.random.default_rng(0).bytes(20000))
    refuse(path, "unrecognised data", "export it again")


@pytest.mark.parametrize("suffix", WHOLE)
def test_noise_behind_a_good_beginning(good, refuse, suffix):
    path = good(suffix)
    head = path.read_bytes()[: 60 if suffix == ".msh" else 200]
    path.write_bytes(head + np.random.default_rng(0).bytes(20000))
    refuse(path)


def same(one, other):
    return (
        np.array_equal(one.points, other.points)
        and len(one.blocks) == len(other.blocks)
        and all(
            np.array_equal(a.nodes, b.nodes) for a, b in zip(one.blocks, other.blocks, strict=True)
        )
        and len(one.steps) == len(other.steps)
        and all(
            np.array_equal(a.displacement, b.displacement)
            for a, b in zip(one.steps, other.steps, strict=True)
        )
    )


def assert_truncation_is_noticed(path, capfd):
    """Cut short at 25 places, a file is refused, or all that matters was still in it."""
    whole = path.read_bytes()
    reference = load(path)
    refused = 0
    capfd.readouterr()
    for share in np.linspace(0.02, 0.995, 25):
        path.write_bytes(whole[: int(share * len(whole))])
        try:
            solid = load(path)
        except ReadError as error:
            refused += 1
            assert str(path) in str(error)
        else:
            assert same(solid, reference), share
    assert refused >= 20
    assert capfd.readouterr() == ("", "")


@pytest.mark.parametrize("suffix", WHOLE)
def test_truncated_file(good, capfd, suffix):
    assert_truncation_is_noticed(good(suffix), capfd)


@pytest.mark.parametrize(
    "form, suffix, binary",
    [
        ("vtu", ".vtu", False),
        ("vtu", ".vtu", True),
        ("vtk42", ".vtk", False),
        ("vtk42", ".vtk", True),
        ("vtk", ".vtk", False),
    ],
)
def test_truncated_file_of_another_writer(tmp_path, capfd, form, suffix, binary):
    points, nodes = cells("tetra10", 20)
    path = tmp_path / f"a{suffix}"
    m = mesh(points, {"tetra10": nodes}, displacement=displacement(points))
    meshio.write(path, m, form, binary=binary)
    assert_truncation_is_noticed(path, capfd)


@pytest.mark.parametrize("scalars", [True, False])
def test_truncated_attributes_of_a_legacy_file(tmp_path, capfd, scalars):
    """VECTORS and SCALARS, which the writers above do not use, in ASCII."""
    points, nodes = cells("tetra", 4)
    u = displacement(points)
    lines = ["# vtk DataFile Version 3.0", "test", "ASCII", "DATASET UNSTRUCTURED_GRID"]
    lines += [f"POINTS {len(points)} double", *(" ".join(map(str, p)) for p in points.tolist())]
    lines += ["CELLS 4 20", *("4 " + " ".join(map(str, c)) for c in nodes.tolist())]
    lines += ["CELL_TYPES 4", *["10"] * 4, f"POINT_DATA {len(points)}"]
    if scalars:
        for k, axis in enumerate("xyz"):
            lines += [
                f"SCALARS u_{axis} double",
                "LOOKUP_TABLE default",
                *map(str, u[:, k].tolist()),
            ]
    else:
        lines += ["VECTORS u double", *(" ".join(map(str, v)) for v in u.tolist())]
    path = tmp_path / "a.vtk"
    path.write_text("\n".join(lines) + "\n")
    assert np.array_equal(load(path).steps[0].displacement, u)
    assert_truncation_is_noticed(path, capfd)


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_wrong_suffix_of_a_known_format(good, refuse, suffix):
    other = ".msh" if suffix != ".msh" else ".vtu"
    path = good(suffix)
    target = path.rename(path.with_suffix(other))
    message = refuse(target, "expected", f"rename it to good{suffix}")
    assert "VTU" in message if other == ".vtu" else "MSH" in message


def test_unknown_suffix_lists_the_formats(tmp_path, good, refuse):
    path = tmp_path / "a.xyz"
    path.write_text("hello")
    refuse(path, "'.xyz'", *SUFFIXES)
    target = good(".vtu").rename(tmp_path / "b.xyz")
    refuse(target, "rename it to b.vtu")
    target = target.rename(tmp_path / "plain")
    refuse(target, "(none)")


def test_other_files_of_a_family_are_told_apart(tmp_path, refuse):
    pv.Sphere().save(tmp_path / "a.vtp")
    refuse((tmp_path / "a.vtp").rename(tmp_path / "a.vtu"), "PolyData")
    with h5py.File(tmp_path / "a.med", "w") as file:
        file["numbers"] = [1, 2]
    refuse(tmp_path / "a.med", "HDF5 with numbers", "MED")


def test_a_netcdf_file_that_is_no_exodus(tmp_path, refuse):
    for name, form in (("a.e", "NETCDF3_CLASSIC"), ("b.e", "NETCDF4")):
        with netCDF4.Dataset(tmp_path / name, "w", format=form) as file:
            file.api_version = np.float32(5.1)
            file.createDimension("x", 3)
            file.createVariable("x", "f8", ("x",))[:] = 1.0
        refuse(tmp_path / name, "cannot be read as Exodus")


def test_what_c_libraries_write_to_standard_error_goes_into_the_message(tmp_path, capfd):
    """The Exodus and HDF5 libraries write to file descriptor 2, behind Python and VTK."""
    with (
        pytest.raises(ReadError, match=r"a\.e: cannot be read as Exodus: a damaged header; check"),
        vtk_library(tmp_path / "a.e", "Exodus", native=True),
    ):
        os.write(2, b"a damaged\nheader\n")
        raise ReadError("no mesh")
    with vtk_library(tmp_path / "a.e", "Exodus", native=True):
        os.write(2, b"a remark about a good file")
    assert capfd.readouterr() == ("", "")


def test_hdf5_names_that_are_no_text(tmp_path, refuse):
    with h5py.File(tmp_path / "a.med", "w") as file:
        file[b"\xff\xfe"] = [1]
    refuse(tmp_path / "a.med", "HDF5")


def test_absurd_coordinates(tmp_path, refuse):
    points, nodes = cells("tetra10")
    points[nodes[0, 1]] = 1e300
    grid(points, {"tetra10": nodes}, u=displacement(points * 0)).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", "tetra10 cell 0")


def test_a_companion_file_that_is_missing(good, tmp_path, refuse):
    path = good(".xdmf")
    (tmp_path / "good.h5").unlink()
    refuse(path, "good.h5")
    path = good(".pvd")
    (tmp_path / "good.vtu").unlink()
    refuse(path, "good.vtu", "no such file")


def test_xml_that_is_cut_short(tmp_path, refuse):
    for suffix, head in ((".pvd", '<VTKFile type="Collection"><Coll'), (".xdmf", "<Xdmf Version=")):
        (tmp_path / f"a{suffix}").write_text(head)
        refuse(tmp_path / f"a{suffix}", "cannot be read")
    (tmp_path / "a.pvd").write_text('<VTKFile type="Collection"><Collection/></VTKFile>')
    refuse(tmp_path / "a.pvd", "no times")


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


def test_output_of_the_libraries_is_restored(good, capfd, refuse, tmp_path):
    """Quiet only while reading: afterwards standard error and VTK's own log work again."""
    from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridReader

    path = good(".vtkhdf")
    path.write_bytes(path.read_bytes()[:3000])
    refuse(path)
    os.write(2, b"heard")
    assert capfd.readouterr().err == "heard"
    reader = vtkXMLUnstructuredGridReader()
    reader.SetFileName(str(tmp_path / "nothing.vtu"))
    reader.Update()
    assert "nothing.vtu" in capfd.readouterr().err


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
