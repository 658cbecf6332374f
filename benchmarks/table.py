"""Tables of what was measured: exponents, ratios, and the Markdown of README."""

from typing import Any

import numpy as np

MARKS = ("<!-- benchmarks: begin -->", "<!-- benchmarks: end -->")

STAGES = (
    "reading",
    "detection",
    "geometry",
    "interaction",
    "closure",
    "all after reading",
    "output",
)

Record = dict[str, Any]


def growth(record: Record) -> dict[str, float]:
    """Exponents, fitted to processor times: with cells outside the tube, and with stations."""
    found = {}
    for by, key in (("by cells", "cells"), ("by stations", "stations")):
        runs = record[by]
        if len(runs) < 2:
            continue
        along = np.log([run[key] for run in runs])
        for stage in ("detection", "geometry", "interaction", "closure", "integral and closure"):
            times = [_cpu(run, stage) for run in runs]
            found[f"{stage}, {by}"] = float(np.polyfit(along, np.log(times), 1)[0])
    return found


def _cpu(run: Record, stage: str) -> float:
    seconds = run["seconds"]
    if stage == "integral and closure":
        return float(seconds["interaction"]["warm cpu"] + seconds["closure"]["warm cpu"])
    return float(seconds[stage]["warm cpu"])


def ratios(record: Record) -> dict[str, float]:
    """What the bars are about, each from one run."""
    found = {}
    for kind, times in record["kernel"].items():
        found[f"numpy over numba, {kind}"] = times["numpy"] / times["numba"]
        found[f"numpy at once over numba, {kind}"] = times["numpy at once"] / times["numba"]
        found[f"numba over C -O3, {kind}"] = times["numba"] / times["C -O3"]
        native = times["C -O3 -march=native"]
        found[f"numba over C -O3 -march=native, {kind}"] = times["numba"] / native
        one, two = ("numba, 1 threads", "numba, 2 threads")
        found[f"one thread over two, {kind}"] = times[one] / times[two]
        found[f"the same by processor time, {kind}"] = (
            2 * times[f"{one}, processor"] / times[f"{two}, processor"]
        )
    for run in _runs(record):
        seconds, name = run["seconds"], _name(run)
        for clock in ("warm", "warm cpu"):
            ratio = seconds["all after reading"][clock] / seconds["reading"][clock]
            found[f"after reading over reading, {name} ({clock})"] = ratio
        found[f"peak over arrays of the whole, {name}"] = run["peak"] / _whole(record, run)
    return found


def _whole(record: Record, run: Record) -> float:
    """Bytes of the arrays; of pieces, of which not all are kept, those of the whole model."""
    if run["file"] == ".pvtu":
        return float(record["by cells"][-1]["array bytes"])
    return float(run["array bytes"])


def _runs(record: Record) -> list[Record]:
    return [*record["by cells"], record["bricks"], *record["pieces"]]


def _name(run: Record) -> str:
    kept = f"{run['cells'] / 1e6:.2g} million {run['kind']}"
    return f"{kept} kept of 8 pieces" if run["file"] == ".pvtu" else kept


def text(record: Record) -> str:
    """Everything, for the terminal."""
    lines = [f"{'seconds, cold / warm':28}" + "".join(f"{stage:>20}" for stage in STAGES)]
    for run in [*_runs(record), *record["by stations"]]:
        cells = f"{_name(run)}, {run['stations']} st."
        times = (run["seconds"][stage] for stage in STAGES)
        lines.append(f"{cells:44}" + "".join(f"{t['cold']:9.2f} /{t['warm']:9.2f}" for t in times))
    for name, values in (("exponents", record["growth"]), ("ratios", ratios(record))):
        lines += ["", name, *(f"  {key:64}{value:8.2f}" for key, value in values.items())]
    lines += ["", "kernel, seconds per million Gauss points; differences over the largest force"]
    for kind, times in record["kernel"].items():
        lines += [f"  {kind + ', ' + name:64}{value:10.3g}" for name, value in times.items()]
    return "\n".join(lines)


def markdown(record: Record) -> str:
    """The short table of README."""
    machine = record["machine"]
    memory = round(machine["memory"] / 2**30)
    lines = [
        f"Made by `python -m benchmarks` on a virtual machine with {machine['processors']} "
        f"processors and {memory} GB (load {machine['load']:.1f} from other work when it began, so "
        "only ratios count; processor seconds, warm, which that load disturbs least):",
        "",
        "| model | reading | detection | integral | closure | all after reading | peak memory "
        "over arrays |",
        "| --- " * 7 + "|",
    ]
    for run in _runs(record):
        seconds = run["seconds"]
        shown = ("reading", "detection", "interaction", "closure", "all after reading")
        figures = " | ".join(f"{seconds[stage]['warm cpu']:.2f} s" for stage in shown)
        share = run["peak"] / _whole(record, run)
        lines.append(f"| {_name(run)} | {figures} | {share:.1f} |")
    lines += ["", "| ratio or exponent | measured | bar |", "| --- | --- | --- |"]
    lines += [f"| {name} | {value:.2f} | {bar} |" for name, value, bar in bars(record)]
    return "\n".join(lines)


def bars(record: Record) -> list[tuple[str, float, str]]:
    """What is asked for, measured."""
    found, grows = ratios(record), record["growth"]
    wanted = [
        ("numpy over numba, tetra10", found, ">= 30"),
        ("numpy at once over numba, tetra10", found, ">= 30"),
        ("numba over C -O3, tetra10", found, "<= 1.3"),
        ("numba over C -O3 -march=native, tetra10", found, "<= 1.3"),
        ("one thread over two, tetra10", found, ">= 1.7"),
        ("the same by processor time, tetra10", found, ">= 1.7"),
        ("detection, by cells", grows, "<= 1.05"),
        ("integral and closure, by cells", grows, "<= 0.1"),
        ("integral and closure, by stations", grows, "<= 1.1"),
    ]
    rows = [(name, values[name], bar) for name, values, bar in wanted if name in values]
    million = next((run for run in record["by cells"] if 9e5 < run["cells"] < 2e6), None)
    if million is not None:
        for clock in ("warm", "warm cpu"):
            name = f"after reading over reading, {_name(million)} ({clock})"
            rows.append((name, found[name], "< 1"))
    return rows
