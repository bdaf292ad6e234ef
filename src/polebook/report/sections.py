"""The sections of the default page: heading, targets, account, who owns the edges, cautions."""

from __future__ import annotations

import re
from textwrap import wrap

from polebook.report import figures as show
from polebook.report import markdown
from polebook.report.document import Document, Entry, bridge_of, entries, greatest, input_node, output_node, part_name
from polebook.report.look import Look, cells, fit
from polebook.report.table import Cell, Column, table

NO_BREAK = "\u00a0"
_FIGURE = re.compile(r"(?<=\d) (?=(?:[fpnumkMGT]?(?:Hz|F|H|Ω|V|A|s)|dBΩ?|%)(?!\w))|(?<=\(K) (?=-?\d)")
_VERDICTS = {True: Cell("met", "good"), False: Cell("missed", "bad"), None: Cell("not judged", "warn")}


def heading(document: Document, file: str, look: Look) -> list[str]:
    """The chain's title and the file's name on one line, and a rule."""
    name = look.text(file)
    title = look.text(document["chain"]["title"] or "untitled chain")
    room = look.width - 2 - cells(name) - 2
    if room < cells(title):
        lines = [" " + look.paint(fit(title, look.width - 2, look.text("…")), "head"), " " + name]
    else:
        gap = " " * (look.width - 2 - cells(title) - cells(name))
        lines = [f" {look.paint(title, 'head')}{gap}{look.paint(name, 'dim')}"]
    return [*lines, look.paint(look.text("─") * look.width, "dim")]


def unstable(document: Document, look: Look) -> list[str]:
    """Instability is told before any figure."""
    unstable = document["overall"]["unstable"]
    if unstable is False:
        return []
    plain = "Unstable: the chain oscillates and has no edges."
    if unstable is None:
        plain = "Whether the chain is stable could not be told, so no edge is given."
    return paragraph(unparted(document["verdict"] or plain), look, "bad")


def targets(document: Document, look: Look) -> list[str]:
    """One line a target: wanted, got, margin, and the reason where it is not judged."""
    rows = [target_row(entry, document["overall"]["gain_unit"]) for entry in entries(document, "targets")]
    if not rows:
        return [] if document["targets"] is None else [" " + look.text("no targets are set")]
    names = ("targets", "want", "got", "margin", "", "")
    columns = [Column(name, right=name in ("want", "got", "margin")) for name in names]
    return table(columns, rows, look)


def target_row(entry: Entry, gain_unit: str) -> list[Cell | str]:
    """Cells of one target."""
    name = entry["name"]
    return [
        name,
        show.target(name, entry["want"], gain_unit),
        show.target(name, entry["got"], gain_unit),
        show.share(entry["margin"]),
        _VERDICTS[entry["met"]],
        "" if entry["met"] is False else entry["why"] or "",  # why one is missed is for sentences
    ]


def account(document: Document, look: Look) -> list[str]:
    """Both ends of the band: the exact edge, what is lost where it is judged, and the two estimates beside it."""
    overall, both = document["overall"], document["account"] or {}
    rows: list[list[Cell | str]] = []
    for end, constants, nodes in (("upper", "octc_upper_hz", "node_upper_hz"), ("lower", "sctc_lower_hz", "")):
        side = both.get(end) or dict.fromkeys(("edge_hz", "budget_db", "lost_db", "left_db"))
        left = side["left_db"]
        rows.append(
            [
                end,
                show.eng(overall[f"{end}_edge_hz"], "Hz"),
                show.eng(side["edge_hz"], "Hz"),
                show.decibel(side["lost_db"]),
                show.decibel(side["budget_db"]),
                Cell(show.decibel(left), "bad" if left is not None and left < 0 else ""),
                show.eng(overall[constants], "Hz"),
                show.eng(overall[nodes], "Hz") if nodes else show.NONE,
            ]
        )
    losses = ("lost\ndB", "budget\ndB", "left\ndB")
    names = ("account", "edge", "judged at", *losses, "by time\nconstants", "by node\npoles")
    return table([Column(name, right=name != "account") for name in names], rows, look)


def owners(document: Document, look: Look, told: str = "") -> list[str]:
    """Who owns most of each edge, in plain words, and by what multiplication; not what has been `told`."""
    lines: list[str] = []
    for end in ("upper", "lower"):
        part = greatest(document, end)
        if part is not None and f"{part_name(part)} owns" not in told:
            share = _whole(show.about(part[f"owns_{end}"]))
            lines += paragraph(f"{part_name(part)} owns {share} of the {end} edge: {_how(document, part)}.", look)
    return lines


