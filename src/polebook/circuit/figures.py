"""The small-signal figures of each stage's card at its operating point."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from polebook.chain.model import Chain, Stage
from polebook.circuit.bias import Operating
from polebook.circuit.terminals import Get
from polebook.devices import bjt, fet, opamp, triode
from polebook.devices.missing import Lack, Missing
from polebook.devices.spectrum import Noise
from polebook.stages.stamper import Figures, Value

NOTHING: Figures = MappingProxyType({})
UNKNOWN = Operating(None, None, None, None, None, None)


def card_figures(chain: Chain, card: str, get: Get, point: Operating) -> tuple[Figures, tuple[Lack, ...]]:
    """Figures of one card at one operating point (SI units), and what could not be had."""
    family = chain.cards[card].family

    def read(key: str) -> Value | None:
        return get(f"device.{card}.{key}")

    try:
        if family == "bjt":
            celsius = get("supply.temperature")
            vbe = bjt.base_emitter_voltage(read, celsius)
            return bjt.small_signal(read, point.current, point.across, vbe, celsius), ()
        if family == "triode":
            return triode.small_signal(read, point.current), ()
        if family == "opamp":
            return opamp.small_signal(read), ()
        return fet.small_signal(read, point.current), ()
    except Missing as missing:
        return missing.figures, missing.lacks


def stage_figures(chain: Chain, stage: Stage, get: Get,
                  points: Mapping[str, Operating]) -> tuple[Figures, Figures, tuple[Lack, ...]]:
    """Figures of the stage's card, of its upper card where it is a cascode, and what both lack."""
    if not stage.device:
        return NOTHING, NOTHING, ()
    own, lacks = card_figures(chain, stage.device, get, points.get(stage.name, UNKNOWN))
    if stage.kind != "cascode":
        return own, NOTHING, lacks
    card = stage.upper or stage.device
    upper, more = card_figures(chain, card, get, points.get(f"{stage.name}_upper", UNKNOWN))
    return own, upper, lacks + more


def stage_noise(chain: Chain, stage: Stage, get: Get, points: Mapping[str, Operating], figures: Figures,
                upper: Figures) -> tuple[Noise, Noise]:
    """Noise sources of the stage's device, and of its upper one where it is a cascode."""
    if not stage.device:
        return {}, {}
    own = card_noise(chain, stage.device, get, points.get(stage.name, UNKNOWN), figures)
    if stage.kind != "cascode":
        return own, {}
    return own, card_noise(chain, stage.upper or stage.device, get, points.get(f"{stage.name}_upper", UNKNOWN), upper)


def card_noise(chain: Chain, card: str, get: Get, point: Operating, figures: Figures) -> Noise:
    """Noise sources of one card at one operating point, from its small-signal figures there."""
    family = chain.cards[card].family

    def read(key: str) -> Value | None:
        return get(f"device.{card}.{key}")

    if family == "bjt":
        return bjt.noise(read, figures, point.current)
    if family == "triode":
        return triode.noise(read, figures)
    return opamp.noise(read) if family == "opamp" else fet.noise(read, figures, get("supply.temperature"))
