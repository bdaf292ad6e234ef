"""Chains drawn at random from the tables of kinds, cards and sections, as the text of a chain file.

Every kind and every key of the tables is drawn, so that a new one is covered by itself. What the reader refuses is
mended by what it says: a key that is missing is drawn, one that does not fit is drawn anew or taken out. Three shapes:

plain   values as they stand on a bench
wide    every value anywhere in some 20 decades
hard    like values, near-cancelling feedback, traps, corners in the wrong order, extremes among plain values
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass, field
from random import Random

from polebook.chain.read import examine
from polebook.chain.tables import SECTIONS
from polebook.devices.registry import FAMILIES
from polebook.param import Param
from polebook.problem import Problem
from polebook.stages.base import COMMON
from polebook.stages.ladder import ARM_ROLE, ARM_SERIES, ARM_SHUNT
from polebook.stages.registry import KINDS

SHAPES = ("plain", "wide", "hard")
ROUNDS, ATTEMPTS = 16, 6

# what plain values lie between, by dimension and role, and by key where the dimension says too little
_PLAIN = {
    "resistance": (30, 3e5), "capacitance": (1e-12, 1e-9), "capacitance low": (1e-8, 1e-4), "inductance": (1e-8, 1e-3),
    "voltage": (1, 12), "current": (2e-4, 2e-2), "frequency": (10, 3e4), "frequency high": (1e6, 1e9),
    "time": (1e-8, 1e-3), "transconductance": (5e-4, 0.1), "k_factor": (1e-3, 0.2), "per_volt": (5e-3, 0.1),
    "per_second": (1e5, 1e9), "density_v": (5e-10, 5e-8), "density_a": (1e-14, 1e-11), "power": (0.1, 2),
    "temperature": (-40, 90), "thermal": (20, 400), "ratio": (0.5, 50), "factor": (20, 400), "decibel": (0.01, 0.1),
    "share": (0.01, 0.2), "gain_source": (1, 1e3), "amplitude": (1e-4, 1e-1), "density": (1e-10, 1e-7),
}  # fmt: skip
_KEYS = {
    "early_voltage": (20, 200), "rx": (1, 200), "ft": (5e7, 5e9), "ft_ic": (5e-4, 2e-2), "cob": (3e-13, 8e-12),
    "cob_v": (1, 10), "grading": (0.2, 0.5), "built_in": (0.4, 0.9), "c_be0": (1e-13, 3e-12), "vbe": (0.55, 0.75),
    "vce_sat": (0.05, 0.4), "ro": (5e3, 1e6), "rpi": (300, 1e4), "vgs_th": (-2, 3), "vgs_off": (0.5, 5),
    "idss": (1e-3, 3e-2), "gamma_noise": (0.4, 1.2), "ciss": (5e-12, 5e-11), "crss": (3e-13, 4e-12),
    "coss": (5e-12, 3e-11), "mu": (10, 120), "rp": (1e3, 8e4), "ig": (1e-13, 1e-8), "a0": (1e3, 1e6),
    "f2": (2e7, 1e9), "gbw": (5e5, 3e8), "iq": (1e-4, 1e-2), "rb1": (1e4, 3e5), "rb2": (2e3, 1e5), "rg": (1e3, 1e6),
    "stopper": (10, 500), "rc": (200, 1e4), "rd": (200, 1e4), "ra": (1e4, 2e5), "re": (10, 2e3), "rs": (10, 2e3),
    "rk": (50, 3e3), "rout": (1, 1e3), "r_out": (10, 300), "poles": (1e6, 1e9), "lower_poles": (1, 1e3),
    "nf": (0.5, 12), "nf_source": (25, 200), "slew": (1e5, 1e9), "lower": (10, 1e4), "upper": (1e5, 1e7),
    "reference": (1e3, 1e6), "noise_from": (10, 1e3), "noise_to": (1e4, 1e8), "vout": (-2, 2), "c_peak": (1e-12, 3e-9),
    "gain_into": (30, 1e3), "flicker_corner": (10, 1e5),
}  # fmt: skip
_WIDE = {
    "resistance": (1e-6, 1e14), "capacitance": (1e-21, 1e-1), "inductance": (1e-15, 1e5), "voltage": (1e-3, 1e4),
    "current": (1e-15, 1e2), "frequency": (1e-6, 1e14), "time": (1e-15, 1e5), "transconductance": (1e-12, 1e4),
    "k_factor": (1e-9, 1e4), "per_volt": (1e-6, 1e2), "ratio": (1e-6, 1e8), "factor": (1e-3, 1e6),
    "density_v": (1e-15, 1e-3), "density_a": (1e-20, 1e-6), "temperature": (-270, 500),
}  # fmt: skip
# optional keys that a plain chain has more seldom than not, or oftener: share of files
_OFTEN = {
    "left_out": 0.04, "note": 0.02, "couple": 0.55, "tolerance": 0.0, "free": 0.0, "allot": 0.05, "ic": 0.75,
    "id": 0.75, "ia": 0.75, "vce": 0.6, "vds": 0.6, "vak": 0.6, "output_to": 0.08, "lower_to": 0.08, "rc": 0.9,
    "rd": 0.9, "ra": 0.9, "rb1": 0.8, "rb2": 0.8, "rg": 0.7, "rg1": 0.25, "rg2": 0.25, "rf": 0.3, "beta": 0.9,
    "early_voltage": 0.6, "ft": 0.7, "cob": 0.7, "gm": 0.3, "gm_id": 0.2, "ro": 0.15, "rpi": 0.1,
    "polarity": 0.15, "cpi": 0.15, "cmu": 0.2, "lower_poles": 0.3, "poles": 0.6, "r_bridge": 0.15,
    "c_bridge": 0.2, "resistance": 0.8, "vgs_th": 0.9, "positive": 1, "inverting": 0.0, "re": 0.85, "rs": 0.85,
    "rk": 0.85, "yield": 0.0, "gain": 0.2, "upper": 0.2, "lower": 0.2, "reference": 0.25, "k": 0.8, "idss": 0.9,
}  # fmt: skip


def _literal(value: object) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return f'"{value}"'
    if isinstance(value, list):
        return "[" + ", ".join(_literal(one) for one in value) + "]"
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{key} = {_literal(one)}" for key, one in value.items()) + " }"
    return f"{value:.6g}"


@dataclass
class Table:
    """One table of the file: how it begins, its rows, what they may be."""

    head: str
    params: dict[str, Param]
    rows: dict[str, object] = field(default_factory=dict)


class Draft:
    """A chain file in the making."""

    def __init__(self, rng: Random, shape: str) -> None:
        self.rng, self.shape = rng, shape
        self.seen: dict[str, list[float]] = {}
        self.tables: list[Table] = []
        self.cards: dict[str, str] = {}  # name -> family
        self.places: list[tuple[Table, str, int]] = []  # of every line of the text: table, key, arm

    # -- values -----------------------------------------------------------------------------------------------------

    def number(self, param: Param) -> float:
        """A value that the row allows."""
        rng, dimension = self.rng, param.of or param.dimension
        if param.sign == "nonnegative" and rng.random() < 0.04:
            return 0.0
        low, high = _KEYS.get(param.key) or _PLAIN.get(f"{dimension} {param.role}") or _PLAIN.get(dimension, (0.1, 10))
        wide = self.shape == "wide" or (self.shape == "hard" and rng.random() < 0.08)
        if wide and dimension in _WIDE:
            low, high = _WIDE[dimension]
        like = self.seen.setdefault(f"{dimension} {param.role}", [])
        if self.shape == "hard" and like and rng.random() < 0.3 and not wide:
            return rng.choice(like)
        if low > 0:
            value = low * (high / low) ** rng.random()
            value = float(f"{value:.3g}") if rng.random() < 0.7 else value
        else:
            value = rng.uniform(low, high)
        if param.sign in ("nonzero", "any") and low > 0 and rng.random() < 0.4:
            value = -value
        if param.sign == "nonpositive":
            value = -abs(value)
        if low > 0 and not wide:
            like.append(abs(value))
        return value

    def value(self, param: Param) -> object:
        rng = self.rng
        if param.choices:
            return rng.choice(param.choices)
        if param.dimension == "flag":
            return rng.random() < 0.5
        if param.dimension == "quantities":
            return [self.number(param) for _ in range(rng.choice((1, 1, 2, 3)))]
        if param.dimension == "arms":
            return self.arms()
        if param.dimension == "text":
            return "drawn"
        return self.number(param)

    def arms(self) -> list[dict[str, object]]:
        rng = self.rng
        return [self.arm() for _ in range(rng.randint(1, 5))]

    def arm(self) -> dict[str, object]:
        rng = self.rng
        table = rng.choice((ARM_SERIES, ARM_SHUNT))
        some = rng.sample(table, rng.choice((1, 1, 1, 2, 2, 3)))
        arm: dict[str, object] = {param.key: self.value(param) for param in some}
        if rng.random() < 0.15:
            arm["role"] = rng.choice(ARM_ROLE.choices)
        return arm

    # -- tables -----------------------------------------------------------------------------------------------------

    def table(self, head: str, params: Iterable[Param], often: float = 0.5) -> Table:
        table = Table(head, {p.key: p for p in params})
        for param in table.params.values():
            if param.required or self.rng.random() < _OFTEN.get(param.key, often):
                table.rows[param.key] = self.value(param)
        self.tables.append(table)
        return table

    def card(self, family: str) -> str:
        """A card of the family: one that stands, or a new one."""
        some = [name for name, one in self.cards.items() if one == family]
        if some and self.rng.random() < 0.5:
            return self.rng.choice(some)
        name = f"D{len(self.cards) + 1}"
        self.cards[name] = family
        return name

    def stage(self, number: int) -> None:
        rng = self.rng
        kind = rng.choice(list(KINDS.values()))
        family = rng.choice(kind.families) if kind.families else ""
        table = Table("[[stage]]", {p.key: p for p in (*COMMON, *kind.params_for(family))})
        table.rows = {"name": f"S{number}", "kind": kind.name}
        for param in table.params.values():
            if param.key in table.rows:
                continue
            if param.key == "device":
                table.rows["device"] = self.card(family)
            elif param.key == "upper":
                if rng.random() < 0.4:
                    table.rows["upper"] = self.card(rng.choice(kind.families))
            elif param.required or rng.random() < _OFTEN.get(param.key, 0.4):
                table.rows[param.key] = self.value(param)
        if isinstance(table.rows.get("gain"), float) and rng.random() < 0.2:
            table.rows["gain"], table.rows["inverting"] = f"{rng.uniform(-10, 40):.3g} dB", rng.random() < 0.5
        self.tables.append(table)

    def whole(self) -> None:
        """Every table of a chain."""
        rng = self.rng
        supply = self.table("[supply]", SECTIONS["supply"])
        source = self.table("[source]", SECTIONS["source"])
        if source.rows["kind"] == "current":
            source.rows.pop("couple", None)
        source.rows.setdefault("resistance", 50 * 100 ** rng.random())
        for number in range(1, rng.randint(1, 8) + 1):
            self.stage(number)
        if self.shape == "hard":
            self.trouble()
        self.table("[load]", SECTIONS["load"])
        self.table("[target]", SECTIONS["target"], 0.15)
        for name, family in self.cards.items():
            card = self.table(f"[device.{name}]", FAMILIES[family], 0.35)
            card.rows["family"] = family
        if self.shape != "wide":
            supply.rows["positive"] = rng.choice((5, 9, 12, 15, 24)) if "triode" not in self.cards.values() else 250
            if rng.random() < 0.5:
                supply.rows["negative"] = -rng.choice((5, 9, 12, 15))
            else:
                supply.rows.pop("negative", None)

    def trouble(self) -> None:
        """One stage that few would build."""
        rng = self.rng
        made = rng.choice((self._bridge, self._trap, self._crossed, self._like, self._none))
        made()

    def _none(self) -> None:
        pass

    def _add(self, kind: str, rows: dict[str, object]) -> None:
        number = sum(table.head == "[[stage]]" for table in self.tables) + 1
        table = Table("[[stage]]", {p.key: p for p in (*COMMON, *KINDS[kind].params)})
        table.rows = {"name": f"S{number}", "kind": kind, **rows}
        self.tables.insert(self.rng.randint(2, len(self.tables)), table)

    def _bridge(self) -> None:
        """Positive feedback that all but cancels what loads its input: 1/R + 1/rin + (1 - gain)/r_bridge near 0."""
        rng = self.rng
        rin, series, gain = 10 ** rng.uniform(2, 5), 10 ** rng.uniform(1, 4), rng.uniform(1.5, 20)
        off = 1 + rng.choice((-1, 1)) * 10 ** rng.uniform(-11, 0)
        self._add("block", {"gain": gain, "rin": rin, "r_bridge": (gain - 1) * rin * off, "rout": 0.001,
                            "cin": 1e-11, "c_bridge": 10 ** rng.uniform(-13, -9), "couple": 1e-6})
        self._add("ladder", {"arms": [{"series_r": series}]})

    def _trap(self) -> None:
        """A resonance with next to no loss, in series or in shunt."""
        rng = self.rng
        coil, farad, ohm = 10 ** rng.uniform(-7, -3), 10 ** rng.uniform(-12, -9), 10 ** rng.uniform(-9, 1)
        shunt = {"shunt_r": ohm, "shunt_l": coil, "shunt_c": farad, "role": "high"}
        series = {"series_l": coil, "series_c": farad, "role": "high"}
        self._add("ladder", {"arms": [{"series_r": 10 ** rng.uniform(0, 4)}, rng.choice((shunt, series))]})

    def _crossed(self) -> None:
        """Lower corners at or above the upper ones: little or no midband."""
        rng = self.rng
        at = 10 ** rng.uniform(3, 6)
        self._add("block", {"gain": rng.uniform(-20, 20), "rin": 1e4, "poles": [at * 10 ** rng.uniform(-1, 1)],
                            "lower_poles": [at * 10 ** rng.uniform(-1, 1) for _ in range(rng.randint(1, 3))]})

    def _like(self) -> None:
        """Many like poles, some of them apart by next to nothing."""
        rng = self.rng
        at = 10 ** rng.uniform(5, 8)
        poles = [at * (1 + rng.choice((0, 0, 1e-12, 1e-8, 1e-5))) for _ in range(rng.randint(2, 6))]
        self._add("block", {"gain": rng.uniform(1, 20), "rin": 1e4, "poles": poles})

    # -- text -------------------------------------------------------------------------------------------------------

    def text(self) -> str:
        """The file; `places` then tells what stands in every line."""
        lines = ["format = 1"]
        self.places = [(Table("", {}), "format", -1)]

        def put(line: str, table: Table, key: str = "", arm: int = -1) -> None:
            lines.append(line)
            self.places.append((table, key, arm))

        for table in self.tables:
            if not table.rows and table.head != "[load]":
                continue
            put(table.head, table)
            for key, value in table.rows.items():
                if key == "arms" and isinstance(value, list):
                    put("arms = [", table, key)
                    for at, arm in enumerate(value):
                        put(f"  {_literal(arm)},", table, key, at)
                    put("]", table, key)
                else:
                    put(f"{key} = {_literal(value)}", table, key)
        return "\n".join(lines) + "\n"

    def mend(self, problems: Iterable[Problem]) -> bool:
        """Does what each fault asks for; False where nothing could be done."""
        done = False
        for problem in problems:
            if problem.place is None or not 0 < problem.place.line <= len(self.places):
                continue
            table, key, arm = self.places[problem.place.line - 1]
            lacking = re.search(r"has (?:rg and )?no (\w+)$", problem.what)
            if lacking and lacking[1] in table.params and lacking[1] not in table.rows:
                table.rows[lacking[1]] = self.value(table.params[lacking[1]])
            elif key == "arms":
                arms = table.rows.get("arms")
                if isinstance(arms, list):
                    if len(arms) > 1 and 0 <= arm < len(arms):
                        del arms[arm]
                    else:
                        table.rows["arms"] = self.arms()
            elif key in table.rows and key in table.params:
                if table.params[key].required or (self.rng.random() < 0.5 and "without" not in problem.what):
                    table.rows[key] = self.value(table.params[key])
                else:
                    del table.rows[key]
            else:
                continue
            done = True
        return done


def draw(seed: int, number: int, shape: str) -> str:
    """The chain file of a seed and number: one that the reader takes, in all but a few cases."""
    rng = Random(f"{seed}:{number}:{shape}")
    text = ""
    for _ in range(ATTEMPTS):
        draft = Draft(rng, shape)
        draft.whole()
        for _ in range(ROUNDS):
            text = draft.text()
            problems = [p for p in examine(text, "drawn.toml")[1] if p.severity == "fault"]
            if not problems:
                return text
            if not draft.mend(problems):
                break
    return text


def shape_of(number: int) -> str:
    """Where no shape is asked for: half plain, a quarter each of the others."""
    return ("plain", "wide", "plain", "hard")[number % 4]
