"""What a reader must know of material and loads: the inputs of an evaluation in words."""

from collections.abc import Mapping, Sequence
from typing import Any

from front3d.loads import acting
from front3d.solid import Constants, Material
from front3d.units import Units

Pair = tuple[str, str]

ONLY_DISPLACEMENTS = (
    "none stated: K follows from the displacements of the result file, and crack faces, volume and "
    "the surface at the ends of the front are taken to be free of load"
)


def material_words(options: Mapping[str, Any], material: Material, units: Units) -> list[Pair]:
    """The elastic constants: one material, a table by temperature, or several regions."""
    loads, stress = _loads(options), units.stress
    if loads.get("elastic_table"):
        rows = [
            f"at temperature {t:g}: {_elastic(E, nu, stress)}"
            for t, E, nu in loads["elastic_table"]
        ]
        return [("material", "isotropic, by temperature; " + "; ".join(rows))]
    if not loads.get("regions"):
        return [("material", f"isotropic, {_elastic(material.young, material.poisson, stress)}")]
    words = []
    for region in loads["regions"]:
        more = ""
        if region.get("expansion") is not None:
            more += f", {_expansion(region['expansion'])}"
        if region.get("density") is not None:
            more += f", density {region['density']:g}"
        elastic = _elastic(region["young"], region["poisson"], stress)
        name = region["region"]
        name = name if isinstance(name, str) else f"{name:g}"
        words.append(f"region {name}: {elastic}{more}")
    array = loads.get("region_array")
    return [
        ("material", f"isotropic, by region ({array or 'physical groups'}); " + "; ".join(words))
    ]


def load_words(options: Mapping[str, Any], units: Units) -> list[Pair]:
    """Every load that was stated beside the displacements, in the order of the case file."""
    loads, stress = _loads(options), units.stress
    found: list[Pair] = []
    some_steps = dict(acting(text) for text in loads.get("acts_in") or ())
    for key, name in (
        ("face_pressure", "pressure on the crack faces"),
        ("surface_pressure", "pressure on the surface at the ends of the front"),
    ):
        if options.get(key):
            every = "" if key in some_steps else ", in every step"
            found.append((name, f"{_of(options[key], stress)}{every}"))
    if loads.get("face_polynomial"):
        terms = [
            f"{c:g}" + ("" if k == 0 else " d" if k == 1 else f" d^{k}")
            for k, c in enumerate(loads["face_polynomial"])
        ]
        where = f"d the distance from ({_vector(loads['depth_from'])})"
        if loads.get("depth_direction"):
            where += f" along ({_vector(loads['depth_direction'])})"
        unit = f" {stress}".rstrip()
        polynomial = " + ".join(terms).replace("+ -", "- ")
        found.append(("pressure on the crack faces by depth", f"{polynomial}{unit}, {where}"))
    if loads.get("face_array"):
        found.append(("load on the crack faces", f"array {loads['face_array']} of the result file"))
    density = loads.get("density")
    if loads.get("gravity"):
        found.append(("gravity", f"acceleration ({_vector(loads['gravity'])})"))
    if loads.get("rotation"):
        words = f"{loads['rotation']:g} radians per unit of time"
        if loads.get("rotation_axis"):
            words += f" about ({_vector(loads['rotation_axis'])})"
        found.append(("rotation", f"{words} through ({_vector(loads['rotation_point'])})"))
    if density is not None:
        found.append(("density", f"{density:g}, in the units of the model"))
    if loads.get("temperature"):
        words = f"array {loads['temperature']} of the result file"
        words += f", no thermal strain at {loads['reference_temperature']:g}"
        if loads.get("expansion") is not None:
            words += f", {_expansion(loads['expansion'])}"
        found.append(("temperature", words))
    for key in ("initial_stress", "initial_strain"):
        if loads.get(key):
            name = key.replace("_", " ")
            found.append((name, f"array {loads[key]} of the result file"))
    for key, steps in some_steps.items():
        found.append((f"steps of {key.replace('_', ' ')}", f"{', '.join(steps)} only"))
    return found


def own_constants(material: Constants | None, whole: Material) -> bool:
    """Whether the constants along a front are not those reported for the whole solid."""
    if material is None:
        return False
    if not isinstance(material, Material):
        return True
    return (material.young, material.poisson) != (whole.young, whole.poisson)


def _loads(options: Mapping[str, Any]) -> Mapping[str, Any]:
    loads: Mapping[str, Any] = options.get("loads") or {}
    return loads


def _elastic(young: float, poisson: float, stress: str) -> str:
    return f"E = {_of(young, stress)}, Poisson's ratio {poisson:g}"


def _expansion(value: float | Sequence[Sequence[float]]) -> str:
    if isinstance(value, int | float):
        return f"expansion {value:g}"
    rows = ", ".join(f"{a:g} at {t:g}" for t, a in value)
    return f"mean expansion by temperature: {rows}"


def _of(value: float, unit: str) -> str:
    return f"{value:g} {unit}".rstrip()


def _vector(value: Sequence[float]) -> str:
    return ", ".join(f"{v:g}" for v in value)
