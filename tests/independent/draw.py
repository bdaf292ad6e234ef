"""A chain file's table drawn as elements between nodes: CHAIN_FORMAT, topology by kind."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from tests.independent.bias import Bias
from tests.independent.cards import NAMES, Card
from tests.independent.kinds import BIAS_KEYS, COMMON_CONTROL, DEVICE_KINDS, FOLLOWERS, KEYS
from tests.independent.linear import mp
from tests.independent.network import GROUND, Element
from tests.independent.quantity import number


class Drawing:
    """Elements, the interstage nodes, which node is whose site, and the bridges of each stage."""

    def __init__(self, doc: Mapping[str, Any], bias: Mapping[str, Bias], cards: Mapping[str, Card]) -> None:
        self.doc, self.bias, self.cards = doc, bias, cards
        self.elements: list[Element] = []
        self.sites: dict[str, str] = {}  # full-network node -> site name
        self.nodes: list[str] = []  # n0 ... nN as nodes of the network
        self.names: list[str] = []  # n0 ... nN as listed (a stage of one node repeats the lower name)
        self.bridges: dict[int, list[tuple[str, str, Any, str, str]]] = {}  # line -> part, type, value, input, output
        self.arm_nodes: list[tuple[str, str]] = []  # a node between the parts of a shunt arm, after where it hangs
        self.storages: set[str] = set()  # nodes that stand for the storages gbw, f2, pole1 ...
        self.controls: dict[int, str] = {}  # line -> node on which rf or r_bridge ends
        self.line = 0
        self.stage: Mapping[str, Any] = {}
        self.lines = [("source", doc["source"]["kind"])]
        self._source(doc["source"])
        for k, stage in enumerate(doc.get("stage", []), 1):
            self.line, self.stage = k, stage
            self.lines.append((stage["name"], stage["kind"]))
            self._stage(stage)
        self.line, self.stage = len(self.lines), {}
        self.load = self._load(doc.get("load", {}))
        self.lines.append(("load", "load"))
        for hangs_from, node in self.arm_nodes:
            self.site(self.sites[hangs_from], node)

    # -- small tools ------------------------------------------------------------------------------------------------

    def at(self, name: str) -> str:
        return f"{self.lines[self.line][0]}.{name}"

    def value(self, table: Mapping[str, Any], key: str) -> Any:
        """The number of a key; None where it is absent or 0 (the part is not there)."""
        v = mp.mpf(number(table[key], key)) if key in table else None
        return v if v else None

    def put(
        self, kind: str, part: str, a: str, b: str, value: Any, role: str = "", c: str = GROUND, d: str = GROUND
    ) -> None:
        if kind == "tau" and role == "high":
            self.storages.add(a)
        if value is not None and value != 0 and a != b:
            self.elements.append(Element(kind, self.line, part, a, b, value, role, c, d))

    def series(self, kind: str, part: str, a: str, far: str, value: Any, role: str = "") -> str:
        """A part from node `a` to a new node `far`; the node reached (`a` itself without the part, or of 0)."""
        if not value:
            return a
        self.put(kind, part, a, far, value, role)
        return far

    def site(self, name: str, *nodes: str) -> None:
        for node in nodes:
            if node != GROUND:
                self.sites.setdefault(node, name)

    def bridge(self, part: str, kind: str, value: Any, input_side: str, output_side: str) -> None:
        if value is not None and value != 0:
            self.bridges.setdefault(self.line, []).append((part, kind, value, input_side, output_side))

    # -- source, load -----------------------------------------------------------------------------------------------

    def _source(self, table: Mapping[str, Any]) -> None:
        resistance = self.value(table, "resistance")
        if table["kind"] == "voltage":
            node = "emf"
            self.elements.append(Element("emf", 0, "emf", node, GROUND, 1))
            node = self.series("C", "couple", node, "source.c", self.value(table, "couple"), "low")
            node = self.series("R", "resistance", node, "source.r", resistance)
        else:
            node = "source.r"
            self.put("R", "resistance", node, GROUND, resistance)
        self.put("C", "capacitance", node, GROUND, self.value(table, "capacitance"), "high")
        self.nodes.append(node)
        self.names.append("n0")
        self.site("n0", node)

    def _load(self, table: Mapping[str, Any]) -> str:
        node = self.nodes[-1]
        far = self.series("C", "couple", node, "load.n", self.value(table, "couple"), "low")
        if far != node:
            self.site(self.names[-1], far)
        self.put("R", "resistance", far, GROUND, self.value(table, "resistance"))
        self.put("C", "capacitance", far, GROUND, self.value(table, "capacitance"), "high")
        return far

    # -- stages -----------------------------------------------------------------------------------------------------

    def _stage(self, stage: Mapping[str, Any]) -> None:
        before, kind = self.nodes[-1], stage["kind"]
        self.before_site, self.after_site = self.names[-1], f"n{self.line}"
        if stage.get("left_out"):
            self.nodes.append(before)
            self.names.append(self.names[-1])
            return
        a = self.series("C", "couple", before, self.at("a"), self.value(stage, "couple"), "low")
        if kind == "ladder":
            out = self._ladder(stage, a)
            self.site(self.before_site if out != a else self.after_site, a)
        else:
            self.site(self.before_site, a)
            if kind in DEVICE_KINDS:
                out = self._device_stage(stage, kind, a)
            elif kind == "block":
                out = self._block(stage, a)
            else:
                out = self._opamp(stage, kind, a)
        self.put("C", "c_load", out, GROUND, self.value(stage, "c_load"), "high")
        self.put("C", "stray", out, GROUND, self.value(stage, "stray"), "high")
        self.nodes.append(out)
        self.names.append(self.names[-1] if out == before else self.after_site)
        self.site(self.names[-1], out)

    def _device(self, card: Card, figures: Mapping[str, Any], suffix: str, b: str, c: str, e: str) -> str:
        """The small-signal device; gives its inner control node b'."""
        c_in, c_bridge, c_ground, c_across = NAMES[card.family]
        inner = self.series("R", "rx" + suffix, b, self.at("b'" + suffix), figures.get("rx"))
        self.put("R", "rpi" + suffix, inner, e, figures.get("rpi"))
        self.put("C", c_in + suffix, inner, e, figures.get(c_in), "high")
        self.put("C", c_bridge + suffix, inner, c, figures.get(c_bridge), "high")
        self.put("gm", "gm" + suffix, c, e, figures["gm"], c=inner, d=e)
        self.put("R", "ro" + suffix, c, e, figures.get("ro"))
        if c_ground:
            self.put("C", c_ground + suffix, c, GROUND, figures.get(c_ground), "high")
        if c_across:
            self.put("C", c_across + suffix, c, e, figures.get(c_across), "high")
        return inner

    def _lower(self, stage: Mapping[str, Any], family: str) -> str:
        """The lower resistors of an inverting kind; the lower terminal."""
        _, _, _, r, r_bypassed, bypass, _ = KEYS[family]
        if self.value(stage, r) is None and self.value(stage, r_bypassed) is None and bypass not in stage:
            return GROUND
        end = self.at("e")
        middle = end
        if self.value(stage, r) is not None:
            middle = self.at("e2")
            if self.value(stage, r_bypassed) is None and bypass not in stage:
                middle = GROUND
            self.put("R", r, end, middle, self.value(stage, r))
            self.put("C", "c_peak", end, middle, self.value(stage, "c_peak"), "high")
        self.put("R", r_bypassed, middle, GROUND, self.value(stage, r_bypassed))
        self.put("C", bypass, middle, GROUND, self.value(stage, bypass), "low")
        return end

    def _control(self, stage: Mapping[str, Any], a: str) -> str:
        for key in BIAS_KEYS:
            self.put("R", key, a, GROUND, self.value(stage, key))
        return self.series("R", "stopper", a, self.at("b"), self.value(stage, "stopper"))

    def _output_resistor(self, stage: Mapping[str, Any], family: str, out: str) -> None:
        key = KEYS[family][2]
        if self.value(stage, key) is not None:
            coil = self.value(stage, "l_peak")
            end = self.at("coil") if coil is not None else GROUND
            self.put("R", key, out, end, self.value(stage, key))
            self.put("L", "l_peak", end, GROUND, coil, "high")

    def _device_stage(self, stage: Mapping[str, Any], kind: str, a: str) -> str:
        name = stage["name"]
        card = self.cards[stage["device"]]
        family = card.family
        own = self.bias[name]
        figures = card.small_signal(own.current, own.across)
        c_in, c_bridge = NAMES[family][:2]
        if kind in FOLLOWERS:
            out = self.at("e")
            b = self._control(stage, a)
            inner = self._device(card, figures, "", b, GROUND, out)
            self.put("R", KEYS[family][3], out, GROUND, self.value(stage, KEYS[family][3]))
            self.site(self.before_site, b, inner)
            self.bridge(c_in, "C", figures.get(c_in), inner, out)
            return out
        if kind in COMMON_CONTROL:
            out = self.at("c")
            biased = any(self.value(stage, key) is not None for key in BIAS_KEYS)
            control = self.at("g") if biased else GROUND
            if biased:
                self.put("C", KEYS[family][6], control, GROUND, self.value(stage, KEYS[family][6]), "low")
            b = self._control(stage, control)
            inner = self._device(card, figures, "", b, out, a)
            self.put("R", KEYS[family][3], a, GROUND, self.value(stage, KEYS[family][3]))
            self._output_resistor(stage, family, out)
            self.site(self.before_site, control, b, inner)
            return out
        b = self._control(stage, a)
        e = self._lower(stage, family)
        out = self.at("c")
        if kind == "cascode":
            upper_card = self.cards[stage.get("upper", stage["device"])]
            above_bias = own.upper or Bias()
            upper = upper_card.small_signal(above_bias.current, above_bias.across)
            middle = self.at("mid")
            inner = self._device(card, figures, "", b, middle, e)
            above = self._device(upper_card, upper, "_upper", GROUND, out, middle)
            self._output_resistor(stage, family, out)
            self.site(self.before_site, b, inner)
            self.site(f"{name}.mid", middle, above)
            self.bridge(c_bridge, "C", figures.get(c_bridge), inner, middle)
            return out
        inner = self._device(card, figures, "", b, out, e)
        self._output_resistor(stage, family, out)
        self.site(self.before_site, b, inner)
        self.bridge(c_bridge, "C", figures.get(c_bridge), inner, out)
        rf = self.value(stage, "rf")
        if rf is not None:
            far = self.series("C", "c_rf", out, self.at("f"), self.value(stage, "c_rf"), "low")
            self.put("R", "rf", b, far, rf)
            self.bridge("rf", "R", rf, b, out)
            self.controls[self.line] = b
        comp = self.value(stage, "c_comp")
        if comp is not None:
            node = self.series("R", "r_comp", b, self.at("comp"), self.value(stage, "r_comp"))
            self.put("C", "c_comp", node, out, comp, "high")
            self.site(self.before_site, node)
            self.bridge("c_comp", "C", comp, node, out)
        return out

    def _opamp(self, stage: Mapping[str, Any], kind: str, a: str) -> str:
        card = self.cards[stage["device"]]
        out = self.at("o")
        rf = self.value(stage, "rf")
        n = self.at("n") if rf is not None else out
        p = GROUND
        if kind == "noninverting":
            p = a
            self.put("R", "r_bias", p, GROUND, self.value(stage, "r_bias"))
            if self.value(stage, "rg") is not None:
                low = self.at("g") if "c_rg" in stage else GROUND
                self.put("R", "rg", n, low, self.value(stage, "rg"))
                self.put("C", "c_rg", low, GROUND, self.value(stage, "c_rg"), "low")
        else:
            if self.value(stage, "r_bias") is not None:
                p = self.at("p")
                self.put("R", "r_bias", p, GROUND, self.value(stage, "r_bias"))
            n = self.series("R", "rg", a, n, self.value(stage, "rg")) if kind == "inverting" else a
            self.bridge("rf", "R", rf, n, out)
            self.bridge("cf", "C", self.value(stage, "cf"), n, out)
        self.put("R", "rf", n, out, rf)
        self.put("C", "cf", n, out, self.value(stage, "cf"), "high")
        self.put("R", "rin", p, n, card.get("rin"))
        self.put("C", "cin_diff", p, n, card.get("cin_diff"), "high")
        for node in (p, n):
            self.put("C", "cin_cm", node, GROUND, card.get("cin_cm"), "high")
        a0 = card.get("a0", mp.mpf(100000))
        storage = self.at("gbw")
        self.put("gm", "a0", GROUND, storage, a0, c=p, d=n)
        self.put("R", "unit", storage, GROUND, mp.mpf(1))
        self.put("tau", "gbw", storage, GROUND, a0 / (2 * mp.pi * card.get("gbw")), "high")
        self.site(f"{stage['name']}.gbw", storage)
        if card.get("f2"):
            second = self.at("f2")
            self.put("gm", "unity", GROUND, second, mp.mpf(1), c=storage)
            self.put("R", "unit2", second, GROUND, mp.mpf(1))
            self.put("tau", "f2", second, GROUND, 1 / (2 * mp.pi * card.get("f2")), "high")
            self.site(f"{stage['name']}.f2", second)
            storage = second
        rout = card.get("rout", mp.mpf(50))
        drive = self.at("x") if rout else out
        self.put("amp", "buffer", drive, GROUND, mp.mpf(1), c=storage)
        self.put("R", "rout", drive, out, rout)
        self.site(self.after_site, out)
        self.site(self.before_site, p, n)
        return self.series("R", "r_out", out, self.at("end"), self.value(stage, "r_out"))

    def _block(self, stage: Mapping[str, Any], a: str) -> str:
        out = self.at("o")
        rout = mp.mpf(number(stage.get("rout", "1m")))
        gain = mp.mpf(number(stage["gain"], "gain"))
        if stage.get("inverting"):
            gain = -gain
        if "gain_into" in stage:
            gain = gain * (1 + rout / mp.mpf(number(stage["gain_into"])))
        self.put("R", "rin", a, GROUND, self.value(stage, "rin"))
        self.put("C", "cin", a, GROUND, self.value(stage, "cin"), "high")
        signal = a
        for i, corner in enumerate(stage.get("lower_poles", []), 1):
            driven, passed = self.at(f"drive{i}"), self.at(f"lower{i}")
            self.put("amp", "copy", driven, GROUND, mp.mpf(1), c=signal)
            self.put("tau", f"lower{i}", driven, passed, 1 / (2 * mp.pi * mp.mpf(number(corner))), "low")
            self.put("R", "unit", passed, GROUND, mp.mpf(1))
            signal = passed
        for i, corner in enumerate(stage.get("poles", []), 1):
            storage = self.at(f"pole{i}")
            self.put("gm", "copy", GROUND, storage, mp.mpf(1), c=signal)
            self.put("R", "unit", storage, GROUND, mp.mpf(1))
            self.put("tau", f"pole{i}", storage, GROUND, 1 / (2 * mp.pi * mp.mpf(number(corner))), "high")
            self.site(f"{stage['name']}.pole{i}", storage)
            signal = storage
        drive = self.at("x") if rout else out
        self.put("amp", "gain", drive, GROUND, gain, c=signal)
        self.put("R", "rout", drive, out, rout)
        self.put("C", "cout", out, GROUND, self.value(stage, "cout"), "high")
        self.put("R", "r_bridge", a, out, self.value(stage, "r_bridge"))
        self.put("C", "c_bridge", a, out, self.value(stage, "c_bridge"), "high")
        self.bridge("r_bridge", "R", self.value(stage, "r_bridge"), a, out)
        self.bridge("c_bridge", "C", self.value(stage, "c_bridge"), a, out)
        if self.value(stage, "r_bridge") is not None:
            self.controls[self.line] = a
        return out

    def _ladder(self, stage: Mapping[str, Any], node: str) -> str:
        arms = stage["arms"]
        # a series R or L of 0 is not there: what is ahead of it and behind it is one node
        absent = [any(k in ("series_r", "series_l") and self.value(arm, k) is None for k in arm) for arm in arms]
        series_left = sum(any(k.startswith("series") for k in arm) and not gone
                          for arm, gone in zip(arms, absent, strict=True))
        inner = 0
        for i, arm in enumerate(arms, 1):
            parts = [k for k in arm if k != "role"]
            many = len(parts) > 1
            role = arm.get("role")
            label = {k: f"arm{i}.{k[-1]}" if many else f"arm{i}" for k in parts}
            if absent[i - 1]:
                continue
            if parts[0].startswith("series"):
                series_left -= 1
                if series_left:
                    inner += 1
                    far = self.at(str(inner))
                    self.site(f"{stage['name']}.{inner}", far)
                else:
                    far = self.at("o")
                roles = {"series_c": role or "low", "series_l": role or "high", "series_r": ""}
                for k in parts:
                    self.put(k[-1].upper(), label[k], node, far, self.value(arm, k), roles[k])
                node = far
            else:
                roles = {"shunt_c": role or "high", "shunt_l": role or "low", "shunt_r": ""}
                end = node
                if "shunt_c" in parts and self.value(arm, "shunt_c") is None:
                    continue  # no capacitor, no current
                standing = [k for k in ("shunt_r", "shunt_l", "shunt_c") if k in parts and self.value(arm, k)]
                for k in standing:
                    far = GROUND if k == standing[-1] else self.at(f"arm{i}{k[-1]}")
                    self.arm_nodes.append((node, far))
                    self.put(k[-1].upper(), label[k], end, far, self.value(arm, k), roles[k])
                    end = far
        return node
