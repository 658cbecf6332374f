"""Every format, written by its own library, comes back as the same solid."""

import h5py
import meshio
import numpy as np
import pytest
import pyvista as pv

from front3d.elements import ELEMENTS
from front3d.reading import load
from tests.reading_models import (
    EXODUS,
    KINDS,
    assert_same_cells,
    cells,
    displacement,
    grid,
    mesh,
    mixed,
    volumes,
    write_exodus,
)

pytestmark = pytest.mark.filterwarnings("ignore::DeprecationWarning:meshio")

QUADRATIC = [kind for kind in KINDS if ELEMENTS[kind].quadratic]
IN_MED = [kind for kind in KINDS if kind != "hexahedron27"]


def check(solid, points, blocks, steps, rtol=1e-14):
    """Same cells, volumes, interpolated positions and displacements, whatever the node order.

    `steps` maps the expected names to the displacements.
    """
    np.testing.assert_allclose(solid.points, points, rtol=rtol, atol=1e-15)
    assert [step.name for step in solid.steps] == list(steps)
    assert {block.kind for block in solid.blocks} == set(blocks)
    for block in solid.blocks:
        nodes = blocks[block.kind]
        expected = np.abs(volumes(points, block.kind, nodes))
        np.testing.assert_allclose(
            volumes(solid.points, block.kind, block.nodes), expected, rtol=max(rtol, 1e-12)
        )
        for step, u in zip(solid.steps, steps.values(), strict=True):
            assert_same_cells(points, block.kind, nodes, block.nodes, u, step.displacement)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("suffix", [".vtu", ".vtk", ".vtkhdf"])
def test_vtk_formats_by_vtk(tmp_path, kind, suffix):
    points, nodes = cells(kind)
    u = displacement(points)
    grid(points, {kind: nodes}, displacement=u).save(tmp_path / f"a{suffix}")
    check(load(tmp_path / f"a{suffix}"), points, {kind: nodes}, {"1": u})


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize(
    "form, suffix, options",
    [
        ("vtu", ".vtu", {"binary": False}),
        ("vtu", ".vtu", {"binary": True}),
        ("vtk42", ".vtk", {"binary": True}),
        ("vtk", ".vtk", {"binary": False}),
        ("gmsh22", ".msh", {"binary": True}),
        ("gmsh", ".msh", {"binary": True}),
        ("xdmf", ".xdmf", {"data_format": "XML"}),
        ("xdmf", ".xdmf", {"data_format": "HDF"}),
        ("med", ".med", {}),
    ],
    ids=lambda v: "-".join(map(str, v.values())) if isinstance(v, dict) else v,
)
def test_formats_by_meshio(tmp_path, kind, form, suffix, options):
    if form == "med" and kind not in IN_MED:
        pytest.skip("meshio writes no such cells to MED")
    points, nodes = cells(kind)
    u = displacement(points)
    path = tmp_path / f"a{suffix}"
    meshio.write(path, mesh(points, {kind: nodes}, displacement=u), form, **options)
    check(load(path), points, {kind: nodes}, {"1": u}, rtol=1e-10)


# ------------------------------------------------------------------ MSH, by the mesher itself


@pytest.fixture(scope="module")
def mesher():
    gmsh = pytest.importorskip("gmsh")
    gmsh.initialize(interruptible=False)
    gmsh.option.setNumber("General.Terminal", 0)
    yield gmsh
    gmsh.finalize()


def write_by_mesher(gmsh, path, points, blocks, steps, version, binary):
    """Write with node numbers far from 1 and out of order; `steps` are (view, step, time, u)."""
    gmsh.clear()
    names = {"tetra": "Tetrahedron", "hexahedron": "Hexahedron", "wedge": "Prism"}
    names["pyramid"] = "Pyramid"
    entity = gmsh.model.addDiscreteEntity(3)
    tags = 3 + np.random.default_rng(1).permutation(len(points))
    if version == 2.2 and binary:
        tags = 1 + np.arange(len(points))  # meshio accepts nothing else there
    gmsh.model.mesh.addNodes(3, entity, tags, points.ravel())
    for kind, nodes in blocks.items():
        element = ELEMENTS[kind]
        number = gmsh.model.mesh.getElementType(
            names[element.family], element.order, len(nodes[0]) in (20, 15, 13)
        )
        reference = gmsh.model.mesh.getElementProperties(number)[4].reshape(-1, 3)
        distance = np.linalg.norm(reference[:, None] - element.nodes[None], axis=2)
        order = distance.argmin(axis=1)
        assert distance.min(axis=1).max() < 1e-12
        gmsh.model.mesh.addElementsByType(entity, number, [], tags[nodes[:, order]].ravel())
    gmsh.option.setNumber("Mesh.MshFileVersion", version)
    gmsh.option.setNumber("Mesh.Binary", binary)
    gmsh.option.setNumber("PostProcessing.SaveMesh", 0)
    gmsh.write(str(path))
    views = {}
    model = gmsh.model.getCurrent()
    for name, step, time, u in steps:
        if name not in views:
            views[name] = gmsh.view.add(name)
        rows = np.random.default_rng(2).permutation(len(points))
        gmsh.view.addModelData(views[name], step, model, "NodeData", tags[rows], u[rows], time)
    for view in views.values():
        gmsh.view.write(view, str(path), append=True)


