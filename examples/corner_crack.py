"""A corner crack, checked against the published equation.

    python examples/corner_crack.py [FOLDER]

Invented scenario: a bracket arm, 20 mm thick and 60 mm wide, has a quarter-elliptical crack at its
edge, 5 mm deep and 6 mm long on the side, under 150 MPa of tension.  Before the model is used for
shapes that no equation covers, it has to reproduce one that an equation does cover.
"""

import sys
from pathlib import Path

import front3d
from front3d.output.deviation import deviation
from front3d.output.pictures import save_picture
from front3d.results import CAUTION
from front3d.samples import build
from front3d.units import Units

DEPTH, LENGTH, THICKNESS, WIDTH = 5.0, 6.0, 20.0, 60.0  # mm
TENSION = 150.0  # MPa


def main(folder: Path) -> None:
    folder.mkdir(parents=True, exist_ok=True)
    sample = build(
        "corner-crack",
        depth=DEPTH,
        length=LENGTH,
        thickness=THICKNESS,
        width=WIDTH,
        tension=TENSION,
        bending=0.0,
    )
    equation = f"newman-raju-corner:a={DEPTH},c={LENGTH},t={THICKNESS},b={WIDTH},tension={TENSION}"
    result = front3d.evaluate(
        sample.solid,
        young=sample.material.young,
        poisson=sample.material.poisson,
        units=Units("mm", "MPa"),
        compare=[equation],
    )
    (front,) = result.fronts
    (published,) = front.comparisons
    percent = deviation(front, published).percent[:, 0]
    print(sample.description)
    print(f"K_I in {result.units.K_label} beside {published.source}; claimed: {published.claim}")
    print(f"{'phi':>6}{'model':>10}{'equation':>10}{'deviation':>11}")
    for i in range(len(front)):
        judged = "" if published.judged[i] else "   near a free surface, not judged"
        print(
            f"{published.angle[i]:6.1f}{front.K[i, 0]:10.1f}{published.K[i, 0]:10.1f}"
            f"{percent[i]:+9.1f} %{judged}"
        )
    print(*published.notes, *front.warnings, sep="\n")
    print(CAUTION)
    for name in ("chart", "through_thickness"):
        save_picture(result, sample.solid, name, folder / f"corner_crack_{name}.png")


if __name__ == "__main__":
    here = Path(__file__).parent / "pictures"
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else here)
