"""The report: parsed as a browser does, and opened in one with the network off."""

import json
import re
import shutil
import socket
import subprocess
from collections.abc import Callable
from dataclasses import asdict, fields, replace
from html.parser import HTMLParser
from importlib.util import find_spec
from pathlib import Path
from typing import Any

import matplotlib.image
import numpy as np
import pytest
from matplotlib.figure import Figure

from front3d.cli import main
from front3d.loads import Loads, Region
from front3d.options import Options
from front3d.output import report as report_module
from front3d.output.files import write_whole
from front3d.output.report import report_html, write_report
from front3d.output.report.words import levelled
from front3d.output.saved import read_saved
from front3d.output.skin import skin_vtp
from front3d.output.summary import summary_json
from front3d.output.tables import points_csv
from front3d.results import CAUTION, Evaluation, MethodResult
from front3d.solid import LocalMaterial, Material
from tests.output_models import corner_front, cracked_block, elliptic_front, evaluation_of

NASTY = "<script>alert(\"1\")</script> & 'more'"
FRONT = replace(corner_front(), step=NASTY, warnings=(f"beware of {NASTY}",))
CASE = 'result = "block.vtu"\n\n[material]\nyoung = 200000.0\n'


def folder_of(evaluation: Evaluation, folder: Path, *more: str) -> Path:
    """A folder as `evaluate` leaves it, without pictures; `more` are further files listed."""
    write_whole(folder / "points.csv", points_csv(evaluation))
    content = summary_json(evaluation, [], ["points.csv", *more], CASE)
    write_whole(folder / "summary.json", content)
    return folder


class Page(HTMLParser):
    """Text, references and tables of a page; fails where elements are not closed in order."""

    EMPTY = ("meta", "img", "br")

    def __init__(self, content: str) -> None:
        super().__init__()
        self.open: list[str] = []
        self.text: list[str] = []
        self.references: list[str] = []
        self.tags: list[str] = []
        self.ids: list[str] = []
        self.feed(content)
        self.close()
        assert self.open == []

    def handle_starttag(self, tag: str, attrs: Any) -> None:
        self.tags.append(tag)
        for name, value in attrs:
            if name in ("src", "href", "xlink:href", "data", "action", "poster", "srcset"):
                self.references.append(value)
            if name == "id":
                self.ids.append(value)
            if name.startswith("on"):
                raise AssertionError(f"{tag} {name}")
        if tag not in self.EMPTY:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: Any) -> None:
        self.handle_starttag(tag, attrs)
        if tag not in self.EMPTY:
            self.open.pop()

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open and self.open[-1] != "style":
            self.text.append(data)

    @property
    def words(self) -> str:
        return " ".join("".join(self.text).split())


@pytest.fixture
def one_chart(monkeypatch: pytest.MonkeyPatch) -> None:
    """A blank drawing in place of the charts, which have tests of their own."""
    monkeypatch.setattr(report_module, "charts_of", lambda _: {"chart": lambda: Figure((8, 4))})


@pytest.fixture
def page(tmp_path: Path, one_chart: None) -> str:
    evaluation = replace(evaluation_of(FRONT), source=NASTY)
    content, _ = report_html(read_saved(folder_of(evaluation, tmp_path)))
    return content.decode()


def test_nothing_is_fetched_and_nothing_runs(page: str) -> None:
    found = Page(page)
    for reference in found.references:
        assert reference.startswith(("#", "data:image/png;base64,")), reference
    assert not {"script", "link", "object", "embed", "base"} & set(found.tags)
    assert "@import" not in page
    assert re.findall(r"url\((?!#)", page) == []
    assert "http" not in page


def test_names_from_files_are_text(page: str) -> None:
    assert NASTY in Page(page).words
    assert f"beware of {NASTY}" in Page(page).words
    assert "<script" not in page


