"""What is to be said of compensations and coils, in sentences with their figures."""

from __future__ import annotations

from collections.abc import Iterator
from math import pi
from typing import Any

from polebook.report import figures as show
from polebook.report.document import Entry

WANTED = {"upper_edge_hz": "upper edge", "dominant_pole_hz": "dominant pole"}
PLACES = {2: "second", 3: "third", 4: "fourth", 5: "fifth", 6: "sixth", 7: "seventh", 8: "eighth"}
FAR = 1.02  # a pole that lies further out by less stays where it is
SHOWS_DB = 0.005  # of peaking that is told
ONE_NODE = 0.95  # of all nodes' time constants at the coil's own: then the published factors are its


def per_cent(value: float | None) -> str:
    """A figure in % without its unit."""
    return show.NONE if value is None else f"{round(value, 1) + 0.0:.1f}"


def degrees(value: float | None) -> str:
    """Whole degrees without their unit."""
    return show.NONE if value is None else f"{round(value) + 0:d}"


def head(one: Entry) -> str:
    """What is asked."""
    kind = f"{one['stage']}, {_a(one['kind'])}"
    if "coil" in one:
        return f"{kind}: {_key(one['coil'])} for {one['resistor']} {show.eng(one['ohm'], 'Ω')}"
    wanted = one["wanted"]
    today = one["today"]
    pole = today["first_pole"]
    now = today["upper_edge_hz"] if wanted["figure"] == "upper_edge_hz" else pole and pole["hz"]
    told = f"today {show.eng(now, 'Hz')}" if now else "today it has none"
    return f"{kind}: {WANTED[wanted['figure']]} wanted at {show.eng(wanted['hz'], 'Hz')}, {told}"


def _a(kind: str) -> str:
    return f"{'an' if kind[0] in 'aeiou' else 'a'} {kind}"


def _key(path: str) -> str:
    return path.rpartition(".")[2]


def of_ways(one: Entry) -> Iterator[str]:
    """How the values come about, and what to mind of each way."""
    ways = {option["name"]: option for option in one["options"]}
    across, ground = ways.get("across"), ways.get("ground")
    for each, path in ((across, one["across"]), (ground, one["ground"])):
        if each and each["solved"]:
            yield _working(one, each, path)
    if one["ratio"] is not None and across and ground:
        yield _ratio(one, across, ground)
    if across and across["solved"]:
        yield _zero(one, across)
    yield from _resistors(one, ways)
    yield from _stays(one, ways)
    yield from (f"{way(option['name'])}: {option['why']}." for option in _unreached(one))
    yield from _loop(one, [across, ground])


def _working(one: Entry, option: Entry, path: str) -> str:
    """The resistance that the capacitor sees, and what it has of the time that one pole would take."""
    farad, hz = option["solved"][path], one["wanted"]["hz"]
    told = f"{_key(path)} {show.eng(farad, 'F')} sees {show.eng(option['sees_ohm'], 'Ω')} at midband"
    if option["k"] is not None:
        told += f" (K {show.ratio(option['k'])})"
    whole = show.eng(1.0 / (2.0 * pi * hz), "s")
    return f"{told}: {show.eng(option['tau_s'], 's')}, where one pole at {show.eng(hz, 'Hz')} has 1/(2·pi·f) = " \
           f"{whole} in all."


def _ratio(one: Entry, across: Entry, ground: Entry) -> str:
    """How much larger the one to ground is, and what becomes of the second pole."""
    big, small = _key(one["ground"]), _key(one["across"])
    ohms = across["sees_ohm"] / ground["sees_ohm"] if across["sees_ohm"] and ground["sees_ohm"] else None
    told = f"{big} is {show.eng(one['ratio'])} times {small}"
    told += f", which sees {show.eng(ohms)} times its resistance." if ohms else "."
    told += " Common practice takes the capacitor across, where it is far smaller and moves the second pole out"
    seconds = [option["figures"]["second_pole"] for option in (across, ground)]
    if not all(seconds):
        return f"{told}."
    first, second = ([show.eng(pole["hz"], "Hz"), f" ({pole['stage']})" if pole["stage"] else ""] for pole in seconds)
    here = seconds[0]["hz"] / seconds[1]["hz"]
    moved = "further out than" if here > FAR else "nearer than" if here * FAR < 1.0 else "no further out than"
    told += f"; here that of the chain lies at {''.join(first)}, {moved} with the one to ground, {''.join(second)}."
    alone = [option["figures"]["split_pole"] for option in (across, ground)]
    if all(alone):
        told += f" The stage's own two nodes alone, all else as resistances, would have it at " \
                f"{show.eng(alone[0]['hz'], 'Hz')} against {show.eng(alone[1]['hz'], 'Hz')}."
    return told


def _zero(one: Entry, across: Entry) -> str:
    """What zero the capacitor across brings, and that one to ground brings none."""
    came, went = across["zeros_brought"], across["zeros_taken"]
    if not came:
        return f"{_key(one['across'])} brings no zero, nor does a capacitor to ground."
    nearest = came[0]
    right = nearest["re"] > 0 and not nearest["im"]
    side = "in the right half-plane" if right else "in the left half-plane" if nearest["re"] < 0 else "on the axis"
    told = f"{_key(one['across'])} brings a zero {side} at {show.eng(nearest['hz'], 'Hz')}"
    if went:
        told += f" (without it {show.eng(went[0]['hz'], 'Hz')})"
    if right:
        told += ": it turns the phase back as a pole does, while it lifts the size"
    return f"{told}. A capacitor from the output to ground brings none: it lies outside the way through the stage."


