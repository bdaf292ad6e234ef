"""What a ledger has to warn of beside its figures."""

from __future__ import annotations

from polebook.book.solution import Solution
from polebook.chain.suggest import listed
from polebook.problem import Problem

TOUCH_V = 60.0  # V d.c.; IEC 61140 and EN 60204-1 take 60 V d.c. (25 V a.c.) as the limit without touch protection
BLIND = 0.3
CODES = "keep to your local codes, and leave the work to a licensed practitioner where they ask for one"


def cautions(of: Solution, judged: bool) -> list[Problem]:
    """Cautions of the signal figures, and the usual ones where voltage or heat can hurt somebody.

    Instability is no caution: it is told before any figure.
    """
    return [*_safety(of), *_rounded(of), *(_band(of) if judged else [])]


def _caution(of: Solution, owner: str, what: str, why: str, fix: str) -> Problem:
    return Problem(of.chain.places.get(owner), what, why, fix, "caution")


def _safety(of: Solution) -> list[Problem]:
    result = []
    rails = [of.chain.get("supply.positive", 0.0) or 0.0, of.chain.get("supply.negative", 0.0) or 0.0]
    high = max(abs(rails[0]), abs(rails[1]), rails[0] - rails[1]) > TOUCH_V
    if high:
        result.append(_caution(
            of, "supply", "the rails are above 60 V d.c., which can kill",
            "live parts at such voltages must be out of reach (IEC 61140, EN 60204-1), and capacitors hold their "
            "charge after the supply is off",
            f"discharge and measure before you touch; {CODES}"))
    valves = sorted({stage.name for stage in of.chain.stages if not stage.left_out and stage.device
                     and of.chain.cards[stage.device].family == "triode"})
    if valves:
        why = "their glass stays hot for minutes, and a supply without its load stands higher than stated"
        if not high:
            why = "their glass stays hot for minutes, and valve supplies are above 60 V d.c. as a rule"
        fix = "let them cool, and keep wiring and hands off the glass"
        result.append(_caution(of, "supply", f"valves ({', '.join(valves)}) get hot enough to burn", why,
                               fix if high else f"{fix}; discharge and measure before you touch; {CODES}"))
    return result


def _rounded(of: Solution) -> list[Problem]:
    """What double precision leaves too few digits of."""
    parts = of.circuit.layout.parts
    names = [f"{parts[index].stage}.{parts[index].name}" for index in of.constants.untold]
    if not names:
        return []
    return [_caution(of, "", f"the time constants of {listed(names)} can't be told",
                     "values lie so far apart that what these parts see is lost in rounding",
                     "look for a value with a wrong prefix (p for M, a missing u)")]


def _band(of: Solution) -> list[Problem]:
    band, constants = of.band, of.constants
    if not band.clean:
        return [_caution(of, "", "no clean midband",
                         "the corners of both ends lie too close for a band to form between them, so that there are "
                         "no edges", "part them, or look for an arm in the wrong role")]
    ends = (("upper", constants.upper_hz, band.upper_hz), ("lower", constants.lower_hz, band.lower_hz))
    off = [f"{estimate / exact:.2g} times the exact {name} edge" for name, estimate, exact in ends
           if estimate is not None and exact is not None and abs(estimate / exact - 1.0) > BLIND]
    if not off:
        return []
    return [_caution(of, "", f"the sum of time constants comes to {' and '.join(off)}",
                     "it is blind to complex poles, and to corners that lie together", "go by the exact figure")]