def other_owners(document: Document, look: Look) -> list[str]:
    """Who owns most of each edge, on a page that the verdict leads."""
    return owners(document, look, document["verdict"] or "")


def _how(document: Document, part: Entry) -> str:
    """The part's value, what it counts as where it bridges a stage, and its time constant."""
    if part["type"] == "tau":  # its value is its time constant
        return f"a time constant of {_whole(show.eng(part['value'], 's'))}"
    text = value = _whole(show.eng(part["value"], show.UNIT_OF_TYPE[part["type"]]))
    bridge = bridge_of(document, part["stage"], part["part"])
    # where the stage holds its input node, what the part counts as there is huge and tells nothing
    held = {line["name"] for line in entries(document, "lines") if line["transfer_ohm"] is not None}
    if bridge is not None and bridge[1]["at_input"] is not None and part["stage"] not in held:
        at, split = bridge
        unit = show.UNIT_OF_TYPE[split["type"]]
        counts = _whole(show.eng(split["at_input"], unit))
        text = f"its {value} counts as {counts} at {input_node(document, at)} ({_whole('K ' + show.ratio(split['k']))})"
    if part["tau_s"] is not None:
        text += f", with a time constant of {_whole(show.eng(part['tau_s'], 's'))}"
    return text


def verdict(document: Document, look: Look) -> list[str]:
    """What limits the chain, in a few sentences; of an unstable one it has been told already."""
    if document["overall"]["unstable"] is not False or not document["verdict"]:
        return []
    return paragraph(unparted(document["verdict"]), look)


def cautions(document: Document, look: Look) -> list[str]:
    """Every caution, with the name of what it is about where it does not say so itself."""
    lines = [line for text in warnings(document) for line in paragraph(text, look, hang=3)]
    return [" " + look.paint("cautions", "warn"), *lines] if lines else []


def warnings(document: Document) -> list[str]:
    """The cautions as sentences."""
    told = []
    for caution in entries(document, "cautions"):
        about, text = caution["stage"], caution["text"]
        named = not about or about == "supply" or re.search(rf"(?<!\w){re.escape(about)}(?!\w)", text)
        told.append(text if named else f"{about}: {text}")
    return told


def bridges(document: Document, look: Look) -> list[str]:
    """The Miller split of every bridge: how much of it lands on either side."""
    rows: list[list[Cell | str]] = []
    marked = False
    for at, line in enumerate(entries(document, "lines")):
        for bridge in line["bridges"] or []:
            part = bridge["part"].rpartition(".")[2]
            unit = show.UNIT_OF_TYPE[bridge["type"]]
            far = f"{line['name']}.mid" if line["kind"] == "cascode" else output_node(document, at)
            rows.append(
                [
                    f"{line['name']}.{part}",
                    show.eng(bridge["value"], unit),
                    show.ratio(bridge["k"]),
                    show.eng(bridge["at_input"], unit),
                    f"at {input_node(document, at)}",
                    show.eng(bridge["at_output"], unit),
                    f"at {far}" + (" *" if _of_no_use(bridge) else ""),
                ]
            )
            marked = marked or _of_no_use(bridge)
    names = ("bridges", "value", "K", "counts as", "", "and", "")
    columns = [Column(name, right=name in ("value", "K", "counts as", "and")) for name in names]
    note = paragraph("* with K above 0 the half at the output is of no use for an estimate", look) if marked else []
    return [*table(columns, rows, look), *note] if rows else []


def _of_no_use(bridge: Entry) -> bool:
    """The output half of a bridge whose ends move together."""
    return bridge["k"] is not None and bridge["k"] > 0 and bridge["at_output"] is not None


def paragraph(text: str, look: Look, style: str = "", hang: int = 1) -> list[str]:
    """`text` wrapped to the width, indented by one; lines after the first by `hang`. No-break spaces hold."""
    if isinstance(look, markdown.Markup):
        return markdown.paragraph(look.text(text.replace(NO_BREAK, " ")))
    lines = wrap(look.text(text), look.width - 1, initial_indent=" ", subsequent_indent=" " * hang)
    return [look.paint(line.replace(NO_BREAK, " "), style) for line in lines]


def unparted(text: str) -> str:
    """Sentences whose figures are not parted from their units at the end of a line."""
    return _FIGURE.sub(NO_BREAK, text)


def _whole(text: str) -> str:
    """A figure that is not parted from its unit at the end of a line."""
    return text.replace(" ", NO_BREAK)
