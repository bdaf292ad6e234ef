"""What is amiss with a solved bias: cautions, told at the file's own values."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.chain.model import Chain
from polebook.circuit.bias_laws import reading
from polebook.circuit.bias_missing import BIAS_KEYS, missing
from polebook.circuit.bias_network import Device
from polebook.circuit.bias_region import region
from polebook.circuit.bias_solution import Operating, Plan, compared
from polebook.devices import ratings
from polebook.problem import Problem
from polebook.quantity import engineering
from polebook.stages.base import GROUP, TERMINALS, slot_key

APART = 0.2  # share by which a stated and a solved figure may differ


def cautions(plan: Plan, chain: Chain, operating: dict[str, Operating]) -> list[Problem]:
    """Every caution of the bias, stage by stage.

    `operating` holds plain floats, the solution at the file's values. Where `solve` was not asked to compare, the
    comparison of stated currents is made here.
    """
    points = operating
    if all(point.solved_current is None for point in operating.values()):
        points = {**operating, **compared(plan, chain.get, operating)}
    lacking = missing(plan, chain)
    found: list[Problem] = []
    for device in (device for part in plan.groups for device in part.group.devices):
        point = points[device.name]
        if device.name in plan.floating:
            found.append(_floating(chain, device))
        if device.name in lacking:
            found.append(_missing(chain, device, lacking[device.name]))
        if not point.converged:
            found.append(_unsolved(chain, device))
        found += _apart(chain, device, point)
        found += _device(chain, device, device.name, device.card, device.family, point)
        if device.upper:
            point, what = points[f"{device.name}_upper"], f"the upper device of {device.name}"
            found += _device(chain, device, what, device.upper, device.upper_family, point)
    amplifiers = {amplifier.name for amplifier in plan.amplifiers}
    return found + [_caution(chain, name, f"no d.c. path to the input of {name}",
                             "its non-inverting input hangs on capacitors alone, so nothing sets its voltage",
                             "give it an r_bias") for name in plan.floating if name in amplifiers]


def _caution(chain: Chain, path: str, what: str, why: str, fix: str) -> Problem:
    place = chain.places.get(path) or chain.places.get(path.partition(".")[0])
    return Problem(place, what, why, fix, "caution")


def _floating(chain: Chain, device: Device) -> Problem:
    control = TERMINALS[GROUP[device.family]]["control"]
    return _caution(chain, device.name, f"no d.c. path to the {control} of {device.name}",
                    f"the {control} hangs on capacitors alone, so nothing sets its voltage",
                    f"give {BIAS_KEYS[device.family]}, or couple it directly to the stage before")


def _missing(chain: Chain, device: Device, ways: tuple[str, ...]) -> Problem:
    return _caution(chain, device.name, f"the quiescent current of {device.name} can't be had",
                    "it is not stated, and resistors, rails and card don't settle it",
                    f"give {', or '.join(ways)}")


def _unsolved(chain: Chain, device: Device) -> Problem:
    return _caution(chain, device.name, f"the bias of {device.name} is not solved",
                    "the laws of its devices are not met to 1e-12 after the last step of the solution",
                    f"state {slot_key('current', device.family)} of {device.name}")


def _apart(chain: Chain, device: Device, point: Operating) -> Iterator[Problem]:
    """Stated figures that lie over 20 % from what the network gives."""
    name, solved = device.name, point.solved_current
    current, across = point.current, point.across
    if solved is not None and current is not None and abs(solved - current) > APART * current:
        key = slot_key("current", device.family)
        yield _caution(chain, device.current,
                       f"{key} of {name} is stated as {engineering(current, 'A')}, its network gives "
                       f"{engineering(solved, 'A')}", "they are over 20 % apart; the stated current stands",
                       f"correct {key} or the resistors, or take {key} out to have it solved")
    if across is None or not device.across or device.upper or point.output_v is None or point.lower_v is None:
        return
    rails = device.sign * (point.output_v - point.lower_v)
    if abs(rails - across) > APART * across:
        key = slot_key("across", device.family)
        yield _caution(chain, device.across,
                       f"{key} of {name} is stated as {engineering(across, 'V')}, current, resistors and rails "
                       f"give {engineering(rails, 'V')}",
                       "they are over 20 % apart; the stated voltage stands for capacitances and clipping",
                       f"correct {key}, or take it out to have it solved")


def _device(chain: Chain, device: Device, what: str, card: str, family: str, point: Operating) -> Iterator[Problem]:
    """Region of operation, ratings, and a voltage that a capacitance needs and that can't be known."""
    get, name = reading(card, chain.get), device.name
    for sentence, why in region(family, get, device.sign, point):
        yield _caution(chain, name, f"{what} {sentence}", why, f"check the bias of {name}")
    for key, sentence in ratings.exceeded(get, point.current, point.across):
        yield _caution(chain, name, f"{what} {sentence}", ratings.why(key, card),
                       "lower its current or voltage, or take a device that stands it")
    if point.across is not None:
        return
    key = slot_key("across", device.family)
    why = f"{key} is not stated and can't be had from resistors and rails"
    if device.upper:
        why = f"{key} of a cascode is the lower device's; without it the rails can't be shared out"
    if family == "bjt" and get("cmu") is None and get("cob") is not None:
        yield _caution(chain, name, f"cmu of {what} is taken at 0 V", why, f"give {key} of {name}")
    elif device.upper and what == name:
        yield _caution(chain, name, f"the voltages across both devices of {name} can't be had", why, f"give {key}")
