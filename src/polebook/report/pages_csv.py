"""The pages of `polebook show` as CSV: the tables of a page after one another, a blank line between."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from polebook.report.csvout import Value, csv_text, titled
from polebook.report.document import Document, Entry, entries, finite, part_name
from polebook.report.figures import UNIT_OF_TYPE
from polebook.report.noise import ranked
from polebook.report.pages import LEDGER
from polebook.report.times import alone, constants, seen

Table = Callable[[Document], str]
Columns = Sequence[tuple[str, str, str]]  # heading, unit, key

_LINES: Columns = (
    ("line", "", "name"), ("kind", "", "kind"), ("gain", "", "gain"), ("gain", "dB", "gain_db"),
    ("open gain", "", "open_gain"), ("loading", "1", "loading"), ("K", "", "k"), ("input", "Ω", "input_ohm"),
    ("output", "Ω", "output_ohm"), ("transfer", "Ω", "transfer_ohm"), ("owns of upper", "1", "owns_upper"),
    ("owns of lower", "1", "owns_lower"), ("noise share", "1", "noise_share"),
)
_NODES: Columns = (
    ("node", "", "name"), ("after", "", "stage"), ("interstage", "", "interstage"), ("R", "Ω", "ohm"),
    ("C", "F", "farad"), ("pole", "Hz", "pole_hz"), ("room", "1", "room"), ("lost upper", "dB", "lost_upper_db"),
    ("allotted upper", "dB", "allotted_upper_db"), ("lost lower", "dB", "lost_lower_db"),
    ("allotted lower", "dB", "allotted_lower_db"),
)
_TARGETS: Columns = (
    ("target", "", "name"), ("want", "SI", "want"), ("got", "SI", "got"), ("margin", "1", "margin"),
    ("met", "", "met"), ("why", "", "why"),
)
_BIAS: Columns = (
    ("stage", "", "stage"), ("device", "", "device"), ("current", "A", "current_a"), ("across", "V", "across_v"),
    ("control", "V", "control_v"), ("lower", "V", "lower_v"), ("output", "V", "output_v"),
    ("dissipation", "W", "dissipation_w"), ("from", "", "from"),
)
_RAILS: Columns = (("rail", "", "rail"), ("current", "A", "current_a"))
_LEVELS: Columns = (
    ("node", "", "node"), ("smallest peak", "V", "smallest_v"), ("largest peak", "V", "largest_v"),
    ("noise rms", "V", "noise_v"), ("clip peak", "V", "clip_v"), ("headroom", "dB", "headroom_db"),
    ("clips by", "", "clips_by"),
)
_ROOTS: Columns = (
    ("frequency", "Hz", "hz"), ("Q", "", "q"), ("re", "rad/s", "re"), ("im", "rad/s", "im"), ("stage", "", "stage"),
)
_AT: Columns = (("line", "", "name"), ("gain", "dB", "gain_db"), ("phase", "°", "phase_deg"), ("lost", "dB", "lost_db"))
_LEVERAGE = ("gain", "lower_edge", "upper_edge", "noise")


def _plain(section: str, columns: Columns) -> Table:
    """A section whose rows are a table as they stand."""
    return lambda document: _rows(columns, entries(document, section))


def _rows(columns: Columns, rows: Sequence[Entry]) -> str:
    heading = [titled(name, unit) for name, unit, _ in columns]
    return csv_text(heading, ([row[key] for *_, key in columns] for row in rows))


def _bridges(document: Document) -> str:
    heading = ("bridge", "type", titled("value", "SI"), "K", titled("counts at the input", "SI"),
               titled("counts at the output", "SI"))
    rows: list[list[Value]] = []
    for line in entries(document, "lines"):
        for bridge in line["bridges"] or ():
            name = f"{line['name']}.{bridge['part'].rpartition('.')[2]}"
            rows.append([name, *(bridge[key] for key in ("type", "value", "k", "at_input", "at_output"))])
    return csv_text(heading, rows)


def _parts(document: Document) -> str:
    heading = ("part", "type", "role", "value", "unit", titled("time constant", "s"), titled("owns of upper", "1"),
               titled("owns of lower", "1"))
    return csv_text(heading, (
        [part_name(part), part["type"], part["role"], part["value"], UNIT_OF_TYPE.get(part["type"], ""),
         *(part[key] for key in ("tau_s", "owns_upper", "owns_lower"))]
        for part in entries(document, "parts")))


def _times(document: Document) -> str:
    """Both ends, ranked as on the page."""
    heading = ("edge", "part", "value", "unit", titled("sees", "Ω"), titled("time constant", "s"),
               titled("alone", "Hz"), titled("share of the sum", "1"))
    rows: list[list[Value]] = []
    for end in ("upper", "lower"):
        listed = constants(document, end)
        total = sum(term for _, term in listed)
        for part, term in listed:
            rows.append([end, part_name(part), part["value"], UNIT_OF_TYPE[part["type"]], seen(part), part["tau_s"],
                         alone(part), term / total if total > 0 else None])
    return csv_text(heading, rows)


def _roots(document: Document) -> str:
    heading = ["what", *(titled(name, unit) for name, unit, _ in _ROOTS)]
    rows = [[what, *(root[key] for *_, key in _ROOTS)]
            for what, section in (("pole", "poles"), ("zero", "zeros")) for root in entries(document, section)]
    return csv_text(heading, rows)


def _leverage(document: Document) -> str:
    """Every part, then every card figure: d ln(figure)/d ln(value), which is per cent for 1 %."""
    heading = ["of", "value", *(titled(name.replace("_", " "), "% per %") for name in _LEVERAGE)]
    rows: list[list[Value]] = [[part_name(part), part["value"], *(part["leverage"][key] for key in _LEVERAGE)]
                               for part in entries(document, "parts")]
    rows += [[f"device.{card['device']}.{card['figure']}", card["value"],
              *(card["leverage"][key] for key in _LEVERAGE)] for card in entries(document, "cards")]
    return csv_text(heading, rows)


def _draws(document: Document) -> str:
    """What carries the current of each rail, where the page was asked for."""
    draws = (document.get("direct") or {}).get("draws", ())
    return csv_text(("from rail", "stage", "through", titled("current", "A")),
                    ([draw[key] for key in ("rail", "stage", "element", "current_a")] for draw in draws))


_NOISE: Columns = (
    ("input density", "V/√Hz or A/√Hz", "noise_density"), ("noise figure", "dB", "noise_figure_db"),
    ("output", "V", "noise_total_output"), ("input", "V or A", "noise_total_input"), ("from", "Hz", "noise_from_hz"),
    ("to", "Hz", "noise_to_hz"), ("smallest over noise", "dB", "noise_margin_db"),
)
_DENSITY: Columns = (
    ("frequency", "Hz", "hz"), ("input density", "V/√Hz or A/√Hz", "input"), ("output density", "V/√Hz", "output"),
    ("most of it", "", "most"), ("its share", "1", "share"),
)


def _noise(document: Document) -> str:
    return _rows(_NOISE, [document["overall"]])


def _sources(document: Document) -> str:
    """Every part that makes noise, the greatest first."""
    what = (document.get("noise") or {}).get("what", {})
    rows: list[list[Value]] = [[part_name(part), what.get(part_name(part), ""), share] for part, share in
                               ranked(document)]
    return csv_text(("noise of", "what", titled("share of the power", "1")), rows)


def _density(document: Document) -> str:
    return _rows(_DENSITY, (document.get("noise") or {}).get("curve") or ())


_STEP: Columns = (
    ("rise", "s", "rise_time_s"), ("overshoot", "%", "overshoot_percent"), ("settled to 1 %", "s", "settling_1_s"),
    ("settled to 0.1 %", "s", "settling_01_s"), ("sag", "%", "sag_percent"), ("group delay", "s", "group_delay_s"),
    ("its spread", "s", "group_delay_spread_s"),
)
_MARKS: Columns = (("mark", "", "mark"), ("time", "s", "time_s"), ("of the final value", "1", "height"))
_RISES: Columns = (("node", "", "name"), ("pole", "Hz", "pole_hz"), ("rise alone", "s", "rise_s"))


def _step(document: Document) -> str:
    return _rows(_STEP, [document["overall"]])


def _marks(document: Document) -> str:
    return _rows(_MARKS, (document.get("pulse") or {}).get("marks") or ())


def _rises(document: Document) -> str:
    return _rows(_RISES, (document.get("pulse") or {}).get("nodes") or ())


def _curve(document: Document) -> str:
    """The step response over time, as a share of its final value and as it is."""
    pulse = document.get("pulse") or {}
    heading = (titled("time", "s"), titled("of the final value", "1"),
               titled("response", document["overall"]["gain_unit"]))
    return csv_text(heading, ([t, height, height * pulse["final"]] for t, height in pulse.get("curve") or ()))


_LINES_TABLE, _NODES_TABLE = _plain("lines", _LINES), _plain("nodes", _NODES)
_TARGETS_TABLE, _BIAS_TABLE, _RAILS_TABLE = _plain("targets", _TARGETS), _plain("bias", _BIAS), _plain("rails", _RAILS)
_LEVELS_TABLE = _plain("levels", _LEVELS)
PAGES_CSV: dict[str, tuple[Table, ...]] = {
    LEDGER: (_TARGETS_TABLE, _LINES_TABLE, _NODES_TABLE),
    "lines": (_LINES_TABLE, _bridges),
    "nodes": (_NODES_TABLE,),
    "parts": (_parts,),
    "times": (_times,),
    "poles": (_roots,),
    "leverage": (_leverage,),
    "noise": (_noise, _sources, _density),
    "pulse": (_step, _marks, _rises, _curve),
    "levels": (_LEVELS_TABLE, _BIAS_TABLE, _RAILS_TABLE, _draws),
    "bias": (_BIAS_TABLE, _RAILS_TABLE, _draws),
    "account": (_NODES_TABLE,),
    "all": (_TARGETS_TABLE, _LINES_TABLE, _bridges, _NODES_TABLE, _times, _parts, _roots, _leverage, _noise, _sources,
            _density, _step, _marks, _rises, _BIAS_TABLE, _RAILS_TABLE, _draws, _LEVELS_TABLE),
}


def page_csv(document: Document, name: str) -> str:
    """The page `name` as CSV; a table without rows is left away unless it is the only one."""
    document = finite(document)
    made = [make(document) for make in PAGES_CSV[name]]
    if document.get("at"):
        made.append(_rows(_AT, document["at"]["lines"]))
    full = [text for text in made if text.count("\n") > 1]
    return "\n".join(full or made[:1])
