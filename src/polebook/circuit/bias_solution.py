"""The d.c. solution of a chain: planned once for its structure, solved for any values.

`plan` sorts out which nodes hang together without a capacitor, which currents are stated and which follow from
resistors, rails and cards. `solve` is pure: no branch on a value and a fixed number of Newton steps, so that floats,
arrays (a spread) and complex numbers (derivatives by complex step) pass alike. Early voltage, channel slope, ro and
rx are left out, and the active-region laws are kept in saturation and cut-off.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from polebook.chain.model import Chain
from polebook.circuit.bias_build import build
from polebook.circuit.bias_compile import Compiled, Solution, compiled, level, solution
from polebook.circuit.bias_group import Group, groups
from polebook.circuit.bias_laws import Get, control_drop, reading
from polebook.circuit.bias_network import Amplifier, Device
from polebook.devices.num import Value


@dataclass(frozen=True, slots=True)
class Operating:
    """Where a stage stands at d.c. A figure that cannot be had is None.

    current         A, magnitude; across V, as for n-types (a stated one wins over the rails)
    control_v, lower_v, output_v   V to ground, signed
    origin          "given" or "solved", None without a current
    solved_current  A, what the network gives where the current is stated; only where `solve` is asked to compare
    converged       False where the laws are not met to 1e-12 (an array of bool for arrays)

    Of an op-amp or block stage only control_v, its input, and output_v are told.
    """

    current: Value | None
    across: Value | None
    control_v: Value | None
    lower_v: Value | None
    output_v: Value | None
    origin: str | None
    solved_current: Value | None = None
    converged: Value = True


@dataclass(frozen=True, slots=True)
class Plan:
    """The d.c. structure of a chain, each group ready to be solved.

    raw         groups as the network gives them, beside their plans in `groups`
    amplifiers  op-amp and block stages; `levels` the held nodes that they touch
    floating    stages with no d.c. path to the control terminal
    """

    groups: tuple[Compiled, ...]
    raw: tuple[Group, ...]
    amplifiers: tuple[Amplifier, ...]
    levels: dict[int, str]
    floating: tuple[str, ...]


def plan(chain: Chain) -> Plan:
    """Plans the d.c. solution of a chain: structure, and the orders of elimination at the file's own values."""
    net = build(chain)
    raw = groups(net)
    ends = {node: net.level(node) for a in net.amplifiers for node in (a.input, a.output) if net.level(node)}
    parts = tuple(compiled(group, chain.get) for group in raw)
    return Plan(parts, tuple(raw), tuple(net.amplifiers), ends, net.floating())


def solve(plan: Plan, get: Get, compare: bool = False) -> dict[str, Operating]:
    """Operating points by stage name, a cascode's upper device as NAME_upper.

    get      path -> value (float, array of any shape, complex) or None; what stands must be what stood in `plan`
    compare  also what the network would give for each stated current, the others standing (nominal floats only)
    """
    result: dict[str, Operating] = {}
    inputs: dict[int, Value] = {}
    for part in plan.groups:
        solved = solution(part, get)
        for k in range(len(part.group.devices)):
            result.update(_operating(solved, k, get))
        if plan.amplifiers:
            inputs.update({node: solved.voltage(node) for node in part.group.nodes})
    for amplifier in plan.amplifiers:
        entry = plan.levels.get(amplifier.input)
        control = level(entry, get) if entry else inputs.get(amplifier.input)
        result[amplifier.name] = Operating(None, None, control, None, level(plan.levels[amplifier.output], get), None)
    return {**result, **compared(plan, get, result)} if compare else result


def _operating(solved: Solution, k: int, get: Get) -> dict[str, Operating]:
    """The operating point of a group's k-th device, and of a cascode's upper one."""
    device, law = solved.compiled.group.devices[k], solved.numbers.laws[k]
    given = law.current is not None
    current = law.current if given else solved.unknown(solved.compiled.cols.current[k])
    lower, output = solved.voltage(device.lower), solved.voltage(device.output)
    across = solved.numbers.across[k]
    middle = None if lower is None or across is None else lower + device.sign * across
    origin = None if current is None else "given" if given else "solved"
    upper = {}
    if device.upper:
        upper = _upper(solved, k, current, middle, output, get)
        output = middle
    elif output is None:
        output = middle
    if across is None and output is not None and lower is not None:
        across = device.sign * (output - lower)
    control = _control(solved, k, current, lower, across)
    return {device.name: Operating(current, across, control, lower, output, origin, None, solved.converged), **upper}


def _control(solved: Solution, k: int, current: Value | None, lower: Value | None,
             across: Value | None) -> Value | None:
    """Voltage at the control terminal: by the law of a stated current, else as the network has it."""
    device, law = solved.compiled.group.devices[k], solved.numbers.laws[k]
    if law.current is not None and law.drop is not None and lower is not None:
        if device.family != "triode":
            return lower + device.sign * law.drop
        if across is not None:
            return lower + device.sign * (law.drop - law.tilt * across)
    side, stopper = solved.voltage(device.control), solved.numbers.stoppers[k]
    if side is None or stopper is None or device.family != "bjt":
        return side
    return None if current is None else side - device.sign * stopper * law.share * current


def _upper(solved: Solution, k: int, current: Value | None, middle: Value | None, output: Value | None,
           get: Get) -> dict[str, Operating]:
    """A cascode's upper device: the lower one's current but for its own control's share, and what the rails leave."""
    device, law = solved.compiled.group.devices[k], solved.numbers.laws[k]
    own = None if current is None else current / (1.0 + law.above)
    drop = control_drop(device.upper_family, reading(device.upper, get), own, get)
    if own is None and device.upper_family != "bjt":
        drop = None
    control = None if middle is None or drop is None else middle + device.sign * drop
    across = None if middle is None or output is None else device.sign * (output - middle)
    origin = None if own is None else "given" if law.current is not None else "solved"
    point = Operating(own, across, control, middle, output, origin, None, solved.converged)
    return {f"{device.name}_upper": point}


def compared(plan: Plan, get: Get, points: dict[str, Operating]) -> dict[str, Operating]:
    """The points of all stated currents with `solved_current`: one current at a time is set free. Floats only."""
    result = {}
    for group in plan.raw:
        for k, device in enumerate(group.devices):
            if device.current:
                free = _freed(group, k, device)
                solved = solution(compiled(free, get), get)
                current = solved.unknown(solved.compiled.cols.current[k])
                result[device.name] = replace(points[device.name], solved_current=current)
    return result


def _freed(group: Group, k: int, device: Device) -> Group:
    devices = (*group.devices[:k], replace(device, current=""), *group.devices[k + 1:])
    return replace(group, devices=devices)
