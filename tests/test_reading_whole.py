"""Every format, written by its own library, gives the same K when it is read back.

One small model (tests/whole_models.py) goes through all of them.  Formats in single precision are
held to 1e-4 of the largest K, the others to 1e-9.
"""

import h5py
import meshio
import numpy as np
import pytest
from vtkmodules.vtkFiltersParallel import vtkExtractUnstructuredGridPiece
from vtkmodules.vtkIOParallelXML import vtkXMLPUnstructuredGridWriter
from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridWriter

from front3d.errors import ReadError
from front3d.reading import load
from tests.reading_models import grid, mesh, write_ensight, write_exodus
from tests.test_reading_formats import mesher, write_by_mesher  # noqa: F401
from tests.whole_models import assert_same_K, block, block_K

pytestmark = pytest.mark.filterwarnings("ignore::DeprecationWarning:meshio")
KIND = "hexahedron20"


def parts():
    """Points, nodes and displacements of the model."""
    solid = block()
    return solid.points, solid.blocks[0].nodes, solid.steps[0].displacement


def whole_grid():
    points, nodes, u = parts()
    return grid(points, {KIND: nodes}, displacement=u)


# ---------------------------------------------------------------------------- one file


@pytest.mark.slow
@pytest.mark.parametrize("mode", ["ascii", "binary", "appended raw", "appended base64"])
@pytest.mark.parametrize("compressor", ["none", "ZLib", "LZ4", "LZMA"])
@pytest.mark.parametrize("header", [32, 64])
def test_vtu_of_every_encoding(tmp_path, mode, compressor, header):
    writer = vtkXMLUnstructuredGridWriter()
    writer.SetInputData(whole_grid())
    writer.SetFileName(str(tmp_path / "a.vtu"))
    writer.SetDataMode({"ascii": 0, "binary": 1}.get(mode, 2))
    writer.SetEncodeAppendedData(mode == "appended base64")
    writer.SetHeaderType(1 if header == 64 else 0)
    writer.SetBlockSize(4096)  # several blocks for each array
    if compressor == "none":
        writer.SetCompressorTypeToNone()
    else:
        getattr(writer, f"SetCompressorTypeTo{compressor}")()
    assert writer.Write() == 1
    assert_same_K(tmp_path / "a.vtu", 1e-7 if mode == "ascii" else 1e-9)


@pytest.mark.slow
@pytest.mark.parametrize("binary", [True, False], ids=["binary", "ascii"])
@pytest.mark.parametrize("suffix", [".vtk", ".vtkhdf"])
def test_legacy_and_vtkhdf(tmp_path, suffix, binary):
    if suffix == ".vtkhdf":
        whole_grid().save(tmp_path / "a.vtkhdf")
    else:
        whole_grid().save(tmp_path / "a.vtk", binary=binary)
    assert_same_K(tmp_path / f"a{suffix}", 1e-9 if binary or suffix == ".vtkhdf" else 1e-5)


@pytest.mark.slow
@pytest.mark.parametrize("form", ["vtk42", "vtk", "xdmf XML", "xdmf HDF", "med", "gmsh22"])
def test_formats_by_meshio(tmp_path, form):
    points, nodes, u = parts()
    form, _, data = form.partition(" ")
    suffix = {"gmsh22": ".msh", "vtk42": ".vtk"}.get(form, f".{form}")
    meshio.write(
        tmp_path / f"a{suffix}",
        mesh(points, {KIND: nodes}, displacement=u),
        form,
        **({"data_format": data} if data else {}),
    )
    assert_same_K(tmp_path / f"a{suffix}")


@pytest.mark.slow
@pytest.mark.parametrize("real, relative", [("f8", 1e-9), ("f4", 1e-4)])
def test_exodus_in_both_precisions(tmp_path, real, relative):
    points, nodes, u = parts()
    write_exodus(tmp_path / "a.e", points, {KIND: nodes}, {1.0: u, 2.0: 2 * u}, real)
    assert_same_K(tmp_path / "a.e", relative, steps=2)


