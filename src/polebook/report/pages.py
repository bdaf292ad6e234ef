"""Which sections make which page of `polebook show`."""

from __future__ import annotations

from collections.abc import Callable

from polebook.report import leverage, roots, sections, tables, times
from polebook.report.document import Document, finite
from polebook.report.look import Look

Section = Callable[[Document, Look], list[str]]

LEDGER = "ledger"
PAGES: dict[str, tuple[Section, ...]] = {
    LEDGER: (
        sections.verdict,
        sections.targets,
        tables.short_lines,
        tables.nodes,
        sections.account,
        sections.other_owners,
        sections.cautions,
    ),
    "lines": (tables.lines, sections.bridges),
    "nodes": (tables.nodes, sections.bridges, sections.account),
    "parts": (tables.parts, sections.owners),
    "times": (times.upper, times.lower),
    "poles": (roots.poles, roots.zeros),
    "leverage": (leverage.leverage,),
    "bias": (tables.bias, sections.cautions),
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
        tables.bias,
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
