"""Second-order tetrahedral meshes with a plane crack, by gmsh, split along the crack.

gmsh gives a mesh that conforms to the crack surface but passes through it.  `cracked_mesh`
doubles the nodes of that surface that do not lie on the front, and gives the copies to the
cells above it (the crack lies in the plane z = 0).
"""

from dataclasses import dataclass

import numpy as np

# gmsh lists the last two mid-side nodes of a 10-node tetrahedron the other way round than VTK.
GMSH_TO_VTK = [0, 1, 2, 3, 4, 5, 6, 7, 9, 8]


@dataclass(frozen=True)
class CrackedMesh:
    """A tetra10 mesh, split along its crack.

    Attributes
    ----------
    points : (n, 3)
    cells : (m, 10) in VTK order
    front : node numbers on the front
    upper, lower : matching nodes of the two faces of the crack
    """

    points: np.ndarray
    cells: np.ndarray
    front: np.ndarray
    upper: np.ndarray
    lower: np.ndarray


def cracked_mesh(body, crack, size, front_lines=None, front_cells=None):
    """Mesh a body with a crack surface in it.

    Parameters
    ----------
    body : function(occ) -> tag of the volume
    crack : function(occ) -> tag of the surface, in the plane z = 0; it may stick out of the body
    size : (h, core, growth, largest): cells of size h within `core` of the front, growing
        outside with the distance by `growth`, up to `largest`
    front_lines : function(middle point of a boundary curve of the crack) -> whether it is
        front; default: every boundary curve
    front_cells : number of cells along each curve of the front; by default as long as wide
    """
    import gmsh

    gmsh.initialize(interruptible=False)
    try:
        gmsh.option.setNumber("General.Terminal", 0)
        gmsh.option.setNumber("General.NumThreads", 1)
        occ = gmsh.model.occ
        volume = (3, body(occ))
        surfaces, _ = occ.intersect([(2, crack(occ))], [volume], removeTool=False)
        _, origin = occ.fragment([volume], surfaces)
        faces = [tag for found in origin[1:] for _, tag in found]
        occ.synchronize()
        curves = gmsh.model.getBoundary([(2, t) for t in faces], oriented=False)
        front = [c for _, c in curves if front_lines is None or front_lines(_middle(gmsh.model, c))]
        if front_cells:
            for curve in front:
                gmsh.model.mesh.setTransfiniteCurve(curve, front_cells + 1)
        _set_sizes(gmsh.model.mesh.field, front, size)
        for name in ("MeshSizeFromPoints", "MeshSizeExtendFromBoundary", "MeshSizeFromCurvature"):
            gmsh.option.setNumber(f"Mesh.{name}", 0)
        gmsh.option.setNumber("Mesh.Algorithm3D", 1)
        gmsh.option.setNumber("Mesh.OptimizeNetgen", 0)
        gmsh.model.mesh.generate(3)
        gmsh.model.mesh.setOrder(2)
        tags, coordinates, _ = gmsh.model.mesh.getNodes()
        points = coordinates.reshape(-1, 3)
        row = np.zeros(int(tags.max()) + 1, dtype=np.int64)
        row[tags] = np.arange(len(tags))
        _, cell_nodes = gmsh.model.mesh.getElementsByType(11)
        cells = row[cell_nodes].reshape(-1, 10)[:, GMSH_TO_VTK]
        on_faces = _nodes_of(gmsh.model.mesh, 2, faces, row)
        on_front = _nodes_of(gmsh.model.mesh, 1, front, row)
    finally:
        gmsh.finalize()
    return _split(points, cells, on_faces, on_front)


def _middle(model, curve):
    low, high = model.getParametrizationBounds(1, curve)
    return model.getValue(1, curve, [(low[0] + high[0]) / 2])


def _nodes_of(mesh, dim, tags, row):
    found = [mesh.getNodes(dim, t, includeBoundary=True)[0] for t in tags]
    return np.unique(row[np.concatenate(found)])


def _set_sizes(field, front, size):
    h, core, growth, largest = size
    distance = field.add("Distance")
    field.setNumbers(distance, "CurvesList", front)
    field.setNumber(distance, "Sampling", 400)
    ramp = field.add("MathEval")
    field.setString(ramp, "F", f"min({largest}, {h} + {growth} * max(0, F{distance} - {core}))")
    field.setAsBackgroundMesh(ramp)


def _split(points, cells, on_faces, on_front):
    """Double the nodes of the crack surface that are not on the front."""
    used = np.unique(cells)
    renumber = np.full(len(points), -1)
    renumber[used] = np.arange(len(used))
    points, cells = points[used], renumber[cells]
    on_faces, on_front = renumber[on_faces], renumber[on_front]
    lower = np.setdiff1d(on_faces, on_front)
    upper = len(points) + np.arange(len(lower))
    copy = np.arange(len(points))
    copy[lower] = upper
    above = points[cells[:, :4], 2].mean(axis=1) > 0
    cells = np.where(above[:, None], copy[cells], cells)
    points = np.vstack([points, points[lower]])
    _require_open_chords(cells, on_front, np.concatenate([lower, upper]))
    return CrackedMesh(points, cells, on_front, upper, lower)


def _require_open_chords(cells, on_front, doubled):
    """No cell edge may join two front nodes through the crack: its two copies would be one edge
    to a solver that numbers edges by their ends.
    """
    edges = np.array([(0, 1), (1, 2), (2, 0), (0, 3), (1, 3), (2, 3)])
    ends = np.isin(cells[:, edges], on_front).all(axis=2)
    if (ends & np.isin(cells[:, 4:], doubled)).any():
        raise RuntimeError("a cell edge joins two front nodes through the crack: change the sizes")
