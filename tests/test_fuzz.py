"""Damage of thousands of kinds: a refusal, a word of warning, or the right K; never anything else.

The files are read and evaluated in a process of their own (tests/fuzz_worker.py), with limited
memory, so that a crash, a hang or a blow-up is seen as such.  What counts as right: K within
TOLERANCE of that of the good file, at all stations between the ends.

What cannot be noticed, by any program: a smooth change of the displacements that is itself a
possible result (a factor, another load, K_III of the other sign), and a wrong Young's modulus.

FRONT3D_FUZZ sets how many damages of each kind the thorough runs try.
"""

import os

import h5py
import meshio
import numpy as np
import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st
from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridWriter

from tests.fuzz_tools import KINDS, Worker, damage_bytes, verdict
from tests.reading_models import grid, mesh, write_ensight, write_exodus
from tests.whole_models import POISSON, YOUNG, block

pytestmark = pytest.mark.filterwarnings("ignore::DeprecationWarning:meshio")
KIND = "hexahedron20"


def profile(examples):
    return settings(
        max_examples=examples,
        derandomize=True,  # the same in every run
        database=None,
        deadline=None,
        phases=[Phase.generate],  # shrinking takes too long where a crash costs a start
        suppress_health_check=list(HealthCheck),
    )


QUICK = 10
THOROUGH = int(os.environ.get("FRONT3D_FUZZ", "40"))


def with_examples(names, quick):
    """Quick and thorough runs of each name."""
    for name in names:
        yield pytest.param(name, quick, id=f"{name}-quick")
        yield pytest.param(name, THOROUGH, id=f"{name}-thorough", marks=pytest.mark.slow)


@pytest.fixture(scope="module")
def worker():
    worker = Worker()
    yield worker
    worker.close()


@pytest.fixture(scope="module")
def good(worker, tmp_path_factory):
    """The good file's answer, and the file."""
    path = tmp_path_factory.mktemp("good") / "good.vtu"
    model().save(path)
    answer = worker.ask(path=str(path))
    assert len(answer["fronts"]) == 1
    return answer, str(path)


def parts():
    solid = block()
    return solid.points, solid.blocks[0].nodes, solid.steps[0].displacement


def model(points=None, nodes=None, u=None):
    p, n, v = parts()
    points, nodes, u = (a if b is None else b for a, b in ((p, points), (n, nodes), (v, u)))
    return grid(points, {KIND: nodes}, displacement=u)


# ------------------------------------------------------------------------ damaged bytes


def vtu(folder, mode, compressor):
    writer = vtkXMLUnstructuredGridWriter()
    writer.SetInputData(model())
    writer.SetFileName(str(folder / "a.vtu"))
    writer.SetDataMode(mode)
    writer.SetEncodeAppendedData(False)
    if compressor:
        writer.SetCompressorTypeToZLib()
    else:
        writer.SetCompressorTypeToNone()
    writer.Write()


def by_meshio(suffix, form, **options):
    def write(folder):
        points, nodes, u = parts()
        m = mesh(points, {KIND: nodes}, displacement=u)
        meshio.write(folder / f"a{suffix}", m, form, **options)

    return write


def exodus(folder):
    points, nodes, u = parts()
    write_exodus(folder / "a.e", points, {KIND: nodes}, {1.0: u})


def vtkhdf(folder):
    points, nodes, u = parts()
    with h5py.File(folder / "a.vtkhdf", "w") as file:
        root = file.create_group("VTKHDF")
        root.attrs["Version"] = (2, 0)
        root.attrs.create("Type", b"UnstructuredGrid", dtype=h5py.string_dtype("ascii", 16))
        root["NumberOfPoints"] = [len(points)]
        root["NumberOfCells"] = [len(nodes)]
        root["NumberOfConnectivityIds"] = [nodes.size]
        root["Points"], root["Connectivity"] = points, nodes.ravel()
        root["Offsets"] = 20 * np.arange(len(nodes) + 1)
        root["Types"] = np.full(len(nodes), 25, dtype=np.uint8)
        root["PointData/displacement"] = u


def index(suffix):
    def write(folder):
        model().save(folder / "p.vtu")
        (folder / f"a{suffix}").write_text(
            '<VTKFile type="PUnstructuredGrid" version="1.0"><PUnstructuredGrid GhostLevel="0">'
            '<Piece Source="p.vtu"/></PUnstructuredGrid></VTKFile>'
            if suffix == ".pvtu"
            else '<VTKFile type="Collection" version="1.0"><Collection>'
            '<DataSet timestep="1" part="0" file="p.vtu"/></Collection></VTKFile>'
        )

    return write


