"""Levels from node to node: the signal, where it clips, and how far it may go before it does."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from math import inf, log10, pi, sqrt

from polebook.book.lumped import Lumped, merged
from polebook.book.sites import interstage_names, site_names
from polebook.book.solution import Solution
from polebook.book.swing import Clip, clips, is_device, output_of, upper_of
from polebook.formula import Formula

FORMULAS = (
    Formula("levels.largest_v", "|V(node)/V(source)|·source.largest, midband", "definition"),
    Formula("levels.smallest_v", "|V(node)/V(source)|·source.smallest, midband", "definition"),
    Formula("levels.headroom_db", "20·log10(clip level/largest signal)", "definition"),
    Formula("overall.largest_source", "the least of clip level/|V(node)/V(source)| over the nodes", "definition"),
    Formula("overall.dynamic_range_db", "20·log10(largest source that passes/(sqrt 2·input noise, rms))", "definition"),
    Formula("overall.noise_margin_db", "20·log10(smallest source/(sqrt 2·input noise, rms))", "definition"),
    Formula("overall.full_power_hz", "the least of slew/(2·pi·V) of the amplifiers and I/(2·pi·C·V) of the nodes that "
                                     "a device drives; V the peak of the largest signal, else the target's swing",
            "slope of a sine (J. M. Fiore, Op Amps and Linear Integrated Circuits, examples 5.7 and 5.8)"),
    Formula("overall.supply_current_a", "the greater rail's current", "definition"),
    Formula("rails.current_a", "sum of the currents out of the rail", "Kirchhoff's current law"),
)


@dataclass(frozen=True, slots=True)
class Level:
    """Signals and clip level at one interstage node, V peak; None where a figure has no value.

    stage    the stage that clips there, "" where none is known to
    clips_by what happens there, "" where nothing is known to
    """

    node: str
    largest: float | None
    smallest: float | None
    clip: float | None
    stage: str
    clips_by: str

    @property
    def headroom_db(self) -> float | None:
        return _decibels(self.clip, self.largest) if self.clip and self.largest else None


@dataclass(frozen=True, slots=True)
class Slope:
    """How fast an output can move: `stage`'s limit in V/s (an amplifier's slew, else ampere/farad), for `volts` peak.

    Of a device also the current in A and the capacitance in F that it charges; its node.
    """

    stage: str
    per_second: float
    volts: float
    node: int
    ampere: float | None = None
    farad: float | None = None

    @property
    def hz(self) -> float:
        return self.per_second / (2.0 * pi * self.volts)


class Levels:
    """Everything about levels that needs no noise. Midband; a stable chain."""

    def __init__(self, of: Solution) -> None:
        self.of = of
        self.names = interstage_names(of.circuit.layout)

    @cached_property
    def clips(self) -> list[Clip]:
        """The bounds of every stage that amplifies."""
        return clips(self.of)

    def per_source(self, node: int) -> float:
        """|V(node)| for 1 V or 1 A of source."""
        return abs(self.of.volts[node])

    @cached_property
    def unknown(self) -> tuple[str, ...]:
        """Stages of whose clip level something can't be had."""
        return tuple(clip.stage for clip in self.clips if clip.least is None or not clip.whole)

    @cached_property
    def first(self) -> Clip | None:
        """The stage that clips first as the source grows; None where no clip level is known."""
        known = [clip for clip in self.clips if clip.least is not None]
        return min(known, key=self.passing, default=None)

    def passing(self, clip: Clip) -> float:
        """Peak of the source at which a stage clips, V or A."""
        volts, gain = (clip.least.volts if clip.least else None) or 0.0, self.per_source(clip.node)
        return volts / gain if gain else float("inf")

    @property
    def largest_source(self) -> float | None:
        """Peak of the largest source that passes every stage whose clip level is known."""
        return self.passing(self.first) if self.first else None

    @property
    def swing(self) -> float | None:
        """V peak at the load for the largest source that passes."""
        return None if self.largest_source is None else self.largest_source * abs(self.of.gain)

    @cached_property
    def clip_at(self) -> dict[int, Clip]:
        """Interstage node -> what clips there; nodes that are one at midband share it."""
        root = merged(self.of)
        own = {root[clip.node]: clip for clip in self.clips}
        return {node: own[root[node]] for node in self.names if root[node] in own}

    @cached_property
    def rows(self) -> list[Level]:
        """Every interstage node, in signal order."""
        largest, smallest = (self.of.chain.get(f"source.{key}") for key in ("largest", "smallest"))
        result = []
        for node, name in self.names.items():
            gain, clip = self.per_source(node), self.clip_at.get(node)
            least = clip.least if clip else None
            result.append(Level(
                name, None if largest is None else gain * largest, None if smallest is None else gain * smallest,
                least.volts if least else None, clip.stage if clip and least else "", least.by if least else ""))
        return result

    @cached_property
    def scale(self) -> float | None:
        """Peak of the source that the full-power bandwidth is told for: the largest, else the target's swing."""
        largest, swing = self.of.chain.get("source.largest"), self.of.chain.get("target.swing")
        if largest is not None:
            return largest
        return swing / abs(self.of.gain) if swing is not None and self.of.gain else None

    @cached_property
    def slopes(self) -> list[Slope]:
        """The limit of every stage that has one."""
        found = (slope for slope in self._slopes() if slope.volts > 0.0) if self.scale else ()
        return sorted(found, key=lambda slope: slope.hz)

    def _slopes(self) -> Iterator[Slope]:
        chain, layout = self.of.chain, self.of.circuit.layout
        stages = {stage.name: stage for stage in chain.stages}
        farads = self._farads()
        for clip in self.clips:
            stage = stages[clip.stage]
            index = next(k for k, segment in enumerate(layout.segments) if segment.name == clip.stage)
            node = clip.node
            if is_device(self.of, stage):
                point = self.of.circuit.points.get(stage.name + upper_of(stage)[1])
                ampere, farad = None if point is None else point.current, farads.get(self.names[node], 0.0)
                if ampere is not None and farad > 0.0:
                    yield Slope(stage.name, ampere / farad, self._peak(node), node, ampere, farad)
                continue
            slew = chain.get(f"{stage.name}.slew" if stage.kind == "block" else f"device.{stage.device}.slew")
            at = node if stage.kind == "block" else output_of(self.of, index)
            if slew is not None:
                yield Slope(stage.name, slew, self._peak(at), at)

    def _peak(self, node: int) -> float:
        return (self.scale or 0.0) * self.per_source(node)

    def _farads(self) -> dict[str, float]:
        """High-role capacitance of every site with its Miller halves, F."""
        values = self.of.circuit.network.values
        lumped = Lumped(self.of, site_names(self.of.circuit.layout))
        result: dict[str, float] = {}
        for node, half in lumped.landings():
            if half is not None and half.of_use and lumped.hears(node):
                name = lumped.names[node]
                result[name] = result.get(name, 0.0) + float(values[half.part]) * half.share
        return result

    @property
    def full_power_hz(self) -> float | None:
        return self.slopes[0].hz if self.slopes else None


def over_noise_db(peak: float | None, noise_rms: float | None) -> float | None:
    """20·log10 of a sine's rms over the noise's: `peak` in V or A against an rms in the same unit."""
    return _decibels(peak, sqrt(2.0) * noise_rms) if peak and noise_rms else None


def _decibels(one: float, other: float) -> float | None:
    """20·log10 of the ratio; None where no double holds it."""
    ratio = one / other
    return 20.0 * log10(ratio) if 0.0 < ratio < inf else None
