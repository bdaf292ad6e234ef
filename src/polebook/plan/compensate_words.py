"""Why a capacitor can't do what is wanted, in figures."""

from __future__ import annotations

from polebook.plan.compensate_search import HIT, Found
from polebook.quantity import engineering

_WHAT = {"edge": "upper edge", "pole": "dominant pole"}


def unreached(path: str, found: Found, what: str, hz: float) -> str:
    """What speaks against a capacitor at `path`, for a wanted edge or pole at hz."""
    named, wanted = _WHAT[what], engineering(hz, "Hz")
    if found.jump is not None:
        farad, above, below = found.jump
        return f"at {engineering(farad, 'F')} the {named} leaps from {engineering(above, 'Hz')} to " \
               f"{engineering(below, 'Hz')}: no value gives {wanted}"
    if found.without is None:
        return f"the chain has no {named} without {path}, and none at {wanted} with any value of it"
    if abs(found.without / hz - 1.0) < HIT:
        return f"the {named} lies at {wanted} without {path}"
    if found.without < hz:
        return f"without {path} the {named} lies at {engineering(found.without, 'Hz')}, below the wanted {wanted}: " \
               "a capacitor only lowers it"
    told = f"no value of {path} brings the {named} from {engineering(found.without, 'Hz')} to {wanted}"
    if found.gap is not None:
        gap = found.gap
        told += f": with {engineering(gap.before, 'F')} it lies at {engineering(gap.above, 'Hz')}, with more {gap.why}"
        if gap.after is not None:
            told += f", and from {engineering(gap.after, 'F')} on it lies at {engineering(gap.below, 'Hz')} or lower"
    elif found.least is not None:
        told += f": it stays above {engineering(found.least, 'Hz')}"
    return told
