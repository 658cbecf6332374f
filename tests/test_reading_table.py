"""Displacements from a table beside the mesh, by node number or coordinates, and wrong tables."""

import numpy as np
import pytest

from front3d.errors import ReadError
from front3d.reading import load
from tests.reading_models import grid
from tests.test_reading_formats import mesher, write_by_mesher  # noqa: F401
from tests.whole_models import KIND, assert_same_K, parts


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
    assert solid.notes == ()  # what was asked for is no warning


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


def test_a_table_without_names_of_its_columns_is_refused(tmp_path):
    points, nodes, _ = half_model()
    grid(points, {KIND: nodes}).save(tmp_path / "a.vtu")
    (tmp_path / "u.csv").write_text("1,0,-1e-3,0\n2,0,0.5,0\n")
    with pytest.raises(ReadError, match="found numbers in its first line, expected a first line"):
        load(tmp_path / "a.vtu", displacement_file=tmp_path / "u.csv")
