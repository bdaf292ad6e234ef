"""Chain -> circuit: the topology once, and the values of its parts as often as wanted."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from polebook.chain.model import Chain, Stage
from polebook.circuit import bias, terminals
from polebook.circuit.bias import Operating
from polebook.circuit.bias_missing import missing as missing_currents
from polebook.circuit.figures import stage_figures, stage_noise
from polebook.circuit.layout import Layout, arrange
from polebook.circuit.recorder import Collector, Recorder
from polebook.circuit.terminals import Get
from polebook.circuit.views import Network, network
from polebook.devices.missing import Lack
from polebook.devices.spectrum import Spectrum
from polebook.problem import Problem, ProblemsFound
from polebook.stages.registry import KINDS, STAMPS
from polebook.stages.stamper import GROUND, Given, Stamper, Value

CURRENT_KEYS = {"bjt": "ic", "triode": "ia"}  # else id


@dataclass(frozen=True, slots=True)
class Circuit:
    """A chain with its topology, its operating points and its network at the file's own values."""

    chain: Chain
    plan: bias.Plan
    layout: Layout
    points: Mapping[str, Operating]
    network: Network


def circuit(chain: Chain) -> Circuit:
    """Solves the bias, and lays out the network. Raises ProblemsFound where a needed figure cannot be had.

    Where the chain is looked at ahead of its load, what follows is one segment with the load, and no way to go on.
    """
    plan = bias.plan(chain)
    get = chain.numbers.get
    points = bias.solve(plan, get)
    recorder = Recorder()
    source = recorder.begin("source", chain.source_kind, GROUND)
    emf, source.after = terminals.source(recorder, chain.source_kind == "voltage", get)
    lacks: list[tuple[Stage, Lack]] = []
    at, ended = source.after, False
    for stage in chain.stages:
        if ended:
            recorder.within(stage.name)
        else:
            segment = recorder.begin(stage.name, stage.kind, at)
        if not stage.left_out:
            given, missing = given_of(chain, stage, get, points)
            lacks += [(stage, lack) for lack in missing]
            if not missing:
                at = STAMPS[KINDS[stage.kind].topology](recorder, at, given)
        if not ended:
            segment.after = at
        if stage.name == chain.output:
            recorder.begin("load", "load", at).after = at
            ended = True
    if lacks:
        raise ProblemsFound([_problem(chain, plan, stage, lack) for stage, lack in lacks], "")
    if ended:
        recorder.within("load")
        terminals.load(recorder, at, get)
    else:
        load = recorder.begin("load", "load", at)
        load.after = terminals.load(recorder, at, get)
    layout = arrange(recorder, emf)
    return Circuit(chain, plan, layout, points, network(layout, recorder.values))


def given_of(chain: Chain, stage: Stage, get: Get, points: Mapping[str, Operating]) -> tuple[Given, tuple[Lack, ...]]:
    """What a stage is stamped from, and what is missing for it."""
    figures, upper, lacks = stage_figures(chain, stage, get, points)
    noise, upper_noise = ({}, {}) if lacks else stage_noise(chain, stage, get, points, figures, upper)
    family = chain.cards[stage.device].family if stage.device else ""
    prefix = stage.name + "."
    given = Given(family, lambda key: get(prefix + key), figures, upper, stage.arms, stage.poles, stage.lower_poles,
                  noise, upper_noise)
    return given, lacks


def values(of: Circuit, override: Mapping[str, Value]) -> list[Value]:
    """Part values with some numbers of the file replaced: floats, complex numbers or arrays of one shape.

    The parts are those of the layout, in its order; a value that makes a part vanish needs a new circuit.
    """
    return built(of, override)[0]


def values_and_noise(of: Circuit, override: Mapping[str, Value]) -> tuple[list[Value], list[Spectrum]]:
    """`values`, and the noise sources that are no resistors, in the order of the recorder's `noises`."""
    return built(of, override)[:2]


def built(of: Circuit, override: Mapping[str, Value]) -> tuple[list[Value], list[Spectrum], dict[str, Operating]]:
    """`values_and_noise`, and the operating points behind them; what no array moves stays a float."""
    numbers = of.chain.numbers

    def get(path: str) -> Value | None:
        return override[path] if path in override else numbers.get(path)

    points = bias.solve(of.plan, get)
    collector = Collector(of.layout.recorder)
    stamper: Stamper = collector
    terminals.source(stamper, of.chain.source_kind == "voltage", get)
    for stage in of.chain.stages:
        if not stage.left_out:
            given, _ = given_of(of.chain, stage, get, points)
            STAMPS[KINDS[stage.kind].topology](stamper, 0, given)
    terminals.load(stamper, 0, get)
    return collector.values, collector.spectra, points


def with_values(of: Circuit, override: Mapping[str, Value]) -> Network:
    """The network with some numbers of the file replaced."""
    return network(of.layout, values(of, override))


def moved(of: Circuit, chain: Chain) -> Circuit:
    """The circuit of `chain`, which has the parts of `of` at other values, on the topology that is laid out.

    The noise sources of the layout stay as they are.
    """
    points = bias.solve(of.plan, chain.numbers.get)
    return Circuit(chain, of.plan, of.layout, points, network(of.layout, values(replace(of, chain=chain), {})))


def _problem(chain: Chain, plan: bias.Plan, stage: Stage, lack: Lack) -> Problem:
    place = chain.places.get(stage.name)
    card = chain.cards[stage.device]
    if lack.of_stage:
        ways = missing_currents(plan, chain).get(stage.name, ())
        key = CURRENT_KEYS.get(card.family, "id")
        return Problem(
            place, f"{lack.figure} of stage {stage.name} cannot be had",
            f"{lack.why}, and the quiescent current cannot be solved",
            f"give {', or '.join(ways) or key}; or give card {card.name} its {lack.figure} at the operating point")
    return Problem(chain.places.get(f"device.{card.name}", place), f"card {card.name} lacks {lack.key}",
                   f"stage {stage.name} needs {lack.figure}: {lack.why}", f"add {lack.key} to [device.{card.name}]")
