"""The two readers of the stages' stamps: one builds the network, the other only collects values for it."""

from __future__ import annotations

from dataclasses import dataclass, field

from polebook.circuit.elements import Branch, Drive, NoiseSource, Part, Segment, Storage, Transfer
from polebook.devices.spectrum import Spectrum
from polebook.stages.stamper import GROUND, Labelled, Value

KINDS = {"R": ("R", ""), "C-low": ("C", "low"), "C-high": ("C", "high"), "L-high": ("L", "high"), "L-low": ("L", "low")}


@dataclass(slots=True)
class Recorder:
    """Builds the network: nodes, elements, owners, roles, which parts stand, and the noise sources.

    noises and spectra go together; `untold` are (stage, part) of noise that cannot be told, `told` which could.
    """

    names: list[str] = field(default_factory=list)
    sites: list[str] = field(default_factory=list)
    is_driven: list[bool] = field(default_factory=list)
    parts: list[Part] = field(default_factory=list)
    values: list[Value] = field(default_factory=list)
    stood: list[bool] = field(default_factory=list)
    fresh: list[bool] = field(default_factory=list)
    segments: list[Segment] = field(default_factory=list)
    noises: list[NoiseSource] = field(default_factory=list)
    spectra: list[Spectrum] = field(default_factory=list)
    untold: list[tuple[str, str]] = field(default_factory=list)
    told: list[bool] = field(default_factory=list)
    _own: dict[tuple[int, str], int] = field(default_factory=dict)
    _owner: str = ""
    _owners: int = 0

    def begin(self, name: str, kind: str, before: int) -> Segment:
        """Opens the next segment; all that is stamped from now on is its own."""
        segment = Segment(name, kind, before)
        self.segments.append(segment)
        self.within(name)
        return segment

    def within(self, owner: str) -> None:
        """Whose the parts are that are stamped from now on, in the segment that is open."""
        self._owner, self._owners = owner, self._owners + 1

    def stands(self, value: Value | None) -> bool:
        return self._stands(value)

    def node(self, label: str, site: str) -> int:
        return self._new_node(label, site, False)

    def driven(self, label: str, site: str) -> int:
        return self._new_node(label, site, True)

    def series(self, label: str, node: int, site: str, parts: Labelled) -> int:
        group = self._group(parts)
        if not group:
            return node
        behind = self.node(label, site)
        self._branch(Branch(node, behind, (group,), series=True))
        return behind

    def resistor(self, part: str, i: int, j: int, value: Value | None, bridge: bool = False,
                 silent: bool = False) -> None:
        self._across(part, "R", i, j, value, bridge, silent)

    def capacitor(self, part: str, i: int, j: int, value: Value | None, bridge: bool = False) -> None:
        self._across(part, "C-high", i, j, value, bridge)

    def link(self, i: int, j: int, parts: Labelled, bridge: bool = False) -> None:
        groups = tuple(g for g in (self._group([part]) for part in parts) if g)
        if groups:
            self._branch(Branch(i, j, groups, series=False, bridge=bridge))

    def transconductance(self, part: str, output: int, lower: int, plus: int, minus: int, value: Value | None) -> None:
        if self._stands(value):
            self._segment.transfers.append(Transfer(self._part(part, "gm", "", value), output, lower, plus, minus))

    def amplifier(self, node: int, plus: int, minus: int, gain: Value) -> None:
        part = self._part(f"gain of {self.names[node]}", "gain", "", gain)
        self._segment.drives.append(Drive(node, plus, minus, part))

    def lag(self, part: str, node: int, tau: Value) -> None:
        self._segment.storages.append(Storage(self._part(part, "tau", "high", tau), node))

    def washout(self, part: str, node: int, tau: Value) -> None:
        self._segment.storages.append(Storage(self._part(part, "tau", "low", tau), node))

    def noise_current(self, part: str, i: int, j: int, spectrum: Spectrum | None) -> None:
        self._noise(NoiseSource(self._owner, part, len(self.segments) - 1, i, j), spectrum)

    def noise_voltage(self, part: str, node: int, ahead: int, spectrum: Spectrum | None) -> None:
        source = NoiseSource(self._owner, part, len(self.segments) - 1, GROUND, GROUND, node, ahead)
        self._noise(source, spectrum)

    def _noise(self, source: NoiseSource, spectrum: Spectrum | None) -> None:
        self.told.append(spectrum is not None)
        if spectrum is None:
            self.untold.append((source.stage, source.part))
        else:
            self.noises.append(source)
            self.spectra.append(spectrum)

    @property
    def _segment(self) -> Segment:
        return self.segments[-1]

    def _new_node(self, label: str, site: str, driven: bool) -> int:
        number = len(self.names)
        self.names.append(f"{self._owner}.{label}")
        self.sites.append(site)
        self.is_driven.append(driven)
        self._segment.nodes.append(number)
        return number

    def _across(self, part: str, type_: str, i: int, j: int, value: Value | None, bridge: bool,
                silent: bool = False) -> None:
        if i == j:
            self.stood.append(False)
            return
        group = self._group([(part, type_, value)], silent)
        if group:
            self._branch(Branch(i, j, (group,), series=False, bridge=bridge))

    def _branch(self, branch: Branch) -> None:
        self._segment.branches.append(branch)

    def _group(self, parts: Labelled, silent: bool = False) -> tuple[int, ...]:
        group = []
        for name, type_, value in parts:
            if self._stands(value):
                kind, role = KINDS[type_]
                group.append(self._part(name, kind, role, value, silent))
        return tuple(group)

    def _part(self, name: str, type_: str, role: str, value: Value, silent: bool = False) -> int:
        """Number of the part; a name stamped twice (cin_cm of both inputs) is one part in two places."""
        index = self._own.get((self._owners, name))
        self.fresh.append(index is None)
        if index is not None:
            return index
        self._own[self._owners, name] = len(self.parts)
        self.parts.append(Part(self._owner, name, type_, role, len(self.segments) - 1, silent))
        self.values.append(value)
        return len(self.parts) - 1

    def _stands(self, value: Value | None) -> bool:
        stands = value is not None and not (isinstance(value, int | float) and value == 0)
        self.stood.append(stands)
        return stands


