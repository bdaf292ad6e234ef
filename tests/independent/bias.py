"""Quiescent currents and voltages: CHAIN_FORMAT, "Bias". One d.c. network of resistors, rails and device laws.

The laws: a bjt holds v(base) - v(emitter) = vbe and draws ic/beta at its base; a fet has
id = k/2·u² with u = vgs - vgs_th (jfet: id = idss·u² with u = 1 + vgs/vgs_off); a triode ia = P·w^1.5 with
w = vgk + vak/mu. The squares and powers are solved by Newton's method on u or w, from a start in the active region.
"""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from dataclasses import dataclass
from typing import Any

from tests.independent.cards import Card
from tests.independent.kinds import BIAS_KEYS, COMMON_CONTROL, DEVICE_KINDS, FOLLOWERS, KEYS
from tests.independent.linear import Singular, mp, solve
from tests.independent.network import GROUND
from tests.independent.quantity import number


@dataclass
class Bias:
    """Quiescent figures of a stage's device; of its upper device too where it is a cascode. Voltages are signed,
    `current` and `across` as for an n-type."""

    current: Any = None
    across: Any = None
    control: Any = None
    lower: Any = None
    output: Any = None
    upper: Bias | None = None

    def rows(self, stage: str) -> list[tuple[str, dict[str, Any]]]:
        """Rows of the ledger's JSON, the upper device's after the lower's."""
        power = None if self.current is None or self.across is None else self.current * self.across
        row = {
            "current_a": self.current, "across_v": self.across, "control_v": self.control,
            "lower_v": self.lower, "output_v": self.output, "dissipation_w": power,
        }  # fmt: skip
        return [(stage, row)] + (self.upper.rows(f"{stage}_upper") if self.upper else [])


class Transistor:
    """Where a stage's device hangs in the d.c. network."""

    def __init__(self, stage: Mapping[str, Any], card: Card, b: str, c: str, e: str, upper: Card | None) -> None:
        self.name, self.stage, self.card, self.upper = stage["name"], stage, card, upper
        self.b, self.c, self.e = b, c, e
        key = KEYS[card.family][0]
        self.stated = mp.mpf(number(stage[key])) if key in stage else None
        self.sign = -1 if card.mirrored else 1
        self.unknown = ("current", self.name)  # ic of a bjt, u or w of the others
        self.guess = self._start()

    def _start(self) -> Any:
        if self.card.family == "triode":
            p = self.card.perveance()
            return (self.card.get("gm_ia") / p) ** (mp.mpf(2) / 3) if p is not None else mp.mpf(1)
        return mp.mpf("0.5") if self.card.family == "jfet" else mp.mpf(1)

    def passed(self) -> Any:
        """What part of the device's current reaches the stage's output: a bipolar upper device keeps its base's."""
        beta = self.upper.get("beta") if self.upper and self.upper.family == "bjt" else None
        return beta / (beta + 1) if beta else mp.mpf(1)

    def solvable(self) -> bool:
        """Does the card tell the law of the current?"""
        card = self.card
        if card.family == "bjt":
            return "beta" in card.numbers
        if card.family == "triode":
            return card.perveance() is not None
        if card.family == "mosfet":
            return card.k_factor(None) is not None and "vgs_th" in card.numbers
        return "idss" in card.numbers and ("vgs_off" in card.numbers or "gm_id" in card.numbers)

    def law(self, x: Any) -> tuple[Any, Any]:
        """Current and its slope at u or w = x."""
        x = max(x, mp.mpf(0))
        if self.card.family == "triode":
            p = self.card.perveance()
            return p * x ** (mp.mpf(3) / 2), p * mp.mpf(3) / 2 * mp.sqrt(x)
        scale = self.card.k_factor(None) / 2 if self.card.family == "mosfet" else self.card.get("idss")
        return scale * x * x, 2 * scale * x

    def control_to_lower(self, current: Any, across: Any) -> Any:
        return control_to_lower(self.card, self.sign, current, across)


