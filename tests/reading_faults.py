"""Good files of every format to be spoilt, and what holds of every refusal to read one."""

import meshio
import pytest

from front3d.errors import ReadError
from front3d.reading import FORMATS, load
from tests.reading_models import displacement, grid, mesh, mixed, write_ensight, write_exodus

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
