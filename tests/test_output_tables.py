"""points.csv, front.vtp and summary.json: columns, precision, and what they say of trust."""

import csv
import hashlib
import io
import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import pyvista as pv

from front3d.cli import words
from front3d.output import formats
from front3d.output.formats import place
from front3d.output.summary import companions, summary_json
from front3d.output.tables import FIRST_COLUMNS, front_vtp, points_csv
from front3d.output.trust import agreement
from front3d.results import CAUTION, Evaluation
from front3d.units import Units, percent
from tests.output_models import elliptic_front, evaluation_of

OPEN = elliptic_front(1.6, 1.2, closed=False, flags={0: "free surface, 1st"})
CLOSED = elliptic_front(1.0, 1.0, closed=True, front=1, step="bending, 2")


def rows(evaluation: Evaluation) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(points_csv(evaluation).decode())))


def test_columns_stand_in_the_agreed_order() -> None:
    header = points_csv(evaluation_of(OPEN)).decode().splitlines()[0]
    agreed = "step,front,station,s,s_rel,x,y,z,K_I,K_II,K_III,G,flag"
    assert header.startswith(agreed + ",K_I_interaction,")
    assert ",".join(FIRST_COLUMNS) == agreed


def test_numbers_read_back_exactly() -> None:
    table = rows(evaluation_of(OPEN))
    for name, values in {"K_I": OPEN.K[:, 0], "s": OPEN.s, "y": OPEN.positions[:, 1]}.items():
        assert np.array_equal([float(row[name]) for row in table], values)
    assert [row["flag"] for row in table] == list(OPEN.flags)


def test_every_station_of_every_front_has_one_row() -> None:
    table = rows(evaluation_of(OPEN, CLOSED))
    found = [(row["step"], row["front"], row["station"]) for row in table]
    assert found == [
        (front.step, str(front.front), str(i))
        for front in (OPEN, CLOSED)
        for i in range(len(front))
    ]


def test_a_method_that_a_front_lacks_is_nan_there() -> None:
    without = elliptic_front(1.0, 1.0, closed=True, front=1, rings=False)
    table = rows(evaluation_of(without, OPEN))
    assert {row["K_I_ring_spread"] for row in table if row["front"] == "1"} == {"nan"}
    assert all(float(row["K_I_ring_spread"]) > 0 for row in table if row["front"] == "0")


def test_K_in_named_units() -> None:
    # 1 MPa sqrt(mm) = sqrt(0.001) MPa sqrt(m), by the definition of the millimetre.
    row = rows(evaluation_of(OPEN))[0]
    assert float(row["K_I_MPa_sqrt_m"]) == pytest.approx(float(row["K_I"]) * 0.001**0.5, rel=1e-12)
    assert "K_I_MPa_sqrt_m" not in rows(evaluation_of(OPEN, units=Units()))[0]


def test_frame_vectors_are_orthonormal_and_right_handed() -> None:
    for row in rows(evaluation_of(OPEN)):
        e1, e2, e3 = (np.array([float(row[f"e{i}{axis}"]) for axis in "xyz"]) for i in (1, 2, 3))
        assert np.cross(e1, e2) == pytest.approx(e3, abs=1e-12)


def test_vtp_holds_the_fronts_with_every_column(tmp_path: Path) -> None:
    evaluation = evaluation_of(OPEN, CLOSED)
    path = tmp_path / "front.vtp"
    path.write_bytes(front_vtp(evaluation))
    poly: Any = pv.read(path)
    assert poly.n_lines == 2
    first, second = poly.get_cell(0).point_ids, poly.get_cell(1).point_ids
    assert first[0] != first[-1]
    assert second[0] == second[-1]
    assert list(poly.point_data["flag"])[: len(OPEN)] == list(OPEN.flags)
    assert set(rows(evaluation)[0]) == set(poly.point_data.keys())
    assert np.array_equal(poly.point_data["K_I"], np.r_[OPEN.K[:, 0], CLOSED.K[:, 0]])


