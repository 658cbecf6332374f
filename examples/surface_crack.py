"""A surface crack in a thick plate under membrane and bending stress.

    python examples/surface_crack.py [FOLDER]

Invented scenario: an ultrasonic inspection of a 40 mm wall reports a crack 12 mm deep and 40 mm
long.  The wall carries 120 MPa of membrane and 60 MPa of bending stress; in an upset half as much
again.  Where along the crack is K largest, and how far can the number be trusted?
"""

import sys
from pathlib import Path

import numpy as np

import front3d
from front3d.output.pictures import save_picture
from front3d.results import CAUTION
from front3d.samples import build
from front3d.units import Units

DEPTH, HALF_LENGTH, WALL = 12.0, 20.0, 40.0  # mm
MEMBRANE, BENDING = 120.0, 60.0  # MPa


def main(folder: Path) -> None:
    folder.mkdir(parents=True, exist_ok=True)
    # In place of a model of your own: front3d.load("result.vtu").
    sample = build(
        "surface-crack",
        depth=DEPTH,
        half_length=HALF_LENGTH,
        thickness=WALL,
        tension=MEMBRANE,
        bending=BENDING,
    )
    units = Units("mm", "MPa")
    result = front3d.evaluate(
        sample.solid,
        young=sample.material.young,
        poisson=sample.material.poisson,
        units=units,
        combine=["service = tension + bending", "upset = 1.5*tension + 1.5*bending"],
    )
    print(sample.description)
    print(f"{'step':10}{'deepest point':>16}{'largest':>10}   at (x, y, z)        methods within")
    for front in result.fronts:
        K = front.K[:, 0] * units.K_factor
        deepest = int(np.argmax(front.positions[:, 1]))
        # At the free surface no K exists in the strict sense: such stations are flagged.
        worst = max((i for i in range(len(front)) if not front.flags[i]), key=lambda i: K[i])
        place = ", ".join(f"{x:.1f}" for x in front.positions[worst])
        agree = 100 * front.method_spread[worst, 0] / front.K[worst, 0]
        print(f"{front.step:10}{K[deepest]:16.2f}{K[worst]:10.2f}   ({place}){agree:16.1f} %")
    print("K_I in MPa sqrt(m), free surface left out")
    print(*result.warnings, *(w for front in result.fronts for w in front.warnings), sep="\n")
    print(CAUTION)
    for name in ("scene", "through_thickness"):
        path = folder / f"surface_crack_{name}.png"
        save_picture(result, sample.solid, name, path, step="service")
    save_picture(result, sample.solid, "steps", folder / "surface_crack_steps.png")


if __name__ == "__main__":
    here = Path(__file__).parent / "pictures"
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else here)
