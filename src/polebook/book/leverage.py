"""Leverage: by how many per cent a figure moves where a part, a card's figure or a stated current moves by one.

Total derivatives: what a part does through a solved bias counts, a stated current stands still. The adjoint solution
gives d(figure)/d(element), a complex step through bias, card and stage formulas d(element)/d(key).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from polebook.book.noise_slopes import Slopes, slopes_of
from polebook.book.shares import derivatives
from polebook.book.solution import Solution
from polebook.chain.model import Chain
from polebook.circuit.build import CURRENT_KEYS, Circuit, values_and_noise
from polebook.devices.spectrum import Spectrum
from polebook.formula import Formula
from polebook.solve.contributions import contributions
from polebook.solve.transfer import adjoint, branch_currents
from polebook.stages.ladder import arm_part

ADJOINT = "adjoint network (S. W. Director and R. A. Rohrer, The generalized adjoint network and network " \
          "sensitivities, IEEE Trans. Circuit Theory 16, 1969, from memory) and complex step (W. Squire and " \
          "G. Trapp, Using complex variables to estimate derivatives of real functions, SIAM Review 40, 1998, " \
          "from memory)"
FORMULAS = (
    Formula("leverage.gain", "d ln|gain|/d ln p", ADJOINT),
    Formula("leverage.lower_edge", "d ln f_L/d ln p = -d(ln|H(f_L)| - ln|gain|)/d ln p / (d ln|H|/d ln f)", ADJOINT),
    Formula("leverage.upper_edge", "d ln f_H/d ln p = -d(ln|H(f_H)| - ln|gain|)/d ln p / (d ln|H|/d ln f)", ADJOINT),
    Formula("leverage.noise", "d ln e/d ln p, e the input-referred noise density at the reference frequency, which "
                              "stands still", ADJOINT),
)
FIGURES = ("gain", "lower_edge", "upper_edge", "noise")
if TYPE_CHECKING:
    from polebook.book.noise import Noise
    from polebook.solve.sweep import Array

STEP = 1e-30  # imaginary share of a key's value: its square is nothing

Row = dict[str, float | None]


@dataclass(slots=True)
class Leverage:
    """Leverage on gain, lower_edge, upper_edge and noise; None where there is no such edge, or no noise.

    elements  by part number, of the element alone: of a resistor with its noise, of a device with its noise as it is
    sources   (stage, part) -> leverage of a noise source's density alone, of those that are no resistors
    slopes    what the leverage on the noise is made of
    parts     (stage, part) of a fitted part, through the bias
    currents  (stage, key) -> (A, leverage) of a stated quiescent current
    cards     (card, key) -> (value in the key's own unit, leverage)
    """

    slopes: Slopes | None = None
    elements: dict[int, Row] = field(default_factory=dict)
    sources: dict[tuple[str, str], float] = field(default_factory=dict)
    parts: dict[tuple[str, str], Row] = field(default_factory=dict)
    currents: dict[tuple[str, str], tuple[float, Row]] = field(default_factory=dict)
    cards: dict[tuple[str, str], tuple[float, Row]] = field(default_factory=dict)


def leverage(of: Solution, lower_hz: float | None, upper_hz: float | None, noise: Noise | None = None) -> Leverage:
    """Leverage of everything that the file states a value for; edges in Hz."""
    partial = {"gain": of_gain(of), "lower_edge": None, "upper_edge": None}
    for name, edge in (("lower_edge", lower_hz), ("upper_edge", upper_hz)):
        if edge is not None:
            partial[name] = of_edge(of, edge, partial["gain"] or {})
    slopes = slopes_of(noise) if noise is not None else None
    partial["noise"] = None if slopes is None else slopes.elements
    result = Leverage(slopes, {index: {name: None if each is None else each.get(index, 0.0)
                                       for name, each in partial.items()} for index in partial["gain"] or {}})
    for owned, lever in zip(of.circuit.layout.recorder.noises, () if slopes is None else slopes.sources, strict=False):
        at = owned.stage, owned.part
        result.sources[at] = result.sources.get(at, 0.0) + lever
    keys = list(_keys(of.chain))
    rows = through_bias(of, partial, slopes, [key[3] for key in keys])
    for (kind, owner, name, path), row in zip(keys, rows, strict=True):
        if kind == "part":
            result.parts[owner, name] = row
        elif kind == "current":
            result.currents[owner, name] = (of.chain.numbers[path], row)
        else:
            result.cards[owner, name] = (of.chain.numbers[path], row)
    return result


def of_gain(of: Solution) -> dict[int, float]:
    """d ln|gain|/d ln X of every element, by part number."""
    folded, output = of.midband, of.circuit.layout.after[-1]
    adj = adjoint(folded, output)
    currents = branch_currents(folded, of.volts, adj)
    each = contributions(of.circuit.network, 0.0, of.volts, adj.u, currents, "midband", resistive=True)
    found = dict.fromkeys(range(len(of.circuit.layout.parts)), 0.0)
    return found | {index: float(x / of.volts[output]) for index, x in each.items()}


def of_edge(of: Solution, hz: float, of_gain: dict[int, float]) -> dict[int, float] | None:
    """d ln f/d ln X of an edge at hz; None where the response is level there."""
    net = of.circuit.network
    slopes = {index: d.real for index, d in derivatives(net, hz, resistive=True).by_part.items()}
    steep = sum(slope for index, slope in slopes.items() if net.layout.parts[index].type in ("C", "L", "tau"))
    if not steep:
        return None
    return {index: -(slopes.get(index, 0.0) - gain) / steep for index, gain in of_gain.items()}


def _keys(chain: Chain) -> Iterator[tuple[str, str, str, str]]:
    """(kind, owner, name, path) of every number that may have leverage: parts, currents, cards' figures."""
    for owner in ("source", "load"):
        for key in ("resistance", "capacitance", "couple"):
            if chain.get(f"{owner}.{key}"):
                yield "part", owner, key, f"{owner}.{key}"
    for stage in chain.stages:
        if stage.left_out:
            continue
        prefix = stage.name + "."
        names = {f"{prefix}arms.{arm.number}.{key}": arm_part(arm, key)[0] for arm in stage.arms for key in arm.parts}
        current = CURRENT_KEYS.get(chain.cards[stage.device].family, "id") if stage.device else ""
        for path in sorted(path for path in chain.given if path.startswith(prefix)):
            key = path.removeprefix(prefix)
            if key == current:
                yield "current", stage.name, key, path
            elif path in names or "." not in key:
                yield "part", stage.name, names.get(path, key), path
    used = {card for stage in chain.stages if not stage.left_out for card in (stage.device, stage.upper) if card}
    for card in chain.cards:
        if card in used:
            for path in sorted(path for path in chain.given if path.startswith(f"device.{card}.")):
                yield "card", card, path.rpartition(".")[2], path


def through_bias(of: Solution, partial: dict[str, dict[int, float] | None], slopes: Slopes | None,
                 paths: list[str]) -> list[Row]:
    """Leverage of each path: d(figure)/d(element) times d(element)/d(path), summed over the elements.

    On the noise, what the path does to its sources comes to it.
    """
    count = len(paths)
    relative, spectra = of_elements(of.circuit, paths)
    rows: dict[str, Any] = {}
    for name, each in partial.items():
        weights = None if each is None else np.array([each[index] for index in range(relative.shape[0])])
        rows[name] = None if weights is None else weights @ relative
    if slopes is not None:
        rows["noise"] = rows["noise"] + slopes.moved(spectra, count, STEP)
    return [{name: None if row is None else float(row[k]) for name, row in rows.items()} for k in range(count)]


def of_elements(of: Circuit, paths: Sequence[str]) -> tuple[Array, list[Spectrum]]:
    """d ln(element)/d ln(path), (elements, paths), and the noise sources stepped by `STEP`, path by path."""
    count = len(paths)
    override: dict[str, Any] = {}
    for k, path in enumerate(paths):
        stepped = np.full(count, of.chain.numbers[path], dtype=complex)
        stepped[k] *= 1 + 1j * STEP
        override[path] = stepped
    with np.errstate(all="ignore"):
        values, spectra = values_and_noise(of, override)
        moved = np.array([np.broadcast_to(value, (count,)) for value in values], dtype=complex)
        relative = moved.imag / STEP / np.array(of.network.values, dtype=float)[:, None]
    # a device cut off has figures that nothing moves
    return np.where(np.isfinite(relative), relative, 0.0), spectra
