"""Error against element size for five kinds of cells, by both methods, on an inclined penny crack.

    python benchmarks/convergence.py [--out FOLDER] [--sizes 6 9 12]

Every mesh is the same mesh at another size: cells across the front, along it, and away from it
shrink together.  The error is the largest deviation of any mode at any station from the exact
solution (Sneddon 1946; Kassir and Sih 1966), over the largest K.  Prints a table, and writes
convergence.json and convergence.png.
"""

import argparse
import json
from dataclasses import replace
from math import cos, exp, log, pi, radians, sin
from pathlib import Path

import numpy as np

import front3d
from front3d.samples import build_from, sample_spec
from front3d.samples.cells import CELL_KINDS, cracked_solid, has_quarter_points
from front3d.samples.mirror import Unfolded
from front3d.samples.octant import octant
from front3d.samples.sample import SampleSpec
from front3d.samples.sheet import Density, Quarter
from front3d.samples.tube import Tube

METHODS = ("interaction", "closure")
TILT, BODY = 40.0, 20.0
NAMES = {
    "brick8": "8-node bricks",
    "brick20": "20-node bricks",
    "bricks": "20-node bricks, quarter-points",
    "tetra4": "4-node tetrahedra",
    "tetra10": "10-node tetrahedra",
}
STYLES = {
    "brick8": ("#0072B2", "o", "--"),
    "brick20": ("#0072B2", "s", "-"),
    "bricks": ("#222222", "D", "-"),
    "tetra4": ("#D55E00", "^", "--"),
    "tetra10": ("#D55E00", "v", "-"),
}


def spec_of(size: int) -> SampleSpec:
    """The penny with `size` cells along a quarter of its front, and all else in proportion."""

    def mesh(values: dict[str, float], cells: str) -> Unfolded:
        a, body = values["radius"], values["body"]
        tube = Tube(8, size // 3 - 1, power=1.0, quarter_points=has_quarter_points(cells))
        fine = Density(size, max(1, size // 6), exp(log(4.0) * 6 / size), tube)
        shape = Quarter(a, a, radius=0.25 * a, width=body, depth=body, round=True)
        return cracked_solid(octant(shape, fine, body), (0, 1), cells, "penny")

    return replace(sample_spec("penny"), mesh=mesh)


def errors(cells: str, size: int) -> dict[str, float]:
    """Per method the largest error over the largest K; NaN where the method does not apply."""
    sample = build_from(
        spec_of(size), cells=cells, part="half", radius=1.0, body=BODY, tension=1.0, tilt=TILT
    )
    load = f"{sin(radians(TILT))!r}/0/{cos(radians(TILT))!r}"
    (front,) = front3d.evaluate(
        sample.solid, young=sample.material.young, poisson=sample.material.poisson,
        methods=METHODS, compare=f"penny-inclined:a=1,tension=1,load={load}",
    ).fronts  # fmt: skip
    exact = front.comparisons[0].K
    largest = np.abs(exact).max()
    return {
        name: float(np.abs(front.methods[name].K - exact).max() / largest)
        if name in front.methods
        else float("nan")
        for name in METHODS
    }


def picture(found: dict[str, dict[str, list[float]]], widths: list[float], path: Path) -> None:
    from matplotlib.figure import Figure

    figure = Figure(figsize=(8.0, 4.6), dpi=150, layout="constrained", facecolor="white")
    panels = figure.subplots(1, len(METHODS), sharey=True)
    for axes, method in zip(panels, METHODS, strict=True):
        for cells, (colour, marker, line) in STYLES.items():
            values = 100 * np.array(found[cells][method])
            axes.loglog(
                widths, values, line, color=colour, marker=marker, linewidth=2, markersize=7,
                label=NAMES[cells],
            )  # fmt: skip
        axes.set_title({"interaction": "interaction integral"}.get(method, method), fontsize=14)
        axes.set_xlabel("cell along the front / crack radius", fontsize=13)
        axes.set_xticks(widths, [f"{w:.2g}" for w in widths])
        axes.minorticks_off()
        axes.tick_params(labelsize=12)
        axes.grid(True, which="both", color="#dddddd", linewidth=0.8)
        axes.spines[["top", "right"]].set_visible(False)
    ticks = [0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 20]
    panels[0].set_yticks(ticks, [f"{t:g}" for t in ticks])
    panels[0].set_ylabel("largest error, % of largest K", fontsize=13)
    figure.legend(
        *panels[0].get_legend_handles_labels(), loc="outside lower center", ncols=3, fontsize=12,
        frameon=False,
    )  # fmt: skip
    figure.savefig(path)


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--out", type=Path, default=Path())
    parser.add_argument("--sizes", type=int, nargs="+", default=[6, 9, 12])
    arguments = parser.parse_args()
    widths = [pi / 2 / size for size in arguments.sizes]
    found: dict[str, dict[str, list[float]]] = {}
    print("| cells | method | " + " | ".join(f"{w:.3f} a" for w in widths) + " | order |")
    print("| --- " * (len(widths) + 3) + "|")
    for cells in CELL_KINDS:
        by_size = [errors(cells, size) for size in arguments.sizes]
        found[cells] = {name: [e[name] for e in by_size] for name in METHODS}
        for name, values in found[cells].items():
            order = np.polyfit(np.log(widths), np.log(values), 1)[0]
            numbers = " | ".join(f"{100 * value:.2g} %" for value in values)
            print(f"| {NAMES[cells]} | {name} | {numbers} | {order:.1f} |", flush=True)
    arguments.out.mkdir(parents=True, exist_ok=True)
    content = {"cell_over_radius": widths, "error": found}
    (arguments.out / "convergence.json").write_text(json.dumps(content, indent=2) + "\n")
    picture(found, widths, arguments.out / "convergence.png")


if __name__ == "__main__":
    main()
