"""Linear elasticity on tetra10 meshes by general libraries: scikit-fem assembles, pyamg solves.

Nothing of front3d takes part, so what is solved here can stand against it.  The body is loaded
by surface tractions in equilibrium; where no plane is held, the stiffness is singular and the
conjugate gradients stay orthogonal to the rigid motions.
"""

import numpy as np


def solve_tetra10(
    points, cells, poisson, tractions, held=(), tolerance=1e-10, young=1.0, forces=None
):
    """Displacements, one (n, 3) array per load.

    Parameters
    ----------
    points, cells : (n, 3) and (m, 10) in VTK order
    tractions : one function per load, (normals (3, ...), positions (3, ...)) -> traction (3, ...)
        on the whole outer boundary (crack faces included: return zero there)
    held : (node numbers, component) pairs whose displacement is zero
    forces : one function per load, positions (3, ...) -> force per volume (3, ...); or None
    """
    import skfem
    from skfem.helpers import ddot, sym_grad, trace

    mesh = skfem.MeshTet2(points.T, cells.T)
    element = skfem.ElementVector(skfem.ElementTetP2())
    basis = skfem.Basis(mesh, element, intorder=3)
    mu = young / (2 * (1 + poisson))
    lam = young * poisson / ((1 + poisson) * (1 - 2 * poisson))

    @skfem.BilinearForm
    def elasticity(u, v, _):
        eps, delta = sym_grad(u), sym_grad(v)
        return lam * trace(eps) * trace(delta) + 2 * mu * ddot(eps, delta)

    # scikit-fem numbers by its own rule: node and component of each of its unknowns.
    node = np.repeat(cells.T, 3, axis=0)
    component = np.tile(np.arange(3), 10)[:, None] + np.zeros_like(node)
    row = np.zeros(basis.N, dtype=np.int64)
    row[basis.element_dofs] = 3 * node + component
    if len(np.unique(row)) != basis.N or 3 * len(points) != basis.N:
        raise RuntimeError("the solver's unknowns do not match the nodes one to one")
    np.testing.assert_allclose(basis.doflocs.T, points[row // 3], atol=1e-12)
    order = np.argsort(row)
    stiffness = elasticity.assemble(basis).tocsr()[order][:, order]
    boundary = skfem.FacetBasis(mesh, element, intorder=4)
    loads = []
    for traction in tractions:
        form = skfem.LinearForm(lambda v, w, t=traction: np.sum(t(w.n, w.x) * v, axis=0))
        loads.append(form.assemble(boundary)[order])
    for load, force in zip(loads, forces or (), strict=False):
        form = skfem.LinearForm(lambda v, w, f=force: np.sum(f(w.x) * v, axis=0))
        load += form.assemble(basis)[order]
    fixed = np.concatenate([3 * np.asarray(n) + c for n, c in held] or [np.zeros(0, int)])
    return _conjugate_gradients(stiffness, loads, points, fixed.astype(int), tolerance)


def _conjugate_gradients(stiffness, loads, points, fixed, tolerance):
    import pyamg
    import scipy.sparse as sp

    modes = rigid_motions(points)
    if len(fixed):
        keep = np.ones(len(modes))
        keep[fixed] = 0.0
        mask = sp.diags(keep)
        scale = stiffness.diagonal().mean()
        stiffness = mask @ stiffness @ mask + scale * sp.diags(1.0 - keep)
        loads = [keep * f for f in loads]
        modes = keep[:, None] * modes
    else:
        basis, _ = np.linalg.qr(modes)
        for f in loads:
            resultant = np.abs(basis.T @ f).max() / np.linalg.norm(f)
            if resultant > 1e-8:
                raise RuntimeError(f"loads are not in equilibrium: {resultant:.1e}")
        loads = [f - basis @ (basis.T @ f) for f in loads]
    hierarchy = pyamg.smoothed_aggregation_solver(
        stiffness.tobsr(blocksize=(3, 3)),
        B=modes,
        strength=("symmetric", {"theta": 0.0}),
        smooth=("jacobi", {"omega": 4.0 / 3.0}),
        presmoother=("block_gauss_seidel", {"sweep": "symmetric"}),
        postsmoother=("block_gauss_seidel", {"sweep": "symmetric"}),
        max_coarse=500,
    )
    found = []
    for f in loads:
        u = hierarchy.solve(f, tol=tolerance, maxiter=400, accel="cg")
        residual = np.linalg.norm(f - stiffness @ u) / np.linalg.norm(f)
        if residual > 10 * tolerance:
            raise RuntimeError(f"no convergence: relative residual {residual:.1e}")
        if not len(fixed):
            u = u - basis @ (basis.T @ u)
        found.append(u.reshape(-1, 3))
    return found


def rigid_motions(points):
    """(3 n, 6): translations and rotations about the centroid."""
    x, y, z = (points - points.mean(axis=0)).T
    out = np.zeros((len(points), 3, 6))
    out[:, [0, 1, 2], [0, 1, 2]] = 1.0
    out[:, 0, 3], out[:, 1, 3] = -y, x
    out[:, 1, 4], out[:, 2, 4] = -z, y
    out[:, 2, 5], out[:, 0, 5] = -x, z
    return out.reshape(-1, 6)
