"""Rails and levels once more, from LEDGER's definitions: d.c. currents out of every rail, and what clips at each node.

Drawn and solved apart from the program, in 50-digit arithmetic. Stages without a clip level have no row.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from tests.independent.bias import DirectNetwork, Transistor
from tests.independent.cards import Card
from tests.independent.kinds import DEVICE_KINDS, FOLLOWERS, KEYS
from tests.independent.linear import mp
from tests.independent.network import GROUND, Element, System, merged
from tests.independent.oracle import Oracle
from tests.independent.quantity import number

NEARLY_NOTHING = mp.mpf(10) ** -45  # S: holds what taking a device out leaves hanging
DEVICE = ("gm", "rpi", "ro", "rx")


def read(table: Mapping[str, Any], key: str, default: float | None = None) -> Any:
    if key in table:
        return mp.mpf(number(table[key], key))
    return None if default is None else mp.mpf(default)


class Currents:
    """A out of every node that something holds, by adding up what leaves each node of the d.c. network."""

    def __init__(self, doc: Mapping[str, Any]) -> None:
        celsius = number(doc.get("supply", {}).get("temperature", 25))
        cards = {name: Card(table, celsius) for name, table in doc.get("device", {}).items()}
        self.doc, self.net = doc, DirectNetwork(doc, cards)
        self.x = self.net.solve()
        self.stages = {stage["name"]: stage for stage in doc.get("stage", [])}
        self.leaving: dict[str, Any] = {}
        for a, b, ohms in self.net.resistors:
            self._book(a, (self.x[a] - self.x[b]) / ohms)
            self._book(b, (self.x[b] - self.x[a]) / ohms)
        self.rails = {name: mp.mpf(0) for name in ("positive", "negative", GROUND)}
        for t in self.net.devices:
            self._device(t)
        self._sources()
        for stage in doc.get("stage", []):
            if not stage.get("left_out") and stage["kind"] not in (*DEVICE_KINDS, "ladder"):
                self._amplifier(stage)
        for name in self.rails:
            self.rails[name] += self.leaving.get(name, mp.mpf(0))

    def _book(self, node: str, current: Any) -> None:
        self.leaving[node] = self.leaving.get(node, mp.mpf(0)) + current

    def _device(self, t: Transistor) -> None:
        if t.stated is not None:
            current = t.stated
        else:
            current = self.x[t.unknown] if t.card.family == "bjt" else t.law(self.x[t.unknown])[0]
        base = current / t.card.get("beta") if t.card.family == "bjt" and "beta" in t.card.numbers else mp.mpf(0)
        self._book(t.b, t.sign * base)
        self._book(t.c, t.sign * current * t.passed())
        self._book(t.e, -t.sign * (current + base))
        self._book(self._rail(t, "output_to"), t.sign * current * (1 - t.passed()))  # a cascode's upper base

    def _rail(self, t: Transistor, key: str) -> str:
        default = "positive" if (key == "output_to") != t.card.mirrored else "ground"
        rail = t.stage.get(key, default)
        return GROUND if rail == "ground" else rail

    def _sources(self) -> None:
        """What is left over at a free node comes from a current source on the rail of the stage that lacks it."""
        for t in self.net.devices:
            _, _, r_out, r_low, _, _, _ = KEYS[t.card.family]
            ends = [("output_to", t.c, r_out)] if t.stage["kind"] not in FOLLOWERS else []
            ends.append(("lower_to", t.e, r_low))
            for key, node, resistor in ends:
                over = self.leaving.get(node, mp.mpf(0))
                if node not in self.net.fixed and resistor not in t.stage and abs(over) > mp.mpf(10) ** -25:
                    self._book(self._rail(t, key), over)
                    self.leaving[node] = mp.mpf(0)

    def _amplifier(self, stage: Mapping[str, Any]) -> None:
        """iq from the positive rail to the negative; the output's current from the one or into the other."""
        name, kind = stage["name"], stage["kind"]
        output = self.leaving.pop(f"{name}.o", mp.mpf(0))
        if kind == "noninverting" and "rg" in stage and "c_rg" not in stage:
            current = self.net.fixed[f"{name}.o"] / (read(stage, "rg") + read(stage, "rf", 0.0))
            output += current
            self._book(GROUND, -current)
        if kind == "inverting" and read(stage, "rg"):
            into = self._entry(stage) / read(stage, "rg")  # arrives at 0 V, and goes on through rf
            output -= into
            self._book(GROUND, into)
        if kind == "transimpedance":
            output += self.leaving.pop(self._before(stage), mp.mpf(0))
        iq = read(stage if kind == "block" else self.doc["device"][stage["device"]], "iq")
        self.rails["positive"] += iq + max(output, mp.mpf(0))
        self.rails["negative"] += min(output, mp.mpf(0)) - iq

    def _before(self, stage: Mapping[str, Any]) -> str:
        """The d.c. node at a stage's input."""
        if "couple" in stage:
            return f"{stage['name']}.a"
        node = "n0"
        for other in self.doc["stage"]:
            if other is stage:
                return node
            if other.get("left_out"):
                continue
            if other["kind"] in DEVICE_KINDS:
                t = next(t for t in self.net.devices if t.name == other["name"])
                node = t.e if other["kind"] in FOLLOWERS else t.c
            elif other["kind"] == "ladder":
                series = [i for i, arm in enumerate(other["arms"], 1)
                          if any(key.startswith("series") for key in arm) and "series_l" not in arm]
                node = f"{other['name']}.{series[-1]}" if series else node
            else:
                node = f"{other['name']}.o"
        raise LookupError(stage["name"])

    def _entry(self, stage: Mapping[str, Any]) -> Any:
        return self.x.get(self._before(stage), mp.mpf(0))

    def rows(self) -> list[dict[str, Any]]:
        """Rows as those of the ledger; a rail at 0 V is ground."""
        standing = [name for name in ("positive", "negative") if self.net.fixed[name] != 0]
        ground = self.rails[GROUND] + sum(self.rails[n] for n in ("positive", "negative") if n not in standing)
        return [*({"rail": name, "current_a": self.rails[name]} for name in standing),
                *([{"rail": "ground", "current_a": ground}] if standing else [])]


