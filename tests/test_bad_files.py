"""Bad files at the command line: one sentence, exit code 1, no traceback, nothing left behind."""

import base64
import resource
import struct
import subprocess
import sys

import numpy as np
import pytest

from front3d.cli import main
from tests.reading_models import cells, displacement, grid, write_ensight, write_exodus
from tests.whole_models import block

CONSTANTS = ("--young", "200e3", "--poisson", "0.3", "--no-pictures")


@pytest.fixture
def refuse(tmp_path, capfd):
    def check(path, *words):
        out = tmp_path / "out"
        assert main(["evaluate", str(path), *CONSTANTS, "--out", str(out)]) == 1
        said, complained = capfd.readouterr()
        assert said == "" and complained.count("\n") == 1
        assert complained.startswith("front3d: ") and "unexpected" not in complained
        for word in words:
            assert word in complained, complained
        assert not out.exists()

    return check


def cracked():
    solid = block()
    return solid.points.copy(), solid.blocks[0].nodes.copy(), solid.steps[0].displacement.copy()


def save(path, points, nodes, u):
    grid(points, {"hexahedron20": nodes}, displacement=u).save(path)
    return path


def test_a_cell_that_stands_twice(tmp_path, refuse):
    points, nodes, u = cracked()
    path = save(tmp_path / "a.vtu", points, np.concatenate([nodes, nodes[3:4]]), u)
    refuse(path, "cell 3 and hexahedron20 cell 48 have the same corners", "remove the copies")


def test_no_crack(tmp_path, refuse):
    points, nodes = cells("hexahedron20")
    grid(points, {"hexahedron20": nodes}, u=displacement(points)).save(tmp_path / "a.vtu")
    refuse(tmp_path / "a.vtu", "no crack", "--crack-plane")


def test_a_crack_that_splits_the_body(tmp_path, refuse):
    """Every node of the crack plane doubled: two bodies that touch, and no front."""
    points, nodes, u = cracked()
    above = points[nodes].mean(axis=1)[:, 1] > 0
    on_plane = np.flatnonzero(np.abs(points[:, 1]) < 1e-9)
    shared = np.intersect1d(np.intersect1d(nodes[above], nodes[~above]), on_plane)
    twin = np.arange(len(points))
    twin[shared] = len(points) + np.arange(len(shared))
    nodes[above] = twin[nodes[above]]
    u = np.concatenate([u, u[shared] + [0, 1e-3, 0]])
    path = save(tmp_path / "a.vtu", np.concatenate([points, points[shared]]), nodes, u)
    refuse(path, "a.vtu")


def test_displacements_of_some_nodes_only(tmp_path, refuse):
    """An array shorter than the points, in ASCII."""
    points, nodes, u = cracked()
    save(tmp_path / "b.vtk", points, nodes, u)
    grid(points, {"hexahedron20": nodes}, u=u).save(tmp_path / "a.vtk", binary=False)
    text = (tmp_path / "a.vtk").read_text().splitlines(keepends=True)
    (tmp_path / "a.vtk").write_text("".join(text[:-3]))
    refuse(tmp_path / "a.vtk", "cut short")


# ------------------------------------------------------------------ claims of gigabytes

CLAIM = 2_000_000_000


def claims(folder):
    """Small files, each of which claims arrays of many gigabytes."""
    points, nodes, u = cracked()
    made = {}
    good = save(folder / "good.vtu", points, nodes, u).read_bytes()
    count = f'NumberOfPoints="{len(points)}"'.encode()
    assert count in good
    made["points.vtu"] = good.replace(count, f'NumberOfPoints="{CLAIM}"'.encode())
    grid(points, {"hexahedron20": nodes}, u=u).save(folder / "good.vtk")
    legacy = (folder / "good.vtk").read_bytes()
    made["points.vtk"] = legacy.replace(
        f"POINTS {len(points)} ".encode(), f"POINTS {CLAIM} ".encode()
    )
    made["cells.vtk"] = legacy.replace(b"CELLS 49 960", f"CELLS {CLAIM} 960".encode())
    assert made["cells.vtk"] != legacy
    blocks = base64.b64encode(struct.pack("<III", 500_000, 1 << 20, 0)).decode()
    made["blocks.vtu"] = (
        '<VTKFile type="UnstructuredGrid" version="0.1" byte_order="LittleEndian" header_type='
        '"UInt32" compressor="vtkZLibDataCompressor"><UnstructuredGrid><Piece NumberOfPoints="8" '
        'NumberOfCells="1"><Points><DataArray type="Float64" NumberOfComponents="3" '
        f'format="binary">{blocks}</DataArray></Points></Piece></UnstructuredGrid></VTKFile>'
    ).encode()
    write_exodus(folder / "good.e", points, {"hexahedron20": nodes}, {1.0: u})
    made["nodes.e"] = (
        (folder / "good.e")
        .read_bytes()
        .replace(
            b"num_nodes\0\0\0" + struct.pack(">i", len(points)),
            b"num_nodes\0\0\0" + struct.pack(">i", CLAIM),
        )
    )
    made["nodes.msh"] = (
        f"$MeshFormat\n2.2 0 8\n$EndMeshFormat\n$Nodes\n{CLAIM}\n1 0 0 0\n$EndNodes\n".encode()
    )
    write_ensight(folder / "good.case", grid(points, {"hexahedron20": nodes}, u=u))
    (geometry,) = folder.glob("*.geo")
    data = geometry.read_bytes()
    place = data.index(b"coordinates") + 80
    geometry.write_bytes(data[:place] + struct.pack("<i", CLAIM) + data[place + 4 :])
    made["nodes.case"] = (folder / "good.case").read_bytes()
    for name, content in made.items():
        (folder / name).write_bytes(content)
    return [folder / name for name in made]


def test_claims_of_gigabytes_take_no_memory(tmp_path):
    """All in one process, whose peak is measured with and without them."""
    paths = claims(tmp_path)
    code = (
        "import resource, sys\n"
        "from front3d.errors import ReadError\n"
        "from front3d.reading import load\n"
        "peak = lambda: resource.getrusage(resource.RUSAGE_SELF).ru_maxrss\n"
        "for name in ('good.vtu', 'good.vtk', 'good.e'): load(sys.argv[1] + '/' + name)\n"
        "before = peak()\n"
        "for path in sys.argv[2:]:\n"
        "    try: load(path)\n"
        "    except ReadError as error: print(error)\n"
        "    else: sys.exit(path + ' was read')\n"
        "print(peak() - before)\n"
    )
    limit = 8 << 30
    ran = subprocess.run(
        [sys.executable, "-c", code, str(tmp_path), *map(str, paths)],
        capture_output=True, text=True, check=False,
        preexec_fn=lambda: resource.setrlimit(resource.RLIMIT_AS, (limit, limit)),
    )  # fmt: skip
    assert (ran.returncode, ran.stderr) == (0, ""), ran.stderr + ran.stdout
    *messages, grown = ran.stdout.splitlines()
    assert len(messages) == len(paths)
    for path, message in zip(paths, messages, strict=True):
        assert path.name in message
    assert int(grown) < 100_000  # kilobytes
