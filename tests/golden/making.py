"""What a golden holds: every page of a demo chain as a reader sees it, and every figure to four digits."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

from polebook.book import build
from polebook.chain import read
from polebook.record.review import review as gathered
from polebook.report.look import Look
from polebook.report.pages import LEDGER, page
from polebook.report.review import review as review_text
from polebook.report.sections import unstable, verdict
from polebook.report.svg.drawings import WHAT
from polebook.report.tables import at_frequency
from tests.book.verdict_cases import CASES

GOLDEN = Path(__file__).parent
CHAINS = sorted((GOLDEN.parent.parent / "chains").glob("*.toml"))
AT_HZ = 100e3
VERDICTS = "verdicts.txt"
REVIEWED = "wire-break-listener"
REVIEW = f"{REVIEWED}.review.md"


def texts(chain: Path) -> dict[str, str]:
    """File name -> text of every golden of a chain."""
    ledger = build.ledger(read.load(str(chain)))
    document = build.document(ledger)
    section = build.at(ledger, AT_HZ)
    file = f"chains/{chain.name}"
    look = Look()
    return {
        f"{chain.stem}.ledger.txt": page(document, LEDGER, look, file),
        f"{chain.stem}.all.txt": page({**document, "at": section}, "all", look, file),
        f"{chain.stem}.figures.txt": "".join(f"{path} {value}\n" for path, value in figures(document)),
        f"{chain.stem}.at.txt": "\n".join(at_frequency(section, look)) + "\n",
    }


def verdicts() -> str:
    """Every verdict of the chains that tests/book/verdict_cases.py keeps for them, wrapped as a page shows it."""
    look = Look()
    told = []
    for name, text in CASES.items():
        document = build.document(build.ledger(read.parse(text, "case.toml")), ("overall", "verdict"))
        told.append("\n".join([f"{name}:", *(unstable(document, look) or verdict(document, look)), ""]))
    return "\n".join(told)


def review() -> str:
    """The design review of one demo chain, with its pictures linked."""
    of = build.ledger(read.load(str(GOLDEN.parent.parent / "chains" / f"{REVIEWED}.toml")))
    return review_text(gathered(of, f"{REVIEWED}.toml"), {what: f"review-{what}.svg" for what in WHAT})


def figures(value: Any, path: str = "") -> Iterator[tuple[str, str]]:
    """Every leaf of the document with its path, numbers to four significant digits."""
    if isinstance(value, dict):
        for key, item in value.items():
            yield from figures(item, f"{path}.{key}" if path else key)
    elif isinstance(value, list | tuple):
        for at, item in enumerate(value):
            yield from figures(item, f"{path}[{_label(item, at)}]")
    elif isinstance(value, float):
        yield path, f"{value:.4g}" if abs(value) > 1e-15 else "0"
    else:
        yield path, repr(value) if isinstance(value, str) else str(value).lower()


def _label(item: Any, at: int) -> str:
    """A row by the name that it carries, else by its number."""
    if not isinstance(item, dict):
        return str(at)
    names = [str(item[key]) for key in ("stage", "name", "part", "rail") if item.get(key) and key in item]
    if "pole_hz" in item:
        return str(item["name"])
    return ".".join(names) or str(at)
