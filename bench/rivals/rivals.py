"""The rivals' side of bench/rivals/run: one solver, one Laplacian, one right-hand side of the kind that probes have (b = B'q, random signs q).

Invariant: what is printed is measured: set-up apart from the solve, and the residual recomputed as |b - L x| / |b|.
"""
import sys
import time

import numpy
import scipy
import scipy.sparse
import scipy.sparse.csgraph
import scipy.sparse.linalg


def prepare(links, system):
    pairs = numpy.fromfile(links, dtype=numpy.int64, sep=" ").reshape(-1, 2)
    n = int(pairs.max()) + 1
    adjacency = scipy.sparse.coo_matrix((numpy.ones(len(pairs)), (pairs[:, 0], pairs[:, 1])), shape=(n, n)).tocsr()
    adjacency = adjacency + adjacency.T  # parallel links add up
    _, label = scipy.sparse.csgraph.connected_components(adjacency, directed=False)
    largest = numpy.flatnonzero(label == numpy.bincount(label).argmax())
    if len(largest) < n:
        adjacency = adjacency[largest][:, largest]
    laplacian = scipy.sparse.diags(numpy.asarray(adjacency.sum(axis=1)).ravel()) - adjacency
    scipy.sparse.save_npz(system, laplacian.tocsr(), compressed=False)
    print(f"{system}: {len(largest)} nodes, {adjacency.nnz // 2} links")


def read(system):
    laplacian = scipy.sparse.load_npz(system)
    laplacian.sort_indices()
    upper = scipy.sparse.triu(laplacian, 1).tocoo()
    flow = numpy.random.default_rng(1).choice([-1.0, 1.0], upper.nnz) * numpy.sqrt(-upper.data)
    n = laplacian.shape[0]
    return laplacian, numpy.bincount(upper.row, flow, n) - numpy.bincount(upper.col, flow, n)


def report(name, set_up, times, iterations, laplacian, b, x):
    residual = numpy.linalg.norm(b - laplacian @ x) / numpy.linalg.norm(b)
    print(f"{name} | {set_up:.2f} | {min(times) * 1e3:.0f} | {iterations} | {residual:.1e}")


def timed(work, most=4):
    """Up to four times, as long as they are short."""
    times = []
    while len(times) < most and sum(times) < 10:
        begin = time.perf_counter()
        answer = work()
        times.append(time.perf_counter() - begin)
    return times, answer


def jacobi(system):
    laplacian, b = read(system)
    begin = time.perf_counter()
    preconditioner = scipy.sparse.diags(1 / laplacian.diagonal()).tocsr()
    set_up = time.perf_counter() - begin
    count = [0]

    def step(_):
        count[0] += 1

    def solve():
        count[0] = 0
        x, failure = scipy.sparse.linalg.cg(laplacian, b, tol=1e-4, M=preconditioner, callback=step)
        if failure:
            raise RuntimeError(f"error: cg gave {failure}")
        return x

    times, x = timed(solve)
    report("scipy CG + Jacobi to 1e-4", set_up, times, count[0], laplacian, b, x)


def projection(system, tolerance, solves=16, limit=None):
    """Plain projection (Spielman & Srivastava 2008): for every probe z = L+ B'q, then the mean of (z_u - z_v)^2 for all links. Relative standard error
    sqrt(2/K): 5,000 probes for 2 %. A solve that comes to the limit of iterations is cut off, and what is extrapolated is a lower bound."""
    laplacian = scipy.sparse.load_npz(system)
    upper = scipy.sparse.triu(laplacian, 1).tocoo()
    u, v, roots, n = upper.row, upper.col, numpy.sqrt(-upper.data), laplacian.shape[0]
    preconditioner = scipy.sparse.diags(1 / laplacian.diagonal()).tocsr()
    random, sums = numpy.random.default_rng(1), numpy.zeros(upper.nnz)
    times, iterations, cut, worst = numpy.zeros((int(solves), 3)), 0, 0, 0.0
    count = [0]

    def step(_):
        count[0] += 1

    for k in range(int(solves)):
        begin = time.perf_counter()
        flow = random.choice([-1.0, 1.0], upper.nnz) * roots
        b = numpy.bincount(u, flow, n) - numpy.bincount(v, flow, n)
        drawn = time.perf_counter()
        count[0] = 0
        z, left = scipy.sparse.linalg.cg(
            laplacian, b, tol=float(tolerance), M=preconditioner, callback=step, maxiter=int(limit) if limit else None)
        solved = time.perf_counter()
        sums += (z[u] - z[v]) ** 2
        times[k] = drawn - begin, solved - drawn, time.perf_counter() - solved
        iterations, cut = iterations + count[0], cut + (left > 0)
        worst = max(worst, numpy.linalg.norm(b - laplacian @ z) / numpy.linalg.norm(b))
    each = times.sum(axis=1)
    print(
        f"{tolerance} | {solves} | {iterations / int(solves):.0f} | {cut} | {worst:.1e} | {times[:, 0].mean():.3f} + {times[:, 1].mean():.3f} "
        f"+ {times[:, 2].mean():.3f} | {each.mean():.3f} ({each.min():.3f} to {each.max():.3f}) | {5000 * each.mean():,.0f}", flush=True)


