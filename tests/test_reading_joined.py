"""A model written in several pieces or parts is read as one, its crack faces still apart.

The model is that of tests/whole_models.py; a format in single precision is held to 1e-4 of the
largest K, the others to 1e-9.
"""

import h5py
import numpy as np
import pytest
from vtkmodules.vtkFiltersParallel import vtkExtractUnstructuredGridPiece
from vtkmodules.vtkIOParallelXML import vtkXMLPUnstructuredGridWriter

from front3d.errors import ReadError
from front3d.reading import load
from tests.reading_models import grid, write_ensight
from tests.whole_models import KIND, assert_same_K, block_K, parts, whole_grid


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
