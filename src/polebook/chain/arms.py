"""The arms of a ladder, and whether one of them cuts the chain at midband."""

from __future__ import annotations

from typing import Any

from polebook.chain import rows, values
from polebook.chain.desk import Desk, Owner
from polebook.chain.model import Arm
from polebook.chain.tables import MOST_ARMS
from polebook.refusal import quoted
from polebook.stages.ladder import ARM

_EXAMPLE = 'arms = [ { series_r = "50" }, { shunt_c = "22p" } ]'


def read(desk: Desk, raw: object, owner: Owner) -> tuple[Arm, ...]:
    """The arms of the ladder `owner`; faults go to the desk."""
    path = (*owner.path, "arms")
    if not isinstance(raw, list):
        desk.fault(
            path,
            f"arms of {owner.words} is not a list",
            f"{quoted(raw)} is {values.kind_of_value(raw)}",
            f"write the arms from input to output in brackets: {_EXAMPLE}",
        )
        return ()
    if not raw:
        desk.fault(path, f"{owner.words} has no arm", "a ladder holds at least one", f"write {_EXAMPLE}")
    if len(raw) > MOST_ARMS:
        desk.fault(
            (*path, MOST_ARMS),
            f"{owner.words} has {len(raw)} arms, and at most {MOST_ARMS} are taken",
            "the ledger is made for networks that one can hold in view",
            "split the ladder over several stages",
        )
    found = []
    for at, item in enumerate(raw[:MOST_ARMS]):
        if isinstance(item, dict):
            arm = _arm(desk, item, at, owner)
            if arm:
                found.append(arm)
        else:
            desk.fault(
                (*path, at),
                f"{quoted(item)} is not an arm",
                f"an arm of {owner.words} is a table of its parts",
                'write it in braces: { series_r = "50" }',
            )
    return tuple(found)


def _arm(desk: Desk, table: dict[str, Any], at: int, ladder: Owner) -> Arm | None:
    number = at + 1
    owner = Owner((*ladder.path, "arms", at), f"{ladder.prefix}.arms.{number}", f"arm {number} of {ladder.words}")
    row = rows.read(desk, table, owner, ARM)
    parts = tuple(key for key in table if key[:-1] in ("series_", "shunt_") and key[-1] in "rlc")
    if not parts:
        desk.fault(
            owner.path,
            f"{owner.words} has no part",
            "an arm holds series_r, series_l, series_c or shunt_r, shunt_l, shunt_c",
            'add a part: { series_r = "50" }',
        )
        return None
    if len({key[:-1] for key in parts}) == 2:
        desk.fault(
            owner.path,
            f"{owner.words} holds series and shunt parts",
            "an arm is one or the other",
            "write two arms, in the order from input to output",
        )
        return None
    desk.mark(owner.prefix, owner.path)
    arm = Arm(number, parts[0].startswith("series_"), parts, row.texts.get("role", ""))
    if all(owner.number(key) in desk.numbers for key in parts) and _zeros_fit(desk, arm, owner):
        _cut(desk, arm, owner)
    return arm


def state(arm: Arm, key: str, value: float) -> str:
    """What a part is at midband: "open", "short" or "resistor"."""
    letter = key[-1]
    if letter == "r":
        return "resistor" if value else "short"
    if letter == "l":
        return "open" if arm.role_of(key) == "low" and value else "short"
    return "short" if arm.role_of(key) == "low" and value else "open"


def _zeros_fit(desk: Desk, arm: Arm, owner: Owner) -> bool:
    """Zero means that a part is not there; where it would mean something else it is a fault."""
    fits = True
    for key in arm.parts:
        alone = len(arm.parts) == 1
        if desk.numbers[owner.number(key)]:
            continue
        if key[-1] == "c" and arm.role_of(key) == "low":
            why = "a coupling or bypass capacitor of zero cuts its path"
        elif key[-1] != "c" and arm.series and not alone:
            why = "the parts of a series arm stand in parallel, and a zero among them would short the others"
        elif key[-1] != "c" and not arm.series and alone:
            why = "a shunt of zero shorts the signal to ground"
        else:
            continue
        fits = False
        desk.fault((*owner.path, key), f"{key} of {owner.words} is zero", why, f"give it a value, or take {key} out")
    return fits


def _cut(desk: Desk, arm: Arm, owner: Owner) -> None:
    """The fault of a series arm that is open at midband, or of a shunt arm that is a short there."""
    states = [state(arm, key, desk.numbers[owner.number(key)]) for key in arm.parts]
    if arm.series and all(s == "open" for s in states):
        what, how = "open", "in parallel, each open"
        fix = (
            'give its C role = "low", or put a resistor or inductor beside it'
            if any(k[-1] == "c" for k in arm.parts)
            else ('give its L role = "high", or put a resistor beside it')
        )
    elif not arm.series and all(s == "short" for s in states):
        what, how = "a short", "in series, each a short"
        fix = "put a resistor in series with it in the arm, or change its role"
    else:
        return
    parts = " and ".join(arm.parts)
    desk.fault(
        owner.path,
        f"{owner.words} cuts the chain at midband",
        f"its {parts} {'stand ' + how if len(arm.parts) > 1 else 'is ' + what} at midband, "
        f"so {'no signal passes' if arm.series else 'the signal is shorted to ground'}",
        fix,
    )
