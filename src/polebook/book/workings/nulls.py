"""Why a figure is null, in plain words."""

from __future__ import annotations

from polebook.book.workings import null_levels, null_noise, null_pulse
from polebook.book.workings.index import Entry
from polebook.book.workings.sheet import Books
from polebook.chain.suggest import listed
from polebook.circuit.bias import missing

VERSION = "this version does not compute it yet"
_OF_THE_BAND = ("lower_edge_hz", "upper_edge_hz", "peaking_db", "shrinkage", "gain_at_reference", "reference_hz",
                "owns_upper", "owns_lower", "lost_upper_db", "lost_lower_db", "allotted_upper_db", "allotted_lower_db",
                "room", "edge_hz", "lost_db", "left_db")


def why(books: Books, entry: Entry) -> str:
    """One sentence."""
    section, key, row = entry.section, entry.key, entry.row
    if not row:
        return _no_section(books, section)
    if key.startswith("leverage."):
        return _no_leverage(books, key.removeprefix("leverage."))
    if section == "overall" and key in null_pulse.KEYS:
        return null_pulse.why(books, key)
    if section in ("lines", "bridges") and row.get("name") in books.left_out:
        return f"{row['name']} is left out: a wire has gain 1 and nothing else"
    if section == "overall" and key in null_noise.WHOLE:
        return null_noise.whole(books, key, _unjudged(books))
    if key == "noise_share":
        return null_noise.share(books, entry, _unjudged(books))
    if key in _OF_THE_BAND and (found := _no_band(books, section, key)):
        return found
    maker = {"overall": _overall, "lines": _line, "bridges": _bridge, "nodes": _node, "parts": _part, "bias": _bias,
             "targets": _target, "account": _account, "levels": null_levels.level,
             "rails": null_levels.rail}.get(section)
    return maker(books, entry) if maker else "it does not apply here"


def _no_section(books: Books, section: str) -> str:
    if section == "poles":
        return f"the poles of this chain are not resolved: {books.ledger.poles.why}"
    if section == "levels":
        return _unjudged(books).replace("no edges", "no levels")
    return "the zeros of a stage could not be counted" if section == "zeros" else VERSION


def _no_leverage(books: Books, figure: str) -> str:
    if figure == "noise" and (found := null_noise.nothing(books, _unjudged(books))):
        return found
    edge = {"lower_edge": "lower", "upper_edge": "upper"}.get(figure)
    if edge and books.value(f"overall.{edge}_edge_hz") is None:
        return _no_edge(books, edge)
    if edge and all(row["leverage"][figure] is None for row in books.document["parts"]):
        return "the response is level at the edge, so that nothing can be said to move it"
    return "a device that carries no current has an infinite figure, which has no derivative"


def _no_edge(books: Books, end: str) -> str:
    return _unjudged(books) or f"the band has no {end} edge: the response stays within 3 dB at that end"


def _unjudged(books: Books) -> str:
    """Why there are no edges at all; "" where there may be."""
    ledger = books.ledger
    if ledger.unstable:
        return "the chain is unstable, and an unstable chain has no edges"
    if not ledger.judged:
        return "whether the chain is stable could not be told, so edges and what rests on them are left out"
    if not ledger.solution.band.clean:
        return "the chain has no clean midband, so it has no edges"
    return ""


def _no_band(books: Books, section: str, key: str) -> str:
    ledger = books.ledger
    if key in ("peaking_db", "gain_at_reference", "reference_hz"):
        return _unjudged(books) if not ledger.judged else ""
    if section == "account":
        return ""
    ends = {"lower_edge_hz": "lower", "upper_edge_hz": "upper", "shrinkage": "upper", "owns_upper": "upper",
            "owns_lower": "lower"}
    end = ends.get(key)
    return _no_edge(books, end) if end and books.value(f"overall.{end}_edge_hz") is None else ""


def _overall(books: Books, entry: Entry) -> str:
    if entry.key in null_levels.WHOLE:
        return null_levels.whole(books, entry.key, _unjudged(books))
    return {
        "unstable": "the winding of the determinant came to no whole number: values lie too far apart",
        "octc_upper_hz": "the open-circuit time constants have no positive sum",
        "sctc_lower_hz": "no part makes a lower corner",
        "node_upper_hz": "no node has a pole", "shrinkage": "no node has a pole",
        "gain_db": "the gain is beyond what has a logarithm",
    }.get(entry.key, "it does not apply here")


