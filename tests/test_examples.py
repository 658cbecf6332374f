"""The examples: each runs, says its numbers with the caution, and leaves its pictures."""

import re
import subprocess
import sys
from pathlib import Path

import matplotlib.image
import pytest

from front3d.results import CAUTION

FOLDER = Path(__file__).parent.parent / "examples"
PICTURES = {
    "surface_crack": ("scene", "steps", "through_thickness"),
    "corner_crack": ("chart", "through_thickness"),
    "inclined_crack": ("chart", "mode_mix"),
}


def test_every_example_is_tested_and_its_pictures_stand_beside_it() -> None:
    assert {path.stem for path in FOLDER.glob("*.py")} == set(PICTURES)
    expected = {f"{script}_{name}.png" for script, names in PICTURES.items() for name in names}
    assert expected <= {path.name for path in (FOLDER / "pictures").glob("*.png")}


def run(script: str, folder: Path) -> str:
    done = subprocess.run(
        [sys.executable, str(FOLDER / f"{script}.py"), str(folder)],
        check=True,
        capture_output=True,
        text=True,
    )
    assert done.stderr == ""
    return done.stdout


@pytest.mark.slow
@pytest.mark.parametrize("script", PICTURES)
def test_an_example_runs(script: str, tmp_path: Path) -> None:
    said = run(script, tmp_path / "new")
    assert CAUTION in said
    made = {path.name for path in (tmp_path / "new").iterdir()}
    assert made == {f"{script}_{name}.png" for name in PICTURES[script]}
    for name in made:
        picture = matplotlib.image.imread(tmp_path / "new" / name)
        assert picture.shape[1] == 1200
        assert picture.std() > 0.05
    if script == "surface_crack":
        K = {
            row[0]: float(row[1])
            for line in said.splitlines()
            if (row := line.split()) and row[0] in ("tension", "bending", "service", "upset")
        }
        # Superposition, to the digits printed.
        assert K["service"] == pytest.approx(K["tension"] + K["bending"], abs=0.011)
        assert K["upset"] == pytest.approx(1.5 * K["service"], abs=0.011)
    if script == "corner_crack":
        judged = [float(d) for d in re.findall(r"([+-][\d.]+) %$", said, re.MULTILINE)]
        assert len(judged) >= 5
        # Within what the equation of Newman and Raju is known to hold, corner cracks in tension.
        assert max(map(abs, judged)) < 4.1
    if script == "inclined_crack":
        # The exact solution of Kassir and Sih (1966) for an infinite solid.
        (off,) = re.findall(r"within ([\d.]+) % of the largest K", said)
        assert float(off) < 1.0