class Levels(Oracle):
    """Clip levels, headroom, the largest source that passes, full-power bandwidth."""

    def clip_terms(self, k: int) -> list[Any]:
        """The bounds of stage k at its node, V peak; None for one that is not known."""
        stage = self.doc["stage"][k - 1]
        name, kind = stage["name"], stage["kind"]
        if kind == "ladder" or stage.get("left_out"):
            return []
        if kind == "block":
            return [read(stage, "clip")]
        if kind not in DEVICE_KINDS:
            return self._amplifier_terms(k, stage)
        own, after = self.bias[name], ""
        card = self.cards[stage["device"]]
        if kind == "cascode":
            own, after, card = own.upper, "_upper", self.cards[stage.get("upper", stage["device"])]
        current, across = (own.current, own.across) if own else (None, None)
        terms = [None if current is None else self._times(current, self.without_device(k, after))]
        if card.family == "bjt":
            terms.append(None if across is None else across - card.get("vce_sat", mp.mpf("0.2")))
        elif card.family == "triode":
            terms.append(across)
            known = own and own.control is not None and own.lower is not None
            terms.append((own.lower - own.control) * abs(self.v(self.nodes[k]) / self._grid(k)) if known else None)
        else:
            gm = next(e.value for e in self.elements if e.line == k and e.part == "gm" + after)
            terms.append(None if current is None or across is None else across - 2 * current / gm)
        return [None if t is None else max(t, mp.mpf(0)) for t in terms if t != mp.inf]

    def _times(self, current: Any, ohm: Any) -> Any:
        return mp.inf if ohm is None else current * ohm

    def _grid(self, k: int) -> Any:
        gm = next(e for e in self.elements if e.line == k and e.part == "gm")
        return self.v(gm.c) - self.v(gm.d)

    def without_device(self, k: int, after: str) -> Any:
        """Resistance at the node behind stage k, every element of its device taken out; None where it is open."""
        gone = {part + after for part in DEVICE}
        left = [e for e in self.elements if not (e.line == k and e.part in gone)]
        names = {node for e in left for node in (e.a, e.b)} - {GROUND}
        left += [Element("R", 0, "hold", node, GROUND, 1 / NEARLY_NOTHING) for node in names]
        kept, find = merged(left)
        node, system = find(self.nodes[k]), System(kept)
        seen = system.voltages(mp.mpf(0), [system.drive({node: 1}, emf=False)])[0][node]
        return None if seen > mp.mpf(10) ** 30 else seen

    def _amplifier_terms(self, k: int, stage: Mapping[str, Any]) -> list[Any]:
        card, o = self.doc["device"][stage["device"]], f"{stage['name']}.o"
        carry = abs(self.v(self.nodes[k]) / self.v(o))
        supply = self.doc.get("supply", {})
        rails = [read(supply, "positive", 0.0), read(supply, "negative", 0.0)]
        terms: list[Any] = [None]
        if rails[0] != rails[1]:
            vout = read(stage, "vout")
            vout = sum(rails) / 2 if vout is None else vout
            room = min(rails[0] - vout, vout - rails[1]) - read(card, "headroom", 1.5)
            terms = [max(room, mp.mpf(0)) * carry]
        if "i_max" in card:
            current = mp.mpf(0)
            at = self.find(o)
            for e in self.elements:
                ends = self.find(e.a), self.find(e.b)
                if e.kind == "R" and e.part != "rout" and at in ends and ends[0] != ends[1]:
                    other = ends[1] if ends[0] == at else ends[0]
                    current += (self.mid_v[at] - self.mid_v.get(other, mp.mpf(0))) / e.value
            if current != 0:
                terms.append(read(card, "i_max") * abs(self.mid_v[at] / current) * carry)
        return terms

    def clip(self, k: int) -> Any:
        known = [t for t in self.clip_terms(k) if t is not None]
        return min(known) if known else None

    def rows(self) -> list[dict[str, Any]]:
        """Rows of the levels but for the noise."""
        source = self.doc["source"]
        ends = [*zip(self.drawing.names, self.nodes, strict=True)]
        if self.load != self.nodes[-1]:
            ends.append(("load", self.load))
        clips = {self.find(self.nodes[k]): self.clip(k) for k in range(1, self.last)
                 if self.nodes[k] != self.nodes[k - 1] and self.clip_terms(k)}
        result = {}
        for name, node in ends:
            gain, clip = abs(self.v(node)), clips.get(self.find(node))
            row = {"node": name, "clip_v": clip}
            for key in ("largest", "smallest"):
                row[f"{key}_v"] = None if key not in source else gain * read(source, key)
            both = clip and row["largest_v"]
            row["headroom_db"] = 20 * mp.log10(clip / row["largest_v"]) if both else None
            result.setdefault(name, row)
        return list(result.values())

    def overall(self) -> dict[str, Any]:
        """clips_first, largest_source and full_power_hz."""
        names = [stage["name"] for stage in self.doc.get("stage", [])]
        passing = {names[k - 1]: self.clip(k) / abs(self.v(self.nodes[k])) for k in range(1, self.last)
                   if self.nodes[k] != self.nodes[k - 1] and self.clip(k) is not None}
        first = min(passing, key=lambda name: passing[name], default=None)
        slopes = self.slopes()
        return {"clips_first": first, "largest_source": passing[first] if first else None,
                "full_power_hz": min(slopes) if slopes else None}

    def slopes(self) -> list[Any]:
        """Hz that each stage can follow at full signal."""
        largest = read(self.doc["source"], "largest")
        if largest is None:
            return []
        found = []
        for k in range(1, self.last):
            stage = self.doc["stage"][k - 1]
            if stage.get("left_out") or stage["kind"] == "ladder" or self.nodes[k] == self.nodes[k - 1]:
                continue
            at, limit = self.nodes[k], None
            if stage["kind"] == "block":
                limit = read(stage, "slew")
            elif stage["kind"] not in DEVICE_KINDS:
                at, limit = f"{stage['name']}.o", read(self.doc["device"][stage["device"]], "slew")
            else:
                own = self.bias[stage["name"]]
                own = own.upper if stage["kind"] == "cascode" else own
                farad = self.farads(k)
                if own is not None and own.current is not None and farad > 0:
                    limit = own.current / farad
            if limit is not None:
                found.append(limit / (2 * mp.pi * abs(self.v(at)) * largest))
        return found

    def farads(self, k: int) -> Any:
        """High-role capacitance of the site of node k with its Miller halves."""
        name = self.drawing.names[k]
        interstage = set(self.drawing.names)
        nodes = {self.find(node) for node, site in self.drawing.sites.items() if site == name} - {GROUND}
        taken = {self.find(node) for node, site in self.drawing.sites.items()
                 if site in interstage and self.drawing.names.index(site) < k}
        nodes = {n for n in nodes - taken if n in self.response}
        loudest = max((abs(self.mid_v[n]) for n in nodes), default=mp.mpf(0))
        return sum((self._capacitance(n) for n in nodes if abs(self.mid_v[n]) >= mp.mpf("1e-12") * loudest),
                   mp.mpf(0))
