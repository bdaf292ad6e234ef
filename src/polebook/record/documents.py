"""Documents that are written beside a chain: each carries a mark by which it is known again as ours and as unedited.

Only such a file is written over. A review in which somebody has made remarks, or any other file, stays.
"""

from __future__ import annotations

import hashlib
import os
import re
from collections.abc import Iterable, Mapping

from polebook.problem import Place, Problem, ProblemsFound
from polebook.text import files

_MARK = re.compile(r"<!-- polebook [a-z]+; written anew only while unedited: sha256 ([0-9a-f]{64}) -->\n")
_DECLARED = re.compile(r"<\?xml[^\n]*\n")


def marked(text: str, command: str) -> str:
    """`text` with the mark in its first line, of XML in the second one, where a declaration has to stand first."""
    declared = _DECLARED.match(text)
    at = declared.end() if declared else 0
    return f"{text[:at]}<!-- polebook {command}; written anew only while unedited: sha256 {_sum(text)} -->\n{text[at:]}"


def intact(text: str) -> bool:
    """Whether a text carries the mark, and is as it was written. Line ends may have been changed on the way."""
    plain = text.replace("\r\n", "\n")
    mark = _MARK.search(plain)
    return mark is not None and _sum(plain[:mark.start()] + plain[mark.end():]) == mark[1]


def check(names: Iterable[str], chain: str, force: bool) -> None:
    """Raises ProblemsFound where a document can't be put at one of the names: what stands there, and why it stays.

    With `force` anything may be written over but the chain itself.
    """
    problems = [found for name in names if (found := _problem(name, chain, force)) is not None]
    if problems:
        raise ProblemsFound(problems)


def save(texts: Mapping[str, str]) -> None:
    """Writes every text at its name, each whole or not at all. Raises ProblemsFound."""
    for name, text in texts.items():
        files.save(name, text)


def _problem(name: str, chain: str, force: bool) -> Problem | None:
    try:
        if os.path.realpath(name) == os.path.realpath(chain):
            return Problem(Place(name), "this is the chain itself", "the document would be written over it",
                           "choose another name")
        folder = os.path.dirname(os.path.realpath(name))
        if os.path.isdir(name):
            return Problem(Place(name), "this is a folder", "a document is asked for", "name a file in it")
        if not os.path.isdir(folder):
            return Problem(Place(name), "the file can't be written", "its folder is not there",
                           "make the folder first, or choose another")
        if not os.access(folder, os.W_OK | os.X_OK):
            return Problem(Place(name), "the file can't be written", "nothing may be written in its folder",
                           "change the folder's permissions, or choose another")
        if force or not os.path.lexists(name):
            return None
        text = files.read(name).text
    except ValueError:  # a NUL in the name: the saving tells it
        return None
    except ProblemsFound:  # not a text, or none that may be read
        text = ""
    if intact(text):
        return None
    fix = "choose another name, move it away, or write over it with --force"
    if _MARK.search(text.replace("\r\n", "\n")):
        return Problem(Place(name), "this document was edited after it was written",
                       "what was put into it would be lost", fix)
    return Problem(Place(name), "there is another file of that name",
                   "only what polebook has written itself, and nobody has edited, is written over", fix)


def _sum(text: str) -> str:
    return hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()