@pytest.mark.slow
@pytest.mark.parametrize("version", [2.2, 4.1])
@pytest.mark.parametrize("binary", [False, True], ids=["ascii", "binary"])
def test_msh_by_the_mesher(tmp_path, mesher, version, binary):  # noqa: F811
    points, nodes, u = parts()
    steps = [("U", 0, 0.0, u), ("U", 1, 1.0, 2 * u)]
    write_by_mesher(mesher, tmp_path / "a.msh", points, {KIND: nodes}, steps, version, binary)
    assert_same_K(tmp_path / "a.msh", steps=2)


def test_msh_4_0_is_refused_by_its_version(tmp_path, mesher):  # noqa: F811
    """An intermediate version of the format that the mesher itself writes in ASCII only."""
    points, nodes, _ = parts()
    write_by_mesher(mesher, tmp_path / "a.msh", points, {KIND: nodes}, [], 4.0, False)
    with pytest.raises(ReadError, match=r"found version 4, expected 2\.2 or 4\.1"):
        load(tmp_path / "a.msh")


@pytest.mark.slow
def test_displacements_as_three_scalars(tmp_path):
    points, nodes, u = parts()
    names = ("UX", "UY", "UZ")
    scalars = dict(zip(names, u.T, strict=True))
    grid(points, {KIND: nodes}, **scalars).save(tmp_path / "a.vtu")
    assert_same_K(tmp_path / "a.vtu")
    shifted = dict(zip(("a", "b", "c"), u.T, strict=True))
    meshio.write(tmp_path / "a.med", mesh(points, {KIND: nodes}, **shifted))
    assert_same_K(tmp_path / "a.med", displacement="a,b,c")


# ------------------------------------------------------------------------------ pieces


def cut(owner, numbers=True, ghosts=False):
    """Grids of the cells of each owner; border nodes are in both, as every mesher of pieces does.

    With `ghosts` each piece holds copies of its neighbours' cells, too, marked as such.
    """
    points, nodes, u = parts()
    pieces = []
    for k in range(owner.max() + 1):
        mine = owner == k
        if ghosts:
            mine = mine | np.isin(nodes, nodes[mine]).any(axis=1)
        used, local = np.unique(nodes[mine], return_inverse=True)
        piece = grid(points[used], {KIND: local.reshape(-1, 20)}, displacement=u[used])
        if ghosts:
            piece.cell_data["vtkGhostType"] = (owner[mine] != k).astype(np.uint8)
        if numbers:
            piece.point_data["GlobalNodeId"] = used
        pieces.append(piece)
    return pieces


def owners(how):
    """Which piece a cell belongs to: along the crack plane, across the front, both."""
    points, nodes, _ = parts()
    x, y, z = points[nodes].mean(axis=1).T
    middle = np.median(points[:, 2])
    return {
        "crack plane": (y > 0).astype(int),
        "across the front": (z > middle).astype(int),
        "quarters": (y > 0) + 2 * (z > middle),
        "by chance": np.random.default_rng(0).integers(0, 3, len(nodes)),
        "ahead and behind": (x > 0).astype(int),
    }[how]


def write_pieces(path, pieces):
    for k, piece in enumerate(pieces):
        piece.save(path.with_name(f"{path.stem}_{k}.vtu"))
    sources = "".join(f'<Piece Source="{path.stem}_{k}.vtu"/>' for k in range(len(pieces)))
    path.write_text(
        '<VTKFile type="PUnstructuredGrid"><PUnstructuredGrid GhostLevel="0">'
        f"{sources}</PUnstructuredGrid></VTKFile>"
    )


HOW = ["crack plane", "across the front", "quarters", "by chance", "ahead and behind"]


@pytest.mark.parametrize("how", HOW)
@pytest.mark.parametrize("numbers", [True, False], ids=["global numbers", "by place"])
@pytest.mark.parametrize("ghosts", [False, True], ids=["", "ghosts"])
def test_pieces_are_joined_and_crack_faces_are_not(tmp_path, how, numbers, ghosts):
    """The nodes are those of the whole model again: none is left doubled, none is glued."""
    write_pieces(tmp_path / "a.pvtu", cut(owners(how), numbers, ghosts))
    solid = load(tmp_path / "a.pvtu")
    points, nodes, u = parts()
    used = np.unique(solid.blocks[0].nodes)
    rows = np.column_stack([solid.points, solid.steps[0].displacement])[used]
    expected = np.column_stack([points, u])
    assert np.array_equal(np.unique(rows, axis=0), np.unique(expected, axis=0))
    assert len(used) == len(points)
    assert solid.n_cells == len(nodes)
    assert any("pieces joined" in note for note in solid.notes)