@pytest.mark.parametrize("version", [2.2, 4.1])
@pytest.mark.parametrize("binary", [False, True], ids=["ascii", "binary"])
def test_msh_by_the_mesher_keeps_all_steps_and_its_node_numbers(tmp_path, mesher, version, binary):
    points, blocks = mixed(*KINDS)
    steps = [("U", k, 0.5 * k, displacement(points, k + 1)) for k in range(3)]
    path = tmp_path / "a.msh"
    write_by_mesher(mesher, path, points, blocks, steps, version, binary)
    solid = load(path)
    # The file has its own order of nodes: undo it by position.
    rows = np.array([np.abs(solid.points - p).sum(axis=1).argmin() for p in points])
    assert len(np.unique(rows)) == len(points)
    inverse = np.argsort(rows)
    np.testing.assert_allclose(solid.points[rows], points, rtol=1e-14)
    assert [(s.name, s.time) for s in solid.steps] == [("0", 0.0), ("0.5", 0.5), ("1", 1.0)]
    for step, (_, _, _, u) in zip(solid.steps, steps, strict=True):
        np.testing.assert_allclose(step.displacement[rows], u, rtol=1e-14)
        for block in solid.blocks:
            expected = blocks[block.kind]
            assert_same_cells(
                points, block.kind, expected, inverse[block.nodes], u, step.displacement[rows]
            )


def test_msh_views_of_one_time_are_load_cases(tmp_path, mesher):
    points, blocks = mixed("tetra10")
    cases = {name: displacement(points, k + 1.0) for k, name in enumerate(["tension", "shear"])}
    steps = [(f"displacement_{name}", 0, 0.0, u) for name, u in cases.items()]
    write_by_mesher(mesher, tmp_path / "a.msh", points, blocks, steps, 4.1, True)
    assert [s.name for s in load(tmp_path / "a.msh").steps] == ["tension", "shear"]


# --------------------------------------------------------------------------- several times


def test_pvd_gives_one_step_per_time(tmp_path):
    points, blocks = mixed("hexahedron20", "wedge15")
    times = [0.25, 0.5, 2.0]
    lines = []
    for k, time in enumerate(times):
        u = displacement(points, time)
        grid(points, blocks, displacement=u).save(tmp_path / f"part {k}.vtu")
        lines.append(f'<DataSet timestep="{time}" part="0" file="part {k}.vtu"/>')
    path = tmp_path / "a.pvd"
    path.write_text(
        f'<?xml version="1.0"?>\n<VTKFile type="Collection"><Collection>{"".join(lines)}'
        "</Collection></VTKFile>"
    )
    solid = load(path)
    check(solid, points, blocks, {f"{t:g}": displacement(points, t) for t in times})
    assert [s.time for s in solid.steps] == times


def test_vtkhdf_gives_one_step_per_time(tmp_path):
    """The temporal layout of the published VTKHDF file format, version 2.0, written with h5py."""
    points, nodes = cells("tetra10", 2)
    times = np.array([0.5, 1.5])
    both = np.concatenate([displacement(points, t) for t in times])
    with h5py.File(tmp_path / "a.vtkhdf", "w") as file:
        root = file.create_group("VTKHDF")
        root.attrs["Version"] = (2, 0)
        root.attrs.create("Type", b"UnstructuredGrid", dtype=h5py.string_dtype("ascii", 16))
        root["NumberOfPoints"] = np.array([len(points)])
        root["NumberOfCells"] = np.array([2])
        root["NumberOfConnectivityIds"] = np.array([20])
        root["Points"] = points
        root["Connectivity"] = nodes.ravel()
        root["Offsets"] = np.array([0, 10, 20])
        root["Types"] = np.array([24, 24], dtype=np.uint8)
        root["PointData/displacement"] = both
        steps = root.create_group("Steps")
        steps.attrs["NSteps"] = 2
        steps["Values"] = times
        for name in ("PartOffsets", "PointOffsets"):
            steps[name] = np.zeros(2, dtype=np.int64)
        for name in ("CellOffsets", "ConnectivityIdOffsets"):
            steps[name] = np.zeros((2, 1), dtype=np.int64)
        steps["NumberOfParts"] = np.ones(2, dtype=np.int64)
        steps["PointDataOffsets/displacement"] = np.array([0, len(points)])
    solid = load(tmp_path / "a.vtkhdf")
    check(
        solid,
        points,
        {"tetra10": nodes},
        {f"{t:g}": displacement(points, t) for t in times},
    )


