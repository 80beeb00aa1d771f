"""Picked calls of networkx, sortedcontainers, mpmath and sympy."""

# mypy: ignore-errors

from __future__ import annotations

import random
from typing import Any

from programs.picked import PORTS, needs


def _grid() -> Any:
    import networkx

    graph = networkx.grid_2d_graph(4, 4)
    for at, (a, b) in enumerate(graph.edges):
        graph[a][b]["weight"] = 1 + at * 7 % 5
    return graph


@needs("networkx")
def networkx_dijkstra() -> Any:
    import networkx

    return networkx.single_source_dijkstra_path_length(_grid(), (0, 0))


@needs("networkx")
def networkx_floyd_warshall() -> Any:
    import networkx

    found = networkx.floyd_warshall(networkx.path_graph(7))
    return {k: dict(v) for k, v in found.items()}


@needs("networkx")
def networkx_spanning_tree() -> Any:
    import networkx

    return sorted(networkx.minimum_spanning_edges(_grid(), data=False))


@needs("networkx")
def networkx_flow() -> Any:
    import networkx

    graph = networkx.DiGraph()
    for a, b, room in ((0, 1, 4), (0, 2, 2), (1, 2, 3), (1, 3, 1), (2, 3, 6)):
        graph.add_edge(a, b, capacity=room)
    return networkx.maximum_flow(graph, 0, 3)


@needs("networkx")
def networkx_components() -> Any:
    import networkx

    graph = networkx.gnp_random_graph(20, 0.08, seed=3, directed=True)
    return [sorted(c) for c in networkx.strongly_connected_components(graph)], list(
        networkx.dfs_postorder_nodes(graph, 0)
    )


@needs("networkx")
def networkx_cycle_refused() -> Any:
    import networkx

    try:
        return list(networkx.topological_sort(networkx.DiGraph([(1, 2), (2, 1)])))
    except networkx.NetworkXUnfeasible as fault:
        return str(fault)


@needs("sortedcontainers")
def sorted_list() -> Any:
    from sortedcontainers import SortedList

    kept = SortedList()
    kept._reset(4)
    for key in random.Random(2).choices(range(100), k=50):
        kept.add(key)
    for key in list(kept)[::3]:
        kept.remove(key)
    return list(kept.irange(20, 60)), kept.bisect(50), kept[3:6], kept.pop(2)


@needs("sortedcontainers")
def sorted_dict_and_set() -> Any:
    from sortedcontainers import SortedDict, SortedSet

    berths = SortedDict({port: len(port) for port in PORTS})
    kept = SortedSet(range(9)) ^ SortedSet(range(4, 12))
    try:
        kept.remove(100)
    except KeyError as fault:
        return berths.peekitem(1), list(kept), repr(fault)
    return None


@needs("mpmath")
def mpmath_functions() -> Any:
    import mpmath
    from mpmath.libmp import gammazeta, libelefun

    # Constants are cached at the precision asked for last; start from none.
    mpmath.mp.dps = 25
    return [str(v) for v in (mpmath.exp(1), mpmath.gamma(2.5), mpmath.zeta(3), mpmath.sqrt(2))], (
        len(gammazeta.__name__),
        libelefun.log_int_fixed(7, 60),
    )


@needs("mpmath")
def mpmath_quad_and_roots() -> Any:
    import mpmath

    mpmath.mp.dps = 15
    return str(mpmath.quad(lambda x: x * x, [0, 1])), [
        str(r) for r in mpmath.polyroots([1, -6, 11, -6])
    ]


@needs("mpmath")
def mpmath_matrix() -> Any:
    import mpmath

    mpmath.mp.dps = 15
    table = mpmath.matrix([[4, 1, 2], [1, 3, 0], [2, 0, 5]])
    try:
        mpmath.lu_solve(mpmath.matrix([[1, 1], [1, 1]]), mpmath.matrix([1, 2]))
    except ZeroDivisionError:
        return str(mpmath.det(table)), str(mpmath.cholesky(table)[2, 2])
    return None


@needs("sympy")
def sympy_integers() -> Any:
    from sympy import factorint, integer_nthroot, isprime
    from sympy.ntheory.modular import crt

    return factorint(360360), isprime(10007), integer_nthroot(1000, 3), crt([3, 5], [2, 3])


@needs("sympy")
def sympy_polynomials() -> Any:
    from sympy.core.random import seed
    from sympy.polys import ZZ
    from sympy.polys.densearith import dup_mul, dup_pow
    from sympy.polys.factortools import dup_factor_list

    seed(1)
    product = dup_mul([1, 0, -1], dup_pow([1, 2], 3, ZZ), ZZ)
    return product, dup_factor_list(product, ZZ)


@needs("sympy")
def sympy_sums() -> Any:
    from sympy import expand, symbols
    from sympy.core.cache import clear_cache
    from sympy.core.random import seed

    seed(1)
    clear_cache()
    x, y = symbols("x y")
    return str(expand((x + y + 1) ** 4))
