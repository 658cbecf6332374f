"""Writing a sample: the result as VTU, and a case file beside it."""

import errno
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np

from front3d.reading.guard import quiet_vtk
from front3d.samples.sample import Sample


def write_sample(sample: Sample, directory: str | Path) -> tuple[Path, Path]:
    """Write NAME.vtu and NAME.toml into `directory`; returns both paths.

    The displacements are point arrays "displacement", or "displacement_STEP" where there are
    several steps.  Both files are made in a scratch folder and moved into place, so that they
    are there whole or not at all.
    """
    folder = Path(directory)
    folder.mkdir(parents=True, exist_ok=True)
    with TemporaryDirectory(prefix=".sample-", dir=folder) as scratch:
        made = [Path(scratch) / f"{sample.name}.vtu", Path(scratch) / f"{sample.name}.toml"]
        _write_vtu(sample, made[0])
        made[1].write_text(case_text(sample), encoding="utf-8")
        vtu, case = (folder / path.name for path in made)
        for source, target in zip(made, (vtu, case), strict=True):
            source.replace(target)
    return vtu, case


def case_text(sample: Sample) -> str:
    """The case file: the result's name, then the tables of `sample.case`."""
    lines = [f"# {sample.description}", f'result = "{sample.name}.vtu"']
    for table, entries in sample.case.items():
        lines += ["", f"[{table}]"]
        lines += [f"{key} = {_toml(value)}" for key, value in entries.items()]
    return "\n".join(lines) + "\n"


def _toml(value: object) -> str:
    if isinstance(value, str):
        escaped = value.replace("\\", "\\\\").replace('"', '\\"')
        return f'"{escaped}"'
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int | float):
        return repr(value)
    if isinstance(value, list | tuple):
        return "[" + ", ".join(_toml(v) for v in value) + "]"
    raise TypeError(f"case file: found a {type(value).__name__}, expected text or numbers")


def _write_vtu(sample: Sample, path: Path) -> None:
    import pyvista
    from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridWriter

    solid = sample.solid
    cells, kinds = [], []
    for block in solid.blocks:
        n, m = block.nodes.shape
        cells.append(np.hstack([np.full((n, 1), m), block.nodes]).ravel())
        kinds.append(np.full(n, block.element.vtk_type, dtype=np.uint8))
    grid = pyvista.UnstructuredGrid(np.concatenate(cells), np.concatenate(kinds), solid.points)
    single = len(solid.steps) == 1
    for step in solid.steps:
        name = "displacement" if single else f"displacement_{step.name}"
        grid.point_data[name] = step.displacement
    writer = vtkXMLUnstructuredGridWriter()
    writer.SetFileName(str(path))
    writer.SetInputData(grid)
    writer.SetDataModeToAppended()
    writer.EncodeAppendedDataOff()
    writer.SetCompressorTypeToZLib()
    with quiet_vtk():
        done = writer.Write()
    # With the disk full VTK may speak of success.
    if done != 1 or not path.exists() or writer.GetErrorCode():
        raise OSError(errno.EIO, "VTK could not write it: is the disk full?", str(path))