def test_agreement_is_what_the_rings_say() -> None:
    # Rings of 0.97, 0.995, 1.005 K: the first is left out, so 1 % of the largest K_I.
    trust = agreement(OPEN)
    assert trust.rings is not None
    assert trust.rings["K_I"] == pytest.approx(0.01)
    assert trust.J_and_G == pytest.approx(0.01)
    assert trust.methods == {"opening": pytest.approx(0.02)}


def test_summary_names_inputs_extremes_and_caution(tmp_path: Path) -> None:
    result = tmp_path / "block.vtu"
    result.write_bytes(b"numbers")
    data = json.loads(summary_json(evaluation_of(OPEN), [result], ["points.csv"]))
    assert data["caution"] == CAUTION
    assert data["inputs"] == [
        {"file": "block.vtu", "sha256": hashlib.sha256(b"numbers").hexdigest()}
    ]
    stated = "isotropic, E = 200000 MPa, Poisson's ratio 0.3"
    assert data["material"] == {"young": 200e3, "poisson": 0.3, "stated": stated}
    assert data["loads"].startswith("none stated")
    assert {"front3d", "python", "numpy", "vtk"} <= set(data["versions"])
    (front,) = data["fronts"]
    peak = front["K"]["K_I"]["max"]
    assert peak["station"] == int(OPEN.K[:, 0].argmax())
    assert peak["value"] == OPEN.K[:, 0].max()
    assert peak["position"] == pytest.approx([0.0, 1.2, 0.0], abs=1e-12)
    assert front["ends"] == ["free surface", "symmetry plane"]
    assert front["rings"]["radii"][1] == {"min": 0.2, "max": 0.2}
    assert front["warnings"] == ["the front is coarse"]


def test_summary_without_any_value_is_still_json() -> None:
    front = elliptic_front(1.6, 1.2, closed=False)
    K = np.full_like(front.K, np.nan)
    empty = type(front)(
        **{name: getattr(front, name) for name in front.__slots__} | {"K": K, "G": K[:, 0]}
    )
    (read,) = json.loads(summary_json(evaluation_of(empty), [], []))["fronts"]
    assert read["K"] == {"K_I": {}, "K_II": {}, "K_III": {}}
    assert read["G_max"] is None


def test_files_named_by_an_index_are_hashed_too(tmp_path: Path) -> None:
    (tmp_path / "step_0.vtu").write_text("a")
    (tmp_path / "fields.h5").write_text("b")
    pvd = tmp_path / "run.pvd"
    pvd.write_text('<DataSet timestep="0" file="step_0.vtu"/><DataSet file="gone.vtu"/>')
    xdmf = tmp_path / "run.xdmf"
    xdmf.write_text('<DataItem Format="HDF">fields.h5:/data0</DataItem>')
    assert companions(pvd) == [tmp_path / "step_0.vtu"]
    assert companions(xdmf) == [tmp_path / "fields.h5"]
    assert companions(tmp_path / "step_0.vtu") == []


@pytest.mark.parametrize("name", ["me.case", "*.case", "/abs/geo*", "x" * 300])
def test_an_index_that_names_itself_or_no_file_names_none(tmp_path: Path, name: str) -> None:
    index = tmp_path / "me.case"
    index.write_text(f"GEOMETRY\nmodel: {name}\n")
    assert companions(index) == []


def test_places_far_from_the_origin_keep_their_digits() -> None:
    """A ten-thousandth of the front's length can be read off, wherever the model stands."""
    assert place(np.array([5000.0123, -7000.0, 1e-15]), 0.01) == "5000.0123, -7000, 0"
    assert place(np.array([12.3456789, 0.5, 0.0]), 10.0) == "12.346, 0.5, 0"


def test_nought_is_the_same_on_the_terminal_and_in_pictures() -> None:
    assert words.NOUGHT == formats.NOUGHT


def test_a_part_in_per_cent_has_no_exponent_where_it_is_large() -> None:
    said = [percent(part) for part in (0.0123, 0.994, 0.996, 1.8, 7e4)]
    assert said == ["1.2 %", "99 %", "100 %", "180 %", "7000000 %"]
