"""Ladder: passive arms from input to output, in series or shunt."""

from __future__ import annotations

from polebook.param import Param
from polebook.stages.base import Kind
from polebook.stages.stamper import GROUND, ArmLike, Given, Stamper, Value
from polebook.stages.terminals import output_capacitance

PARAMS = (
    Param("arms", "arms", "the arms from input to output: [{ series_r = ... }, { shunt_c = ... }]", required=True),
)

ARM_SERIES = (
    Param("series_r", "resistance", "resistor of a series arm", sign="nonnegative"),
    Param("series_l", "inductance", "inductor of a series arm", role="high", sign="nonnegative"),
    Param("series_c", "capacitance", "capacitor of a series arm", role="low", sign="nonnegative"),
)
ARM_SHUNT = (
    Param("shunt_r", "resistance", "resistor of a shunt arm", sign="nonnegative"),
    Param("shunt_l", "inductance", "inductor of a shunt arm", role="low", sign="nonnegative"),
    Param("shunt_c", "capacitance", "capacitor of a shunt arm", role="high", sign="nonnegative"),
)
ARM_ROLE = Param("role", "choice", "end of the band at which the arm's C and L act", choices=("low", "high"))
ARM = (*ARM_SERIES, *ARM_SHUNT, ARM_ROLE)
"""Keys of one arm. Several parts of a series arm stand in parallel, several of a shunt arm in series."""

KINDS = (Kind("ladder", "ladder", (), PARAMS, "passive arms: pads, filters, cables, traps"),)

_DEFAULT_ROLE = {(True, "c"): "low", (True, "l"): "high", (False, "c"): "high", (False, "l"): "low"}


def arm_part(arm: ArmLike, key: str) -> tuple[str, str]:
    """(name in the ledger, type) of an arm's part: `arm2`, or `arm2.c` where the arm holds several."""
    letter = key[-1]
    name = f"arm{arm.number}" if len(arm.parts) == 1 else f"arm{arm.number}.{letter}"
    role = arm.role or _DEFAULT_ROLE.get((arm.series, letter), "")
    return name, "R" if letter == "r" else f"{letter.upper()}-{role}"


def _parts(arm: ArmLike, given: Given) -> list[tuple[str, str, Value | None]]:
    return [(*arm_part(arm, key), given.number(f"arms.{arm.number}.{key}")) for key in arm.parts]


def stamp(st: Stamper, before: int, given: Given) -> int:
    """The arms from input to output; the node behind the last series arm is the output, those before inner ones."""
    arms = [(arm, _parts(arm, given)) for arm in given.arms]
    standing = [arm.series and all(st.stands(value) for _, type_, value in parts if type_[0] in "RL")
                for arm, parts in arms]
    last = max((k for k, stands in enumerate(standing) if stands), default=-1)
    start = st.series("a", before, "in", [("couple", "C-low", given.number("couple"))])
    node, site, inner = start, "in" if last >= 0 else "out", 0
    for k, (arm, parts) in enumerate(arms):
        if not arm.series:
            _shunt(st, arm, node, site, parts)
        elif standing[k]:
            inner += k != last
            site = "out" if k == last else str(inner)
            node = _series(st, arm, node, site, parts)
    output_capacitance(st, given, node)
    return node


def _series(st: Stamper, arm: ArmLike, node: int, site: str, parts: list[tuple[str, str, Value | None]]) -> int:
    """Parts in parallel. A high-role capacitor stands beside the rest: the rest carries the signal at midband."""
    behind = st.series(site, node, site, [p for p in parts if p[1] != "C-high"])
    for name, type_, value in parts:
        if type_ == "C-high":
            st.capacitor(name, node, behind, value)
    return behind


def _shunt(st: Stamper, arm: ArmLike, node: int, site: str, parts: list[tuple[str, str, Value | None]]) -> None:
    """Parts in series to ground. What a high-role capacitor sees at midband is the node behind the others."""
    types = [type_ for _, type_, _ in parts]
    if not all(st.stands(value) for _, type_, value in parts if type_[0] == "C"):
        return  # no capacitor, no current: the arm is open
    if "C-high" not in types or "L-low" in types:
        st.link(node, GROUND, parts)
        return
    for part in parts:
        if part[1] != "C-high":
            node = st.series(f"arm{arm.number}", node, site, [part])
    for name, type_, value in parts:
        if type_ == "C-high":
            st.capacitor(name, node, GROUND, value)


STAMPS = {"ladder": stamp}
