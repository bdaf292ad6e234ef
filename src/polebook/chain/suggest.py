"""The nearest known word, for a word that is not known."""

from __future__ import annotations

from collections.abc import Iterable

_LONGEST = 48  # characters compared: the search is quadratic in them
_CUTOFF = 0.5


def nearest(word: str, known: Iterable[str]) -> str:
    """The known word that `word` was most likely meant to be; "" where none is near."""
    import difflib  # deferred: saves 4 ms where a file has no fault

    words = {w.casefold(): w for w in known}
    short = word[:_LONGEST].casefold()
    if short in words:
        return words[short]
    found = difflib.get_close_matches(short, words, n=4, cutoff=_CUTOFF)
    if found:
        score = {w: difflib.SequenceMatcher(None, w, short).ratio() for w in found}
        best = [w for w in found if score[w] == score[found[0]]]
        return words[max(best, key=lambda w: _together(w, short))]
    inside = [w for w in words if len(short) > 2 and (w.startswith(short) or short.startswith(w))]
    return words[min(inside, key=len)] if inside else ""


def _together(a: str, b: str) -> int:
    """How many characters both begin with."""
    return next((at for at, (x, y) in enumerate(zip(a, b, strict=False)) if x != y), min(len(a), len(b)))


def listed(words: Iterable[str], last: str = "and") -> str:
    """ "a, b and c"; "" for none."""
    names = list(words)
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} {last} {names[-1]}"