class Collector:
    """Runs the same stamps for other values: the parts that stood, and the noise told, are collected in the same order.
    """

    __slots__ = ("_calls", "_fresh", "_node", "_noises", "_part", "_stood", "_told", "spectra", "values")

    def __init__(self, recorder: Recorder) -> None:
        self._stood = recorder.stood
        self._fresh = recorder.fresh
        self._calls = 0
        self._part = 0
        self._node = 0
        self._told = recorder.told
        self._noises = 0
        self.values: list[Value] = []
        self.spectra: list[Spectrum] = []

    def stands(self, value: Value | None) -> bool:
        self._calls += 1
        return self._stood[self._calls - 1]

    def node(self, label: str, site: str) -> int:
        self._node += 1
        return self._node - 1

    driven = node

    def series(self, label: str, node: int, site: str, parts: Labelled) -> int:
        return self.node(label, site) if self._take(parts) else node

    def resistor(self, part: str, i: int, j: int, value: Value | None, bridge: bool = False,
                 silent: bool = False) -> None:
        self._take(((part, "", value),))

    capacitor = resistor

    def link(self, i: int, j: int, parts: Labelled, bridge: bool = False) -> None:
        self._take(parts)

    def transconductance(self, part: str, output: int, lower: int, plus: int, minus: int, value: Value | None) -> None:
        self._take(((part, "", value),))

    def amplifier(self, node: int, plus: int, minus: int, gain: Value) -> None:
        self._collect(gain)

    def lag(self, part: str, node: int, tau: Value) -> None:
        self._collect(tau)

    washout = lag

    def noise_current(self, part: str, i: int, j: int, spectrum: Spectrum | None) -> None:
        self._noises += 1
        if spectrum is not None and self._told[self._noises - 1]:
            self.spectra.append(spectrum)

    noise_voltage = noise_current

    def _take(self, parts: Labelled) -> bool:
        any_stands = False
        for _, _, value in parts:
            if self.stands(value):
                self._collect(value)
                any_stands = True
        return any_stands

    def _collect(self, value: Value) -> None:
        if self._fresh[self._part]:
            self.values.append(value)
        self._part += 1
