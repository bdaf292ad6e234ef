"""A chain handed from process to process: its text, for the reader there, and numbers put in place of the text's."""

from __future__ import annotations

from dataclasses import replace
from types import MappingProxyType
from typing import Any

from polebook.chain.model import Chain
from polebook.chain.read import known_reading, parse
from polebook.plan.wire import Garbled, by_name, many, number, of_names, word

_CHECKED = of_names(text=word, file=word, digest=word, numbers=by_name(number), given=many(word), output=word)


def passed(chain: Chain) -> dict[str, Any] | None:
    """For `taken`. None where a chain is not what its text says, but for numbers put in and where it is looked at."""
    read = known_reading(chain.text, chain.path).chain
    if read is None or read.numbers.keys() - chain.numbers.keys() or read.given - chain.given or \
            replace(chain, numbers=read.numbers, given=read.given, output=read.output) != read:
        return None
    numbers = {path: x for path, x in chain.numbers.items() if read.numbers.get(path) != x}
    return {"text": chain.text, "file": chain.path, "digest": chain.digest, "numbers": numbers,
            "given": sorted(chain.given - read.given), "output": chain.output}


def taken(given: Any) -> Chain:
    """The chain that was passed. Raises Garbled, ProblemsFound."""
    text, file, digest, numbers, stated, output = _CHECKED(given)
    chain = parse(text, file)
    if chain.digest != digest:
        raise Garbled("the reader has another chain of the same text")
    return replace(chain, numbers=MappingProxyType({**chain.numbers, **numbers}), given=chain.given | set(stated),
                   output=output)
