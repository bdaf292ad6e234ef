"""The two poles that a stage's input and output node make alone, with the capacitance across the stage between them.

    1 + b_1·s + b_2·s² = 0
    b_1 = R_1·(C_1 + C) + R_2·(C_2 + C) + Gm·R_1·R_2·C,  b_2 = R_1·R_2·(C_1·C_2 + C·(C_1 + C_2))

R, C of the two nodes at midband, C the sum of what bridges the stage, Gm = -K/R_2. Far apart the second one comes to
Gm·C/(C_1·C_2 + C·(C_1 + C_2)): the splitting (P. R. Gray, P. J. Hurst, S. H. Lewis and R. G. Meyer, Analysis and Design
of Analog Integrated Circuits, 5th ed., section 9.4). The rest of the chain counts as the resistance that it is.
"""

from __future__ import annotations

from cmath import sqrt

from polebook.book.ledger import Ledger
from polebook.book.lumped import Lumped
from polebook.book.sites import IDEAL_OHM, site_names


def two_nodes(of: Ledger, stage: str) -> tuple[complex, complex] | None:
    """Both poles (rad/s) by rising size; None where something else than capacitances bridges the stage, or a node has
    no resistance or no capacitance."""
    solution = of.solution
    layout, values = solution.circuit.layout, solution.circuit.network.values
    segment = next(one for one in layout.segments if one.name == stage)
    across = [bridge for bridge in of.bridges.get(stage, ()) if bridge.k is not None]
    if not across or any(bridge.type == "R" for bridge in across):
        return None
    names = site_names(layout)
    lumped = Lumped(solution, names)
    ohms = [lumped.ohm(node) for node in (segment.before, segment.after)]
    bridging = {(bridge.i, bridge.j) for bridge in across}
    parts = {index for branch in segment.branches if (branch.i, branch.j) in bridging
             for group in branch.groups for index in group}
    farads = {names[segment.before]: 0.0, names[segment.after]: 0.0}
    for node, half in lumped.landings():
        if half is not None and half.of_use and half.part not in parts and names[node] in farads:
            farads[names[node]] += float(values[half.part]) * half.share
    c_1, c_2 = farads.values()
    if min(ohms) < IDEAL_OHM or min(c_1, c_2) < 0.0:
        return None
    c, k = sum(bridge.value for bridge in across), solution.volts[segment.after] / solution.volts[segment.before]
    b_1 = ohms[0] * (c_1 + c) + ohms[1] * (c_2 + c) - k * ohms[0] * c
    b_2 = ohms[0] * ohms[1] * (c_1 * c_2 + c * (c_1 + c_2))
    if b_2 <= 0.0 or b_1 <= 0.0:
        return None
    root = b_1 + sqrt(b_1 * b_1 - 4.0 * b_2)  # the larger of the two, so that no digits are lost
    return -2.0 / root, -root / (2.0 * b_2)
