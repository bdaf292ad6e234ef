"""The text of `polebook bench`, from its JSON answer."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.report import figures as show
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, Row, table

_EXPLAINED = {True: Cell("explained", "good"), False: Cell("not explained", "bad"), None: Cell("not judged", "warn")}


def bench_text(answer: Document, look: Look) -> str:
    """Every bench with its figures and its sweep, and by what a figure counts as explained."""
    one = answer["files"][0]
    lines = [" " + look.paint(look.text(one["file"]), "head")]
    for bench in one["benches"]:
        lines += ["", *_bench(bench, one["gain_unit"], look)]
    builds = max((row["builds"] for bench in one["benches"] for row in bench["figures"]), default=0)
    if builds:
        lines += ["", *paragraph(
            f"Of {builds} built chains, seed {one['seed']}: a measured value is explained where at least 1 % of them "
            "lie on either side of it. What the instruments were off is not in that.", look, "dim")]
    return "\n".join(lines) + "\n"


def name_of(bench: Entry) -> str:
    """What a bench is called by, and where it was measured."""
    label = ", ".join(part for part in (bench["unit"], bench["date"]) if part)
    where = f"at the output of {bench['at']}" if bench["at"] else "at the load"
    return f"bench {bench['bench']}{f' ({label})' if label else ''}, {where}"


def _bench(bench: Entry, gain_unit: str, look: Look) -> list[str]:
    lines = paragraph(name_of(bench), look, "head")
    if bench["figures"]:
        titles = ("", "planned", "measured", "off by", "builds\n1 %", "builds\n99 %", "builds\nbelow", "")
        rows = [_row(row, gain_unit) for row in bench["figures"]]
        lines += table([Column(title, right=0 < at < 7) for at, title in enumerate(titles)], rows, look)
        for row in bench["figures"]:
            if row["why"]:
                lines += paragraph(unparted(f"{row['name']}: {row['why']}"), look, "warn", hang=3)
    if bench["sweep"] is not None:
        lines += [line for text, style in sweep_words(bench["sweep"])
                  for line in paragraph(unparted(text), look, style, hang=3)]
    if not bench["figures"] and bench["sweep"] is None:
        lines += paragraph("nothing is measured in it: no gain, lower, upper or file", look, "warn")
    return lines


def _row(row: Entry, gain_unit: str) -> Row:
    unit = "dBΩ" if row["unit"] == "dB" and gain_unit == "V/A" else row["unit"]
    planned, measured, low, high = (show.by_unit(row[key], unit) for key in ("planned", "measured", "low", "high"))
    if row["relative"] is not None:
        off = f"{plus(100 * row['relative'], 1)} %"
    else:
        off = show.NONE if row["difference"] is None else f"{plus(row['difference'])} dB"
    below = show.NONE if row["percentile"] is None else f"{row['percentile']:.1f} %"
    return [row["name"], planned, measured, off, low, high, below, _EXPLAINED[row["explained"]]]


def sweep_words(sweep: Entry) -> Iterator[tuple[str, str]]:
    """(sentence, style) on a sweep: what it is, how far it is off, how it was read."""
    if sweep["points"] is None:
        yield f"sweep {sweep['file']} can't be read: {sweep['why']}", "bad"
        return
    yield sweep_head(sweep), ""
    if sweep["why"]:
        yield sweep["why"], "warn"
    if sweep["gain"]:
        yield f"gain {_off_words(sweep['gain'], 'dB')}", ""
    if sweep["phase"]:
        yield f"phase {_off_words(sweep['phase'], '°')}", ""
    for note in sweep["notes"]:
        yield note, "dim"


def sweep_head(sweep: Entry) -> str:
    """Which sweep, and what it covers."""
    return f"sweep {sweep['file']}: {sweep['points']} points from {_hz(sweep['from_hz'])} to {_hz(sweep['to_hz'])}"


def _off_words(off: Entry, unit: str) -> str:
    """How far a curve is off: rms, mean, and most of all where."""
    return (f"off by {off['rms']:.2f} {unit} rms, {plus(off['mean'])} {unit} in the mean, most at "
            f"{_hz(off['largest_hz'])}: {plus(off['largest'])} {unit}")


def plus(value: float, decimals: int = 2) -> str:
    """A difference with its sign; none where it rounds to nothing."""
    shown = round(value, decimals)
    return f"{shown:+.{decimals}f}" if shown else f"{0:.{decimals}f}"


def _hz(value: float) -> str:
    return show.eng(value, "Hz")