@pytest.mark.slow
@pytest.mark.parametrize("how", HOW)
def test_pieces_give_the_same_K(tmp_path, how):
    write_pieces(tmp_path / "a.pvtu", cut(owners(how), numbers=False))
    assert_same_K(tmp_path / "a.pvtu")


def test_pieces_by_the_writer_of_the_format(tmp_path):
    """VTK's own writer of PVTU, with cells dealt out in their order and border nodes doubled."""
    pieces = vtkExtractUnstructuredGridPiece()
    pieces.SetInputData(whole_grid())
    pieces.CreateGhostCellsOff()
    writer = vtkXMLPUnstructuredGridWriter()
    writer.SetInputConnection(pieces.GetOutputPort())
    writer.SetFileName(str(tmp_path / "a.pvtu"))
    writer.SetNumberOfPieces(2)
    writer.SetStartPiece(0)
    writer.SetEndPiece(1)
    assert writer.Write() == 1
    solid = assert_same_K(tmp_path / "a.pvtu")
    assert any("border nodes of 2 pieces joined" in note for note in solid.notes)


def test_pieces_that_overlap_are_refused(tmp_path):
    whole_grid().save(tmp_path / "p.vtu")
    (tmp_path / "a.pvtu").write_text(
        '<VTKFile type="PUnstructuredGrid"><PUnstructuredGrid>'
        '<Piece Source="p.vtu"/><Piece Source="p.vtu"/></PUnstructuredGrid></VTKFile>'
    )
    with pytest.raises(ReadError, match=r"cell 0 and hexahedron20 cell 48 .*\(48 such.*overlap"):
        load(tmp_path / "a.pvtu")


def test_pieces_in_a_pvd_keep_their_times(tmp_path):
    points, _, u = parts()
    lines = []
    for k, time in enumerate((1.0, 2.0)):
        for n, piece in enumerate(cut(owners("quarters"), numbers=False)):
            piece.point_data["displacement"] = time * piece.point_data["displacement"]
            piece.save(tmp_path / f"{k}_{n}.vtu")
            lines.append(f'<DataSet timestep="{time}" part="{n}" file="{k}_{n}.vtu"/>')
    text = f'<VTKFile type="Collection"><Collection>{"".join(lines)}</Collection></VTKFile>'
    (tmp_path / "a.pvd").write_text(text)
    solid = load(tmp_path / "a.pvd")
    assert [step.time for step in solid.steps] == [1.0, 2.0]
    assert len(solid.points) == len(points)
    np.testing.assert_array_equal(solid.steps[1].displacement, 2 * solid.steps[0].displacement)
    assert np.abs(solid.steps[0].displacement).max() == np.abs(u).max()


def test_pieces_that_cannot_be_told_apart_are_refused(tmp_path):
    """Without numbers, faces that never part look like borders of the pieces."""
    closed = cut(owners("across the front"), numbers=False)
    for piece in closed:
        piece.point_data["displacement"] = np.zeros((piece.n_points, 3))
    write_pieces(tmp_path / "a.pvtu", closed)
    with pytest.raises(ReadError, match="two nodes of one piece stand and move like one"):
        load(tmp_path / "a.pvtu")
    for piece in closed:
        del piece.point_data["displacement"]
    write_pieces(tmp_path / "b.pvtu", closed)
    with pytest.raises(ReadError, match=r"without displacements.*global node numbers"):
        load(tmp_path / "b.pvtu", need_displacement=False)


def test_global_numbers_that_start_anew_in_each_piece_are_not_believed(tmp_path):
    pieces = cut(owners("quarters"))
    for piece in pieces:
        piece.point_data["GlobalNodeId"] = np.arange(piece.n_points)
    write_pieces(tmp_path / "a.pvtu", pieces)
    solid = load(tmp_path / "a.pvtu")
    assert len(solid.points) == len(parts()[0])
    assert any("stand and move alike" in note for note in solid.notes)


# ----------------------------------------------------------------------------- EnSight


