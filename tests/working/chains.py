"""The chains whose every figure is walked through, and their ledgers, each computed once."""

from functools import cache

from polebook.book.build import document, ledger
from polebook.book.working import workings
from tests.laws.chains import BY_NAME, PATHS, chain

DEMOS = [path.stem for path in PATHS if path.parent.name == "chains" and path.parent.parent.name != "independent"]
NAMES = list(BY_NAME)


@cache
def known(name):
    """The ledger of a chain."""
    return ledger(chain(name))


@cache
def every(name):
    """Every working of a chain by its figure's name."""
    return {one.figure: one for one in workings(known(name))}


@cache
def told(name):
    """The document of a chain."""
    return document(known(name))
