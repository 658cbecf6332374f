"""The record of a verification: a table to read, Markdown and JSON for a quality file."""

import json
import platform
from collections.abc import Sequence
from datetime import UTC, datetime
from math import isfinite
from typing import Any

from front3d.output.summary import plain, versions
from front3d.results import CAUTION
from front3d.verification.case import Row

HEADINGS = (
    *("case", "source", "cells", "load", "method", "stations"),
    *("worst %", "where", "mean %", "allowed %", "verdict"),
)

_ABOUT = (
    "Deviations in per cent of the largest K of the known answer (of the front's own where the "
    "answer is a law), away from free surfaces. A published equation has errors of its own, which "
    "its source states. Mean: mean magnitude over the stations."
)


def cells_of(row: Row) -> list[str]:
    """The texts of one row under HEADINGS."""
    if row.measured is None:
        found = ["", "", "", "", row.failure, ""]
    else:
        m = row.measured
        found = [m.load, m.method, str(m.stations), f"{m.worst:+.2f}", m.where, f"{m.mean:.2f}"]
    allowed = f"{row.allowed:g}" if isfinite(row.allowed) else ""
    return [row.case, row.source, row.cells, *found, allowed, row.verdict]


def verdict(rows: Sequence[Row]) -> str:
    """One sentence on all rows."""
    cases = {row.case for row in rows}
    out = {row.case for row in rows if not row.within}
    if not out:
        which = f"all {len(cases)} cases are" if len(cases) > 1 else "the one case is"
        counted = f"{len(rows)} comparison{'s' if len(rows) > 1 else ''}"
        return f"{which} within what is allowed ({counted})"
    if len(cases) == 1:
        return f"the one case is out: {out.pop()}"
    verb = "is" if len(out) == 1 else "are"
    return f"{len(out)} of {len(cases)} cases {verb} out: {'; '.join(sorted(out))}"


def markdown(rows: Sequence[Row], when: datetime) -> bytes:
    """The record as a Markdown page."""
    used = ", ".join(f"{name} {number}" for name, number in versions().items())
    lines = [
        "# Verification of front3d",
        "",
        f"{when:%Y-%m-%d %H:%M} UTC, {_machine()}; {used}.",
        "",
        f"**{verdict(rows)[:1].upper()}{verdict(rows)[1:]}.** {_ABOUT}",
        "",
        _line(HEADINGS),
        _line(["---"] * len(HEADINGS)),
        *(_line(cells_of(row)) for row in rows),
        "",
        CAUTION,
        "",
    ]
    return "\n".join(lines).encode()


def as_json(rows: Sequence[Row], when: datetime) -> bytes:
    """The record as plain data."""
    content = {
        "caution": CAUTION,
        "date": when.isoformat(timespec="seconds"),
        "platform": _machine(),
        "versions": versions(),
        "verdict": verdict(rows),
        "within": all(row.within for row in rows),
        "about": _ABOUT,
        "rows": [_plain_row(row) for row in rows],
    }
    return (json.dumps(plain(content), indent=2, ensure_ascii=False) + "\n").encode()


def now() -> datetime:
    return datetime.now(UTC)


def _plain_row(row: Row) -> dict[str, Any]:
    m = row.measured
    return {
        "case": row.case,
        "source": row.source,
        "cells": row.cells,
        "load": m.load if m else None,
        "method": m.method if m else None,
        "stations": m.stations if m else None,
        "worst_percent": m.worst if m else None,
        "where": m.where if m else None,
        "mean_percent": m.mean if m else None,
        "allowed_percent": row.allowed,
        "verdict": row.verdict,
        "failure": row.failure,
        "seconds_of_case": round(row.seconds, 1),
    }


def _line(texts: Sequence[str]) -> str:
    return "| " + " | ".join(text.replace("|", "\\|") for text in texts) + " |"


def _machine() -> str:
    return f"{platform.system()} {platform.machine()}, Python {platform.python_version()}"
