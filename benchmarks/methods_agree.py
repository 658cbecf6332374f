"""How the methods agree on the embedded models: prints the Markdown table of README.md.

    python benchmarks/methods_agree.py [SAMPLE ...] [--cells KIND ...]

Per load, the largest difference of any mode from the interaction integral, in per cent of the
front's largest K, away from free surfaces, and the largest range over the rings.
"""

import argparse
from collections.abc import Iterator

import numpy as np

import front3d
from front3d.results import FrontResult, free_surface_layer
from front3d.samples import CELL_KINDS, SAMPLES, build

FURTHER = ("closure", "opening")


def differences(front: FrontResult) -> dict[str, float]:
    """Per cent of the largest K, by method, and for the rings."""
    K = front.methods["interaction"].K
    largest = float(np.abs(K).max())
    inside = ~free_surface_layer(front.s, front.length, front.ends)
    found = {
        name: 100 * float(np.nanmax(np.abs(front.methods[name].K - K)[inside])) / largest
        for name in FURTHER
        if name in front.methods
    }
    spread = front.methods["interaction"].columns["ring_spread"]
    return found | {"rings": 100 * float(spread[inside].max()) / largest}


def rows(names: list[str], kinds: list[str]) -> Iterator[str]:
    for name in names:
        for cells in kinds:
            sample = build(name, cells=cells)
            result = front3d.evaluate(
                sample.solid, young=sample.material.young, poisson=sample.material.poisson
            )
            for front in result.fronts:
                found = differences(front)
                figures = [f"{found[m]:.2g} %" if m in found else "-" for m in (*FURTHER, "rings")]
                where = f"{front.step}, {len(front)} stations"
                yield f"| {name} | {where} | {cells} | {' | '.join(figures)} |"


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("samples", nargs="*", default=list(SAMPLES))
    parser.add_argument("--cells", nargs="+", default=list(CELL_KINDS))
    arguments = parser.parse_args()
    print(f"| model | load | cells | {' | '.join(FURTHER)} | rings |")
    print("| --- " * 6 + "|")
    for row in rows(arguments.samples, arguments.cells):
        print(row, flush=True)


if __name__ == "__main__":
    main()
