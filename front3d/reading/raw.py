"""What a reader hands over: points and cells as the file has them, not yet checked."""

from collections import Counter
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.arrays import BoolArray, IntArray
from front3d.elements import ELEMENTS
from front3d.errors import ReadError


@dataclass(frozen=True, slots=True, eq=False)
class RawBlock:
    """Cells of one type, (cells, nodes), with their numbers in the file, counted from 0."""

    kind: str
    nodes: IntArray
    numbers: IntArray


@dataclass(slots=True, eq=False)
class RawModel:
    """Points, (n, 2 or 3) in the file's own precision, cells, and how many were passed over.

    Attributes
    ----------
    ignored : surface, line and point cells by name
    refused : solid cells of types that front3d does not have, by name
    single_if_exact : coordinates come in double precision whatever the file has, so take them for
        single precision where each of them is a single-precision number
    groups : numbers of the named groups of cells
    pieces : (n,) the piece each point comes from; None if the model is one piece
    global_ids : (n,) node numbers that hold across pieces, if the file has them
    node_numbers : (n,) the numbers of the nodes in the file, if it has any
    """

    points: NDArray[Any]
    blocks: list[RawBlock]
    ignored: Counter[str] = field(default_factory=Counter)
    refused: Counter[str] = field(default_factory=Counter)
    notes: list[str] = field(default_factory=list)
    single_if_exact: bool = False
    groups: dict[str, int] = field(default_factory=dict)
    pieces: IntArray | None = None
    global_ids: IntArray | None = None
    node_numbers: IntArray | None = None

    def check(self) -> None:
        """Raise ReadError unless this is a solid of known elements."""
        if self.refused:
            raise ReadError(
                f"found {_listing(self.refused)}, expected {', '.join(ELEMENTS)}; write the "
                "result with linear or quadratic cells of these types"
            )
        if self.points.ndim != 2 or self.points.shape[1] != 3:
            raise ReadError(
                f"found points of shape {self.points.shape}, expected three coordinates each: "
                "a two-dimensional model has no crack front; extrude it or model a solid"
            )
        self.blocks = [block for block in self.blocks if len(block.nodes)]
        if not self.blocks:
            found = _listing(self.ignored) if self.ignored else "no cells at all"
            raise ReadError(
                f"found {found}, expected solid cells ({', '.join(ELEMENTS)}): two-dimensional "
                "and shell models have no crack front; export the solid cells too"
            )
        self.check_nodes()

    def check_nodes(self) -> None:
        """Raise ReadError if a cell refers to a point that is not there."""
        for block in self.blocks:
            outside = (block.nodes < 0) | (block.nodes >= len(self.points))
            if outside.any():
                row, place = np.argwhere(outside)[0]
                raise ReadError(
                    f"{block.kind} cell {block.numbers[row]} names node "
                    f"{block.nodes[row, place]}, but the file has {len(self.points)} points "
                    "(numbered from 0); the file is damaged, or lacks mid-side nodes"
                )

    def check_cells(self) -> None:
        """Raise ReadError if two cells have the same corners: inside, their faces look doubled."""
        # Sums of random numbers do not depend on the order of the nodes.
        name = np.random.default_rng(0).integers(0, 2**64, len(self.points), dtype=np.uint64)
        names, owners = [], []
        for k, block in enumerate(self.blocks):
            corners = block.nodes[:, : ELEMENTS[block.kind].n_corners]
            sums = name[corners[:, 0]]
            for column in corners.T[1:]:
                sums = sums + name[column]
            names.append(sums)
            owners.append(np.full(len(sums), k))
        sums, owner = np.concatenate(names), np.concatenate(owners)
        order = np.argsort(sums)
        same = np.flatnonzero(sums[order][1:] == sums[order][:-1])
        if not len(same):
            return
        # The sort need not be stable: name the pair that comes first.
        one, other = min(sorted(order[k : k + 2].tolist()) for k in same)
        kinds = [block.kind for block in self.blocks]
        numbers = np.concatenate([block.numbers for block in self.blocks])
        raise ReadError(
            f"{kinds[owner[one]]} cell {numbers[one]} and {kinds[owner[other]]} cell "
            f"{numbers[other]} have the same corners ({len(same)} such cells; numbers from 0), "
            "expected every cell once; remove the copies, or pieces that overlap"
        )

    def used(self) -> BoolArray:
        """(n,) which points a solid cell refers to."""
        used = np.zeros(len(self.points), dtype=bool)
        for block in self.blocks:
            used[block.nodes.ravel()] = True
        return used

    def ignored_cells(self) -> list[str]:
        return [f"{count} {name} cells ignored" for name, count in sorted(self.ignored.items())]

    def point_spacing(self, used: BoolArray) -> float:
        """Distance of neighbouring coordinates in single precision; 0 for double precision."""
        points = self.points[used]
        single = np.float32
        if self.points.dtype != single and not (
            self.single_if_exact and np.array_equal(points, points.astype(single))
        ):
            return 0.0
        return float(np.spacing(np.abs(points).max().astype(single)))


def _listing(counts: Counter[str]) -> str:
    return ", ".join(f"{count} {name}" for name, count in sorted(counts.items())) + " cells"


def merged(parts: list[RawBlock]) -> list[RawBlock]:
    """One block per element type."""
    by_kind: dict[str, list[RawBlock]] = {}
    for part in parts:
        by_kind.setdefault(part.kind, []).append(part)
    return [
        group[0]
        if len(group) == 1
        else RawBlock(
            kind,
            np.concatenate([part.nodes for part in group]),
            np.concatenate([part.numbers for part in group]),
        )
        for kind, group in by_kind.items()
    ]
