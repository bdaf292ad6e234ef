"""The two ends of a chain: what its source and its load stamp."""

from __future__ import annotations

from collections.abc import Callable

from polebook.stages.stamper import GROUND, Stamper, Value

Get = Callable[[str], Value | None]


def source(st: Stamper, voltage: bool, get: Get) -> tuple[int, int]:
    """Stamps the source; returns the driven node of its EMF (GROUND for a current source) and its terminal n0."""
    if voltage:
        emf = st.driven("emf", "")
        behind = st.series("couple", emf, "out", [("couple", "C-low", get("source.couple"))])
        terminal = st.series("terminal", behind, "out", [("resistance", "R", get("source.resistance"))])
    else:
        emf, terminal = GROUND, st.node("terminal", "out")
        st.resistor("resistance", terminal, GROUND, get("source.resistance"))
    st.capacitor("capacitance", terminal, GROUND, get("source.capacitance"))
    return emf, terminal


def load(st: Stamper, before: int, get: Get) -> int:
    """Stamps the load; returns its node, the last interstage node itself where it is not coupled."""
    node = st.series("load", before, "out", [("couple", "C-low", get("load.couple"))])
    st.resistor("resistance", node, GROUND, get("load.resistance"))
    st.capacitor("capacitance", node, GROUND, get("load.capacitance"))
    return node
