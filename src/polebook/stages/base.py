"""What a stage kind is, and the names that each family of device gives to the same part."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from types import MappingProxyType

from polebook.param import Param

GROUP: Mapping[str, str] = MappingProxyType({"bjt": "bjt", "mosfet": "fet", "jfet": "fet", "triode": "triode"})
"""Family of card -> the set of key names that its stages use."""

TERMINALS: Mapping[str, Mapping[str, str]] = MappingProxyType({
    "bjt": {"control": "base", "output": "collector", "lower": "emitter"},
    "fet": {"control": "gate", "output": "drain", "lower": "source"},
    "triode": {"control": "grid", "output": "anode", "lower": "cathode"},
})

RAILS = ("positive", "ground", "negative")

COMMON: tuple[Param, ...] = (
    Param("name", "text", "name of the stage, unique in its chain: letters, digits, _ and -", required=True),
    Param("kind", "choice", "what the stage is", required=True),
    Param("note", "text", "free text"),
    Param("left_out", "flag", "true: kept in the file, its input and output one node", default="false"),
    Param("couple", "capacitance", "series capacitor at the stage's input", role="low"),
    Param("stray", "capacitance", "wiring capacitance, stage output to ground", role="high", sign="nonnegative"),
    Param("c_load", "capacitance", "capacitor fitted from the stage output to ground", role="high", sign="nonnegative"),
    Param("allot", "decibel", "dB of the upper-edge budget allotted to the node at its output", sign="nonnegative"),
    Param("free", "keys", "keys of this stage that planning may change"),
    Param("tolerance", "table", "tolerances of this stage's own parts: { key = share }"),
)
"""Keys that every kind has."""


@dataclass(frozen=True, slots=True)
class Slot:
    """A part of the three-terminal stages under its general name.

    names   its keys for bjt, fet, triode; "" where there is none

    In `about`, {control}, {output}, {lower} stand for the terminals of the family.
    """

    names: tuple[str, str, str]
    dimension: str
    about: str
    role: str = ""
    sign: str = "positive"
    choices: tuple[str, ...] = ()


def _same(key: str) -> tuple[str, str, str]:
    return (key, key, key)


SLOTS: Mapping[str, Slot] = MappingProxyType({
    "current": Slot(("ic", "id", "ia"), "current", "quiescent current (absent = solved from resistors and card)"),
    "across": Slot(("vce", "vds", "vak"), "voltage", "quiescent voltage across the device (absent = solved)"),
    "r_out": Slot(("rc", "rd", "ra"), "resistance", "resistor from the {output} to its rail (absent = current source)"),
    "l_peak": Slot(_same("l_peak"), "inductance", "inductor in series with the {output} resistor, on its rail side",
                   role="high", sign="nonnegative"),
    "r_low": Slot(("re", "rs", "rk"), "resistance", "{lower} resistor, not bypassed"),
    "r_low_bypassed": Slot(("re_bypassed", "rs_bypassed", "rk_bypassed"), "resistance",
                           "{lower} resistor, bypassed, in series below the first"),
    "c_bypass": Slot(("ce", "cs", "ck"), "capacitance", "capacitor across the bypassed {lower} resistor", role="low"),
    "c_peak": Slot(_same("c_peak"), "capacitance", "small capacitor across the unbypassed {lower} resistor",
                   role="high", sign="nonnegative"),
    "bias_top": Slot(("rb1", "rg1", ""), "resistance", "bias resistor from the {control} side to the positive rail"),
    "bias_bottom": Slot(("rb2", "rg2", ""), "resistance", "bias resistor from the {control} side to ground"),
    "bias_single": Slot(("", "rg", "rg"), "resistance", "the only bias resistor, from the {control} side to ground"),
    "c_control": Slot(("cb", "cg", "cg"), "capacitance", "bypass capacitor of the {control}, across its bias resistors",
                      role="low"),
    "stopper": Slot(_same("stopper"), "resistance", "resistor in series with the {control}", sign="nonnegative"),
    "rf": Slot(_same("rf"), "resistance", "bridge resistor, {output} to {control}"),
    "c_rf": Slot(_same("c_rf"), "capacitance", "capacitor in series with rf, which then carries no d.c.", role="low"),
    "c_comp": Slot(_same("c_comp"), "capacitance", "bridge capacitor fitted, {output} to {control}",
                   role="high", sign="nonnegative"),
    "r_comp": Slot(_same("r_comp"), "resistance", "resistor in series with c_comp, on the {control}'s side",
                   sign="nonnegative"),
    "output_to": Slot(_same("output_to"), "choice",
                      "rail of the {output} side (default positive; ground for pnp and p-channel)", choices=RAILS),
    "lower_to": Slot(_same("lower_to"), "choice",
                     "rail of the {lower} side (default ground; positive for pnp and p-channel)", choices=RAILS),
})
"""General name of a part -> its keys, dimension and purpose."""

_COLUMN = {"bjt": 0, "fet": 1, "triode": 2}


def slot_key(slot: str, family: str) -> str:
    """Key that a stage with a card of `family` writes for a general part; "" where the family has none."""
    return SLOTS[slot].names[_COLUMN[GROUP[family]]]


def slot_of(key: str) -> str:
    """General name of the part behind a key of any family; "" where there is none."""
    return next((name for name, slot in SLOTS.items() if key in slot.names), "")


def device_param(what: str = "device") -> Param:
    """The key that names the stage's card."""
    return Param("device", "text", f"card of the {what}: a [device.NAME] table", required=True)


