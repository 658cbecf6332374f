"""A process that reads damaged files and evaluates them, so that a crash of a library is a finding
and not the end of the tests.  One request per line, one answer per line, both in JSON.

The address space is limited: a file that makes a library ask for much more than it holds fails.
"""

import json
import resource
import sys
import traceback
from functools import cache
from pathlib import Path

LIMIT = 6 << 30


def answer(request):
    from front3d.errors import Front3DError

    try:
        return _evaluated(request)
    except Front3DError as error:
        return {"refused": str(error)}
    except Exception:
        return {"traceback": traceback.format_exc()}


def _evaluated(request):
    import numpy as np

    import front3d
    from front3d.case import read_case
    from front3d.cli.flags import check_case
    from front3d.reading import load
    from front3d.solid import Material

    path, options = Path(request["path"]), {"up": (0.0, 1.0, 0.0)}
    young, poisson = 200e3, 0.3
    if path.suffix == ".toml":
        from front3d.pipeline import evaluate_solid

        case = read_case(path)
        check_case(case)
        material = Material(case.young or 0.0, 0.3 if case.poisson is None else case.poisson)
        solid = load(
            case.result, displacement=case.displacement, displacement_file=case.displacement_file
        )
        result = evaluate_solid(solid, material, case.options, case.units)
    else:
        solid = load(path, displacement_file=request.get("table"))
        if "good" in request and _same(solid, _good(request["good"])):
            return {"same": True}
        result = front3d.evaluate(solid, young=young, poisson=poisson, **options)
    fronts = []
    for front in result.fronts:
        order = np.argsort(front.positions[:, 2], kind="stable")
        fronts.append(
            {
                "positions": front.positions[order].tolist(),
                "K": front.K[order].tolist(),
                "flags": [front.flags[k] for k in order],
                "warnings": list(front.warnings),
                "notes": list(front.notes),
            }
        )
    return {"fronts": fronts, "warnings": list(result.warnings)}


@cache
def _good(path):
    from front3d.reading import load

    return load(path)


def _same(one, other):
    """Whether two solids agree to rounding, so that their K need not be computed again."""
    import numpy as np

    def close(a, b):
        size = np.abs(b).max()
        return a.shape == b.shape and bool((np.abs(a - b) <= 1e-9 * size).all())

    return (
        close(one.points, other.points)
        and [b.kind for b in one.blocks] == [b.kind for b in other.blocks]
        and all(
            np.array_equal(a.nodes, b.nodes) for a, b in zip(one.blocks, other.blocks, strict=True)
        )
        and len(one.steps) == len(other.steps)
        and all(
            close(a.displacement, b.displacement)
            for a, b in zip(one.steps, other.steps, strict=True)
        )
    )


if __name__ == "__main__":
    resource.setrlimit(resource.RLIMIT_AS, (LIMIT, LIMIT))
    for line in sys.stdin:
        print(json.dumps(answer(json.loads(line))), flush=True)
