"""scipy's breadth-first search and Dijkstra on a file of links, one thread, nine random sources each: least and median milliseconds.

Invariant: the same network as `bench distances`; node weights enter as weights of the arcs into a node, as scipy knows no other.
"""
import sys
import time

import numpy
import scipy
import scipy.sparse
import scipy.sparse.csgraph


def row(kind, name, work, sources):
    work(int(sources[0]))
    times = []
    for source in sources:
        begin = time.perf_counter()
        work(int(source))
        times.append(1e3 * (time.perf_counter() - begin))
    print(f"| {sys.argv[1]} | {kind} | {name} | {min(times):.1f} | {numpy.median(times):.1f} |", flush=True)


pairs = numpy.fromfile(sys.argv[1], dtype=numpy.int64, sep=" ").reshape(-1, 2)
n = int(pairs.max()) + 1
graph = scipy.sparse.coo_matrix((numpy.ones(2 * len(pairs)), (pairs.ravel(), pairs[:, ::-1].ravel())), shape=(n, n)).tocsr()
random = numpy.random.default_rng(1)
sources = random.integers(n, size=9)
print(f"scipy {scipy.__version__}, {n} nodes, {graph.nnz // 2} links")
row("hops", "breadth_first_order", lambda s: scipy.sparse.csgraph.breadth_first_order(graph, s), sources)
for kind, weights in (("1 to 100", random.integers(1, 101, n).astype(float)), ("real", random.random(n))):
    graph.data = weights[graph.indices]
    row(kind, "dijkstra", lambda s: scipy.sparse.csgraph.dijkstra(graph, indices=s), sources[:5])
