"""Cracks in two dimensions, by general libraries: gmsh meshes, scikit-fem assembles, scipy solves.

Nothing of front3d takes part.  The mesh follows the crack's path beyond its tip, so that one edge
more can be released: G is what that sets free, in plane strain or around an axis.
"""

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Flat:
    """Six-node triangles, split all along a path.

    Attributes
    ----------
    points, triangles : (n, 2) and (m, 6), mid-side nodes of edges 01, 12, 20 last
    path : nodes of one side of the path in order, ends of edges and mid-sides in turn
    copies : the nodes of the other side; the same where the path ends inside
    """

    points: np.ndarray
    triangles: np.ndarray
    path: np.ndarray
    copies: np.ndarray


def flat_mesh(draw, side, along, size) -> Flat:
    """Mesh a surface with a path in it.

    Parameters
    ----------
    draw : function(occ) -> tags of a surface and of a curve in it that starts on its edge
    side : function(points (n, 2)) -> positive on one side of the path
    along : function(points (n, 2)) -> place along the path, growing
    size : (tip, h, core, growth, largest): edges of h within `core` of the point `tip`
    """
    import gmsh

    tip, h, core, growth, largest = size
    gmsh.initialize(interruptible=False)
    try:
        gmsh.option.setNumber("General.Terminal", 0)
        gmsh.option.setNumber("General.NumThreads", 1)
        surface, curve = draw(gmsh.model.occ)
        _, origin = gmsh.model.occ.fragment([(2, surface)], [(1, curve)])
        gmsh.model.occ.synchronize()
        curves = [tag for _, tag in origin[1]]
        field = gmsh.model.mesh.field
        ramp = field.add("MathEval")
        away = f"sqrt((x-({tip[0]}))^2+(y-({tip[1]}))^2)"
        field.setString(ramp, "F", f"min({largest},{h}+{growth}*max(0,{away}-{core}))")
        field.setAsBackgroundMesh(ramp)
        for name in ("MeshSizeFromPoints", "MeshSizeExtendFromBoundary", "MeshSizeFromCurvature"):
            gmsh.option.setNumber(f"Mesh.{name}", 0)
        gmsh.model.mesh.generate(2)
        gmsh.model.mesh.setOrder(2)
        tags, coordinates, _ = gmsh.model.mesh.getNodes()
        row = np.zeros(int(tags.max()) + 1, dtype=int)
        row[tags] = np.arange(len(tags))
        points = coordinates.reshape(-1, 3)[:, :2].copy()
        triangles = row[gmsh.model.mesh.getElementsByType(9)[1]].reshape(-1, 6)
        on_path = np.unique(
            np.concatenate(
                [row[gmsh.model.mesh.getNodes(1, c, includeBoundary=True)[0]] for c in curves]
            )
        )
    finally:
        gmsh.finalize()
    used, triangles = np.unique(triangles, return_inverse=True)  # without centres of arcs
    points, triangles = points[used], triangles.reshape(-1, 6)
    on_path = np.searchsorted(used, np.intersect1d(on_path, used))
    path = on_path[np.argsort(along(points[on_path]))]
    copies = np.append(len(points) + np.arange(len(path) - 1), path[-1])
    twin = np.arange(len(points))
    twin[path] = copies
    above = side(points[triangles[:, :3]].mean(axis=1)) > 0
    triangles = np.where(above[:, None], twin[triangles], triangles)
    return Flat(np.vstack([points, points[path[:-1]]]), triangles, path, copies)


def solve_flat(flat: Flat, poisson, tip, traction, held, axis=False, young=1.0):
    """Displacements, (n, 2), and energy when the crack ends at the path's node number `tip`.

    Parameters
    ----------
    traction : (normals (2, ...), positions (2, ...)) -> (2, ...) on the whole boundary
    held : (nodes, component) pairs that stay
    axis : around the axis x = 0, not in plane strain
    """
    import scipy.sparse as sp
    import skfem
    from scipy.sparse.linalg import spsolve
    from skfem.helpers import ddot, sym_grad, trace

    mesh = skfem.MeshTri2(flat.points.T, flat.triangles.T)
    element = skfem.ElementVector(skfem.ElementTriP2())
    basis = skfem.Basis(mesh, element, intorder=4)
    boundary = skfem.FacetBasis(mesh, element, intorder=4)
    mu = young / (2 * (1 + poisson))
    lam = young * poisson / ((1 + poisson) * (1 - 2 * poisson))

    @skfem.BilinearForm
    def elasticity(u, v, w):
        hoop_u, hoop_v, around = 0.0, 0.0, 1.0
        if axis:
            around = 2 * np.pi * w.x[0]
            hoop_u, hoop_v = u[0] / w.x[0], v[0] / w.x[0]
        e, d = sym_grad(u), sym_grad(v)
        stress = lam * (trace(e) + hoop_u) * (trace(d) + hoop_v)
        return around * (stress + 2 * mu * (ddot(e, d) + hoop_u * hoop_v))

    @skfem.LinearForm
    def load(v, w):
        around = 2 * np.pi * w.x[0] if axis else 1.0
        return around * np.sum(traction(w.n, w.x) * v, axis=0)

    n = len(flat.points)
    node = np.repeat(flat.triangles.T, 2, axis=0)
    row = np.zeros(basis.N, dtype=int)
    row[basis.element_dofs] = 2 * node + np.tile(np.arange(2), 6)[:, None]
    order = np.argsort(row)
    matrix, force = elasticity.assemble(basis).tocsr()[order][:, order], load.assemble(boundary)
    # Ahead of the tip both sides move as one.
    to = np.arange(n)
    to[flat.copies[tip:]] = flat.path[tip:]
    unknown = (2 * to[:, None] + np.arange(2)).ravel()
    join = sp.csr_matrix((np.ones(2 * n), (np.arange(2 * n), unknown)), shape=(2 * n, 2 * n))
    free = np.bincount(unknown, minlength=2 * n) > 0
    for nodes, component in held:
        free[2 * np.asarray(nodes) + component] = False
    joined, right = (join.T @ matrix @ join).tocsc(), join.T @ force[order]
    moved = np.zeros(2 * n)
    moved[free] = spsolve(joined[free][:, free], right[free])
    return (join @ moved).reshape(-1, 2), 0.5 * float(right @ moved)


def release_rate(flat: Flat, tip, area, **about):
    """G when the crack ends at node `tip` of the path: energy set free from an edge before to an
    edge behind, over the area that this makes; `area` is that of the crack up to given nodes.
    """
    ends = tip - 2, tip + 2
    energy = [solve_flat(flat, tip=end, **about)[1] for end in ends]
    first, last = (area(flat.points[flat.path[end]]) for end in ends)
    return (energy[1] - energy[0]) / (last - first)
