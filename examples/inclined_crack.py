"""The mode mix along an inclined crack.

    python examples/inclined_crack.py [FOLDER]

Invented scenario: a forging has a disc-shaped flaw of 3 mm radius, 35 degrees off the plane that is
square to its 250 MPa.  It opens, slides and tears at once, in proportions that change around its
rim.  Where is the energy release rate largest, which mode makes it, and where would it turn?
"""

import sys
from pathlib import Path

import numpy as np

import front3d
from front3d.mixing import energy_by_mode, tangential
from front3d.output.pictures import save_picture
from front3d.results import CAUTION
from front3d.samples import build
from front3d.units import Units

RADIUS, TILT, STRESS = 3.0, 35.0, 250.0  # mm, degrees, MPa
AROUND = 8  # stations printed


def main(folder: Path) -> None:
    folder.mkdir(parents=True, exist_ok=True)
    sample = build("penny", radius=RADIUS, tilt=TILT, tension=STRESS)
    tilt = np.radians(TILT)
    load = f"{np.sin(tilt)}/0/{np.cos(tilt)}"  # its direction in the axes of the model
    result = front3d.evaluate(
        sample.solid,
        young=sample.material.young,
        poisson=sample.material.poisson,
        units=Units("mm", "MPa"),
        compare=[f"penny-inclined:a={RADIUS},tension={STRESS},load={load}"],
    )
    (front,) = result.fronts
    (exact,) = front.comparisons
    parts = energy_by_mode(front.K, result.material)
    kink, _ = tangential(front.K)
    psi, mode_III = front.mode_angles.T
    print(sample.description)
    print(f"K in {result.units.K_label}; angles in degrees; kink by maximum tangential stress")
    print(f"{'K_I':>8}{'K_II':>8}{'K_III':>8}{'psi':>8}{'mode III':>10}{'kink':>8}{'G':>8}")
    for i in range(0, len(front), max(1, len(front) // AROUND)):
        K = "".join(f"{value:8.1f}" for value in front.K[i])
        print(f"{K}{psi[i]:8.1f}{mode_III[i]:10.1f}{kink[i]:8.1f}{front.G[i]:8.4f}")
    worst = int(np.argmax(front.G))
    share = ", ".join(
        f"{name} {100 * part / front.G[worst]:.0f} %"
        for name, part in zip(("I", "II", "III"), parts[worst], strict=True)
    )
    place = ", ".join(f"{x:.2f}" for x in front.positions[worst])
    print(f"largest G at ({place}): mode {share}")
    off = np.abs(front.K - exact.K).max() / np.abs(exact.K).max()
    print(f"beside {exact.source}: within {100 * off:.2f} % of the largest K, an infinite solid")
    print(CAUTION)
    for name in ("chart", "mode_mix"):
        save_picture(result, sample.solid, name, folder / f"inclined_crack_{name}.png")


if __name__ == "__main__":
    here = Path(__file__).parent / "pictures"
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else here)
