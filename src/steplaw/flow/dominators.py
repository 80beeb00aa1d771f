"""Dominators of a flow graph."""

from __future__ import annotations

from collections.abc import Sequence


def reverse_postorder(successors: Sequence[Sequence[int]], start: int) -> list[int]:
    """Give the nodes that can be reached, each before its successors but for ways back.

    Parameters
    ----------
    successors : sequence of sequence of int
        By node number.
    start : int
        The node that flow begins at.
    """
    seen = {start}
    order: list[int] = []
    stack = [(start, iter(successors[start]))]
    while stack:
        node, rest = stack[-1]
        for target in rest:
            if target not in seen:
                seen.add(target)
                stack.append((target, iter(successors[target])))
                break
        else:
            order.append(node)
            stack.pop()
    return order[::-1]


def immediate_dominators(successors: Sequence[Sequence[int]], start: int) -> list[int]:
    """Give the immediate dominator of every node.

    Parameters
    ----------
    successors : sequence of sequence of int
        By node number.
    start : int
        The node that flow begins at.

    Returns
    -------
    list of int
        The start for itself, -1 for nodes that cannot be reached.

    Notes
    -----
    Cooper, Harvey & Kennedy, A simple, fast dominance algorithm, Rice University TR-06-33870,
    2001.
    """
    order = reverse_postorder(successors, start)
    place = {node: k for k, node in enumerate(order)}
    before: dict[int, list[int]] = {node: [] for node in order}
    for node in order:
        for target in successors[node]:
            before[target].append(node)
    out = [-1] * len(successors)
    out[start] = start
    changed = True
    while changed:
        changed = False
        for node in order[1:]:
            known = [p for p in before[node] if out[p] >= 0]
            best = known[0]
            for other in known[1:]:
                best = _common(out, place, best, other)
            if out[node] != best:
                out[node], changed = best, True
    return out


def _common(out: Sequence[int], place: dict[int, int], a: int, b: int) -> int:
    while a != b:
        while place[a] > place[b]:
            a = out[a]
        while place[b] > place[a]:
            b = out[b]
    return a


def dominates(dominators: Sequence[int], a: int, b: int) -> bool:
    """Whether every way to `b` passes `a`."""
    while b != a:
        if dominators[b] in (b, -1):
            return False
        b = dominators[b]
    return True
