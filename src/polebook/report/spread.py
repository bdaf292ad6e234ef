"""The text of `polebook spread`, from its JSON answer."""

from __future__ import annotations

from collections.abc import Sequence

from polebook.report import figures as show
from polebook.report.document import Document, Entry, finite
from polebook.report.histogram import histogram, place
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.spread_causes import corners, costs, makers
from polebook.report.spread_words import built, called, count_of, figure_text, listed, percent, places
from polebook.report.table import Cell, Column, table

SHORT = {"lower_edge_hz": "lower", "upper_edge_hz": "upper", "gain_at_reference_db": "gain there"}
MORE = ("upper", "swing")  # targets that are met from their end upward
STATES = {"unstable": "unstable", "no_band": "without a clean midband", "unsolved": "with a bias that is not solved",
          "no_gain": "without a gain", "untold": "of which stability can't be told"}


def spread(answer: Document, look: Look) -> str:
    """Yield, figures, charts, corners, what makes the spread and what it costs, and how to have it again."""
    answer = finite(answer)
    blocks = [head(answer, look), yields(answer, look), statistics(answer, look), *charts(answer, look)]
    blocks += [costs(answer, look), corners(answer, look), makers(answer, look), cautions(answer, look),
               again(answer, look)]
    return "\n".join("\n".join(block) + "\n" for block in blocks if block)


def head(answer: Document, look: Look) -> list[str]:
    """The file, how many were built of what, and that it was stopped."""
    count = len([draw for draw in answer["draws"] if draw["sort"] != "temperature"])
    law = {"normal": "normal with a third of each as deviation", "uniform": "evenly over all of each"}
    text = f"{built(answer['builds'])}, seed {answer['seed']}: {count} tolerance{'s' * (count != 1)} drawn"
    text += f", {law[answer['shape']]}" if count else ""
    if answer["temperature"]:
        low, high = answer["temperature"]
        text += f"; all at {low:g} °C" if low == high else f"; {low:g} to {high:g} °C, evenly"
    lines = [" " + look.paint(look.text(answer["files"][0]["file"]), "head"), *paragraph(unparted(text), look)]
    if answer["stopped"]:
        told = f"stopped after {answer['builds']} of {answer['asked']} builds"
        if answer["builds"] == answer["asked"]:
            told = "stopped when all were built, before all else was computed"
        lines += paragraph(told, look, "warn")
    return lines


def yields(answer: Document, look: Look) -> list[str]:
    """Share of the builds that meet each target, and all, with its interval; what was wanted of it."""
    shares = answer["yield"]
    if not shares:
        return paragraph("no target that builds are judged by is set: gain, lower, upper, peaking, noise", look)
    wanted, whole = answer["wanted"], shares["all"]
    verdict: Cell | str = ""
    if wanted is not None:
        verdict = Cell("met", "good") if whole["share"] >= wanted else Cell("missed", "bad")
    decimals = max(places(one[key]) for one in shares.values() for key in ("share", "low", "high"))

    def row(name: str, want: str, missed: int, end: Cell | str) -> list[Cell | str]:
        told = (percent(shares[name][key], decimals) for key in ("share", "low", "high"))
        return [name, want, str(missed), *told, end]

    missed = round(answer["builds"] * (1.0 - whole["share"]))
    rows = [row("all", "" if wanted is None else percent(wanted, 1), missed, verdict)]
    rows += [row(target["name"], show.target(target["name"], target["want"], answer["gain_unit"]), target["missed"], "")
             for target in answer["targets"]]
    names = ("yield", "want", "builds\nmiss it", "yield", "95 % sure\nfrom", "\nto", "")
    lines = table([Column(name, right=0 < at < 6) for at, name in enumerate(names)], rows, look)
    if wanted is not None and whole["low"] < wanted < whole["high"]:
        lines += paragraph(unparted(f"{answer['builds']} builds are too few to tell it from {percent(wanted, 1)}: "
                                    "--builds takes more"), look)
    if answer["unjudged"]:
        lines += paragraph(f"without {listed(answer['unjudged'])}, which builds are not judged by", look)
    return lines