def table(folder):
    points, nodes, u = parts()
    grid(points, {KIND: nodes}).save(folder / "a.vtu")
    rows = [f"{k},{x!r},{y!r},{z!r}" for k, (x, y, z) in enumerate(u.tolist())]
    (folder / "u.csv").write_text("\n".join(["node,ux,uy,uz", *rows]) + "\n")


# What writes the good files, the file to load and the pattern of the file to damage.
FORMATS = {
    "vtu ascii": (lambda f: vtu(f, 0, False), "a.vtu", "a.vtu"),
    "vtu binary": (lambda f: vtu(f, 1, False), "a.vtu", "a.vtu"),
    "vtu zlib": (lambda f: vtu(f, 2, True), "a.vtu", "a.vtu"),
    "vtu raw": (lambda f: vtu(f, 2, False), "a.vtu", "a.vtu"),
    "vtk binary": (lambda f: model().save(f / "a.vtk"), "a.vtk", "a.vtk"),
    "vtk ascii": (lambda f: model().save(f / "a.vtk", binary=False), "a.vtk", "a.vtk"),
    "vtk 4 binary": (by_meshio(".vtk", "vtk42", binary=True), "a.vtk", "a.vtk"),
    "vtkhdf": (vtkhdf, "a.vtkhdf", "a.vtkhdf"),
    "exodus": (exodus, "a.e", "a.e"),
    "pvtu": (index(".pvtu"), "a.pvtu", "a.pvtu"),
    "pvd": (index(".pvd"), "a.pvd", "a.pvd"),
    "msh 2.2 ascii": (by_meshio(".msh", "gmsh22", binary=False), "a.msh", "a.msh"),
    "msh 4.1 binary": (by_meshio(".msh", "gmsh", binary=True), "a.msh", "a.msh"),
    "xdmf xml": (by_meshio(".xdmf", "xdmf", data_format="XML"), "a.xdmf", "a.xdmf"),
    "xdmf hdf": (by_meshio(".xdmf", "xdmf", data_format="HDF"), "a.xdmf", "a.h5"),
    "med": (by_meshio(".med", "med"), "a.med", "a.med"),
    "ensight case": (lambda f: write_ensight(f / "a.case", model()), "a.case", "a.case"),
    "ensight mesh": (lambda f: write_ensight(f / "a.case", model()), "a.case", "*.geo"),
    "ensight field": (lambda f: write_ensight(f / "a.case", model()), "a.case", "*displacement"),
    "csv": (table, "a.vtu", "u.csv"),
}

places = st.one_of(st.floats(0, 0.1), st.floats(0, 1))
damages = st.lists(
    st.tuples(st.sampled_from(KINDS), places, st.integers(1, 64), st.integers(0, 10**6)),
    min_size=1,
    max_size=3,
)


@pytest.mark.parametrize(("form", "examples"), list(with_examples(FORMATS, QUICK)))
def test_damaged_files(tmp_path, worker, good, form, examples):
    write, main, pattern = FORMATS[form]
    write(tmp_path)
    (target,) = tmp_path.glob(pattern)
    whole = target.read_bytes()
    # Long runs of zeros, such as unused pages of HDF5, would take most of the hits.
    told = np.flatnonzero(np.frombuffer(whole, np.uint8))
    request = {"path": str(tmp_path / main), "good": good[1]}
    if form == "csv":
        request["table"] = str(target)
    verdicts = []

    @profile(examples)
    @given(damages)
    def run(damages):
        data = whole
        for kind, place, size, seed in damages:
            hit = told[int(place * (len(told) - 1))] / len(whole)
            data = damage_bytes(data, kind, hit, size, seed) or b" "
        target.write_bytes(data)
        verdicts.append(verdict(worker.ask(**request), good[0]))
        assert verdicts[-1] in ("refused", "same", "flagged"), verdicts[-1]

    run()
    assert verdicts.count("refused") > 0.2 * len(verdicts)


# ------------------------------------------------------------------------ a damaged case

CASE = f"""result = "good.vtu"
displacement = "displacement"
[material]
young = {YOUNG}
poisson = {POISSON}
[units]
length = "mm"
stress = "MPa"
[options]
up = [0, 1, 0]
face_pressure = 0.0
rings = [80.0, 90.0]
hat = 2
methods = ["closure"]
unopened = false
"""


