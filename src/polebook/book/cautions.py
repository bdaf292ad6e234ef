"""What a ledger has to warn of beside its figures."""

from __future__ import annotations

from polebook.book.solution import Solution
from polebook.problem import Problem

TOUCH_V = 60.0  # V d.c.; IEC 61140 and EN 60204-1 take 60 V d.c. (25 V a.c.) as the limit without touch protection
BLIND = 0.3


def cautions(of: Solution, judged: bool) -> list[Problem]:
    """Cautions of the signal figures, and the usual ones where the voltages can hurt somebody."""
    return [*_safety(of), *(_band(of) if judged else [_stability(of)])]


def _caution(of: Solution, owner: str, what: str, why: str, fix: str) -> Problem:
    return Problem(of.chain.places.get(owner), what, why, fix, "caution")


def _safety(of: Solution) -> list[Problem]:
    result = []
    rails = [of.chain.get("supply.positive", 0.0) or 0.0, of.chain.get("supply.negative", 0.0) or 0.0]
    if max(abs(rails[0]), abs(rails[1]), rails[0] - rails[1]) > TOUCH_V:
        result.append(_caution(
            of, "supply", "rails above 60 V d.c. can injure or kill",
            "above 60 V d.c. bare parts must not be within reach (IEC 61140, EN 60204-1); capacitors stay charged "
            "after the supply is off",
            "follow your local codes, and leave the work to people licensed for it where those ask it"))
    if any(card.family == "triode" for card in of.chain.cards.values() if _used(of, card.name)):
        result.append(_caution(
            of, "supply", "valve stages run hot and at high voltage",
            "glass and sockets burn, and the supply holds its charge for minutes",
            "discharge and measure before touching; follow your local codes and licensed practice"))
    return result


def _used(of: Solution, card: str) -> bool:
    return any(card in (stage.device, stage.upper) and not stage.left_out for stage in of.chain.stages)


def _stability(of: Solution) -> Problem:
    right = of.winding.right
    if right is None:
        return _caution(of, "", "stability could not be told",
                        "the winding of the determinant came out no whole number, so edges and what rests on them "
                        "are left out",
                        "look for values many decades apart, or parts that all but cancel")
    return _caution(of, "", "the chain is unstable",
                    f"{right} of its poles {'has' if right == 1 else 'have'} a positive real part (winding count): "
                    "it will oscillate, and it has no edges",
                    "look at the loops: bridges, feedback, and what they are loaded with")


def _band(of: Solution) -> list[Problem]:
    band, constants = of.band, of.constants
    if not band.clean:
        return [_caution(of, "", "no clean midband",
                         "at no frequency does the whole network come within 3 dB of the midband gain, so that "
                         "there are no edges",
                         "part the low-role and high-role corners, or look for an arm in the wrong role")]
    result = []
    ends = (("upper", constants.upper_hz, band.upper_hz), ("lower", constants.lower_hz, band.lower_hz))
    for name, estimate, exact in ends:
        if estimate is not None and exact is not None and abs(estimate / exact - 1.0) > BLIND:
            result.append(_caution(
                of, "",
                f"the {name}-edge estimate from time constants is {estimate / exact:.2g} times the exact edge",
                "the sum of time constants is blind to complex poles, and to corners that lie together",
                "go by the exact edge"))
    return result
