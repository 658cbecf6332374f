"""Series of times give the K of each step: PVD of VTU files, XDMF, and Exodus by VTK's writer."""

import meshio
import pytest

from tests.reading_models import grid
from tests.whole_models import KIND, assert_same_K, parts, whole_grid

pytestmark = pytest.mark.filterwarnings("ignore::DeprecationWarning:meshio")


@pytest.mark.slow
def test_pvd_of_two_times(tmp_path):
    """Files by VTK's writer; the index is what the format's users write by hand."""
    points, nodes, u = parts()
    lines = []
    for time in (1, 2):
        grid(points, {KIND: nodes}, displacement=time * u).save(tmp_path / f"{time}.vtu")
        lines.append(f'<DataSet timestep="{time}" part="0" file="{time}.vtu"/>')
    (tmp_path / "a.pvd").write_text(
        f'<VTKFile type="Collection"><Collection>{"".join(lines)}</Collection></VTKFile>'
    )
    assert_same_K(tmp_path / "a.pvd", steps=2)


@pytest.mark.slow
def test_xdmf_of_two_times(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)  # the writer puts its HDF5 file into the working directory
    points, nodes, u = parts()
    with meshio.xdmf.TimeSeriesWriter("a.xdmf") as writer:
        writer.write_points_cells(points, [(KIND, nodes)])
        for time in (1, 2):
            writer.write_data(time, point_data={"displacement": time * u})
    assert_same_K(tmp_path / "a.xdmf", steps=2)


@pytest.mark.slow
def test_exodus_by_vtk(tmp_path):
    from vtkmodules.vtkIOIOSS import vtkIOSSWriter

    writer = vtkIOSSWriter()
    writer.SetInputData(whole_grid())
    writer.SetFileName(str(tmp_path / "a.exo"))
    writer.SetDisplacementMagnitude(0.0)
    writer.Write()
    (path,) = tmp_path.glob("a.exo*")
    assert_same_K(path.rename(tmp_path / "a.exo"))
