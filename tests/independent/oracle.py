"""The ledger's figures once more, straight from their definitions in LEDGER.md, in 50-digit arithmetic.

Slow and plain on purpose: every figure is read off a solution of the nodal equations drawn for it alone. Nothing
of the program is used. The result is a dict named as the ledger's JSON.
"""

from __future__ import annotations

import tomllib
from collections.abc import Hashable, Iterable, Mapping
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np

from tests.independent.kinds import DEVICE_KINDS
from tests.independent.linear import Singular, mp
from tests.independent.modes import Mode, poles, zeros
from tests.independent.network import GROUND
from tests.independent.quantity import number
from tests.independent.solved import TINY, Solved, crossing

HALF_POWER = 10 * mp.log10(2)

Rows = list[dict[str, Any]]
BySite = Mapping[str, Mapping[str, Any]]


def ledger(path: str | Path) -> dict[str, Any]:
    """The figures of a chain file."""
    return plain(Oracle(tomllib.loads(Path(path).read_text(encoding="utf-8"))).document())


def plain(x: Any) -> Any:
    """The same with ordinary floats."""
    if isinstance(x, dict):
        return {k: plain(v) for k, v in x.items()}
    if isinstance(x, list):
        return [plain(v) for v in x]
    return float(x) if isinstance(x, mp.mpf | np.floating) else x


def db(ratio: Any) -> Any:
    return 20 * mp.log10(abs(ratio))


