"""One run of a peer on one model: spectrum_peer.py METHOD K SECOND geometric|mass MANY END THREADS; prints JSON."""

import glob
import json
import sys
import time

import scipy.sparse
import scipy.sparse.linalg


def read(path):
    """Both triangles."""
    return scipy.sparse.csc_matrix(scipy.sparse.load_npz(path))


def arpack(stiffness, second, pencil, many, _end):
    """Shift and invert at 0 with SuperLU in its symmetric mode, minimum degree on A^T + A."""
    factor = scipy.sparse.linalg.splu(stiffness, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options={"SymmetricMode": True})
    inverse = scipy.sparse.linalg.LinearOperator(stiffness.shape, factor.solve)
    if pencil == "geometric":  # -G x = theta K x, the largest theta
        thetas = scipy.sparse.linalg.eigsh(-second, k=many, M=stiffness, Minv=inverse, which="LA", return_eigenvectors=False)
        return [1 / theta for theta in thetas]
    return list(scipy.sparse.linalg.eigsh(stiffness, k=many, M=second, sigma=0, OPinv=inverse, return_eigenvectors=False))


def slepc(stiffness, second, pencil, _many, end):
    """All values of the interval by spectrum slicing, inertias from MUMPS."""
    sys.path += [folder for kind in ("petsc", "slepc") for folder in sorted(glob.glob(
        f"/usr/lib/{kind}dir/*/x86_64-linux-gnu-real/lib/python3/dist-packages"))]
    import slepc4py
    slepc4py.init(["peer", "-st_pc_factor_mat_solver_type", "mumps", "-mat_mumps_icntl_13", "1"])
    from petsc4py import PETSc
    from slepc4py import SLEPc

    def matrix(source):
        rows = source.tocsr()
        made = PETSc.Mat().createAIJ(size=rows.shape, csr=(rows.indptr, rows.indices, rows.data))
        made.setOption(PETSc.Mat.Option.SYMMETRIC, True)
        return made

    solver = SLEPc.EPS().create()
    first, base = (matrix(-second), matrix(stiffness)) if pencil == "geometric" else (matrix(stiffness), matrix(second))
    solver.setOperators(first, base)
    solver.setProblemType(SLEPc.EPS.ProblemType.GHEP)
    solver.setWhichEigenpairs(SLEPc.EPS.Which.ALL)
    if pencil == "geometric":
        solver.setInterval(1 / end, 1e3 / end)
    else:
        solver.setInterval(0.0, end)
    transform = solver.getST()
    transform.setType(SLEPc.ST.Type.SINVERT)
    krylov = transform.getKSP()
    krylov.setType(PETSc.KSP.Type.PREONLY)
    krylov.getPC().setType(PETSc.PC.Type.CHOLESKY)
    krylov.getPC().setFactorSolverType("mumps")
    solver.setFromOptions()
    solver.solve()
    values = [solver.getEigenvalue(k).real for k in range(solver.getConverged())]
    return [1 / value for value in values] if pencil == "geometric" else values


def main():
    method, first, second, pencil, many, end, _threads = sys.argv[1:]
    stiffness, other = read(first), read(second)
    if other.shape[1] == 1:
        other = scipy.sparse.diags(other.toarray().ravel()).tocsc()
    begin = time.perf_counter()
    values = {"arpack": arpack, "slepc": slepc}[method](stiffness, other, pencil, int(many), float(end))
    print(json.dumps({"seconds": time.perf_counter() - begin, "values": [float(value) for value in values]}))


if __name__ == "__main__":
    main()
