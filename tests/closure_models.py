"""Running closure alone on a solid."""

import numpy as np

from front3d.crack import find_cracks
from front3d.methods import closure
from front3d.methods.context import FrontContext
from front3d.options import Options
from front3d.solid import Material


def contexts(solid, young=1.0, poisson=0.3, **options):
    """One context per front."""
    chosen = Options(**options)
    model = find_cracks(solid, chosen)
    displacement = np.stack([step.displacement for step in solid.steps])
    return [
        FrontContext(solid, model, patch, front, Material(young, poisson), chosen, displacement)
        for patch, fronts in zip(model.patches, model.fronts, strict=True)
        for front in fronts
    ]


def closed(solid, young=1.0, poisson=0.3, **options):
    """Context, (steps, stations, 3) K and the first step's result of the only front."""
    (context,) = contexts(solid, young, poisson, **options)
    results = closure.evaluate(context)
    return context, np.array([result.K for result in results]), results[0]
