"""Why a figure of the step response, of the sag or of the delay is null."""

from __future__ import annotations

from polebook.book.workings.sheet import Books

KEYS = frozenset({"rise_time_s", "overshoot_percent", "settling_1_s", "settling_01_s", "sag_percent", "group_delay_s",
                  "group_delay_spread_s"})
TOO_LONG = "the response rings on for too long to be followed"


def why(books: Books, key: str) -> str:
    """One sentence, for one of KEYS."""
    ledger = books.ledger
    if key == "sag_percent":
        return ledger.sag.why
    if key in ("group_delay_s", "group_delay_spread_s"):
        if not ledger.judged:
            return ledger.pulse.why
        if key == "group_delay_spread_s" and not ledger.solution.band.clean:
            return "the chain has no clean midband, so it has no edges to take it between"
        return "the delay is beyond what a number can hold"
    return ledger.pulse.why or TOO_LONG
