"""A new stage of every kind, biased for its rail, as the lines of a chain file."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from polebook.chain import start_bias as bias
from polebook.chain import start_cards
from polebook.chain.start_bias import Point, Row, farad, ohm
from polebook.stages.base import slot_key
from polebook.stages.registry import KINDS

FAMILY: Mapping[str, str] = {
    name: next((family for family in ("bjt", "jfet", "triode", "opamp") if family in kind.families), "")
    for name, kind in KINDS.items()
}
"""Kind -> the family of card that a new stage of it takes unless another is asked for; "" for none."""

LETTER = {"bjt": "Q", "jfet": "Q", "mosfet": "Q", "triode": "V", "opamp": "U"}
"""Family -> the letter that names of its stages begin with; B for a block, L for a ladder."""

# kinds whose output stands near half the rail, so that a grid can be tied straight to it
_LIFTING = frozenset(
    name for name, kind in KINDS.items()
    if kind.topology in ("inverting", "common_control", "cascode") or name in ("emitter-follower", "source-follower")
)


@dataclass(frozen=True, slots=True)
class Site:
    """Where the stage comes: rails in V, the kind of the stage before it ("" for none), ohms of a current source."""

    rail: float
    negative: float = 0.0
    after: str = ""


def stage_block(kind: str, rail: float, name: str, cards: Mapping[str, str], negative: float = 0.0,
                after: str = "", family: str = "") -> str:
    """The table [[stage]] of a new stage: sensible values of E24 and E6, with comments.

    kind      a stage kind (KeyError for none)
    rail      positive rail in V, 3 and more;  negative  the negative one, not above 0
    cards     family -> name of the card to use; the stage counts on figures like those of `start_cards`
    after     kind of the stage before, "" where this is the first
    family    of the device where the kind takes several; the kind's usual one by default
    """
    family = family or FAMILY[kind]
    head: list[Row] = [("name", f'"{name}"', ""), ("kind", f'"{kind}"', "")]
    if family:
        head.append(("device", f'"{cards.get(family, start_cards.NAMES[family])}"', ""))
    rows = _MAKERS[KINDS[kind].topology](family, Site(rail, negative, after))
    return start_cards.table("[[stage]]", head + rows)


def _key(slot: str, family: str) -> str:
    return slot_key(slot, family)


def _inverting(family: str, site: Site) -> list[Row]:
    point = bias.grounded(family, site.rail)
    rows = _control(family, point, site.rail)
    rows.append((_key("r_out", family), ohm(bias.output_ohm(point, site.rail)), _current(point)))
    return rows + _lower(family, point)


def _control(family: str, point: Point, rail: float, couple: bool = True) -> list[Row]:
    """Coupling and bias: a divider, or one resistor to ground where the lower resistor makes the bias."""
    if family in ("bjt", "mosfet"):
        rows = bias.divider(family, point, rail)
        seen = bias.divider_ohm(family, point, rail) / (2 if family == "bjt" else 1)
    else:
        rows, seen = [("rg", '"1M"', "")], 1e6
    return [("couple", farad(seen), ""), *rows] if couple else rows


def _lower(family: str, point: Point) -> list[Row]:
    """The lower resistors; a bipolar stage leaves a tenth unbypassed, which sets its gain."""
    total = point.low / point.amps
    bypassed, bypass = _key("r_low_bypassed", family), _key("c_bypass", family)
    if family == "bjt":
        re = total / 10
        return [("re", ohm(re), "sets the gain"), (bypassed, ohm(total - re), ""),
                (bypass, farad(re + 0.026 / point.amps), "")]
    return [(bypassed, ohm(total), "makes the bias" if family != "mosfet" else ""), (bypass, farad(total / 2), "")]


def _follower(family: str, site: Site) -> list[Row]:
    if family == "triode":
        return _cathode_follower(site)
    point = bias.follower(family, site.rail)
    low = _key("r_low", family)
    seen = bias.divider_ohm(family, point, site.rail)
    stopper = 100.0 if family != "bjt" else 220.0 if site.rail <= start_cards.HIGH_V else 470.0
    return [
        ("couple", farad(seen), ""),
        *bias.divider(family, point, site.rail),
        ("stopper", ohm(stopper), "keeps it quiet into capacitance"),
        (low, ohm(point.low / point.amps), _current(point)),
    ]


def _cathode_follower(site: Site) -> list[Row]:
    """Straight on the output ahead where that stands high, for only so its grid is lifted; else the grid at ground."""
    if site.after in _LIFTING:
        point = bias.valve(0.48 * site.rail, 0.4)
        return [("stopper", '"1k"', "no couple: the output ahead sets the grid's voltage"),
                ("rk", ohm(0.52 * site.rail / point.amps), _current(point))]
    point = bias.follower("triode", site.rail)
    rows: list[Row] = [("couple", farad(1e6), ""), ("rg", '"1M"', ""), ("stopper", '"1k"', "")]
    if site.negative < 0:
        return [*rows, ("rk", ohm((point.low - site.negative) / point.amps), _current(point)),
                ("lower_to", '"negative"', "")]
    small = "small swing; straight on a collector, drain or anode it has more"
    return [*rows, ("rk", ohm(point.low / point.amps), small)]


def _common_control(family: str, site: Site) -> list[Row]:
    point = bias.grounded(family, site.rail)
    low = point.low / point.amps
    rows: list[Row] = [("couple", farad(_emitter_ohm(family, point)), ""), (_key("r_low", family), ohm(low), "")]
    if family in ("bjt", "mosfet"):
        seen = bias.divider_ohm(family, point, site.rail)
        hold = _key("c_control", family)
        what = "base" if family == "bjt" else "gate"
        rows += [*bias.divider(family, point, site.rail), (hold, farad(seen), f"holds the {what} still")]
    rows.append((_key("r_out", family), ohm(bias.output_ohm(point, site.rail)), _current(point)))
    return rows


def _emitter_ohm(family: str, point: Point) -> float:
    """About what a coupling into the lower terminal sees."""
    return 0.026 / point.amps + 50 if family == "bjt" else 150.0


def _cascode(family: str, site: Site) -> list[Row]:
    point, rail = bias.grounded(family, site.rail), site.rail
    across = 0.22 * rail
    rows = _control(family, point, rail)
    rows.append((_key("across", family), f'"{across:.3g}"',
                 f"of the lower device; the upper {'base' if family == 'bjt' else 'gate'} is held to make it so"))
    rows.append((_key("r_out", family), ohm(bias.output_ohm(point, rail, 0.5)), _current(point)))
    return rows + _lower(family, point)


def _current(point: Point) -> str:
    return f"for {point.amps * 1e3:.2g} mA"


_R_OUT: Row = ("r_out", '"100R"', "keeps capacitance off the amplifier")


def _noninverting(family: str, site: Site) -> list[Row]:
    return [
        ("couple", farad(100e3), ""),
        ("r_bias", '"100k"', "to the middle of the supply, which is ground for the signal"),
        ("rf", '"9k1"', ""),
        ("rg", '"1k"', "gain 1 + rf/rg"),
        ("c_rg", farad(1e3), "gain one at d.c."),
        _R_OUT,
    ]


def _inverting_opamp(family: str, site: Site) -> list[Row]:
    return [("couple", farad(10e3), ""), ("rg", '"10k"', "the input resistance"), ("rf", '"100k"', "gain -rf/rg"),
            _R_OUT]


def _transimpedance(family: str, site: Site) -> list[Row]:
    if not site.after:
        return [("rf", '"100k"', "volts for an ampere"), ("cf", '"4p7"', "keeps the step free of ringing"), _R_OUT]
    return [("couple", '"100u"', "sees only the resistance of what drives it"),
            ("rf", '"10k"', "volts for an ampere"), ("cf", '"10p"', ""), _R_OUT]


def _block(family: str, site: Site) -> list[Row]:
    return [
        ("couple", farad(10e3), ""),
        ("gain", "10", "all of it from the data sheet of yours"),
        ("rin", '"10k"', ""),
        ("cin", '"5p"', ""),
        ("rout", '"50R"', ""),
        ("poles", '["20M"]', ""),
    ]


def _ladder(family: str, site: Site) -> list[Row]:
    couple: list[Row] = [("couple", farad(2e3), "")] if site.after else []
    return [*couple, ("arms", '[{ series_r = "1k" }, { shunt_r = "1k" }]', "a pad; from input to output")]


_MAKERS: Mapping[str, Callable[[str, Site], list[Row]]] = {
    "inverting": _inverting,
    "follower": _follower,
    "common_control": _common_control,
    "cascode": _cascode,
    "noninverting": _noninverting,
    "inverting_opamp": _inverting_opamp,
    "transimpedance": _transimpedance,
    "block": _block,
    "ladder": _ladder,
}
