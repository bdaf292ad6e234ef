"""polebook: a ledger of gain, poles and bandwidth for discrete amplifier chains.

The public face is two functions, `load` and `ledger_of`. Importing this package imports nothing heavy.
"""

from __future__ import annotations

from os import PathLike
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from polebook.chain.model import Chain
    from polebook.ledger.book import Ledger

__version__ = "0.1.0"
__all__ = ["__version__", "ledger_of", "load"]


def load(path: str | PathLike[str]) -> Chain:
    """The chain of the file at `path`. Raises `polebook.problem.ProblemsFound` with every fault of the file."""
    from os import fspath

    from polebook.chain import read  # deferred: `import polebook` stays free of the reader

    return read.load(fspath(path))


def ledger_of(chain: Chain) -> Ledger:
    """The ledger of a chain; its sections are computed when first asked for.

    Not named `ledger`: that is the package which computes it, and importing it would hide a function of its name.
    """
    from polebook.ledger import build  # deferred: saves numpy (about 75 ms) where only the file is read

    return build.ledger(chain)
