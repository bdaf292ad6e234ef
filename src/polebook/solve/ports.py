"""The output impedance of a line over frequency. What is seen into a line's input stands in `Folded.inputs`."""

from __future__ import annotations

from polebook.circuit.views import Network
from polebook.solve.fold import NotHeld, fold
from polebook.solve.transfer import adjoint
from polebook.stages.stamper import Value


def output_impedance(net: Network, s: Value, line: int) -> Value | None:
    """Ohms of the full network at the output node of a line with what follows taken away, at s (rad/s, an array).

    None where nothing but a current holds the node.
    """
    layout = net.layout
    node = layout.after[line]
    if layout.driven[node] or node == layout.emf:
        return 0.0
    try:
        return adjoint(fold(net, s, "full", line + 1), node).u[node]
    except NotHeld:
        return None
