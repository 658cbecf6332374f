# ruff: noqa: F811 (the fixtures are imported)
"""Everything that can be wrong with a file is a ReadError that says what to do.

Each check also holds that nothing is printed and that no other exception gets out.  Here the file
itself is at fault; tests/test_reading_errors_model.py has whole files of a model that cannot be.
"""

import os

import h5py
import meshio
import netCDF4
import numpy as np
import pytest
import pyvista as pv

from front3d.errors import ReadError
from front3d.reading import load
from front3d.reading.guard import vtk_library
from tests.reading_faults import SUFFIXES, WHOLE, good, refuse  # noqa: F401
from tests.reading_models import cells, displacement, mesh


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


def test_hdf5_names_that_are_no_text(tmp_path, refuse):
    with h5py.File(tmp_path / "a.med", "w") as file:
        file[b"\xff\xfe"] = [1]
    refuse(tmp_path / "a.med", "HDF5")


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