def statistics(answer: Document, look: Look) -> list[str]:
    """A row a figure: the chain as filed, then mean, deviation and percentiles of the builds."""
    rows: list[list[Cell | str]] = []
    for name, figure in answer["figures"].items():
        unit = figure["unit"]
        percentiles = list(figure["percentiles"].values())
        rows.append([f"{SHORT.get(name) or called(name)} {unit}", *(figure_text(value, unit) for value in
                     (figure["nominal"], figure["mean"])), _deviation(figure["deviation"], unit),
                     *(figure_text(value, unit) for value in percentiles)])
    names = ("builds", "as filed", "mean", "deviation", *(f"{name} %" for name in _percentiles(answer)))
    lines = table([Column(name, right=name != "builds") for name in names], rows, look, gap=1)
    if all(figure["nominal"] is None for figure in answer["figures"].values()):
        lines += paragraph("the chain as filed has none of these: polebook show tells why", look, "warn")
    return lines


def charts(answer: Document, look: Look) -> list[list[str]]:
    """The histograms, and what all of them leave out."""
    found = [lines for lines in (chart(answer, name, look) for name in answer["figures"]) if lines]
    ends = [figure["histogram"] for figure in answer["figures"].values() if figure["histogram"]]
    if found and any(bins["below"] or bins["above"] for bins in ends):
        found[-1] += paragraph("what lies beyond an end of these is 0.1 % of the builds or less", look, "dim")
    return found


def chart(answer: Document, name: str, look: Look) -> list[str]:
    """Histogram of a figure, its target marked; nothing where all builds have the same."""
    figure, unit = answer["figures"][name], answer["figures"][name]["unit"]
    bins = figure["histogram"]
    if bins is None or not figure["deviation"]:
        return []
    text = f"{called(name)}, {show.by_unit(bins['from'], unit, 4)} to {show.by_unit(bins['to'], unit, 4)}"
    if figure["limits"]:
        text += f"; target {_limits(figure, bins, unit)}"
    return paragraph(unparted(text), look) + histogram(bins, figure["limits"], look)


def cautions(answer: Document, look: Look) -> list[str]:
    """What a reader should know: builds without figures, devices out of their region, what the spread leaves out."""
    told = [f"{count_of(count, 'build')} {STATES.get(state, state)}: counted as missing each target for which there is "
            "no figure" for state, count in answer["states"].items() if state != "good"]
    told += [f"{stage}: in {count_of(count, 'build')} its device leaves the region that its law holds for"
             for stage, count in answer["outside"].items()]
    told += answer["cautions"]
    lines = [line for one in told for line in paragraph(one, look, hang=3)]
    return [" " + look.paint("cautions", "warn"), *lines] if lines else []


def again(answer: Document, look: Look) -> list[str]:
    """The command that gives the same once more; what was called off gives as many builds."""
    file, temperature = answer["files"][0]["file"], answer["temperature"]
    more = f" --temperature {temperature[0]:.15g}:{temperature[1]:.15g}" if temperature else ""
    return paragraph(f"to the digit again: polebook spread {file} --builds {answer['builds']} "
                     f"--seed {answer['seed']}{more}", look, hang=3)


def _deviation(value: float | None, unit: str) -> str:
    """Three digits, also of few hundredths of a dB."""
    if value is None or unit not in ("dB", "dBΩ") or value >= 0.995:
        return show.bare(value, unit)
    return f"{value:.3f}"


def _percentiles(answer: Document) -> Sequence[str]:
    return list(next(iter(answer["figures"].values()))["percentiles"])


def _limits(figure: Entry, bins: Entry, unit: str) -> str:
    """Where the target ends, and which end the chart does not reach."""
    told = []
    for limit in figure["limits"]:
        off = "" if place(bins, limit) is not None else " (off left)" if limit < bins["from"] else " (off right)"
        told.append(show.by_unit(limit, unit, 4) + off)
    if len(told) > 1:
        return " to ".join(told)
    return f"{'at least' if figure['target'] in MORE else 'at most'} {told[0]}"