@pytest.mark.parametrize("how", ["one part", "crack plane", "quarters"])
def test_ensight_gold_by_vtk(tmp_path, how):
    """Parts number their nodes for themselves; the format holds single precision only."""
    data = whole_grid()
    points, nodes, _ = parts()
    owner = owners(how) if how != "one part" else np.zeros(len(nodes), int)
    data.cell_data["BlockId"] = (owner + 1).astype(np.int32)
    write_ensight(tmp_path / "a.case", data)
    solid = assert_same_K(tmp_path / "a.case", 1e-4)
    assert len(solid.points) == len(points)
    assert solid.point_spacing > 0


def test_ensight_files_that_are_missing_or_cut_short(tmp_path):
    write_ensight(tmp_path / "a.case", whole_grid())
    (geometry,) = tmp_path.glob("*.geo")
    data = geometry.read_bytes()
    for share in (0.0, 0.3, 0.9, 0.999):
        geometry.write_bytes(data[: int(share * len(data))])
        with pytest.raises(ReadError, match=r"a\.case.*(cut short|empty)"):
            load(tmp_path / "a.case")
    geometry.unlink()
    with pytest.raises(ReadError, match="which is not there"):
        load(tmp_path / "a.case")


# --------------------------------------------------------- a table of displacements beside


def table(path, columns, mark=","):
    lines = [mark.join(columns)]
    rows = np.column_stack(list(columns.values()))
    lines += [mark.join(f"{v:.17g}" for v in row) for row in rows]
    path.write_text("# made by hand\n" + "\n".join(lines) + "\n")
    return path


def shuffled(**columns):
    order = np.random.default_rng(4).permutation(len(next(iter(columns.values()))))
    return {name: np.asarray(values)[order] for name, values in columns.items()}


@pytest.mark.parametrize("first", [0, 1])
@pytest.mark.parametrize("mark", [",", ";", "\t"])
def test_a_table_by_node_number(tmp_path, first, mark):
    points, nodes, u = parts()
    grid(points, {KIND: nodes}).save(tmp_path / "a.vtu")
    columns = shuffled(Node=first + np.arange(len(u)), UX=u[:, 0], UY=u[:, 1], UZ=u[:, 2])
    path = table(tmp_path / "u.csv", columns, mark)
    solid = load(tmp_path / "a.vtu", displacement_file=path)
    assert np.array_equal(solid.steps[0].displacement, u)
    assert solid.notes == ("displacements taken from u.csv",)


@pytest.mark.slow
def test_a_table_gives_the_same_K(tmp_path, mesher):  # noqa: F811
    """The mesher's numbers are far from 1 and out of order; two steps."""
    points, nodes, u = parts()
    write_by_mesher(mesher, tmp_path / "a.msh", points, {KIND: nodes}, [], 4.1, True)
    tags = 3 + np.random.default_rng(1).permutation(len(points))  # as write_by_mesher numbers
    both = np.concatenate([u, 2 * u])
    columns = shuffled(
        node=np.tile(tags, 2), step=np.repeat([1, 2], len(u)),
        u_x=both[:, 0], u_y=both[:, 1], u_z=both[:, 2],
    )  # fmt: skip
    path = table(tmp_path / "u.csv", columns)
    order = np.argsort(columns["step"], kind="stable")
    path = table(tmp_path / "u.csv", {k: v[order] for k, v in columns.items()})
    assert_same_K(tmp_path / "a.msh", steps=2, displacement_file=path)


def half_model():
    points, nodes, u = parts()
    upper = nodes[points[nodes].mean(axis=1)[:, 1] > 0]
    used, local = np.unique(upper, return_inverse=True)
    return points[used], local.reshape(-1, 20), u[used]


@pytest.mark.parametrize("digits", [17, 7])
def test_a_table_by_coordinates_of_a_half_model(tmp_path, digits):
    points, nodes, u = half_model()
    grid(points, {KIND: nodes}).save(tmp_path / "a.vtu")
    rounded = np.array([[float(f"{v:.{digits}g}") for v in p] for p in points])
    columns = shuffled(
        **dict(zip("xyz", rounded.T, strict=True)), u1=u[:, 0], u2=u[:, 1], u3=u[:, 2]
    )
    solid = load(tmp_path / "a.vtu", displacement_file=table(tmp_path / "u.csv", columns))
    assert np.array_equal(solid.steps[0].displacement, u)


