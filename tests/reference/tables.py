"""Tables kept beside the handbook."""

import csv
from pathlib import Path

import numpy as np
from scipy.special import ellipe

import front3d

TABLES = Path(front3d.__file__).parent / "handbook" / "tables"


def surface_crack(load, a_c, a_t):
    """(phi, K_I) of a surface crack of depth 1 under unit stress, the free surface left out.

    load : "tension" or "bending".  From fe3d_surface.csv: computed for this project, not a
    published value.
    """
    with (TABLES / "fe3d_surface.csv").open() as file:
        rows = [
            (float(row["two_phi_over_pi"]) * np.pi / 2, float(row["F"]))
            for row in csv.DictReader(line for line in file if not line.startswith("#"))
            if (row["load"], float(row["a_c"]), float(row["a_t"])) == (load, a_c, a_t)
        ]
    if not rows:
        raise KeyError(f"fe3d_surface.csv has no {load} case a/c = {a_c}, a/t = {a_t}")
    phi, factor = np.array(rows[1:]).T
    ratio = min(a_c, 1 / a_c)
    return phi, factor * np.sqrt(np.pi) / ellipe(1 - ratio**2)
