"""The element library: one record per element type, found by name or by VTK number."""

from front3d.elements.element import ElementType, FaceType
from front3d.elements.faces import FACES
from front3d.elements.hexa import HEXAHEDRON8, HEXAHEDRON20, HEXAHEDRON27
from front3d.elements.pyramid import PYRAMID5, PYRAMID13
from front3d.elements.tetra import TETRA4, TETRA10
from front3d.elements.wedge import WEDGE6, WEDGE15
from front3d.errors import MeshError

ELEMENTS: dict[str, ElementType] = {
    element.name: element
    for element in (
        TETRA4,
        TETRA10,
        HEXAHEDRON8,
        HEXAHEDRON20,
        HEXAHEDRON27,
        WEDGE6,
        WEDGE15,
        PYRAMID5,
        PYRAMID13,
    )
}

BY_VTK_TYPE: dict[int, ElementType] = {e.vtk_type: e for e in ELEMENTS.values()}


def element_type(name: str) -> ElementType:
    """The element type called `name`; MeshError if there is none."""
    try:
        return ELEMENTS[name]
    except KeyError:
        raise MeshError(
            f"element type: found {name!r}, expected one of {', '.join(ELEMENTS)}"
        ) from None


__all__ = ["BY_VTK_TYPE", "ELEMENTS", "FACES", "ElementType", "FaceType", "element_type"]
