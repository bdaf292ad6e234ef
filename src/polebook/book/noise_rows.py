"""What the document says of noise: figures of the whole chain, and a row for each source that is no part."""

from __future__ import annotations

from collections.abc import Sequence
from math import ceil, floor, log10, sqrt
from typing import TYPE_CHECKING, Any

from polebook.devices.num import CHARGE

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

KEYS = ("noise_density", "noise_total_output", "noise_total_input", "noise_from_hz", "noise_to_hz", "noise_figure_db")
TYPES = {"ib": "I", "ig": "I", "en": "en", "in": "in"}
"""Name of a source that is no part -> type of its row: a current in A, densities in V/√Hz and A/√Hz."""


def overall(of: Ledger) -> dict[str, float | None]:
    """KEYS of the chain; None where it is not stable, or where its noise cannot be told."""
    noise = of.noise
    if noise is None:
        return dict.fromkeys(KEYS)
    return {"noise_density": noise.density, "noise_total_output": noise.output_rms,
            "noise_total_input": noise.input_rms, "noise_from_hz": noise.from_hz, "noise_to_hz": noise.to_hz,
            "noise_figure_db": noise.figure_db}


def parts(of: Ledger) -> list[dict[str, Any]]:
    """Rows of `parts`: base and gate currents, voltage and current noise of amplifiers and blocks."""
    recorder, result = of.solution.circuit.layout.recorder, []
    shares = of.noise.shares if of.noise else {}
    for at, spectrum in {(one.stage, one.part): x for one, x in zip(recorder.noises, recorder.spectra, strict=True)
                         if plain(one.part) in TYPES}.items():
        kind = TYPES[plain(at[1])]
        white = float(spectrum.white)
        result.append({
            "stage": at[0], "part": at[1], "type": kind, "role": None,
            "value": white / (2.0 * CHARGE) if kind == "I" else sqrt(white), "tau_s": None, "owns_upper": None,
            "owns_lower": None, "noise_share": shares.get(at), "leverage": _leverage(of, at, kind)})
    return result


def plain(part: str) -> str:
    """A source's name without what marks a cascode's upper device."""
    return part.removesuffix("_upper")


def _leverage(of: Ledger, at: tuple[str, str], kind: str) -> dict[str, float | None]:
    """Through the file's own number where it states it, else of the source alone: it moves nothing but the noise."""
    lever = of.leverage
    if at in lever.parts:
        return lever.parts[at]
    own = lever.sources.get(at)
    return {"gain": 0.0, "lower_edge": None if of.lower_hz is None else 0.0,
            "upper_edge": None if of.upper_hz is None else 0.0,
            "noise": None if own is None else own * (0.5 if kind == "I" else 1.0)}


WHAT = {"bjt": "collector current", "mosfet": "channel", "jfet": "channel", "triode": "anode current",
        "ib": "base current", "ig": "gate leakage", "en": "voltage noise", "in": "current noise"}
"""A source in words, by its name; that of the main current by the family of the device."""


def what(of: Ledger, stage: str, part: str) -> str:
    """A source that is no resistor, in words: "collector current"; "" for a resistor."""
    found = next((one for one in of.chain.stages if one.name == stage), None)
    name = plain(part)
    if name == "gm" and found is not None:
        card = (found.upper or found.device) if part != name else found.device
        return WHAT[of.chain.cards[card].family]
    return WHAT.get(name, "")


def page(of: Ledger) -> dict[str, Any]:
    """What the page of the noise shows beside the ledger: why a figure is missing, sources in words, the density."""
    noise = of.noise
    if noise is None:
        return {"why": "", "what": {}, "curve": []}
    owners = noise.of.circuit.layout.recorder.noises
    return {"why": noise.untold or noise.totals.why,
            "what": {f"{one.stage}.{one.part}": what(of, one.stage, one.part) for one in owners},
            "curve": density(of)}


def density(of: Ledger, hz: Sequence[float] | None = None) -> list[dict[str, Any]]:
    """Output and input-referred density (V/√Hz, A/√Hz) and the line that makes most of it, with its share.

    At the frequencies hz, else at the decades of the band. Empty where the noise cannot be told, or without a band.
    """
    at = list(hz) if hz is not None else frequencies(of)
    found = of.noise.over(at) if at and of.noise is not None else None
    if found is None or of.noise is None:
        return []
    names = [segment.name for segment in of.solution.circuit.layout.segments]
    place = {name: k for k, name in enumerate(names)}
    rows = []
    for k, one in enumerate(at):
        sums = [0.0] * len(names)
        for (stage, _), share in zip(of.noise.sources.owners, found.share[:, k].tolist(), strict=True):
            sums[place[stage]] += share
        most = max(range(len(names)), key=sums.__getitem__)
        rows.append({"hz": one, "output": float(found.output[k]), "input": float(found.input[k]),
                     "most": names[most], "share": sums[most]})
    return rows


def frequencies(of: Ledger) -> list[float]:
    """Whole decades from below the lower edge to above the upper one, a decade or two on either side, Hz."""
    middle = of.reference_hz
    low = of.lower_hz or (middle / 1e3 if middle else None)
    high = of.upper_hz or (middle * 1e3 if middle else None)
    if not low or not high:
        return []
    return [10.0**k for k in range(floor(log10(low)) - 1, ceil(log10(high)) + 2)]
