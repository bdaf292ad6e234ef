"""An independent d.c. solution for tests: nodal equations typed in by hand, solved by a general root finder.

Nothing of the program is used. A net is a list of resistors (node, node, ohms), held nodes with their volts, and
devices with their law as a figure of the card.
"""

from __future__ import annotations

import numpy as np
from scipy.optimize import root


class Net:
    """Resistors, levels and devices by node name."""

    def __init__(self, **levels: float) -> None:
        self.levels = {"0": 0.0, **levels}
        self.resistors: list[tuple[str, str, float]] = []
        self.devices: list[tuple[str, str, str, float, str, dict[str, float]]] = []

    def r(self, a: str, b: str, ohms: float) -> None:
        self.resistors.append((a, b, ohms))

    def bjt(self, b: str, c: str, e: str, beta: float, vbe: float, sign: int = 1) -> None:
        self.devices.append((b, c, e, sign, "bjt", {"beta": beta, "vbe": vbe}))

    def square(self, g: str, d: str, s: str, k: float, cut_off: float, sign: int = 1) -> None:
        self.devices.append((g, d, s, sign, "square", {"k": k, "cut_off": cut_off}))

    def valve(self, g: str, a: str, k: str, mu: float, p: float) -> None:
        self.devices.append((g, a, k, 1, "valve", {"mu": mu, "p": p}))

    def solve(self) -> tuple[dict[str, float], list[float]]:
        """Node voltages and device currents. Unknowns: voltages, and every device's current."""
        used = [n for r in self.resistors for n in r[:2]] + [n for d in self.devices for n in d[:3]]
        free = sorted(set(used) - set(self.levels))
        place = {node: k for k, node in enumerate(free)}
        count = len(free)

        def equations(x: np.ndarray) -> np.ndarray:
            volts = {**self.levels, **{node: x[k] for node, k in place.items()}}
            leaving = dict.fromkeys(volts, 0.0)
            for a, b, ohms in self.resistors:
                leaving[a] += (volts[a] - volts[b]) / ohms
                leaving[b] -= (volts[a] - volts[b]) / ohms
            laws = []
            for n, (b, c, e, sign, kind, card) in enumerate(self.devices):
                i = 1e-3 * x[count + n]  # milliamperes keep the unknowns of one size
                base = i / card["beta"] if kind == "bjt" else 0.0
                leaving[b] += sign * base
                leaving[c] += sign * i
                leaving[e] -= sign * (i + base)
                control, across = sign * (volts[b] - volts[e]), sign * (volts[c] - volts[e])
                if kind == "bjt":
                    laws.append(control - card["vbe"])
                elif kind == "square":
                    laws.append(control - card["cut_off"] - np.sqrt(2 * max(i, 0.0) / card["k"]))
                else:
                    laws.append(control + across / card["mu"] - (max(i, 0.0) / card["p"]) ** (2 / 3))
            return np.array([1e3 * leaving[node] for node in free] + laws)

        found = root(equations, np.ones(count + len(self.devices)), method="hybr", options={"xtol": 1e-14})
        assert np.max(np.abs(found.fun)) < 1e-9, found.message
        volts = {node: float(found.x[k]) for node, k in place.items()}
        return volts, [float(1e-3 * i) for i in found.x[count:]]
