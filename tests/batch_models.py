"""Case files and finished cases for the tests of studies."""

from pathlib import Path

from front3d.batch.finished import Largest, Outcome, put_in_place, unfinished

LARGEST = Largest("K_II", -3.5, "pull", 1, 7, 0.25, 1.0, 2.0, 3.0, "free surface")


def case_file(path: Path, text: str = "") -> Path:
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(f'result = "r.vtu"\n[material]\nyoung = 1e5\npoisson = 0.3\n{text}')
    return path


def placed(folder: Path, key: str = "k", points: str = "a\n1\n") -> Outcome:
    outcome = Outcome("c", largest=LARGEST, warnings=2, seconds=1.5)
    with unfinished(folder) as part:
        (part / "points.csv").write_text(points)
        put_in_place(part, folder, key, outcome)
    return outcome
