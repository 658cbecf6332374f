"""What would crash or stall a library is refused before; what the library writes passes."""

import meshio
import numpy as np
import pytest

from front3d.errors import ReadError
from front3d.reading import load
from front3d.reading.ensight import check_case
from front3d.reading.legacy import check_legacy
from tests.reading_models import cells, displacement, grid, mesh, mixed, write_ensight
from tests.whole_models import parts


def crowded():
    """A grid with every sort of array that VTK writes."""
    points, blocks = mixed("hexahedron20", "tetra10", "wedge")
    data = grid(points, blocks, displacement=displacement(points))
    data.point_data["number"] = np.arange(len(points))
    data.point_data["single"] = np.linspace(0, 1, len(points)).astype(np.float32)
    data.point_data["flag"] = np.ones(len(points), np.uint8)
    data.point_data["tensor"] = np.ones((len(points), 9))
    data.point_data.active_scalars_name = "single"
    data.point_data.active_vectors_name = "displacement"
    data.cell_data["region"] = np.arange(data.n_cells, dtype=np.int32)
    data.field_data["TIME"] = [2.5]
    return data


@pytest.mark.parametrize("binary", [True, False], ids=["binary", "ascii"])
def test_what_vtk_writes_passes(tmp_path, binary):
    crowded().save(tmp_path / "a.vtk", binary=binary)
    check_legacy(tmp_path / "a.vtk")
    assert load(tmp_path / "a.vtk").n_cells == 9


@pytest.mark.parametrize("form", ["vtk42", "vtk51"])
def test_what_meshio_writes_passes(tmp_path, form):
    points, nodes = cells("hexahedron20")
    data = mesh(points, {"hexahedron20": nodes}, displacement=displacement(points))
    meshio.write(tmp_path / "a.vtk", data, form, binary=True)
    check_legacy(tmp_path / "a.vtk")
    assert load(tmp_path / "a.vtk").n_cells == 3


def test_a_binary_file_cut_anywhere_is_refused(tmp_path):
    path = tmp_path / "a.vtk"
    crowded().save(path)
    whole = path.read_bytes()
    for end in np.linspace(30, len(whole) - 3, 60).astype(int):
        path.write_bytes(whole[:end])
        with pytest.raises(ReadError):
            check_legacy(path)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        (b"Version 5.1", b"Version 7# vtk DataFile Version 5.1"),
        (b"BINARY", b"BINERY"),
        (b"CELL_TYPES 9", b"CELL_TYPES 8"),
        (b"OFFSETS vtktypeint64", b"OFFSETS vtktypeint32"),
        (b"\nCONNECTIVITY", b"\nC0NNECTIVITY"),
        (b"POINTS ", b"PAINTS "),
        (b"FIELD FieldData ", b"FIELD FieldData 9"),
        (b"VECTORS displacement double", b"VECTORS displacement bouble"),
    ],
    ids=lambda text: text.decode()[:12].strip(),
)
def test_binary_sections_that_do_not_add_up(tmp_path, old, new):
    path = tmp_path / "a.vtk"
    crowded().save(path)
    whole = path.read_bytes()
    assert old in whole
    path.write_bytes(whole.replace(old, new, 1))
    with pytest.raises(ReadError, match=r"make no sense|not add up|found"):
        load(path)


def test_offsets_that_go_back_and_nodes_that_are_not_there(tmp_path):
    path = tmp_path / "a.vtk"
    crowded().save(path)
    whole = bytearray(path.read_bytes())
    for word in (b"OFFSETS vtktypeint64\n", b"CONNECTIVITY vtktypeint64\n"):
        place = whole.index(word) + len(word) + 8
        changed = whole.copy()
        changed[place : place + 8] = (10**6).to_bytes(8, "big")
        path.write_bytes(changed)
        with pytest.raises(ReadError, match="make no sense"):
            load(path)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("per node:", "per nodee:"),
        ("per node:", "per node::"),
        ("per node: ", "per node:`"),
        ("per node: displ", "per node: displ\x9f"),
        ("displacement_n", "d" * 300),
    ],
)
def test_case_files_by_their_own_words_only(tmp_path, old, new):
    """Each of these made VTK's reader crash or read beyond a line."""
    points, nodes = cells("hexahedron20")
    path = tmp_path / "a.case"
    write_ensight(path, grid(points, {"hexahedron20": nodes}, displacement=displacement(points)))
    check_case(path)
    text = path.read_text()
    assert old in text
    path.write_text(text.replace(old, new, 1), encoding="latin-1")
    with pytest.raises(ReadError, match=r"expected EnSight Gold|without a name"):
        load(path)


def test_more_steps_than_there_is_text_for(tmp_path):
    points, nodes = cells("hexahedron20")
    path = tmp_path / "a.case"
    write_ensight(path, grid(points, {"hexahedron20": nodes}, displacement=displacement(points)))
    with path.open("a") as file:
        file.write("TIME\ntime set: 1\nnumber of steps: 99999999\ntime values: 0.0\n")
    with pytest.raises(ReadError, match="found '99999999' steps"):
        load(path)


def test_names_of_arrays_in_latin_1(tmp_path):
    points, nodes, u = parts()
    grid(points, {"hexahedron20": nodes}, DISPLACEMENTx=u).save(tmp_path / "a.vtk")
    path = tmp_path / "a.vtk"
    path.write_bytes(path.read_bytes().replace(b"DISPLACEMENTx", b"d\xe9placement_"))
    (step,) = load(path, displacement="déplacement_").steps
    np.testing.assert_array_equal(step.displacement, u)


def test_a_mid_side_node_that_no_edge_reaches(tmp_path):
    """Outward on an outer edge no Jacobian turns negative: the place itself is absurd."""
    points, nodes, u = parts()
    points = points.copy()
    node = int(np.argmin(np.linalg.norm(points - [-25, 100, 0], axis=1)))
    points[node, 2] -= 500.0
    grid(points, {"hexahedron20": nodes}, displacement=u).save(tmp_path / "a.vtu")
    with pytest.raises(ReadError, match="stands 500 from the middle of its edge"):
        load(tmp_path / "a.vtu")