def control_to_lower(card: Card, sign: int, current: Any, across: Any) -> Any:
    """vbe, vgs or vgk at a known current, signed for the polarity; None where the card does not tell."""
    if card.family == "bjt":
        return sign * card.vbe
    if card.family == "mosfet":
        k = card.k_factor(current)
        if k is None or "vgs_th" not in card.numbers:
            return None
        return sign * (card.get("vgs_th") + mp.sqrt(2 * current / k))
    if card.family == "jfet":
        if {"vgs_off", "gm"} <= set(card.numbers) and "idss" not in card.numbers:
            return sign * (2 * mp.sqrt(current * card.get("gm_id", current)) / card.get("gm") - card.get("vgs_off"))
        if "idss" not in card.numbers or not {"vgs_off", "gm"} & set(card.numbers):
            return None
        return sign * card.pinch_off(current) * (mp.sqrt(current / card.get("idss")) - 1)
    p = card.perveance(current)
    if p is None or across is None:
        return None
    return (current / p) ** (mp.mpf(2) / 3) - across / card.mu()


class DirectNetwork:
    """Resistors, fixed voltages and devices between d.c. nodes."""

    def __init__(self, doc: Mapping[str, Any], cards: Mapping[str, Card]) -> None:
        supply = doc.get("supply", {})
        self.fixed = {
            "positive": mp.mpf(number(supply.get("positive", 0))),
            "negative": mp.mpf(number(supply.get("negative", 0))),
            GROUND: mp.mpf(0),
        }
        self.resistors: list[tuple[str, str, Any]] = []
        self.devices: list[Transistor] = []
        self.cards = cards
        self._draw(doc)

    def _r(self, a: str, b: str, table: Mapping[str, Any], key: str) -> None:
        if key in table and number(table[key]) > 0 and a != b:
            self.resistors.append((a, b, mp.mpf(number(table[key]))))

    def _through(self, a: str, far: str, table: Mapping[str, Any], key: str) -> str:
        if key not in table or number(table[key]) == 0:
            return a
        self._r(a, far, table, key)
        return far

    def _draw(self, doc: Mapping[str, Any]) -> None:
        source = doc["source"]
        node = "n0"
        if source["kind"] == "voltage":
            if "couple" not in source:
                if number(source["resistance"]) == 0:
                    node = GROUND
                else:
                    self._r(node, GROUND, source, "resistance")
        else:
            self._r(node, GROUND, source, "resistance")
        for stage in doc.get("stage", []):
            if not stage.get("left_out"):
                node = self._stage(stage, node)
        load = doc.get("load", {})
        if "couple" not in load:
            self._r(node, GROUND, load, "resistance")

    def _stage(self, stage: Mapping[str, Any], before: str) -> str:
        name, kind = stage["name"], stage["kind"]
        a = f"{name}.a" if "couple" in stage else before
        if kind in DEVICE_KINDS:
            return self._device(stage, a)
        if kind == "ladder":
            return self._ladder(stage, a)
        middle = (self.fixed["positive"] + self.fixed["negative"]) / 2
        out = f"{name}.o"
        self.fixed[out] = mp.mpf(number(stage["vout"])) if "vout" in stage else middle
        if kind == "block":
            self._r(a, GROUND, stage, "rin")
            self._r(a, out, stage, "r_bridge")
        elif kind == "noninverting":
            self._r(a, GROUND, stage, "r_bias")
        elif kind == "inverting":
            self._r(a, GROUND, stage, "rg")
        elif a not in self.fixed:
            self.fixed[a] = mp.mpf(0)
        return out

    def _ladder(self, stage: Mapping[str, Any], node: str) -> str:
        for i, arm in enumerate(stage["arms"], 1):
            keys = [k for k in arm if k != "role"]
            if keys[0].startswith("series"):
                far = f"{stage['name']}.{i}"
                if "series_l" in keys or ("series_r" in keys and number(arm["series_r"]) == 0):
                    far = node
                self._r(node, far, arm, "series_r")
                node = far
            elif "shunt_c" not in keys:
                if keys == ["shunt_l"]:
                    self.resistors.append((node, GROUND, mp.mpf("1e-20")))
                self._r(node, GROUND, arm, "shunt_r")
        return node

    def _device(self, stage: Mapping[str, Any], a: str) -> str:
        name, kind = stage["name"], stage["kind"]
        card = self.cards[stage["device"]]
        _, _, r_out, r_low, r_bypassed, _, _ = KEYS[card.family]
        out_rail = stage.get("output_to", GROUND if card.mirrored else "positive")
        low_rail = stage.get("lower_to", "positive" if card.mirrored else GROUND)
        out_rail, low_rail = (GROUND if r == "ground" else r for r in (out_rail, low_rail))
        at = a
        if kind in COMMON_CONTROL:
            biased = any(k in stage for k in BIAS_KEYS)
            at = f"{name}.g" if biased else GROUND
        for key, rail in (("rb1", "positive"), ("rb2", GROUND), ("rg1", "positive"), ("rg2", GROUND), ("rg", GROUND)):
            self._r(at, rail, stage, key)
        b = self._through(at, f"{name}.b", stage, "stopper")
        if kind in COMMON_CONTROL:
            c, e = f"{name}.c", a
            self._r(e, low_rail, stage, r_low)
        elif kind in FOLLOWERS:
            c, e = out_rail, f"{name}.e"
            self._r(e, low_rail, stage, r_low)
        else:
            c, e = f"{name}.c", low_rail
            total = sum(number(stage[k]) for k in (r_low, r_bypassed) if k in stage)
            if total:
                e = f"{name}.e"
                self.resistors.append((e, low_rail, mp.mpf(total)))
        if kind not in FOLLOWERS:
            self._r(c, out_rail, stage, r_out)
        if "c_rf" not in stage:
            self._r(b, c, stage, "rf")
        upper = self.cards[stage.get("upper", stage["device"])] if kind == "cascode" else None
        self.devices.append(Transistor(stage, card, b, c, e, upper))
        return e if kind in FOLLOWERS else c

    # -- solution ---------------------------------------------------------------------------------------------------

    def held(self) -> set[str]:
        """Nodes with a d.c. path to a rail, ground or a fixed output."""
        reached = set(self.fixed)
        links = [(a, b) for a, b, _ in self.resistors]
        links += [(t.b, t.e) for t in self.devices if t.stated is None and t.card.family == "bjt"]
        grown = True
        while grown:
            grown = False
            for a, b in links:
                if (a in reached) != (b in reached):
                    reached |= {a, b}
                    grown = True
        return reached

    def solve(self) -> dict[Hashable, Any]:
        """Node voltages and the devices' unknowns. Raises Singular."""
        for _ in range(60):
            x = self._step()
            moved = mp.mpf(0)
            for t in self.devices:
                if t.stated is None and t.solvable() and t.card.family != "bjt":
                    new = x[t.unknown]
                    moved = max(moved, abs(new - t.guess))
                    t.guess = new if new > 0 else t.guess / 2
            if moved < mp.mpf(10) ** -30:
                return x
        raise Singular

    def _step(self) -> dict[Hashable, Any]:
        rows: dict[Hashable, dict[Hashable, Any]] = {}
        right: dict[Hashable, Any] = {}

        def add(row: Hashable, column: Hashable, value: Any) -> None:
            if row in self.fixed:
                return
            rows.setdefault(row, {})
            if column is None or column in self.fixed:
                level = mp.mpf(1) if column is None else self.fixed[column]
                right[row] = right.get(row, mp.mpf(0)) - value * level
            else:
                rows[row][column] = rows[row].get(column, mp.mpf(0)) + value

        for a, b, r in self.resistors:
            for here, there in ((a, b), (b, a)):
                add(here, here, 1 / r)
                add(here, there, -1 / r)
        for t in self.devices:
            one = mp.mpf(t.sign)
            if t.stated is not None or not t.solvable():
                current = t.stated if t.stated is not None else mp.mpf(0)
                base = current / t.card.get("beta") if t.card.get("beta") else mp.mpf(0)
                for node, i in ((t.c, current * t.passed()), (t.b, base), (t.e, -current - base)):
                    add(node, None, one * i)
            elif t.card.family == "bjt":
                share = 1 / t.card.get("beta")
                for node, i in ((t.c, t.passed()), (t.b, share), (t.e, -1 - share)):
                    add(node, t.unknown, one * i)
                add(t.unknown, t.b, mp.mpf(1))
                add(t.unknown, t.e, mp.mpf(-1))
                add(t.unknown, None, -one * t.card.vbe)
            else:
                current, slope = t.law(t.guess)
                for node, turn in ((t.c, t.passed()), (t.e, -1)):
                    add(node, t.unknown, turn * one * slope)
                    add(node, None, turn * one * (current - slope * t.guess))
                self._control_law(t, one, add)
        nodes = {n for t in self.devices for n in (t.b, t.c, t.e)} | {n for a, b, _ in self.resistors for n in (a, b)}
        for node in nodes - set(self.fixed):
            add(node, node, mp.mpf(10) ** -30)  # holds what nothing holds; such voltages are not reported
        x = solve(rows, [right])[0]
        return x | self.fixed

    def _control_law(self, t: Transistor, one: Any, add: Any) -> None:
        """v(control) - v(lower) as a function of u or w, linear in both."""
        n = t.card
        add(t.unknown, t.b, one)
        add(t.unknown, t.e, -one)
        if n.family == "mosfet":
            add(t.unknown, None, -n.get("vgs_th"))
            add(t.unknown, t.unknown, mp.mpf(-1))
        elif n.family == "jfet":
            add(t.unknown, None, n.pinch_off())
            add(t.unknown, t.unknown, -n.pinch_off())
        else:
            add(t.unknown, t.c, one / n.mu())
            add(t.unknown, t.e, -one / n.mu())
            add(t.unknown, t.unknown, mp.mpf(-1))


