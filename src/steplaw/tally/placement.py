"""Which edges need a probe, and how the others follow from them.

Flow is conserved at every block: what comes in goes out. Probes on the edges off a maximum
spanning tree of the flow graph therefore settle every other edge (Kirchhoff's law; Knuth, The Art
of Computer Programming, vol. 1, 2.3.4.1; Ball & Larus, Optimally profiling and tracing programs,
ACM TOPLAS 16, 1994).
"""

from __future__ import annotations

from collections.abc import Sequence

from steplaw.flow.blocks import Blocks, Edge

#: Edges with no place for a probe: they must be on the tree.
UNPROBED = frozenset({"pass"})


class Unplaceable(Exception):
    """The edges without a place for a probe close a cycle."""


class Placement:
    """The probed edges of a flow graph and the order in which the others are solved.

    Parameters
    ----------
    graph : Blocks
        The flow graph.
    weights : sequence of float
        Likely frequency by edge; the tree takes the heaviest.

    Attributes
    ----------
    probed : list of int
        Edge numbers that carry a probe.
    """

    __slots__ = ("_order", "edges", "probed", "size")

    def __init__(self, graph: Blocks, weights: Sequence[float]) -> None:
        self.edges = graph.edges
        self.size = len(graph.blocks)
        tree, self.probed = _split(self.edges, weights, self.size)
        self._order = _peel(self.edges, tree, self.size)

    def solve(self, passes: Sequence[int], raised: dict[int, int]) -> tuple[list[int], list[int]]:
        """Give the frequency of every edge and the inflow of every block.

        Parameters
        ----------
        passes : sequence of int
            Passes of the probes, in the order of `probed`.
        raised : dict of int to int
            Net inflow of a block by fresh exceptions: what was caught there less what left it
            half-run.

        Returns
        -------
        edges, entered : list of int
            Frequency of each edge; times that each block was entered along an edge.
        """
        edges = self.edges
        flow = [0] * len(edges)
        balance = [0] * (self.size + 1)
        for b, net in raised.items():
            balance[b] += net
        for number, count in zip(self.probed, passes, strict=True):
            if count:
                flow[number] = count
                balance[edges[number].target] += count
                balance[edges[number].source] -= count
        for node, number in self._order:
            rest = balance[node]
            if rest:
                edge = edges[number]
                if edge.source == node:
                    flow[number] = rest
                    balance[edge.target] += rest
                else:
                    flow[number] = -rest
                    balance[edge.source] += rest
                balance[node] = 0
        entered = [0] * (self.size + 1)
        for edge, count in zip(edges, flow, strict=True):
            entered[edge.target] += count
        entered.pop()
        return flow, entered


def _split(
    edges: Sequence[Edge], weights: Sequence[float], size: int
) -> tuple[list[int], list[int]]:
    """Split the edges into a maximum spanning forest and the probed rest (Kruskal 1956)."""
    root = list(range(size + 1))

    def find(x: int) -> int:
        while root[x] != x:
            root[x] = root[root[x]]
            x = root[x]
        return x

    def rank(number: int) -> tuple[bool, float]:
        return edges[number].kind not in UNPROBED, -weights[number]

    tree, probed = [], []
    for number in sorted(range(len(edges)), key=rank):
        a, b = find(edges[number].source % (size + 1)), find(edges[number].target % (size + 1))
        if a != b:
            root[a] = b
            tree.append(number)
        elif edges[number].kind in UNPROBED:
            raise Unplaceable
        else:
            probed.append(number)
    probed.sort()
    return tree, probed


def _peel(edges: Sequence[Edge], tree: list[int], size: int) -> list[tuple[int, int]]:
    """Order the tree's edges leaf by leaf, so that each is the last unknown of its node."""
    at: list[list[int]] = [[] for _ in range(size + 1)]
    for number in tree:
        at[edges[number].source].append(number)
        at[edges[number].target].append(number)
    order: list[tuple[int, int]] = []
    seen = [False] * (size + 1)
    for start in (size, *range(size)):
        if seen[start]:
            continue
        seen[start] = True
        path: list[tuple[int, int]] = []
        stack = [start]
        while stack:
            node = stack.pop()
            for number in at[node]:
                ends = edges[number].source % (size + 1), edges[number].target % (size + 1)
                other = ends[1] if ends[0] == node else ends[0]
                if not seen[other]:
                    seen[other] = True
                    path.append((other, number))
                    stack.append(other)
        order.extend(reversed(path))
    return order
