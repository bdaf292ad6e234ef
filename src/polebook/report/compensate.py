"""The text of `polebook compensate`, from its JSON answer: the ways side by side, the values to fit, and the words."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from polebook.report import compensate_words as words
from polebook.report import figures as show
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, Row, table

HEADS = {"today": "today", "without": "without\na coil", "across": "across", "away": "across,\nzero away",
         "left": "across,\nzero left", "ground": "to\nground", "flat": "flat", "delay": "flat\ndelay", "wide": "widest"}
Of = Callable[[Entry], str]


def compensate_text(answer: Document, look: Look) -> str:
    """Every way of one stage, as solved and as one can buy it, and what is to be said of them."""
    one = answer["files"][0]
    coil = "coil" in one
    columns = _coil_columns(one) if coil else _way_columns(one)
    rows = _coil_rows(one) if coil else _way_rows(one)
    if any(option["fit"] for option in one["options"]):
        rows += [("", _nothing), (f"to fit, {' '.join(one['series'].values())}", _nothing), *_fit_rows(one)]
    lines = [" " + look.paint(look.text(one["file"]), "head"), *paragraph(unparted(words.head(one)), look), ""]
    lines += [*_table(columns, rows, look), ""]
    for sentence in words.of_coils(one) if coil else words.of_ways(one):
        lines += paragraph(unparted(sentence), look, hang=3)
    for option in one["options"]:
        if option["fit"] and option["name"] == one["taken"]:
            for caution in option["fit"]["cautions"]:
                lines += paragraph(f"caution: {caution}", look, "warn", hang=3)
    return "\n".join([*lines, "", *_ending(one, look)]) + "\n"


def _nothing(_: Entry) -> str:
    return ""


def _way_columns(one: Entry) -> list[tuple[str, Entry]]:
    """(name, what its cells are of): today, then every way."""
    return [("today", _today(one)), *((option["name"], option) for option in one["options"])]


def _today(one: Entry) -> Entry:
    """Today's figures as a way's."""
    return {**one["today"], "figures": one["today"], "fit": {"figures": one["today"], "keys": [], **one["today"]}}


def _way_rows(one: Entry) -> list[tuple[str, Of]]:
    """A row a key, what its capacitor sees and brings, and the figures."""
    return [
        *((f"{_key(path)}, {unit}", _value_of(path)) for path, unit in _paths(one)),
        ("it sees, Ω", lambda option: show.eng(option["sees_ohm"])),
        ("brings zero, Hz", _zero),
        ("first pole, Hz", _pole("first_pole")),
        ("second pole, Hz", _pole("second_pole")),
        ("  its nodes alone", _pole("split_pole")),
        *_common(one),
    ]


def _coil_columns(one: Entry) -> list[tuple[str, Entry]]:
    """Today where there is a coil, none, then every coil."""
    bare = {"figures": one["without"], "values": {}, "fit": None}
    columns: list[tuple[str, Entry]] = [("today", _today(one))] if one["today"]["values"] else []
    return [*columns, ("without", bare), *((option["name"], option) for option in one["options"])]


def _coil_rows(one: Entry) -> list[tuple[str, Of]]:
    """The coil and the edge, each beside the published factor, and the figures."""
    bare = one["without"]["upper_edge_hz"]

    def factor(option: Entry) -> str:
        edge = option["figures"] and option["figures"]["upper_edge_hz"]
        return show.ratio(edge / bare if edge and bare else None)

    def published(key: str) -> Of:
        return lambda option: show.ratio(option[key]) if key in option else ""

    pole, edge, *rest = [("first pole, Hz", _pole("first_pole")), *_common(one)]
    return [
        (f"{_key(one['coil'])}, H", _value_of(one["coil"])),
        ("m = L/(R·τ)", lambda option: show.ratio(_m(one, option))),
        ("  published", published("published_m")),
        pole,
        edge,
        ("  over none", factor),
        ("  published", published("published_factor")),
        *rest,
    ]


def _m(one: Entry, option: Entry) -> float | None:
    henry = option["values"].get(one["coil"])
    return float(henry / (one["ohm"] * one["tau_s"])) if henry else None


def _common(one: Entry) -> list[tuple[str, Of]]:
    """Rows of the response, and of the loop where one is given."""
    rows: list[tuple[str, Of]] = [
        ("upper edge, Hz", _figure("upper_edge_hz", show.eng)),
        ("peaking, dB", _figure("peaking_db", show.decibel)),
        ("overshoot, %", _figure("overshoot_percent", words.per_cent)),
        ("rise, s", _figure("rise_time_s", show.eng)),
    ]
    if one["loop"]:
        rows += [("loop is 1 at, Hz", _figure("crossing_hz", show.eng)),
                 ("phase margin, °", _figure("phase_margin_deg", words.degrees))]
    return rows


def _fit_rows(one: Entry) -> list[tuple[str, Of]]:
    """The same with the nearest values that one can buy, and the targets then."""
    def fitted(of: Of) -> Of:
        return lambda option: of({"figures": option["fit"]["figures"]}) if option["fit"] else ""

    used = {key["path"] for option in one["options"] if option["fit"] for key in option["fit"]["keys"]}
    rows = [(_key(path), _text_of(path)) for path, _ in _paths(one) if path in used]
    rows += [(name, fitted(of)) for name, of in _common(one) if not name.startswith("rise")]
    if one["today"]["targets"]:
        rows.append(("targets met", lambda option: _met(option["fit"]["targets"]) if option["fit"] else ""))
    return rows


def _met(targets: Sequence[Entry]) -> str:
    return f"{sum(target['met'] is True for target in targets)} of {len(targets)}"


def _table(columns: Sequence[tuple[str, Entry]], rows: Sequence[tuple[str, Of]], look: Look) -> list[str]:
    heads = [Column("", right=False), *(Column(HEADS[name]) for name, _ in columns)]
    body: list[Row] = [[Cell(name, "dim" if name.startswith("to fit") else ""),
                        *(Cell(of(option)) for _, option in columns)] for name, of in rows]
    return table(heads, body, look)


def _paths(one: Entry) -> list[tuple[str, str]]:
    """The keys that the ways set, each with its unit."""
    if "coil" in one:
        return [(one["coil"], "H")]
    found = [(one["across"], "F"), (one["resistor"], "Ω"), (one["ground"], "F")]
    return [(path, unit) for path, unit in found if path]


def _key(path: str) -> str:
    return path.rpartition(".")[2]


def _value_of(path: str) -> Of:
    return lambda option: show.eng(option["values"].get(path))


def _text_of(path: str) -> Of:
    """As the file would have it; "" where the way leaves the key alone."""
    def text(option: Entry) -> str:
        keys = option["fit"]["keys"] if option["fit"] else ()
        return next((key["text"] for key in keys if key["path"] == path), "")
    return text


def _figure(key: str, told: Callable[[float | None], str]) -> Of:
    return lambda option: told(option["figures"][key] if option["figures"] else None)


def _pole(key: str) -> Of:
    def text(option: Entry) -> str:
        pole = option["figures"] and option["figures"][key]
        if not pole:
            return show.NONE
        return show.eng(pole["hz"]) + (" pair" if pole["im"] else "")
    return text


def _zero(option: Entry) -> str:
    """The nearest zero that a way brings, and where it lies."""
    if not option["values"]:
        return show.NONE
    zeros = option["zeros_brought"]
    if not zeros:
        return "none"
    side = "pair" if zeros[0]["im"] else "right" if zeros[0]["re"] > 0 else "left"
    return f"{show.eng(zeros[0]['hz'])} {side}"


def _ending(one: Entry, look: Look) -> list[str]:
    """Stopped, written, or what would write it."""
    lines = []
    if one["stopped"]:
        lines += paragraph(f"stopped after {len(one['options'])} of {one['total']} ways", look, "warn")
    if one["written"]:
        return [*lines, *paragraph(f"{one['taken']} written into {one['file']}", look, "good")]
    names = [option["name"] for option in one["options"] if option["fit"]]
    if one["taken"]:
        return [*lines, *paragraph("the file has these values already", look)] if one["same"] else \
            [*lines, *paragraph(f"the file is as it was; --write puts {one['taken']} into it", look, "dim")]
    if names:
        text = f"the file is as it was; --take {names[0]} --write fits that way ({', '.join(names)})"
        return [*lines, *paragraph(text, look, "dim")]
    return [*lines, *paragraph("the file is as it was", look, "dim")]