class Oracle(Solved):
    """The figures of a solved chain, one by one."""

    # -- lines ------------------------------------------------------------------------------------------------------

    def line_gain(self, k: int, x: Mapping[Hashable, Any], node: Any) -> Any:
        """A of line k from a solution: V(n0), V(n_k)/V(n_{k-1}), V(load)/V(n_N)."""
        ends = [*self.nodes, self.load]
        return x[node(ends[k])] / (x[node(ends[k - 1])] if k else 1)

    def left_out(self, k: int) -> bool:
        return 0 < k < self.last and bool(self.doc["stage"][k - 1].get("left_out"))

    def open_gain(self, k: int) -> Any:
        system = self.only(range(k + 1))
        try:
            x = system.voltages(mp.mpf(0), [self._drive(system, self.find)])[0]
            return self.line_gain(k, x, self.find)
        except (Singular, KeyError):
            return None

    def driving_point(self, lines: Iterable[int], node: str) -> Any:
        """V/I at a node of the midband network of some lines; None where infinite."""
        system = self.only(lines)
        node = self.find(node)
        try:
            return system.voltages(mp.mpf(0), [system.drive({node: 1}, emf=False)])[0][node]
        except Singular:
            return None

    def bridge_rows(self, k: int) -> Rows:
        rows = []
        for part, kind, value, input_side, output_side in self.drawing.bridges.get(k, []):
            factor = self.v(output_side) / self.v(input_side)
            half_in, half_out = 1 - factor, 1 - 1 / factor
            at_input = at_output = None
            if abs(half_in) >= mp.mpf("1e-12"):
                at_input = value * half_in if kind == "C" else value / half_in
            if abs(half_out) >= mp.mpf("1e-12"):
                at_output = value * half_out if kind == "C" else value / half_out
            rows.append(
                {"part": part, "type": kind, "value": value, "k": factor, "at_input": at_input, "at_output": at_output}
            )
        return rows

    def line_k(self, rows: Rows) -> Any:
        """K of the bridge with the largest capacitance at the input, else resistance."""
        for kind in ("C", "R"):
            some = [r for r in rows if r["type"] == kind and r["at_input"] is not None]
            if some:
                return max(some, key=lambda r: r["at_input"])["k"]
        return None

    def holds(self, k: int, rows: Rows) -> bool:
        """Does stage k hold its input node?"""
        kind = self.drawing.lines[k][1]
        if kind == "transimpedance":
            return True
        if k not in self.drawing.controls:
            return False
        half = next(r["at_input"] for r in rows if r["type"] == "R")
        seen = self.ohm(self.nodes[k - 1])
        return half is not None and half > 0 and seen / half > mp.mpf("0.5")

    # -- sites ------------------------------------------------------------------------------------------------------

    def site_rows(self) -> dict[str, dict[str, Any]]:
        """ohm, farad, pole_hz of every site."""
        interstage = list(dict.fromkeys(self.drawing.names))
        inner = [site for site in self.drawing.sites.values() if site not in interstage]
        members: dict[str, list[str]] = {site: [] for site in [*interstage, *inner]}
        taken: set[str] = set()
        # one midband node may belong to two sites (a coil or a coupling joins them): the interstage one has it
        for site, own in members.items():
            for node in (n for n, s in self.drawing.sites.items() if s == site):
                at = self.find(node)
                if at != GROUND and at in self.response and at not in taken:
                    taken.add(at)
                    own.append(at)
        heads = {name: node for node, name in zip(self.nodes, self.drawing.names, strict=True)}
        out = {}
        for site, nodes in members.items():
            greatest = max((abs(self.mid_v[n]) for n in nodes), default=mp.mpf(0))
            tau = mp.mpf(0)
            for node in nodes:
                if abs(self.mid_v[node]) < mp.mpf("1e-12") * greatest or greatest == 0:
                    continue
                tau += self.response[node][node] * self._capacitance(node)
            head = heads.get(site) or next(n for n, s in self.drawing.sites.items() if s == site)
            ohm = self.ohm(head) if self.find(head) in self.response else None
            real = ohm is not None and ohm >= mp.mpf("1e-9")
            storage = head in self.drawing.storages
            out[site] = {
                "ohm": None if storage else ohm,
                "farad": tau / ohm if real and not storage else None,
                "pole_hz": 1 / (2 * mp.pi * tau) if tau > 0 else None,
                "real": real or storage,
            }
        return out

    def _capacitance(self, node: str) -> Any:
        """Grounded capacitance plus Σ C·(1 - V_j/V_i) at a midband node.

        Terms below zero (a capacitance driven beyond its own node's swing, as at a follower's output) are left away,
        save the input half of a bridge: where nodes with a sum below zero were left out instead, a resistor of 1 µΩ
        between two nodes of a site would move its pole.
        """
        total = mp.mpf(0)
        for e in self.elements:
            if e.kind not in ("C", "tau") or e.role != "high":
                continue
            a, b = self.find(e.a), self.find(e.b)
            if node not in (a, b) or a == b:
                continue
            other = b if node == a else a
            if other != GROUND and other not in self.response:
                continue
            factor = 1 - self.mid_v[other] / self.mid_v[node]
            bridges = self.drawing.bridges.get(e.line, [])
            if factor > TINY or any(part == e.part and self.find(end) == node for part, _, _, end, _ in bridges):
                total += e.value * factor
        return total

    # -- the document -----------------------------------------------------------------------------------------------

    def document(self) -> dict[str, Any]:
        taus = self.time_constants()
        span = self.range(taus)
        unstable = bool(self.right_half_plane_poles(span))
        upper_estimate, lower_estimate, seed = self.seed(taus)
        edges: dict[str, Any] = {"upper": None, "lower": None}
        if not unstable and self.clean(seed):
            edges = {"upper": self.edge(seed, 1, span[1]), "lower": self.edge(seed, -1, span[0])}
        owned = {end: self.owned(edges[end], taus) for end in edges}
        sites = self.site_rows()
        overall = {
            "gain": self.gain,
            "gain_db": db(self.gain),
            "gain_unit": "V/A" if self.by_current else "V/V",
            "unstable": unstable,
            "lower_edge_hz": edges["lower"],
            "upper_edge_hz": edges["upper"],
            "peaking_db": None if unstable else self.peaking_db(span),
            "octc_upper_hz": upper_estimate,
            "sctc_lower_hz": lower_estimate,
            "node_upper_hz": self.node_estimate(sites),
            "shrinkage": None,
        }
        target = self.doc.get("target", {})
        if not unstable:
            overall["reference_hz"] = number(target["reference"]) if "reference" in target else seed
        slowest = min((s["pole_hz"] for s in sites.values() if s["pole_hz"] is not None), default=None)
        if edges["upper"] is not None and slowest is not None:
            overall["shrinkage"] = edges["upper"] / slowest
        lines = self.line_rows(owned)
        account, losses = self.account(edges, unstable, lines)
        return {
            "overall": overall,
            "lines": lines,
            "nodes": self.node_rows(sites, account, losses),
            "parts": self.part_rows(taus, owned),
            "bias": self.bias_rows(),
            "account": account,
            "poles": [self.root_row(m, "poles") for m in self.poles],
            "zeros": [self.root_row(m, "zeros") for m in self.zeros],
        }

    @cached_property
    def poles(self) -> list[Mode]:
        return poles(self.elements)

    @cached_property
    def zeros(self) -> list[Mode]:
        return zeros(self.elements, self.nodes, self.load)

    def root_row(self, mode: Mode, kind: str) -> dict[str, Any]:
        row = mode.row([name for name, _ in self.drawing.lines])
        return row | {"stage": None} if kind == "poles" and mode.s == 0 else row

    def node_estimate(self, sites: Mapping[str, Mapping[str, Any]]) -> Any:
        poles = [s["pole_hz"] for s in sites.values() if s["pole_hz"] is not None]
        if not poles:
            return None

        def loss(x: Any) -> Any:
            return sum(mp.log(1 + (mp.exp(x) / p) ** 2) for p in poles) - mp.log(2)

        low, high = mp.log(min(poles)) - 3, mp.log(min(poles)) + mp.mpf("0.1")
        return mp.exp(crossing(loss, low, high))

    def line_rows(self, owned: Mapping[str, Mapping[tuple[int, str], Any] | None]) -> Rows:
        rows = []
        for k, (name, kind) in enumerate(self.drawing.lines):
            bridges = self.bridge_rows(k)
            gain, opened = self.line_gain(k, self.mid_v, self.find), self.open_gain(k)
            row = {
                "name": name, "kind": kind, "gain": gain, "gain_db": db(gain), "open_gain": opened,
                "loading": None if opened is None else gain / opened,
                "transfer_ohm": None, "k": self.line_k(bridges), "bridges": bridges,
                "input_ohm": None, "output_ohm": None, "owns_upper": None, "owns_lower": None,
            }  # fmt: skip
            if self.left_out(k):
                rows.append(row | {"open_gain": None, "loading": None})
                continue
            if k:
                row["input_ohm"] = self.driving_point(range(k, self.last + 1), self.nodes[k - 1])
            row["output_ohm"] = self.driving_point(range(k + 1), [*self.nodes, self.load][k])
            if 0 < k < self.last and self.holds(k, bridges):
                row["transfer_ohm"] = gain * row["input_ohm"]
            for end in ("upper", "lower"):
                if owned[end] is not None:
                    row[f"owns_{end}"] = sum((v for (line, _), v in owned[end].items() if line == k), mp.mpf(0))
            rows.append(row)
        return rows

    def account(
        self, edges: Mapping[str, Any], unstable: bool, lines: Rows
    ) -> tuple[dict[str, Any], dict[str, dict[str, Any]]]:
        """The account of both ends, and dB lost by node at both."""
        held = {self.drawing.names[k - 1] for k, row in enumerate(lines) if row["transfer_ohm"] is not None}
        target = self.doc.get("target", {})
        account: dict[str, Any] = {}
        losses: dict[str, dict[str, Any]] = {}
        for end in ("upper", "lower"):
            at = mp.mpf(number(target[end])) if end in target else edges[end]
            if unstable or at is None:
                account[end], losses[end] = dict.fromkeys(("edge_hz", "lost_db", "left_db")), {}
                continue
            x = self.solution(at)
            lost: dict[str, Any] = {}
            run = mp.mpf(0)
            for k, row in enumerate(lines):
                run -= db(self.line_gain(k, x, lambda n: n) / row["gain"])
                node = "load" if k == self.last else self.drawing.names[k]
                if k == self.last:
                    if self.load != self.nodes[-1]:
                        lost["load"] = run
                    continue
                if k > 0 and node == self.drawing.names[k - 1]:
                    continue  # the line's input and output are one node
                if node in held:
                    lost[node] = None
                else:
                    lost[node], run = run, mp.mpf(0)
            total = -db(x[self.load] / self.gain)
            account[end] = {
                "edge_hz": at, "budget_db": HALF_POWER, "lost_db": total, "left_db": HALF_POWER - total,
            }  # fmt: skip
            losses[end] = lost
        return account, losses

    def allotted(self, lost: Mapping[str, Any], own: Mapping[str, Any]) -> dict[str, Any]:
        claimed = {node: mp.mpf(v) for node, v in own.items() if node in lost}
        sharing = [node for node, v in lost.items() if v is not None and node not in claimed]
        rest = HALF_POWER - sum(claimed.values(), mp.mpf(0))
        return claimed | {node: rest / len(sharing) for node in sharing}

    def node_rows(self, sites: BySite, account: Mapping[str, Any], losses: Mapping[str, Mapping[str, Any]]) -> Rows:
        own = {}
        if "allot" in self.doc["source"]:
            own["n0"] = number(self.doc["source"]["allot"], "allot")
        for k, stage in enumerate(self.doc.get("stage", []), 1):
            if "allot" in stage and not stage.get("left_out"):
                own[self.drawing.names[k]] = number(stage["allot"], "allot")
        if "allot" in self.doc.get("load", {}):
            own["load"] = number(self.doc["load"]["allot"], "allot")
        allotted = {"upper": self.allotted(losses["upper"], own), "lower": self.allotted(losses["lower"], {})}
        interstage = list(dict.fromkeys(self.drawing.names))
        counted = [n for n in interstage if sites[n]["pole_hz"] is not None]
        at = account["upper"]["edge_hz"]
        rows = []
        names = interstage + (["load"] if self.load != self.nodes[-1] else [])
        for name in names + [s for s in sites if s not in interstage]:
            site = sites.get(name, {"farad": mp.mpf(0), "pole_hz": None, "real": False})
            if name == "load":  # its capacitance is counted at the last node, with which it is one at midband
                site["ohm"] = self.ohm(self.load)
                site["farad"] = mp.mpf(0) if site["ohm"] >= mp.mpf("1e-9") else None
            room = None
            if at is not None and counted and site["pole_hz"] is not None and site["real"]:
                room = site["pole_hz"] / (at / mp.sqrt(mp.mpf(2) ** (mp.mpf(1) / len(counted)) - 1))
            rows.append(
                {
                    "name": name, "interstage": name in names,
                    "ohm": site["ohm"], "farad": site["farad"], "pole_hz": site["pole_hz"], "room": room,
                    "lost_upper_db": losses["upper"].get(name), "allotted_upper_db": allotted["upper"].get(name),
                    "lost_lower_db": losses["lower"].get(name), "allotted_lower_db": allotted["lower"].get(name),
                }
            )  # fmt: skip
        return rows

    def part_rows(self, taus: Mapping[Any, Mapping[str, Any]], owned: Mapping[str, Any]) -> Rows:
        rows = []
        for key, row in taus.items():
            line, part = key
            rows.append(
                {
                    "stage": self.drawing.lines[line][0], "part": part, "type": row["kind"], "role": row["role"],
                    "value": row["value"], "tau_s": row["tau"],
                    "owns_upper": owned["upper"] and owned["upper"][key],
                    "owns_lower": owned["lower"] and owned["lower"][key],
                }
            )  # fmt: skip
        for e in self.elements:
            if e.kind in ("R", "gm") and not e.part.startswith(("unit", "a0", "copy")):
                rows.append({"stage": self.drawing.lines[e.line][0], "part": e.part, "value": e.value})
        return rows

    def bias_rows(self) -> Rows:
        rows = []
        for stage in self.doc.get("stage", []):
            if stage["kind"] in DEVICE_KINDS and not stage.get("left_out"):
                for name, row in self.bias[stage["name"]].rows(stage["name"]):
                    rows.append({"stage": name} | row)
        return rows
