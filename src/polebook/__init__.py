"""polebook: a ledger of gain, poles and bandwidth for discrete amplifier chains.

The public face is two functions, `load` and `ledger`. Importing this package imports nothing heavy.
"""

from __future__ import annotations

from os import PathLike
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.chain.model import Chain

__version__ = "0.1.0"
__all__ = ["__version__", "ledger", "load"]


def load(path: str | PathLike[str]) -> Chain:
    """The chain of the file at `path`. Raises `polebook.problem.ProblemsFound` with every fault of the file."""
    from os import fspath

    from polebook.chain import read  # deferred: `import polebook` stays free of the reader

    return read.load(fspath(path))


def ledger(chain: Chain) -> Ledger:
    """The ledger of a chain; its sections are computed when first asked for. Raises ProblemsFound where it has none."""
    from polebook.book import build  # deferred: saves numpy (about 75 ms) where only the file is read

    return build.ledger(chain)