@pytest.mark.parametrize(
    "examples",
    [
        pytest.param(40, id="quick"),
        pytest.param(10 * THOROUGH, marks=pytest.mark.slow, id="thorough"),
    ],
)
def test_damaged_cases(tmp_path, worker, examples):
    """Values that say another case are not damage: they are kept as they are."""
    model().save(tmp_path / "good.vtu")
    path = tmp_path / "case.toml"
    path.write_text(CASE)
    good = worker.ask(path=str(path))
    assert "fronts" in good, good
    lines = CASE.splitlines()
    names = [k for k, line in enumerate(lines) if not line.startswith(("young", "poisson"))]
    text = st.text(st.characters(codec="utf-8"), max_size=12)

    @profile(examples)
    @given(st.sampled_from(names), st.floats(0, 1), st.integers(1, 8), text, st.booleans())
    def run(k, place, size, words, drop):
        line = lines[k]
        at = int(place * len(line))
        new = line[:at] + words + line[at + (size if drop else 0) :]
        path.write_text("\n".join([*lines[:k], new, *lines[k + 1 :]]), encoding="utf-8")
        found = verdict(worker.ask(path=str(path)), good)
        if found.startswith("wrong") and new.split("=")[0].strip() in (
            "face_pressure", "rings", "hat", "up",
        ):  # fmt: skip
            return  # another pressure, other rings: the case says so
        assert found in ("refused", "same", "flagged"), (new, found)

    run()


# ----------------------------------------------------------------------- a damaged model


def swap_nodes(rng, p, n, u):
    c, (i, j) = rng.integers(len(n)), rng.choice(20, 2, replace=False)
    n[c, [i, j]] = n[c, [j, i]]


def shuffle_corners(rng, p, n, u):
    c = rng.integers(len(n))
    n[c, :8] = rng.permutation(n[c, :8])


def another_node(rng, p, n, u):
    n[rng.integers(len(n)), rng.integers(20)] = rng.integers(len(p))


def missing_node(rng, p, n, u):
    n[rng.integers(len(n)), rng.integers(20)] = len(p) + rng.integers(5)


def cell_twice(rng, p, n, u):
    n[rng.integers(len(n) - 1)] = n[-1]


def no_number(rng, p, n, u):
    (p if rng.random() < 0.5 else u)[rng.integers(len(p)), rng.integers(3)] = rng.choice(
        [np.nan, np.inf, -np.inf]
    )


def rows_moved(rng, p, n, u):
    u[:] = np.roll(u, rng.integers(1, len(u)), axis=0)


def components_swapped(rng, p, n, u):
    u[:] = u[:, [[1, 0, 2], [2, 1, 0], [0, 2, 1], [1, 2, 0], [2, 0, 1]][rng.integers(5)]]


def coordinates_for_displacements(rng, p, n, u):
    u[:] = 10.0 ** rng.integers(-3, 1) * p


def far_away(rng, p, n, u):
    p[rng.integers(len(p)), rng.integers(3)] += rng.choice([-1, 1]) * 10 ** rng.uniform(1.7, 9)


def rows_swapped_near_the_front(rng, p, n, u):
    near = np.flatnonzero(np.hypot(p[:, 0], p[:, 1]) < 60)
    i, j = rng.choice(near, 2, replace=False)
    u[[i, j]] = u[[j, i]]


MODEL_DAMAGES = {
    damage.__name__: damage
    for damage in (
        swap_nodes,
        shuffle_corners,
        another_node,
        missing_node,
        cell_twice,
        no_number,
        rows_moved,
        components_swapped,
        coordinates_for_displacements,
        far_away,
        rows_swapped_near_the_front,
    )
}


@pytest.mark.parametrize(("name", "examples"), list(with_examples(MODEL_DAMAGES, 2)))
def test_damaged_models(tmp_path, worker, good, name, examples):
    """Whole files of a model that is wrong."""
    damage = MODEL_DAMAGES[name]

    @profile(examples)
    @given(st.integers(0, 10**9))
    def run(seed):
        p, n, u = (a.copy() for a in parts())
        damage(np.random.default_rng(seed), p, n, u)
        path = tmp_path / ("a.vtu" if damage is not missing_node else "a.xdmf")
        if damage is missing_node:  # VTK would not write it
            meshio.write(path, mesh(p, {KIND: n}, displacement=u), data_format="XML")
        else:
            model(p, n, u).save(path)
        found = verdict(worker.ask(path=str(path), good=good[1]), good[0])
        assert found in ("refused", "same", "flagged"), found

    run()