def test_no_two_elements_share_a_name(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    two = {"chart": lambda: Figure((8, 4)), "mode_mix": lambda: Figure((8, 4))}
    for figure in (draw() for draw in two.values()):
        figure.text(0.5, 0.5, "word")
    monkeypatch.setattr(report_module, "charts_of", lambda _: two)
    content, _ = report_html(read_saved(folder_of(evaluation_of(FRONT), tmp_path)))
    ids = Page(content.decode()).ids
    assert len(ids) == len(set(ids))


def test_the_answer_comes_first_with_its_place_and_its_witnesses(page: str) -> None:
    words = Page(page).words
    i = int(FRONT.K[:, 0].argmax())
    peak = f"{FRONT.K[i, 0]:.4g} MPa \N{SQUARE ROOT}mm"
    assert f"Largest KI = {peak} ({FRONT.K[i, 0] * 0.001**0.5:.4g} MPa \N{SQUARE ROOT}m)" in words
    # At 45 degrees of the ellipse: 6/sqrt(2), 4/sqrt(2).
    assert f"at station {i} of front 0, s/L {FRONT.s_rel[i]:.3f}, (4.243, 2.828, 0)" in words
    words = words.replace("\N{NO-BREAK SPACE}", " ")
    assert "closure within 1 % of it" in words  # 1.01 K in the model
    assert "its rings agree within 1 % of the largest K" in words  # 0.99 K and K
    order = [words.index(w) for w in (CAUTION, "Answer", "Warnings: ", "Question", "Charts")]
    assert order == sorted(order)


LOADS = Loads(
    face_polynomial=(5.0, -0.25),
    depth_direction=(0, 1, 0),
    density=7.85e-9,
    gravity=(0, 0, -9810),
    rotation=314.5,
    rotation_axis=(0, 0, 1),
    temperature="T_wall",
    reference_temperature=20.5,
    expansion=1.15e-5,
    initial_stress="residual",
    acts_in=("initial-stress = lifted,upset",),
    regions=(Region("plate", 210e3, 0.31), Region(7.0, 70e3, 0.33, density=2.7e-9)),
)


@pytest.mark.usefixtures("one_chart")
def test_the_question_states_every_load_and_material(tmp_path: Path) -> None:
    options = asdict(Options(face_pressure=12.5, loads=LOADS, combine=("both = 1.2*a + 0.8*b",)))
    front = replace(FRONT, material=Material(210e3, 0.31))
    evaluation = replace(evaluation_of(front), options=options)
    folder = folder_of(evaluation, tmp_path)
    text = Page(report_html(read_saved(folder))[0].decode()).words
    text = text[text.index("Question") : text.index("The crack")]
    stated = (
        "pressure on the crack faces12.5 MPa", "5 - 0.25 d MPa", "along (0, 1, 0)", "7.85e-09",
        "(0, 0, -9810)", "314.5 radians", "about (0, 0, 1)", "array T_wall", "20.5", "1.15e-05",
        "initial stressarray residual", "steps of initial stresslifted, upset only",
        "region plate: E = 210000 MPa, Poisson's ratio 0.31",
        "region 7: E = 70000 MPa, Poisson's ratio 0.33, density 2.7e-09", "both = 1.2*a + 0.8*b",
        "along it E 210000 MPa, Poisson's ratio 0.31",
    )  # fmt: skip
    for words in stated:
        assert words in text, (words, text)
    summary = json.loads((folder / "summary.json").read_text())
    assert {"pressure on the crack faces", "gravity", "temperature"} <= set(summary["loads"])
    assert "region plate" in summary["material"]["stated"]
    # Every field of Loads is either stated above or one of these, which only complete others.
    partners = {"depth_from", "rotation_point", "region_array"}
    other = {"face_array", "initial_strain", "elastic_table"}
    given = {f.name for f in fields(Loads) if getattr(LOADS, f.name) != f.default}
    assert given | partners | other == {f.name for f in fields(Loads)}


@pytest.mark.usefixtures("one_chart")
def test_no_load_is_claimed_where_none_is_stated(page: str) -> None:
    assert "loadsnone stated: K follows from the displacements" in Page(page).words


def test_constants_of_a_front_come_back_with_its_G_by_mode(tmp_path: Path) -> None:
    young = np.linspace(190e3, 210e3, len(FRONT))
    own = LocalMaterial(young, np.full(len(FRONT), 0.29))
    folder = folder_of(evaluation_of(replace(FRONT, material=own)), tmp_path)
    (front,) = read_saved(folder).evaluation.fronts
    assert front.material is not None
    assert np.array_equal(front.material.young, young)
    assert front.material.poisson[5] == 0.29
    assert (
        read_saved(folder_of(evaluation_of(FRONT), tmp_path)).evaluation.fronts[0].material is None
    )


@pytest.mark.usefixtures("one_chart")
def test_a_flagged_answer_has_one_without_a_flag_beside_it(tmp_path: Path) -> None:
    K = np.array(FRONT.K)
    K[0, 0] = 2 * K[:, 0].max()  # at the free surface
    i = int(FRONT.K[1:-1, 0].argmax()) + 1
    folder = folder_of(evaluation_of(replace(FRONT, K=K)), tmp_path)
    words = Page(report_html(read_saved(folder))[0].decode()).words
    assert f"flagged: free surface. Largest without a flag: {K[i, 0]:.4g} MPa" in words
    assert f"at station {i} of front 0" in words


def test_every_station_is_in_the_table(page: str) -> None:
    table = page[page.index('id="table"') : page.index('id="inputs"')]
    rows = re.findall(r"<tr>(.*?)</tr>", table)[1:]
    assert len(rows) == len(FRONT)
    cells = re.findall(r"<td>(.*?)</td>", rows[7])
    assert cells[0] == "7"
    assert float(cells[1]) == pytest.approx(FRONT.s_rel[7], abs=1e-4)
    assert [float(c) for c in cells[2:4]] == pytest.approx(FRONT.positions[7, :2], abs=2e-3)
    # K_III is nought throughout: closure has no column of it.
    expected = [*FRONT.K[7], FRONT.G[7], *FRONT.methods["closure"].K[7, :2]]
    assert cells.pop(9) == FRONT.flags[7]
    assert [float(c) for c in cells[5:12]] == pytest.approx(
        expected, abs=2e-3 * FRONT.K.max() / 100
    )


def test_what_is_needed_to_repeat_it(page: str) -> None:
    assert CASE in "".join(Page(page).text)
    assert "E = 200000 MPa, Poisson's ratio 0.3" in Page(page).words


def test_extras_that_are_missing_are_named(tmp_path: Path, one_chart: None, monkeypatch) -> None:
    folder = folder_of(evaluation_of(FRONT), tmp_path)
    content, notes = report_html(read_saved(folder))
    assert notes == (
        "The scene to turn by hand needs skin.vtp, which this evaluation did not write.",
    )
    folder_of(evaluation_of(FRONT), tmp_path, "skin.vtp", "scene.png")
    (folder / "skin.vtp").write_bytes(b"")
    (folder / "scene.png").write_bytes(b"picture")
    monkeypatch.setattr(report_module.scene, "find_spec", lambda _: None)
    content, notes = report_html(read_saved(folder))
    assert "pip install trame-pyvista" in notes[0]
    assert notes[0] in Page(content.decode()).words
    assert "data:image/png;base64,cGljdHVyZQ==" in Page(content.decode()).references


def test_a_front_without_any_value(tmp_path: Path, one_chart: None) -> None:
    nothing = np.full_like(FRONT.K, np.nan)
    front = replace(FRONT, K=nothing, G=nothing[:, 0], methods={}, sources=("interaction",) * 61)
    content, _ = report_html(read_saved(folder_of(evaluation_of(front), tmp_path)))
    assert "No station has a value." in Page(content.decode()).words


def test_figures_that_are_nought_against_the_largest_read_so() -> None:
    assert levelled(-4.4e-5, 385.7) == "0.0"
    assert levelled(385.74, 385.74) == "385.7"
    assert levelled(0.012345, 0.02) == "0.01235"
    assert levelled(float("nan"), 1.0) == "no value"


def test_the_command_says_what_it_wrote(
    tmp_path: Path, one_chart: None, capsys: pytest.CaptureFixture[str]
) -> None:
    folder_of(evaluation_of(FRONT), tmp_path)
    assert main(["report", str(tmp_path)]) == 0
    said = capsys.readouterr().out
    assert f"written: {tmp_path / 'report.html'}" in said
    assert CAUTION in said
    assert main(["report", str(tmp_path / "elsewhere")]) == 1
    assert "expected a folder that" in capsys.readouterr().err


# --- in a browser ----------------------------------------------------------------------------

BROWSER = shutil.which("chromium") or shutil.which("chromium-browser")
in_browser = pytest.mark.skipif(BROWSER is None, reason="needs chromium: apt-get install chromium")


@pytest.fixture
def browse(tmp_path: Path) -> Callable[..., str]:
    """Open a page in headless Chromium without a network; stdout, after a check of its console."""

    def run(page: Path, *flags: str) -> str:
        words = [
            *("--headless=new", "--no-sandbox", "--hide-scrollbars", "--enable-logging=stderr"),
            *("--use-angle=swiftshader", "--enable-unsafe-swiftshader"),
            *("--window-size=1000,6000", "--virtual-time-budget=10000"),
            "--proxy-server=127.0.0.1:9",  # where nobody answers
        ]
        profile = f"--user-data-dir={tmp_path / 'profile'}"
        ran = subprocess.run(
            [str(BROWSER), *words, profile, *flags, page.as_uri()],
            capture_output=True,
            text=True,
            timeout=180,
            check=True,
        )
        said = [line for line in ran.stderr.splitlines() if "CONSOLE" in line]
        assert [
            line for line in said if '"hashes,scene"' not in line
        ] == []  # the viewer's greeting
        return ran.stdout

    return run


@in_browser
@pytest.mark.slow
def test_page_opens_offline_and_prints(tmp_path: Path, browse: Callable[..., str]) -> None:
    path, _ = write_report(read_saved(folder_of(evaluation_of(FRONT), tmp_path)))
    shown = browse(path, "--dump-dom")
    assert f"{FRONT.K[7, 0]:.2f}" in shown
    assert shown.count('role="img"') == 3
    browse(path, f"--screenshot={tmp_path / 'page.png'}")
    picture = matplotlib.image.imread(tmp_path / "page.png")[..., :3]
    blue = np.abs(picture - matplotlib.colors.to_rgb("#0072B2")).max(axis=-1) < 0.02
    assert blue.sum() > 1000  # a chart's reported curve
    browse(path, "--no-pdf-header-footer", f"--print-to-pdf={tmp_path / 'page.pdf'}")
    pages = re.findall(rb"/Type\s*/Page\b", (tmp_path / "page.pdf").read_bytes())
    # Answer and question, crack and two charts, a third and the checks, 61 stations, the inputs.
    assert 3 <= len(pages) <= 6


@in_browser
@pytest.mark.slow
def test_the_widest_table_fits_a_printed_page(
    tmp_path: Path, one_chart: None, browse: Callable[..., str]
) -> None:
    K = FRONT.K + np.array((0.0, 0.0, -123.4))
    methods = {name: replace(m, K=K) for name, m in FRONT.methods.items()}
    methods["opening"] = MethodResult("opening", K)
    flags = ("free surface; methods disagree", *FRONT.flags[1:])
    front = replace(FRONT, K=K, methods=methods, flags=flags, step="tension")
    path, _ = write_report(read_saved(folder_of(evaluation_of(front), tmp_path)))
    # As printed on A4 with margins of 14 mm: 182 mm are 688 pixels of 1/96 inch.
    text = path.read_text(encoding="utf-8").replace("@media print {", "@media all {")
    text = text.replace(
        "</style>", "main { width: 688px !important; margin: 0 !important; }</style>"
    )
    path.write_text(text, encoding="utf-8")
    browse(path, f"--screenshot={tmp_path / 'page.png'}")
    picture = matplotlib.image.imread(tmp_path / "page.png")[..., :3]
    assert (picture[:, :688] < 0.5).any(axis=2).sum() > 5000
    assert picture[:, 692:].min() > 0.99


@in_browser
@pytest.mark.slow
@pytest.mark.skipif(find_spec("trame_pyvista") is None, reason="needs the extra trame-pyvista")
def test_scene_can_be_turned_in_the_page(
    tmp_path: Path, browse: Callable[..., str], monkeypatch: pytest.MonkeyPatch
) -> None:
    hosts, find = set(), socket.getaddrinfo

    def found(host: Any, *more: Any, **named: Any) -> Any:
        hosts.add(host)
        return find(host, *more, **named)

    monkeypatch.setattr(socket, "getaddrinfo", found)
    front = elliptic_front(1.6, 1.2, closed=True, centre=2.0)
    folder_of(evaluation_of(front), tmp_path, "skin.vtp")
    skin = skin_vtp(cracked_block(1.6, 1.2, embedded=True), (front,))
    write_whole(tmp_path / "skin.vtp", skin)
    path, notes = write_report(read_saved(tmp_path))
    assert notes == ()
    assert hosts <= {"127.0.0.1", "localhost", None}  # nothing was fetched to make it
    browse(path, f"--screenshot={tmp_path / 'page.png'}")
    picture = matplotlib.image.imread(tmp_path / "page.png")[..., :3]
    red, green, blue = np.moveaxis(picture, -1, 0)
    # The crack's sand colour under light; of this front no other picture in the page has it.
    sand = (red > green) & (green > blue) & (red - blue > 0.08) & (red - blue < 0.25)
    assert (sand & (red > 0.5) & (red < 0.95)).sum() > 3000


def test_skin_reads_back(tmp_path: Path) -> None:
    from front3d.output.scene import close_up
    from front3d.output.skin import read_skin

    front = elliptic_front(1.6, 1.2, closed=True, centre=2.0)
    solid = cracked_block(1.6, 1.2, embedded=True)
    path = write_whole(tmp_path / "skin.vtp", skin_vtp(solid, (front,)))
    parts, box = read_skin(path)
    assert np.array_equal(box, close_up(front.positions, solid.points))
    assert np.abs(np.asarray(parts.crack.points)[:, 2]).max() < 1e-9
    assert parts.crack.n_cells > 0
    low, high = box
    assert (np.asarray(parts.outside.points) >= low - 1e-5).all()
    assert (np.asarray(parts.outside.points) <= high + 1e-5).all()
