"""Make the pictures of the README: a plate with a surface crack, solved, evaluated and drawn.

    python examples/make_pictures.py [FOLDER]

Writes chart.png, through_thickness.png and scene.png into FOLDER (default: the folder pictures
beside this file).
"""

import argparse
import io
import sys
import tempfile
from pathlib import Path

from PIL import Image

from front3d.cli import main as front3d

WIDTH = 900  # small enough to be kept with the sources
MODEL = "surface-crack"


def make(folder: Path) -> None:
    with tempfile.TemporaryDirectory() as name:
        work = Path(name)
        call("sample", MODEL, "--out", name)
        case = next(work.glob("*.toml"))
        call("evaluate", str(case), "--step", "tension", "--out", name)
        folder.mkdir(parents=True, exist_ok=True)
        for picture in ("chart.png", "through_thickness.png", "scene.png"):
            (folder / picture).write_bytes(reduced(work / picture))


def call(*words: str) -> None:
    code = front3d(words)
    if code:
        raise SystemExit(code)


def reduced(path: Path) -> bytes:
    image = Image.open(path).convert("RGB")
    image = image.resize(
        (WIDTH, round(image.height * WIDTH / image.width)), Image.Resampling.LANCZOS
    )
    out = io.BytesIO()
    image.save(out, "PNG", optimize=True)
    return out.getvalue()


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("folder", nargs="?", type=Path, default=Path(__file__).parent / "pictures")
    sys.exit(make(parser.parse_args().folder))
