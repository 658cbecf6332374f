"""front3d: stress intensity factors along three-dimensional crack fronts.

    solid = front3d.load("result.vtu")
    result = front3d.evaluate(solid, young=200e3, poisson=0.3)
    result.fronts[0].K

Imports are deferred until a function is called, so that `import front3d` costs nothing.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from front3d.crack import CrackModel
    from front3d.pipeline import Progress
    from front3d.results import Evaluation
    from front3d.solid import Solid
    from front3d.units import Units

__version__ = "0.1.0"


def load(
    path: str | Path,
    *more: str | Path,
    displacement: str | Sequence[str] | None = None,
    arrays: Sequence[str] = (),
    displacement_file: str | Path | None = None,
) -> Solid:
    """Read a finite-element result, or several of one mesh as its steps; see `front3d.reading.load`
    and `front3d.reading.several.load_all`.
    """
    from front3d.reading.several import load_all

    return load_all(
        (path, *more),
        displacement=displacement,
        arrays=arrays,
        displacement_file=displacement_file,
    )


def find_fronts(solid: Solid, **options: Any) -> CrackModel:
    """The cracks and fronts of a solid, found without being told where they are.

    Keyword arguments are the fields of `front3d.options.Options`.
    """
    from front3d.crack import find_cracks
    from front3d.options import Options

    return find_cracks(solid, Options.from_words(**options))


def evaluate(
    solid: Solid,
    *,
    young: float | None = None,
    poisson: float | None = None,
    units: Units | None = None,
    progress: Progress | None = None,
    **options: Any,
) -> Evaluation:
    """K_I, K_II, K_III at every station of every front of a solid, in every step.

    Parameters
    ----------
    young, poisson : elastic constants, Young's modulus in the stress unit of the model; left out
        where a table or regions are given
    units : names of the model's units, for reports
    progress : called with a stage and the fraction done
    options : fields of `front3d.options.Options` and `front3d.loads.Loads`, such as
        face_pressure=10.0, temperature="T"; arrays that they name are kept by load(arrays=...)
    """
    from front3d.options import Options
    from front3d.pipeline import evaluate_solid
    from front3d.solid import Material

    chosen = Options.from_words(**options)
    material = None if young is None or poisson is None else Material(young, poisson)
    return evaluate_solid(solid, material, chosen, units, progress)
