"""Damage to files and models, and what may come of it."""

import json
import select
import subprocess
import sys
from pathlib import Path

import numpy as np

WORKER = Path(__file__).with_name("fuzz_worker.py")
START, PATIENCE = 300.0, 60.0
"""Seconds before the first request, which may compile kernels, and a later one count as hanging."""

TOLERANCE = 0.02
"""Part of the largest K by which the K of a damaged file may be off without a word: the spread
of the rings beyond which the program itself warns."""


class Worker:
    """The reused process; started again after it died."""

    def __init__(self) -> None:
        self.process = None

    def ask(self, **request) -> dict:
        patience = PATIENCE
        if self.process is None or self.process.poll() is not None:
            patience = START
            self.process = subprocess.Popen(
                [sys.executable, str(WORKER)],
                stdin=subprocess.PIPE,
                stdout=subprocess.PIPE,
                stderr=subprocess.DEVNULL,
                text=True,
            )
        self.process.stdin.write(json.dumps(request) + "\n")
        self.process.stdin.flush()
        if not select.select([self.process.stdout], [], [], patience)[0]:
            self.close()
            return {"hang": True}
        line = self.process.stdout.readline()
        if not line:
            code = self.process.wait()
            self.close()
            return {"crash": code}
        return json.loads(line)

    def close(self) -> None:
        if self.process is not None:
            self.process.kill()
            self.process.communicate()
            self.process = None


def verdict(answer: dict, good: dict) -> str:
    """refused, same, flagged; or what is wrong: crash, hang, traceback, wrong."""
    for bad in ("crash", "hang", "traceback"):
        if bad in answer:
            return f"{bad}: {answer[bad]}"
    if "refused" in answer:
        return "refused" if answer["refused"].strip() else "an empty message"
    if "same" in answer:
        return "same"
    if len(answer["fronts"]) == len(good["fronts"]):
        off = max(
            (_deviation(a, g) for a, g in zip(answer["fronts"], good["fronts"], strict=True)),
            default=np.inf,
        )
        if off <= TOLERANCE:
            return "same"
    else:
        off = np.inf
    if _words(answer) - _words(good):
        return "flagged"
    return f"wrong: K off by {100 * off:.3g} % without a word"


def _deviation(found: dict, good: dict) -> float:
    """Largest difference of K in parts of the largest, ends (where there is none) left out."""
    a, b = np.array(found["K"]), np.array(good["K"])
    x, y = np.array(found["positions"]), np.array(good["positions"])
    size = np.ptp(y, axis=0).max()
    if a.shape != b.shape or not np.isfinite(a).all() or np.abs(x - y).max() > 0.05 * size:
        return np.inf
    inside = slice(1, -1) if len(b) > 2 else slice(None)
    return float(np.abs(a - b)[inside].max() / np.abs(b[inside]).max())


def _words(answer: dict) -> set:
    """Everything that is said of a result, numbers apart."""
    said = [("of all", w) for w in answer["warnings"]]
    for k, front in enumerate(answer["fronts"]):
        said += [(k, w) for w in front["warnings"]]
        said += [
            (k, i, part)
            for i, flag in enumerate(front["flags"])
            for part in flag.split("; ")
            if flag
        ]
    return set(said)


def damage_bytes(data: bytes, kind: str, place: float, size: int, seed: int) -> bytes:
    """One damage to a file, at a place given in parts of its length."""
    rng = np.random.default_rng(seed)
    i = min(int(place * len(data)), len(data) - 1)
    whole = bytearray(data)
    if kind == "flip":
        whole[i] ^= 1 << (seed % 8)
    elif kind == "noise":
        whole[i : i + size] = rng.bytes(size)
    elif kind == "zero":
        whole[i : i + size] = bytes(len(whole[i : i + size]))
    elif kind == "cut":
        del whole[i:]
    elif kind == "insert":
        whole[i:i] = rng.bytes(size)
    elif kind == "delete":
        del whole[i : i + size]
    elif kind == "repeat":
        whole[i:i] = whole[i : i + size]
    elif kind == "digit":
        digits = [j for j in range(i, min(i + 2000, len(whole))) if 48 <= whole[j] <= 57]
        if digits:
            new = [b"9", b"0", b"7", b"99999999", b"-1", b"nan", b"", b"1e300", b"."][seed % 9]
            whole[digits[0] : digits[0] + 1] = new
    return bytes(whole)


KINDS = ("flip", "noise", "zero", "cut", "insert", "delete", "repeat", "digit")
