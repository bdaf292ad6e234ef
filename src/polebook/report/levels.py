"""The pages of levels and bias: the d.c. plan, then signal, noise and clip level from node to node."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.report import level_bar
from polebook.report.document import Document, Entry, entries, interstage
from polebook.report.look import Look
from polebook.report.sections import NO_BREAK, paragraph, unparted
from polebook.report.table import Cell, Column, table

_DRAWN = {"": "{}", "base": "base of {}", "upper base": "upper base of {}", "source": "current source at {}",
          "iq": "{} itself", "output": "output of {}", "feedback": "feedback of {}"}


def _columns(*names: str, words: tuple[int, ...]) -> list[Column]:
    return [Column(name, right=at not in words) for at, name in enumerate(names)]


def bias(document: Document, look: Look) -> list[str]:
    """What a meter shows at every terminal, what flows and what gets warm; a stated current beside the solved one."""
    direct = document.get("direct") or {}
    solved, listed = direct.get("solved", {}), _plan(document)
    given = any(solved.get(entry["stage"]) is not None for entry in listed)
    rows: list[list[Cell | str]] = []
    for entry in listed:
        row: list[Cell | str] = [
            entry["stage"],
            entry["device"] or "",
            show.eng(entry["current_a"], "A"),
            entry["from"] or show.NONE,
            *([show.eng(solved.get(entry["stage"]), "A")] if given else []),
            *(show.eng(entry[key], "V") for key in ("across_v", "control_v", "lower_v", "output_v")),
            show.eng(entry["dissipation_w"], "W"),
        ]
        rows.append(row)
    names = ["bias", "device", "current", "", *(["network\ngives"] if given else []), "across", "control", "lower",
             "output", "heat"]
    return table(_columns(*names, words=(0, 1, 3)), rows, look, gap=1) if rows else []


def _plan(document: Document) -> list[Entry]:
    """Rows of the bias; those of op-amps and blocks with what is known between their rails, all in signal order."""
    found = {entry["stage"]: entry for entry in entries(document, "bias")}
    found |= {entry["stage"]: entry for entry in (document.get("direct") or {}).get("amplifiers", ())}
    order = {line["name"]: at for at, line in enumerate(entries(document, "lines"))}
    return sorted(found.values(), key=lambda entry: order.get(entry["stage"].removesuffix("_upper"), 0))


def rails(document: Document, look: Look) -> list[str]:
    """What each rail gives or takes, and what it feeds."""
    listed = entries(document, "rails")
    if not listed:
        return []
    direct = document.get("direct") or {}
    volts = {rail["rail"]: rail["volts"] for rail in direct.get("rails", ())}
    rows: list[list[Cell | str]] = []
    for rail in listed:
        amperes = rail["current_a"]
        does = "not known" if amperes is None else "gives" if amperes > 0 else "takes" if amperes < 0 else "idle"
        stands = volts.get(rail["rail"]) or 0.0
        rows.append([rail["rail"], show.eng(volts.get(rail["rail"]), "V"), does,
                     show.NONE if amperes is None else show.eng(abs(amperes), "A"),
                     "" if amperes is None or not stands else show.eng(stands * amperes, "W")])
    lines = table(_columns("rails", "volts", "", "current", "power", words=(0, 2)), rows, look)
    for rail in listed:
        draws = [draw for draw in direct.get("draws", ()) if draw["rail"] == rail["rail"]]
        known = sum(draw["current_a"] or 0.0 for draw in draws)
        way = -1.0 if (known or volts.get(rail["rail"]) or -1.0) < 0 else 1.0
        each = [_draw(draw, way) for draw in draws]
        if each:
            lead = f"{rail['rail']} {'takes' if way < 0 else 'gives'}"
            lines += paragraph(unparted(f"{lead}: {', '.join(each)}"), look, hang=3)
    return lines


def _draw(draw: Entry, way: float) -> str:
    """A current of a rail, counted the way in which the rail's own flows; what element and figure are not parted."""
    name = _DRAWN.get(draw["element"], "{}." + draw["element"]).format(draw["stage"])
    amperes = draw["current_a"]
    return f"{name}{NO_BREAK}{'not known' if amperes is None else show.eng(way * amperes, 'A')}"


def summary(document: Document, look: Look) -> list[str]:
    """Supply current, the stage that clips first, and how far the signal lies above the noise, in one paragraph."""
    overall = document["overall"]
    unit = "V" if overall["gain_unit"] == "V/V" else "A"
    told = []
    if overall.get("clips_first") is not None:
        told.append(f"{overall['clips_first']} clips first, at {show.eng(overall['largest_source'], unit)} peak of "
                    "source")
    for key, words in (("dynamic_range_db", "dynamic range"), ("noise_margin_db", "smallest signal over the noise")):
        if overall.get(key) is not None:
            told.append(f"{words} {show.decibel(overall[key], 'dB')}")
    if overall.get("full_power_hz") is not None:
        told.append(f"full power up to {show.eng(overall['full_power_hz'], 'Hz')}")
    if overall.get("supply_current_a") is not None:
        told.append(f"supply current {show.eng(overall['supply_current_a'], 'A')}")
    return paragraph(unparted(f"{'; '.join(told)}."), look) if told else []


def levels(document: Document, look: Look) -> list[str]:
    """Every interstage node: signal, noise, clip level, headroom."""
    listed = entries(document, "levels")
    after = {node["name"]: node["stage"] for node in interstage(document)}
    rows: list[list[Cell | str]] = []
    for row in listed:
        room = row["headroom_db"]
        rows.append([
            row["node"],
            after.get(row["node"]) or "",
            *(show.eng(row[key], "V") for key in ("smallest_v", "largest_v", "noise_v", "clip_v")),
            Cell(show.decibel(room), "bad" if room is not None and room < 0 else ""),
            row["clips_by"] or "",
        ])
    names = ("levels", "after", "smallest\npeak", "largest\npeak", "noise\nrms", "clip\npeak", "headroom\ndB",
             "clips by")
    return table(_columns(*names, words=(0, 1, 7)), rows, look) if rows else []


def diagram(document: Document, look: Look) -> list[str]:
    """The same as bars on one scale of dB: noise floor, signal from smallest to largest, headroom, clip level."""
    rows = [(row["node"], level_bar.marks(*(row[key] for key in ("noise_v", "smallest_v", "largest_v", "clip_v"))))
            for row in entries(document, "levels")]
    lead = max(len("levels"), *(len(name) for name, _ in rows)) + 2 if rows else 0
    scale = level_bar.scale((marks for _, marks in rows), look.width - 2 - lead)
    if scale is None:
        return []
    bars = [(name, scale.bar(marks)) for name, marks in rows]
    lines = [" " + look.paint(f"{'dB':<{lead}}{scale.labels()}", "dim")]
    for name, bar in bars:
        kept, clip, past = bar.partition(level_bar.CLIP)
        lines.append(f" {name:<{lead}}{look.text(kept)}{clip}{look.paint(look.text(past), 'bad')}".rstrip())
    signs = {"noise": level_bar.NOISE, "smallest to largest signal": level_bar.SIGNAL,
             "under the noise": level_bar.UNDER, "headroom": level_bar.HEADROOM, "clip level": level_bar.CLIP}
    told = ", ".join(f"{sign}{NO_BREAK}{word}" for word, sign in signs.items() if any(sign in bar for _, bar in bars))
    noisy = any(row["noise_v"] is not None for row in entries(document, "levels"))
    return [*lines, *paragraph(f"{told}; dB over 1 V peak" + (", noise as a sine of its power" if noisy else ""), look)]