def slot_params(slots: tuple[str, ...], family: str, zero: frozenset[str] = frozenset()) -> tuple[Param, ...]:
    """Parameter rows of general parts as `family` names them; those in `zero` may be 0 (the part is not there)."""
    group = GROUP[family]
    rows = []
    for name in slots:
        slot = SLOTS[name]
        key = slot.names[_COLUMN[group]]
        if key:
            sign = "nonnegative" if name in zero else slot.sign
            about = slot.about.format(**TERMINALS[group])
            rows.append(Param(key, slot.dimension, about, slot.role, sign, choices=slot.choices))
    return tuple(rows)


@dataclass(frozen=True, slots=True)
class Kind:
    """One stage kind.

    topology  inverting, follower, common_control, cascode, noninverting, inverting_opamp, transimpedance, block, ladder
    families  card families that `device` may be of; () where the kind takes no card
    params    its keys beyond COMMON, of every family it takes
    own       family -> its keys with a device of that family
    """

    name: str
    topology: str
    families: tuple[str, ...]
    params: tuple[Param, ...]
    about: str
    own: Mapping[str, tuple[Param, ...]] = field(default_factory=dict)

    def params_for(self, family: str = "") -> tuple[Param, ...]:
        """Keys beyond COMMON with a device of `family`; those of every family where it is not known."""
        return self.own.get(family, self.params)

    def keys(self, family: str = "") -> Mapping[str, Param]:
        """Every key the stage may carry, COMMON included."""
        return {p.key: p for p in (*COMMON, *self.params_for(family))}


def device_kind(name: str, topology: str, families: tuple[str, ...], about: str, slots: tuple[str, ...],
                zero: frozenset[str] = frozenset(), head: tuple[Param, ...] = ()) -> Kind:
    """A kind built on three-terminal cards: `head` and the general parts, named as each family names them."""
    head = head or (device_param(),)
    own = {family: (*head, *slot_params(slots, family, zero)) for family in families}
    union: dict[str, Param] = {}
    for family, rows in own.items():
        for p in rows:
            said = union.get(p.key)
            union[p.key] = p if said is None or said.about == p.about else _of_either(said, families, family)
    return Kind(name, topology, families, tuple(union.values()), about, MappingProxyType(own))


def _of_either(param: Param, families: tuple[str, ...], family: str) -> Param:
    """A row that several groups of families share, with what each of them calls the terminals."""
    groups = dict.fromkeys(GROUP[one] for one in families[:families.index(family) + 1])
    words = {terminal: " or ".join(TERMINALS[group][terminal] for group in groups) for terminal in TERMINALS["bjt"]}
    return replace(param, about=SLOTS[slot_of(param.key)].about.format(**words))