@pytest.mark.parametrize("data_format", ["HDF", "XML"])
def test_xdmf_gives_one_step_per_time(tmp_path, monkeypatch, data_format):
    monkeypatch.chdir(tmp_path)  # the writer puts its HDF5 file into the working directory
    points, blocks = mixed("hexahedron20")
    times = [0.0, 1.0, 2.5]
    with meshio.xdmf.TimeSeriesWriter("a.xdmf", data_format) as writer:
        writer.write_points_cells(points, list(blocks.items()))
        for time in times:
            writer.write_data(time, point_data={"u": displacement(points, time + 1)})
    solid = load(tmp_path / "a.xdmf")
    steps = {f"{t:g}": displacement(points, t + 1) for t in times}
    check(solid, points, blocks, steps, rtol=1e-10)
    assert [s.time for s in solid.steps] == times


def test_xdmf_of_mixed_cells(tmp_path):
    points, blocks = mixed("tetra10", "hexahedron20", "wedge15", "pyramid13", "hexahedron", "tetra")
    u = displacement(points)
    meshio.write(tmp_path / "a.xdmf", mesh(points, blocks, displacement=u))
    check(load(tmp_path / "a.xdmf"), points, blocks, {"1": u}, rtol=1e-10)


def test_med_gives_one_step_per_time(tmp_path):
    """One time is written by meshio; the second is added in the same layout."""
    points, blocks = mixed("tetra10")
    u = displacement(points)
    path = tmp_path / "a.med"
    meshio.write(path, mesh(points, blocks, reslin__DEPL=u))
    with h5py.File(path, "a") as file:
        field = file["CHA/reslin__DEPL"]
        (first,) = field
        field.copy(first, "0000000000000000000200000000000000000002")
        second = field["0000000000000000000200000000000000000002"]
        second.attrs["PDT"] = 1.5
        second["NOE/MED_NO_PROFILE_INTERNAL/CO"][...] *= 2
    check(load(path), points, blocks, {"0": u, "1.5": 2 * u})


def test_med_cells_of_opposite_orientation_are_turned(tmp_path):
    """Cells written by the format's own tools run the other way round (design notes)."""
    from front3d.reading.conventions import mirrored

    points, blocks = mixed(*IN_MED)
    u = displacement(points)
    turned = {kind: nodes[:, mirrored(ELEMENTS[kind])] for kind, nodes in blocks.items()}
    meshio.write(tmp_path / "a.med", mesh(points, turned, DEPL=u))
    solid = load(tmp_path / "a.med")
    check(solid, points, blocks, {"1": u})
    assert len([note for note in solid.notes if "mirrored" in note]) == len(IN_MED)


# --------------------------------------------------------------------------------- Exodus


@pytest.mark.parametrize("kind", list(EXODUS))
def test_exodus_keeps_all_times_and_undeformed_points(tmp_path, kind):
    points, blocks = mixed(kind)
    steps = {time: 300 * displacement(points, time) for time in (0.5, 1.0)}
    write_exodus(tmp_path / "a.e", points, blocks, steps)
    solid = load(tmp_path / "a.e")
    check(solid, points, blocks, {f"{t:g}": u for t, u in steps.items()})
    assert [s.time for s in solid.steps] == list(steps)
    assert solid.point_spacing == 0.0


def test_exodus_blocks_share_their_nodes(tmp_path):
    """Two element blocks with common nodes: doubled nodes there would look like a crack."""
    plane = np.array([[0.0, 0, 0], [1, 0, 0], [1, 1, 0], [0, 1, 0]])
    points = np.concatenate([plane, plane + np.array([0, 0, 1]), [[0.5, 0.5, 2.0]]])
    blocks = {"hexahedron": np.array([[0, 1, 2, 3, 4, 5, 6, 7]])}
    blocks["pyramid"] = np.array([[4, 5, 6, 7, 8]])
    write_exodus(tmp_path / "a.exo", points, blocks, {1.0: displacement(points)})
    solid = load(tmp_path / "a.exo")
    check(solid, points, blocks, {"1": displacement(points)})


