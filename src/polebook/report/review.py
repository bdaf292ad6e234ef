"""A design review of a chain as Markdown, from the document that `record.review` gathers."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from polebook.report import levels, noise, pulse, roots, sections, spread, spread_causes, tables, working
from polebook.report import review_tables as own
from polebook.report.bench import bench_text
from polebook.report.document import Document, entries, finite
from polebook.report.look import Look
from polebook.report.markdown import MARKUP, blocks, code, escaped, fenced, picture
from polebook.report.spread_words import built
from polebook.report.svg.drawings import WHAT, missing

Block = list[str]
Section = Callable[[Document, Look], Block]
_WORDS = {
    "line": "the source, a stage or the load; the gains of all lines multiply to the gain of the chain.",
    "node": "a place between lines (n0 after the source, n1 after the first stage ...), with the resistance and the "
            "capacitance there, and the pole that they make. Room: that pole over the pole that all nodes would have "
            "if they were alike and met the target.",
    "K": "gain from a bridging part's input side to its output side. By it the Miller split tells what the part counts "
         "as at either node: C·(1 - K) at the input.",
    "edge": "where the response is 3 dB below midband; from the exact network. Beside it stand two estimates, by the "
            "sum of time constants and by the node poles.",
    "lost, allotted, left": "dB that a node takes from the response at the wanted edge (at the edge itself where none "
                            "is wanted), its part of the 3.01 dB that may be lost, and the rest. A negative loss is a "
                            "credit: the node peaks.",
    "owns": "by how many per cent an edge moves, over the per cent that a part moves. All shares of an edge add up "
            "to 100 %.",
    "role": "a high part acts at the upper edge, a low one at the lower edge.",
    "margin": "of a target: what is to spare, as a share of what is wanted, of the gain's tolerance for the gain. "
              "Negative: missed.",
}
_TRUST = (
    "The figures are the exact solution of the small-signal network that the file describes, with device cards as they "
    "are filed. They know nothing of what the file leaves out: wiring inductance, coupling between stages over the "
    "supply, anything nonlinear. Clip levels are first figures, from the quiescent point. Measure before you rely on a "
    "margin.",
    "They judge signals, not safety. Rails above 60 V d.c. (the limit without touch protection of IEC 61140 and "
    "EN 60204-1) and valve stages can kill, and capacitors stay charged after the supply is off; parts that dissipate "
    "get hot enough to burn and to fail. What is connected to people (IEC 60601-1), or to the mains, has rules of its "
    "own for insulation and leakage, and no figure here knows of them. That nothing is cautioned means nothing. Keep "
    "to your local codes and to the advice of a licensed practitioner; nothing here stands in for either.",
)


def review(document: Document, pictures: Mapping[str, str]) -> str:
    """The whole review. pictures: name of a drawing -> name of its file; empty where there are none."""
    told = finite(document)
    title = escaped(told["chain"]["title"] or "untitled chain")
    made: list[Block] = [[f"# {title}"], ["Design review of an amplifier chain."], own.facts(told),
                         *own.notes(told)]
    for heading, found in _sections(told, pictures):
        full = [block for block in found if block]
        if full:
            made += [[f"## {heading}"], *full]
    return "\n\n".join("\n".join(block) for block in made if block) + "\n"


def _sections(told: Document, pictures: Mapping[str, str]) -> list[tuple[str, list[Block]]]:
    def of(*some: Section) -> list[Block]:
        return [blocks(section(told, MARKUP)) for section in some]

    def drawn(name: str) -> list[Block]:
        words = missing(told, name) or WHAT[name][0]
        return [[picture(words, pictures[name])]] if name in pictures else []

    losses = (tables.accounts,) if not missing(told, "account") else ()
    rise = (pulse.figures, pulse.estimates) if not missing(told, "pulse") else (pulse.figures,)
    return [
        ("Verdict", [[f"**{escaped(told['verdict'])}**"]]),
        ("Targets", [*of(sections.targets), own.met(told)]),
        ("Cautions", [own.cautions(told)]),
        ("Response", [*drawn("response"), *of(own.band, sections.account)]),
        ("Lines", of(tables.short_lines, sections.bridges)),
        ("Who owns the edges", [*drawn("account"), *of(sections.other_owners, own.owners)]),
        ("Nodes, and what they lose", of(own.nodes, *losses)),
        ("Poles and zeros", of(roots.poles, roots.zeros)),
        ("Step response", [*drawn("pulse"), *of(*rise)]),
        ("Noise", of(noise.totals, own.makers, noise.by_line)),
        ("Levels and bias", [*drawn("levels"), *of(levels.summary, levels.levels, levels.bias, levels.rails)]),
        ("Leverage", _leverage(told)),
        ("Measured on the bench", _bench(told)),
        ("Built chains", _spread(told)),
        ("Parts to fit", of(own.fitted)),
        ("How the figures of the verdict come about", _workings(told)),
        ("Words", [[f"- **{word}**: {escaped(text)}" for word, text in _WORDS.items()]]),
        ("What these figures are, and are not", [[text] for text in _TRUST]),
    ]


def _leverage(told: Document) -> list[Block]:
    found = blocks(own.levers(told, MARKUP))
    if not found:
        return []
    words = "What 1 % more of a value moves, in per cent; the ten that move most."
    if entries(told, "cards"):
        words += " A name without a dot is a device card's: its figure moves every stage that uses the card."
    return [[words], found]


def _bench(told: Document) -> list[Block]:
    """Planned and measured, as `polebook bench` tells it, without the name of the file."""
    return [] if told["bench"] is None else [blocks(bench_text(told["bench"], MARKUP).splitlines()[1:])]


def _spread(told: Document) -> list[Block]:
    """Yield, percentiles, what costs the yield, and the corners."""
    answer = told["spread"]
    if answer is None:
        return []
    again = f"polebook spread {told['file']} --builds {answer['builds']} --seed {answer['seed']}"
    count = len([draw for draw in answer["draws"] if draw["sort"] != "temperature"])
    lead = f"{built(answer['builds'])}, seed {answer['seed']}, each with {count} tolerances drawn; to the digit again:"
    found = [blocks(section(answer, MARKUP)) for section in (
        spread.yields, spread.statistics, spread_causes.costs, spread_causes.corners, spread_causes.makers)]
    return [[f"{escaped(lead)} {code(again)}"], *found]


def _workings(told: Document) -> list[Block]:
    """As `polebook working` prints them."""
    look = Look()
    found = []
    for one in told["workings"]:
        lines: Block = []
        for block in working.blocks(one, look):
            lines += ["", *block] if lines else block
        found.append(fenced(line.removeprefix(" ") for line in lines))
    return found
