"""Strongly connected blocks of the network: what does not feel each other has its poles apart.

Row i of the equations leans on node j where it has an entry there. Nodes that lean on each other, round about, make
a block; det(G + sC) is the product of the blocks' determinants, and the pivots of a block's nodes are its own.
"""

from __future__ import annotations

from polebook.circuit.layout import Layout
from polebook.stages.stamper import GROUND


def blocks(layout: Layout) -> list[int]:
    """Block of every node, numbered from 0; the EMF's own node, which leans on none, has the last to itself."""
    leans = _leans(layout)
    count = len(layout.names)
    order = _finished(leans, [k for k in range(count) if k != layout.emf])
    back: list[list[int]] = [[] for _ in range(count)]
    for i, others in enumerate(leans):
        for j in others:
            back[j].append(i)
    block = [-1] * count
    number = 0
    for start in reversed(order):
        if block[start] >= 0:
            continue
        stack = [start]
        block[start] = number
        while stack:
            for j in back[stack.pop()]:
                if block[j] < 0 and j != layout.emf:
                    block[j] = number
                    stack.append(j)
        number += 1
    if layout.emf != GROUND:
        block[layout.emf] = number  # arms that hang on an ideal source have poles of their own
    return block


def _leans(layout: Layout) -> list[set[int]]:
    count = len(layout.names)
    leans: list[set[int]] = [set() for _ in range(count)]
    for i, j in layout.stamps.where:
        if i < count and i != j and j != layout.emf:
            leans[i].add(j)
    for branch in layout.branches:
        if branch.series and GROUND not in (branch.i, branch.j):
            for i, j in ((branch.i, branch.j), (branch.j, branch.i)):
                if not layout.driven[i] and j != layout.emf:
                    leans[i].add(j)
    return leans


def _finished(leans: list[set[int]], nodes: list[int]) -> list[int]:
    """Nodes in the order in which a depth-first walk leaves them (S. R. Kosaraju, from memory)."""
    seen, order = set(), []
    for start in nodes:
        if start in seen:
            continue
        seen.add(start)
        stack = [(start, iter(leans[start]))]
        while stack:
            node, rest = stack[-1]
            for j in rest:
                if j not in seen:
                    seen.add(j)
                    stack.append((j, iter(leans[j])))
                    break
            else:
                order.append(node)
                stack.pop()
    return order
