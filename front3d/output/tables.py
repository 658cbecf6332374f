"""`points.csv` and `front.vtp`: every station with every column."""

import csv
import io
from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.mixing import mix_columns
from front3d.output.deviation import deviation
from front3d.output.loads import own_constants
from front3d.output.trust import rings_of
from front3d.results import MODES, Evaluation, FrontResult, Rings
from front3d.solid import Constants
from front3d.units import Units

FIRST_COLUMNS = (
    *("step", "front", "station", "s", "s_rel", "x", "y", "z"),
    *("K_I", "K_II", "K_III", "G", "flag"),
)
"""The columns that stand first, in this order, in every table."""

Column = NDArray[Any]


def front_columns(front: FrontResult, units: Units, material: Constants) -> dict[str, Column]:
    """Every column of one front by name: FIRST_COLUMNS first, (n,) each, text or numbers."""
    n = len(front)
    columns: dict[str, Column] = {
        "step": np.full(n, front.step),
        "front": np.full(n, front.front),
        "station": np.arange(n),
        "s": front.s,
        "s_rel": front.s_rel,
        **dict(zip("xyz", front.positions.T, strict=True)),
        **dict(zip(MODES, front.K.T, strict=True)),
        "G": front.G,
        "flag": np.array(front.flags, dtype=str),
    }
    for name, result in front.methods.items():
        columns |= {f"{mode}_{name}": result.K[:, k] for k, mode in enumerate(MODES)}
    for name, result in front.methods.items():
        for column, values in result.columns.items():
            columns[f"{column}_{name}" if column in columns else column] = np.asarray(values)
    rings = rings_of(front)
    if rings is not None:
        spread = rings.spread
        columns |= {f"{mode}_ring_spread": spread[:, k] for k, mode in enumerate(MODES)}
    if len(front.methods) > 1:
        spread = front.method_spread
        columns |= {f"{mode}_method_spread": spread[:, k] for k, mode in enumerate(MODES)}
        columns["K_from"] = np.array(front.sources, dtype=str)
    columns |= _comparison_columns(front)
    columns["psi_deg"], columns["mode_III_deg"] = front.mode_angles.T
    columns |= mix_columns(front.K, material)
    for i, vector in enumerate(("e1", "e2", "e3")):
        columns |= {f"{vector}{axis}": front.frames[:, i, j] for j, axis in enumerate("xyz")}
    if (factor := units.K_factor) is not None:
        columns |= {f"{mode}_MPa_sqrt_m": factor * front.K[:, k] for k, mode in enumerate(MODES)}
    if rings is not None:
        columns |= _ring_columns(rings)
    return columns


def _ring_columns(rings: Rings) -> dict[str, Column]:
    """Each ring's radius, K and J, rings numbered from 1, the innermost."""
    columns: dict[str, Column] = {}
    for ring, (radius, K, J) in enumerate(zip(rings.radii, rings.K, rings.J, strict=True), 1):
        columns[f"radius_ring_{ring}"] = radius
        columns |= {f"{mode}_ring_{ring}": K[:, k] for k, mode in enumerate(MODES)}
        columns[f"J_ring_{ring}"] = J
    return columns


def _comparison_columns(front: FrontResult) -> dict[str, Column]:
    """The angle on the ellipse, then K of each published solution and the deviation from it."""
    columns: dict[str, Column] = {}
    angles = [c.angle for c in front.comparisons if np.isfinite(c.angle).any()]
    if angles:
        columns["phi_deg"] = angles[0]
    for comparison in front.comparisons:
        percent = deviation(front, comparison).percent
        for k, mode in enumerate(MODES):
            if np.isfinite(comparison.K[:, k]).any():
                name = f"{mode}_{comparison.solution}"
                columns[name] = comparison.K[:, k]
                columns[f"{name}_deviation_pct"] = percent[:, k]
    return columns


def all_columns(evaluation: Evaluation) -> dict[str, Column]:
    """The columns of all fronts and steps, one below the other.

    A method that was applied to some fronts only, and a solution that suits some only, has nan for
    the stations of the others.  The elastic constants stand there where they are a front's own.
    """
    units, material = evaluation.units, evaluation.material
    fronts = evaluation.fronts
    tables = [front_columns(front, units, front.material or material) for front in fronts]
    if any(own_constants(front.material, material) for front in fronts):
        for front, table in zip(fronts, tables, strict=True):
            own = front.material or material
            table["young"] = np.full(len(front), own.young)
            table["poisson"] = np.full(len(front), own.poisson)
    names = dict.fromkeys(name for table in tables for name in table)
    return {
        name: np.concatenate([t[name] if name in t else _absent(name, len(t["s"])) for t in tables])
        for name in _in_order(names, tables)
    }


def _absent(name: str, n: int) -> Column:
    """A column that one front lacks."""
    return np.full(n, "", dtype="U1") if name == "K_from" else np.full(n, np.nan)


def points_csv(evaluation: Evaluation) -> bytes:
    """`points.csv`: one row per (step, front, station); numbers keep their full precision."""
    columns = all_columns(evaluation)
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(columns)
    # tolist() gives Python numbers, whose text is the shortest that reads back the same.
    writer.writerows(zip(*(column.tolist() for column in columns.values()), strict=True))
    return text.getvalue().encode()


def front_vtp(evaluation: Evaluation) -> bytes:
    """`front.vtp`: each front of each step as a polyline, with every column as point data."""
    import pyvista as pv
    from vtkmodules.vtkIOXML import vtkXMLPolyDataWriter

    lines: list[int] = []
    start = 0
    for front in evaluation.fronts:
        nodes = list(range(start, start + len(front))) + ([start] if front.closed else [])
        lines += [len(nodes), *nodes]
        start += len(front)
    poly = pv.PolyData()
    poly.points = np.concatenate([front.positions for front in evaluation.fronts])
    poly.lines = np.array(lines)
    for name, column in all_columns(evaluation).items():
        poly.point_data[name] = column
    # Into memory first: on a full disk the writer itself leaves a broken file and raises nothing.
    writer = vtkXMLPolyDataWriter()
    writer.SetInputData(poly)
    writer.SetDataModeToBinary()
    writer.WriteToOutputStringOn()
    writer.Write()
    return str(writer.GetOutputString()).encode()


def _in_order(names: Mapping[str, None], tables: list[dict[str, Column]]) -> list[str]:
    """Names in the order of the table that has most of them, then the rest."""
    fullest = max(tables, key=len, default={})
    return [*fullest, *(name for name in names if name not in fullest)]
