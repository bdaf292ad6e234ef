"""Keys of the levels page: the other bank, and Enter that goes to the key which sets the focused figure."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.book.swing import BOTTOM, CUT_OFF, DATA, GRID, NEGATIVE, OHMIC, OUTPUT, POSITIVE, SATURATION, Clip
from polebook.chain.model import Stage
from polebook.problem import ProblemsFound
from polebook.session.state import KeyRow, keys_of, sheets_of
from polebook.stages.base import GROUP, slot_key
from polebook.tui.control.base import Done, Work, at, done, line, say, to_path
from polebook.tui.control.figures import focused
from polebook.tui.view import State

_CURRENT = ("current", "r_low", "r_low_bypassed", "bias_top", "bias_single", "rf")
_ACROSS = ("across", "r_out", "r_low", "r_low_bypassed", "current")
_SLOTS: Mapping[str, tuple[str, ...]] = {
    "current_a": _CURRENT, "dissipation_w": _CURRENT, "across_v": _ACROSS,
    "control_v": ("bias_top", "bias_single", "bias_bottom", "rf", "couple"),
    "lower_v": ("r_low", "r_low_bypassed", "current"), "output_v": ("r_out", "r_low", "across"),
    CUT_OFF: (*_CURRENT[:3], "bias_top", "r_out"), SATURATION: _ACROSS, OHMIC: _ACROSS, BOTTOM: _ACROSS,
    GRID: ("r_low", "r_low_bypassed", "current"),
}
"""Figure of the bias, or what clips -> general names of the parts that set it, the first that the file has first."""
_AMPLIFIER = {"control_v": ("r_bias", "rg", "rf"), "output_v": ("vout",), "current_a": ("iq",)}
_TOLD = {"plan": "the d.c. plan: what a meter shows, heat, rails",
         "levels": "levels: noise, signal, headroom, clip level"}


def act(state: State) -> Done:
    """To the key that sets the focused figure; to the sheet where none does."""
    name, of = focused(state), state.session.good
    if of is None or not name:
        return done(at(state, focus="sheet"))
    try:
        with within_reach(of.chain):
            wanted = list(_Setting(of, line(state)).paths(name))
    except ProblemsFound:
        wanted = []
    found = {row.path: row for sheet in sheets_of(state.session)[:-1] for row in _keys(state, sheet, wanted)}
    there = [path for path in wanted if path in found]
    path = next((path for path in there if found[path].text), there[0] if there else "")
    return say(to_path(state, path), "") if path else done(at(state, focus="sheet"))


def _keys(state: State, sheet: str, wanted: list[str]) -> list[KeyRow]:
    """The keys of a sheet, where one of the wanted paths may stand on it."""
    return keys_of(state.session, sheet) if any(path.startswith(f"{sheet}.") for path in wanted) else []


@dataclass(frozen=True, slots=True)
class _Setting:
    """What sets a figure: paths, the likeliest first. `own` is the selected line."""

    of: Ledger
    own: str

    def paths(self, name: str) -> Iterator[str]:
        owner, _, key = name.rpartition(".")
        head, _, rest = owner.partition(".")
        if head == "bias" and rest:
            yield from self._bias(rest, key)
        elif head == "rail" and rest:
            yield from (f"supply.{rest}", "supply.positive", "supply.negative")
        elif head == "target" and rest:
            yield owner
        elif key in ("smallest_v", "largest_v"):
            yield f"source.{key.removesuffix('_v')}"
        elif key == "noise_margin_db":
            yield "source.smallest"
        elif key == "noise_v":
            yield from self._loudest()
        elif key == "full_power_hz":
            yield from self._slowest()
        else:
            yield from self._clip(owner)

    def _stage(self, name: str) -> Stage | None:
        return next((stage for stage in self.of.chain.stages if stage.name == name), None)

    def _slots(self, stage: Stage, names: tuple[str, ...]) -> Iterator[str]:
        family = self.of.chain.cards[stage.device].family if stage.device else ""
        for name in names:
            key = name if name == "couple" else slot_key(name, family) if family in GROUP else ""
            if key:
                yield f"{stage.name}.{key}"

    def _bias(self, name: str, key: str) -> Iterator[str]:
        stage = self._stage(name) or self._stage(name.removesuffix("_upper"))
        if stage is not None:
            yield from self._slots(stage, _SLOTS[key])
            yield from (f"{stage.name}.{one}" for one in _AMPLIFIER.get(key, ()))
            yield f"{stage.name}.device"

    def _clip(self, node: str) -> Iterator[str]:
        """What bounds the swing at a node; of the chain ("overall") at the stage that clips first."""
        levels = self.of.levels
        if levels is None:
            return
        number = next((k for k, name in levels.names.items() if name == node), None)
        clip = levels.first if number is None else levels.clip_at.get(number)
        if clip is not None:
            yield from self._bound(clip)

    def _bound(self, clip: Clip) -> Iterator[str]:
        stage, by = self._stage(clip.stage), clip.least.by if clip.least else ""
        if stage is None:
            return
        if by in (POSITIVE, NEGATIVE):
            yield from (f"supply.{by.removesuffix(' rail')}", f"{stage.name}.vout")
        elif by == OUTPUT:
            yield f"device.{stage.device}.i_max"
        elif by == DATA or stage.kind == "block":
            yield f"{stage.name}.clip"
        else:
            yield from self._slots(stage, _SLOTS.get(by, _CURRENT))
        yield f"{stage.name}.device"

    def _loudest(self) -> Iterator[str]:
        """What makes most of the noise at the output."""
        shares = self.of.noise.shares if self.of.noise else {}
        if shares:
            stage, part = max(shares, key=lambda owner: shares[owner])
            yield from (f"{stage}.{part}", f"{stage}.device", f"{stage}.resistance")

    def _slowest(self) -> Iterator[str]:
        """What bounds the full-power bandwidth."""
        slopes = self.of.levels.slopes if self.of.levels else []
        if not slopes:
            yield "source.largest"
            return
        stage = self._stage(slopes[0].stage)
        if stage is None:
            return
        if slopes[0].farad is None:
            yield f"{stage.name}.slew" if stage.kind == "block" else f"device.{stage.device}.slew"
        yield from self._slots(stage, _CURRENT)


def _bank(state: State, now: float) -> Done:
    """The other bank."""
    bank = "plan" if state.view.bank == "levels" else "levels"
    return say(at(state, bank=bank, figure=0), _TOLD[bank])


OWN: Mapping[str, Work] = {"band": _bank}
"""Action -> what it does on this page."""