# ------------------------------------------------------------- what a file may hold besides


@pytest.mark.parametrize("suffix", [".vtu", ".msh", ".med"])
def test_mixed_cells_with_surfaces_lines_and_unused_nodes(tmp_path, suffix):
    points, blocks = mixed("tetra10", "wedge15", "pyramid13", "hexahedron20")
    extra = np.array([[50.0, 0, 0], [51, 0, 0], [50, 1, 0]])
    points = np.concatenate([points, extra])
    n = len(points)
    u = displacement(points)
    surfaces = {"triangle": [[n - 3, n - 2, n - 1]], "line": [[n - 3, n - 2], [n - 2, n - 1]]}
    cells_ = {"triangle": np.array(surfaces["triangle"]), **blocks}
    cells_["line"] = np.array(surfaces["line"])
    meshio.write(
        tmp_path / f"a{suffix}",
        mesh(points, cells_, displacement=u),
        **({"file_format": "gmsh22"} if suffix == ".msh" else {}),
    )
    solid = load(tmp_path / f"a{suffix}")
    check(solid, points, blocks, {"1": u}, rtol=1e-10)
    assert len(solid.points) == n
    assert any(note.startswith("1 triangle") for note in solid.notes)
    assert any(note.startswith("2 line") for note in solid.notes)
    assert any(note.startswith("3 nodes") for note in solid.notes)


def test_unused_nodes_with_bad_numbers_do_no_harm(tmp_path):
    points, nodes = cells("hexahedron20")
    u = np.concatenate([displacement(points), [[0, np.nan, 0]]])
    points = np.concatenate([points, [[np.nan, 0, np.inf]]])
    grid(points, {"hexahedron20": nodes}, u=u).save(tmp_path / "a.vtu")
    solid = load(tmp_path / "a.vtu")
    assert np.isfinite(solid.points).all() and np.isfinite(solid.steps[0].displacement).all()
    low, high = points[:-1].min(axis=0), points[:-1].max(axis=0)
    assert ((low <= solid.points) & (solid.points <= high)).all()


def test_voxels_become_hexahedra(tmp_path):
    image = pv.ImageData(dimensions=(3, 2, 2), spacing=(0.5, 1, 2))
    voxels = image.cast_to_unstructured_grid()
    assert set(voxels.celltypes) == {11}
    voxels.point_data["u"] = displacement(np.asarray(voxels.points, dtype=float))
    voxels.save(tmp_path / "a.vtu")
    solid = load(tmp_path / "a.vtu")
    (block,) = solid.blocks
    assert not solid.notes
    np.testing.assert_allclose(volumes(solid.points, "hexahedron", block.nodes), 1.0)


@pytest.mark.parametrize("suffix", [".vtu", ".vtk", ".xdmf"])
def test_single_precision_is_recorded(tmp_path, suffix):
    points, nodes = cells("tetra10")
    single = (points + np.array([100.0, 0, 0])).astype(np.float32)
    u = displacement(points).astype(np.float32)
    if suffix == ".xdmf":
        meshio.write(tmp_path / "a.xdmf", mesh(single, {"tetra10": nodes}, displacement=u))
    else:
        grid(single, {"tetra10": nodes}, displacement=u).save(tmp_path / f"a{suffix}")
    solid = load(tmp_path / f"a{suffix}")
    assert solid.point_spacing == np.spacing(np.float32(100.0)) == 2.0**-17
    assert solid.points.dtype == np.float64 and np.array_equal(solid.points, single)


def test_single_precision_of_exodus_is_recorded(tmp_path):
    points, blocks = mixed("hexahedron20")
    points = points + np.array([20.0, 0, 0])
    write_exodus(tmp_path / "a.e", points, blocks, {1.0: displacement(points)}, "f4")
    assert load(tmp_path / "a.e").point_spacing == 2.0**-19


@pytest.mark.parametrize("kind", KINDS)
def test_a_large_offset_changes_nothing(tmp_path, kind):
    points, nodes = cells(kind)
    grid(points + 1e5, {kind: nodes}, u=displacement(points)).save(tmp_path / "a.vtu")
    solid = load(tmp_path / "a.vtu")
    (block,) = solid.blocks
    assert np.array_equal(block.nodes, nodes)
    assert not solid.notes