def _resistors(one: Entry, ways: dict[str, Any]) -> Iterator[str]:
    """The resistor in series, for the zero away and for the zero on the second pole."""
    away, left = ways.get("away"), ways.get("left")
    if away and away["solved"]:
        ohm = show.eng(away["solved"][one["resistor"]], "Ω")
        gm = f" (1/gm of the device alone is {show.eng(one['gm_ohm'], 'Ω')})" if one["gm_ohm"] else ""
        came = away["zeros_brought"]
        rest = "no zero of it is left" if not came else \
            "what is left of it lies at " + " and ".join(_placed(zero) for zero in came[:2])
        yield f"zero away: {_key(one['resistor'])} {ohm} takes from the sum of 1/z what the capacitor adds{gm}; {rest}."
    if left and left["solved"]:
        ohm = show.eng(left["solved"][one["resistor"]], "Ω")
        pole = left["zero_on"]
        place = PLACES.get(pole["place"], "nearest")
        maker = f" ({pole['stage']})" if pole["stage"] else ""
        why = "" if pole["place"] == 2 else "; it can't be laid on a nearer one"
        yield f"zero left: {ohm} puts it onto the {place} pole, {show.eng(pole['hz'], 'Hz')}{maker}: the two cancel " \
              f"as far as the parts hold their values{why}."


def _placed(zero: Entry) -> str:
    side = "a pair" if zero["im"] else "right" if zero["re"] > 0 else "left"
    return f"{show.eng(zero['hz'], 'Hz')} ({side})"


def _stays(one: Entry, ways: dict[str, Any]) -> Iterator[str]:
    """What the file has beside, which every way leaves as it is."""
    present = one["today"]["values"]
    kept = [_key(path) for name, paths in (("across", (one["ground"], one["resistor"])),
                                           ("ground", (one["across"], one["resistor"])))
            if ways.get(name) and ways[name]["solved"] for path in paths if path in present]
    if kept:
        told = " and ".join(dict.fromkeys(kept))
        yield f"{told}, which the file has, {'stay' if ' and ' in told else 'stays'} where a way does not set it."


def _unreached(one: Entry) -> list[Entry]:
    """The ways that there are not; a reason is told once."""
    seen = {option["why"]: option for option in reversed(one["options"]) if option["why"]}
    return list(reversed(seen.values()))


def way(name: str) -> str:
    return {"across": "across", "away": "zero away", "left": "zero left", "ground": "to ground", "flat": "flat",
            "delay": "flat delay", "wide": "widest"}[name]


def _loop(one: Entry, ways: list[Any]) -> Iterator[str]:
    """What the loop is, and where it does not hold."""
    loop = one["loop"]
    if not loop:
        return
    beta = show.eng(loop["beta"], "S") if loop["unit"] else f"{loop['beta']:.4g}"
    gain = f"{show.eng(loop['gain'])} ({show.decibel(loop['gain_db'], 'dB')})"
    yield f"Loop: T = beta·H of the whole chain, beta {beta}, {gain} at midband and negative there. The margin is " \
          "180° less the phase that H has turned from midband to where T is 1, above the band."
    shown = [option["figures"] for option in ways if option and option["figures"]] or [one["today"]]
    missing = dict.fromkeys(each["loop_why"] for each in [*shown, one["today"]] if each["loop_why"])
    if missing:
        yield f"Where no margin stands, {', or '.join(missing)}."
    low = min((each for each in shown if each["lower_margin_deg"] is not None),
              key=lambda each: float(each["lower_margin_deg"]), default=None)
    if low and low["lower_margin_deg"] <= 0.0:
        yield f"Below the band T is 1 once more, at {show.eng(low['lower_crossing_hz'], 'Hz')}, with a margin of " \
              f"{degrees(low['lower_margin_deg'])}°: closed, this loop oscillates there, whatever stands here."


def of_coils(one: Entry) -> Iterator[str]:
    """How m is meant, what stands beside it in print, and what to mind."""
    tau, share = show.eng(one["tau_s"], "s"), show.about(one["node_share"])
    yield f"R is {one['resistor']}, τ = {tau} the time constant of {one['node']} without the coil; published for R, " \
          f"L and C alone ({one['published_source']})."
    if one["node_share"] < ONE_NODE:
        yield f"{one['node']} has {share} of the sum of all nodes' time constants. The others fall too, so the coil " \
              "for the whole chain differs from that for the node alone."
    flat = next((option for option in one["options"] if option["name"] == "flat" and option["figures"]), None)
    if flat and flat["figures"]["peaking_db"] > SHOWS_DB:
        rises = show.decibel(flat["figures"]["peaking_db"], "dB")
        yield f"Flat in the middle of the band, the response still rises by {rises} further out: the coil makes up " \
              "for what other nodes lose."
    yield "flat: the second derivative of |H|² at the middle of the band is 0; flat delay: that of the group delay; " \
          "widest: more coil and less both lower the edge. Couplings and bypasses shorted for the first two."
    yield from (f"{way(option['name'])}: {option['why']}." for option in _unreached(one))
    yield from _loop(one, [option for option in one["options"] if option["figures"]])