def _line(books: Books, entry: Entry) -> str:
    name, key = entry.row["name"], entry.key
    if key == "transfer_ohm":
        return f"{name} does not hold its input node, so that its gain is told as a voltage gain alone"
    if key == "k":
        return f"nothing bridges {name} from its output back to its input"
    if key == "input_ohm":
        return "a source has no input" if name == "source" else f"{name} draws no current: its input is open"
    if key == "output_ohm":
        return f"no resistance bounds the output of {name}: only a current drives it"
    if key in ("open_gain", "loading"):
        return f"with what follows taken away, nothing bounds the output of {name}: only a current drives it"
    if key in ("owns_upper", "owns_lower"):
        return _no_edge(books, key.removeprefix("owns_"))
    return "it does not apply here"


def _bridge(books: Books, entry: Entry) -> str:
    if entry.key == "k" or entry.row["k"] is None:
        return "no signal stands at the input side of the bridge, so that it has no K"
    if entry.key == "at_output" and entry.row["k"] == 0.0:
        return "no signal stands at the output side of the bridge"
    return "both ends of the bridge move alike, so that nothing of it counts on this side"


def _node(books: Books, entry: Entry) -> str:
    row, key = entry.row, entry.key
    if key == "ohm":
        return "it is the storage of an amplifier's corner: a pole, but no ohm and no farad"
    if key == "farad":
        return "the node has no resistance of its own: " + (
            "it is the storage of an amplifier's corner" if row["ohm"] is None else "something ideal drives it")
    if key == "pole_hz":
        return "no capacitance acts at the node, or it is driven by something ideal"
    if key == "room":
        return _no_room(books, entry)
    if not row["interstage"]:
        return "losses are booked to the nodes between the stages"
    end = "upper" if "upper" in key else "lower"
    if books.value(f"account.{end}.edge_hz") is None:
        return _no_edge(books, end)
    held = "the stage behind it holds the node: what is lost there is booked to the next node that is not held"
    return held if row[f"lost_{end}_db"] is None else "it does not apply here"


def _no_room(books: Books, entry: Entry) -> str:
    if entry.row["pole_hz"] is None:
        return "the node has no pole"
    if books.value("account.upper.edge_hz") is None:
        return _no_edge(books, "upper")
    if entry.row["farad"] is None and entry.row["ohm"] is not None:
        return "something ideal drives the node"
    return "no node between the stages has a pole"


def _part(books: Books, entry: Entry) -> str:
    kind = entry.row["type"]
    if entry.key == "value":
        return "it is infinite: the device carries no current"
    if kind not in ("C", "L", "tau"):
        return "only a capacitance, a coil or the storage of a corner has it"
    if entry.key == "tau_s":
        return "the part sees no resistance, or an open loop, at midband: it is left out of the sums"
    if entry.key.startswith("owns_"):
        return _no_edge(books, entry.key.removeprefix("owns_"))
    return "it does not apply here"


def _bias(books: Books, entry: Entry) -> str:
    stage, key = entry.row["stage"], entry.key
    if books.chain.cards[entry.row["device"]].family == "opamp":
        if key in ("control_v", "output_v"):
            return f"no d.c. path leads to the input of {stage}"
        return "an operational amplifier's own bias is not looked into"
    if key == "dissipation_w":
        return "current or voltage is not known"
    if key == "across_v":
        return f"it does not follow: give vce, vds or vak of {stage}, or what its terminals stand at"
    owner = next((one.name for one in books.chain.stages if one.name in (stage, stage.removesuffix("_upper"))), stage)
    ways = missing(books.solution.circuit.plan, books.chain).get(owner, ())
    return "the resistors and cards of the file do not tell it" + (f"; give {listed(ways, 'or')}" if ways else "")


def _target(books: Books, entry: Entry) -> str:
    return str(entry.row["why"])


def _account(books: Books, entry: Entry) -> str:
    return _no_edge(books, "upper" if ".upper." in entry.name else "lower")