def test_a_table_by_coordinates_cannot_tell_crack_faces_apart(tmp_path):
    points, nodes, u = parts()
    grid(points, {KIND: nodes}).save(tmp_path / "a.vtu")
    columns = dict(zip(("x", "y", "z", "ux", "uy", "uz"), [*points.T, *u.T], strict=True))
    with pytest.raises(ReadError, match=r"belongs to two nodes of the mesh .* write node numbers"):
        load(tmp_path / "a.vtu", displacement_file=table(tmp_path / "u.csv", columns))


def changed(columns, **new):
    return columns | {name: np.asarray(values) for name, values in new.items()}


def test_what_is_wrong_with_a_table_is_said(tmp_path):
    points, nodes, u = half_model()
    grid(points, {KIND: nodes}).save(tmp_path / "a.vtu")
    n = len(points)
    good = {"node": np.arange(n), "ux": u[:, 0], "uy": u[:, 1], "uz": u[:, 2]}
    wrong = {
        "from 5 to": changed(good, node=np.arange(n) + 5),
        "expected an integer": changed(good, node=np.arange(n) + 0.5),
        "expected a first line such as": {k: v for k, v in good.items() if k != "node"},
        "expected uz too": {k: v for k, v in good.items() if k != "uz"},
        "no displacement": {"node": good["node"], "heat": u[:, 0]},
        "none of its rows stands at a node": {
            **dict(zip("xyz", 1000 * points.T + 1, strict=True)), "ux": u[:, 0], "uy": u[:, 1],
            "uz": u[:, 2],
        },
    }  # fmt: skip
    for words, columns in wrong.items():
        path = table(tmp_path / "u.csv", columns)
        with pytest.raises(ReadError) as caught:
            load(tmp_path / "a.vtu", displacement_file=path)
        assert words in str(caught.value), (words, str(caught.value))
    for words, content in {
        "is empty": b"# nothing\n",
        "binary data": np.random.default_rng(0).bytes(500),
        "one per node": b"node,ux,uy,uz\n",
        "something else than numbers": b"node,ux,uy,uz\n1,2,3,four\n",
        "each name once": b"node,ux,ux,uz\n1,2,3,4\n",
        "found 3 numbers in a row": b"node,ux,uy,uz\n1,2,3\n",
    }.items():
        (tmp_path / "u.csv").write_bytes(content)
        with pytest.raises(ReadError, match=words):
            load(tmp_path / "a.vtu", displacement_file=tmp_path / "u.csv")
    with pytest.raises(ReadError, match="no such file"):
        load(tmp_path / "a.vtu", displacement_file=tmp_path / "none.csv")


# -------------------------------------------------------- several parts in one VTKHDF file


@pytest.mark.parametrize("how", ["crack plane", "quarters"])
def test_partitions_of_a_vtkhdf_file_are_joined(tmp_path, how):
    """The layout of the published VTKHDF format: the pieces' arrays stand one after the other."""
    pieces = cut(owners(how), numbers=False)
    with h5py.File(tmp_path / "a.vtkhdf", "w") as file:
        root = file.create_group("VTKHDF")
        root.attrs["Version"] = (2, 0)
        root.attrs.create("Type", b"UnstructuredGrid", dtype=h5py.string_dtype("ascii", 16))
        root["NumberOfPoints"] = [p.n_points for p in pieces]
        root["NumberOfCells"] = [p.n_cells for p in pieces]
        root["NumberOfConnectivityIds"] = [20 * p.n_cells for p in pieces]
        root["Points"] = np.concatenate([p.points for p in pieces])
        root["Connectivity"] = np.concatenate([p.cell_connectivity for p in pieces])
        root["Offsets"] = np.concatenate([20 * np.arange(p.n_cells + 1) for p in pieces])
        root["Types"] = np.concatenate([p.celltypes for p in pieces])
        root["PointData/displacement"] = np.concatenate(
            [p.point_data["displacement"] for p in pieces]
        )
    solid = load(tmp_path / "a.vtkhdf")
    assert len(solid.points) == len(parts()[0])
    assert block_K().shape[0] == 1
