"""Every format, written by its own library, gives the same K when it is read back.

One small model (tests/whole_models.py) goes through all of them.  Formats in single precision are
held to 1e-4 of the largest K, the others to 1e-9.
"""

import meshio
import pytest
from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridWriter

from front3d.errors import ReadError
from front3d.reading import load
from tests.reading_models import grid, mesh, write_exodus
from tests.test_reading_formats import mesher, write_by_mesher  # noqa: F401
from tests.whole_models import KIND, assert_same_K, parts, whole_grid

pytestmark = pytest.mark.filterwarnings("ignore::DeprecationWarning:meshio")


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