def petsc():
    import petsc4py

    petsc4py.init(sys.argv[:1])
    from petsc4py import PETSc

    return PETSc


def matrix_of(PETSc, laplacian):
    index = PETSc.IntType
    return PETSc.Mat().createAIJ(
        laplacian.shape, csr=(laplacian.indptr.astype(index), laplacian.indices.astype(index), laplacian.data), comm=PETSc.COMM_SELF)


def boomeramg(system, threshold=None):
    PETSc = petsc()
    laplacian, b = read(system)
    matrix = matrix_of(PETSc, laplacian)
    matrix.setNullSpace(PETSc.NullSpace().create(constant=True, comm=PETSc.COMM_SELF))
    if threshold:
        PETSc.Options()["pc_hypre_boomeramg_strong_threshold"] = threshold
    solver = PETSc.KSP().create(PETSc.COMM_SELF)
    solver.setOperators(matrix)
    solver.setType("cg")
    solver.setNormType(PETSc.KSP.NormType.UNPRECONDITIONED)
    solver.getPC().setType("hypre")
    solver.getPC().setHYPREType("boomeramg")
    solver.setTolerances(rtol=1e-6, max_it=1000)
    solver.setFromOptions()
    begin = time.perf_counter()
    solver.setUp()
    set_up = time.perf_counter() - begin
    right, x = PETSc.Vec().createWithArray(b, comm=PETSc.COMM_SELF), matrix.createVecRight()
    times, _ = timed(lambda: solver.solve(right, x))
    if solver.getConvergedReason() < 0:
        raise RuntimeError(f"error: PETSc gave reason {solver.getConvergedReason()}")
    name = "PETSc CG + hypre BoomerAMG to 1e-6" + (f", strong threshold {threshold}" if threshold else "")
    report(name, set_up, times, solver.getIterationNumber(), laplacian, b, x.getArray())


def cholmod(system):
    """Through PETSc; the last node is grounded."""
    solver, matrix, laplacian, b = cholmod_of(system)
    begin = time.perf_counter()
    solver.setUp()
    set_up = time.perf_counter() - begin
    right, x = matrix.createVecRight(), matrix.createVecRight()
    right.setArray(b[:-1])
    times, _ = timed(lambda: solver.solve(right, x))
    report("CHOLMOD", set_up, times, 1, laplacian, b, numpy.append(x.getArray(), 0.0))


def cholmod_phases(system, columns=16):
    """Numbers by phase: the second factorisation keeps the analysis, the first less the least of those is order and analysis."""
    solver, matrix, laplacian, b = cholmod_of(system)
    begin = time.perf_counter()
    solver.setUp()
    first = time.perf_counter() - begin
    numeric = []
    for scale in (2.0, 0.5):
        matrix.scale(scale)
        solver.setOperators(matrix)
        begin = time.perf_counter()
        solver.setUp()
        numeric.append(time.perf_counter() - begin)
    # One at a time: in Debian 12 a block handed to CHOLMOD through PETSc ends in a double free.
    rights = [numpy.roll(b[:-1], 2 * k) for k in range(columns)]
    right, x = matrix.createVecRight(), matrix.createVecRight()

    def solve():
        for values in rights:
            right.setArray(values)
            solver.solve(right, x)

    times, _ = timed(solve)
    residual = numpy.linalg.norm(rights[-1] - laplacian[:-1, :-1] @ x.getArray()) / numpy.linalg.norm(rights[-1])
    print(f"{first - min(numeric):.2f} | {min(numeric):.2f} | {first:.2f} | {min(times) / columns * 1e3:.1f} | {residual:.1e}")


def cholmod_of(system):
    PETSc = petsc()
    laplacian, b = read(system)
    matrix = matrix_of(PETSc, laplacian[:-1, :-1].tocsr())
    matrix.setOption(PETSc.Mat.Option.SPD, True)
    solver = PETSc.KSP().create(PETSc.COMM_SELF)
    solver.setOperators(matrix)
    solver.setType("preonly")
    solver.getPC().setType("cholesky")
    solver.getPC().setFactorSolverType("cholmod")
    return solver, matrix, laplacian, b


def versions():
    print(f"scipy {scipy.__version__}, PETSc {'.'.join(map(str, petsc().Sys.getVersion()))}")


if __name__ == "__main__":
    {f.__name__: f for f in (prepare, jacobi, projection, boomeramg, cholmod, cholmod_phases, versions)}[sys.argv[1]](*sys.argv[2:])
