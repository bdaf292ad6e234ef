"""Which sections make which page of `polebook show`."""

from __future__ import annotations

from collections.abc import Callable

from polebook.report import levels, leverage, noise, pulse, roots, sections, tables, times
from polebook.report.document import Document, finite
from polebook.report.look import Look

Section = Callable[[Document, Look], list[str]]

LEDGER = "ledger"
DIRECT = frozenset({"levels", "bias", "all"})  # pages that tell the d.c. plan: they ask for `direct` in the document
HISS = frozenset({"noise", "all"})  # pages that tell the density over frequency: they ask for `noise` in the document
STEP = frozenset({"pulse", "all"})  # pages that draw the step response: they ask for `pulse` in the document
PAGES: dict[str, tuple[Section, ...]] = {
    LEDGER: (
        sections.verdict,
        sections.targets,
        tables.short_lines,
        tables.nodes,
        sections.account,
        sections.other_owners,
        noise.summary,
        pulse.summary,
        levels.summary,
        sections.cautions,
    ),
    "lines": (tables.lines, sections.bridges),
    "nodes": (tables.nodes, sections.bridges, sections.account),
    "parts": (tables.parts, sections.owners),
    "times": (times.upper, times.lower),
    "poles": (roots.poles, roots.zeros),
    "leverage": (leverage.leverage, noise.levers),
    "noise": (noise.totals, noise.sources, noise.by_line, noise.curve, noise.levers),
    "pulse": (pulse.plot, pulse.marks, pulse.figures, pulse.estimates),
    "levels": (levels.bias, levels.rails, levels.levels, levels.diagram, levels.summary,
               sections.cautions),
    "bias": (levels.bias, levels.rails, sections.cautions),
    "account": (tables.accounts, sections.account, sections.owners),
    "all": (
        sections.verdict,
        sections.targets,
        tables.lines,
        sections.bridges,
        tables.nodes,
        tables.accounts,
        sections.account,
        sections.other_owners,
        tables.parts,
        times.upper,
        times.lower,
        roots.poles,
        roots.zeros,
        leverage.leverage,
        noise.levers,
        noise.totals,
        noise.sources,
        noise.by_line,
        noise.curve,
        pulse.marks,
        pulse.figures,
        pulse.estimates,
        levels.bias,
        levels.rails,
        levels.levels,
        levels.diagram,
        levels.summary,
        sections.cautions,
    ),
}


def page(document: Document, name: str, look: Look, file: str) -> str:
    """The page `name` of PAGES as text that ends with a line break. A frequency asked for with --at comes last."""
    document = finite(document)
    blocks = [sections.heading(document, file, look), sections.unstable(document, look)]
    blocks += [section(document, look) for section in PAGES[name]]
    if document.get("at"):
        blocks.append(tables.at_frequency(document["at"], look))
    head, *rest = [block for block in blocks if block]
    return "\n".join(head) + "\n" + "\n".join("\n".join(block) + "\n" for block in rest)