def bias(doc: Mapping[str, Any], cards: Mapping[str, Card]) -> dict[str, Bias]:
    """The bias of each device stage."""
    network = DirectNetwork(doc, cards)
    if not network.devices:
        return {}
    try:
        x = network.solve()
    except Singular:
        x = {}
    held = network.held()
    return {t.name: _of(t, x, held) for t in network.devices}


def _of(t: Transistor, x: Mapping[Hashable, Any], held: set[str]) -> Bias:
    def volt(node: str) -> Any:
        return x.get(node) if node in held else None

    family = t.card.family
    if t.stated is not None:
        current = t.stated
    elif not t.solvable() or not x or t.b not in held:
        return Bias(control=volt(t.b) if family != "bjt" else None)
    else:
        current = x[t.unknown] if family == "bjt" else t.law(x[t.unknown])[0]
    out = Bias(current, None, volt(t.b), volt(t.e), volt(t.c))
    key = KEYS[family][1]
    stated = mp.mpf(number(t.stage[key])) if key in t.stage else None
    if t.upper is not None:
        out.upper = _upper(t, out, stated)
        out.output = None
    if stated is not None:
        out.across = stated
        if out.output is None and out.lower is not None:
            out.output = out.lower + t.sign * stated
    elif out.output is not None and out.lower is not None:
        out.across = t.sign * (out.output - out.lower)
    if t.stated is not None and out.lower is not None:
        step = t.control_to_lower(t.stated, out.across)
        if step is not None:
            out.control = out.lower + step
    return out


def _upper(t: Transistor, lower: Bias, stated: Any) -> Bias:
    """A cascode's upper device: what the rails leave above the stated voltage of the lower one."""
    out = Bias(current=lower.current * t.passed(), output=lower.output)
    if stated is None or lower.lower is None:
        return out
    out.lower = lower.lower + t.sign * stated
    if out.output is not None:
        out.across = t.sign * (out.output - out.lower)
    step = control_to_lower(t.upper, t.sign, out.current, out.across)
    if step is not None:
        out.control = out.lower + step
    return out
