"""What stands behind a device's own part, which has no key of its own: the card's key that makes it, or the bias."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from polebook.book.ledger import Ledger
from polebook.book.leverage import STEP
from polebook.chain.said import said
from polebook.circuit.build import values, values_and_noise
from polebook.circuit.figures import stage_figures
from polebook.tui.draw.levers import Mover

ENOUGH = 0.3  # of 1 %, that 1 % of a card's key must move a part by to be what makes it
_UPPER = "_upper"


@dataclass(frozen=True, slots=True)
class Made:
    """The path to sweep in a part's place and what to say of it; without one `why` and how to mend it."""

    path: str
    why: str
    fix: str = ""


def maker(of: Ledger, mover: Mover) -> Made:
    """The key of the card that makes the part at its operating point, or what moves that point most."""
    stage, _, part = mover.name.partition(".")
    device = next((one for one in of.chain.stages if one.name == stage), None)
    source = all((one.stage, one.name) != (stage, part) for one in of.solution.circuit.layout.parts)
    if device is None or not device.device:
        path, _ = _strongest((path, _by_source(of, (stage, part), path)) for path in of.chain.given
                             if source and path.startswith(f"{stage}."))
        if path:
            return Made(path, f"{said(mover.name)} has no key of its own: swept is {said(path)}, which makes it")
        return Made("", "it has no key of its own", "Enter on another row sweeps that")
    card = device.device if not part.endswith(_UPPER) else device.upper or device.device
    path, share = _strongest((path, _by_source(of, (stage, part), path) if source else _by_card(of, stage, part, path))
                             for path in of.chain.numbers if path.startswith(f"device.{card}."))
    if share >= ENOUGH:
        users = [one.name for one in of.chain.stages if card in (one.device, one.upper) and not one.left_out]
        more = f", in {' '.join(users)}" if len(users) > 1 else ""
        return Made(path, f"{said(mover.name)} is the device's own: swept is {said(path)}, which makes it{more}")
    path, _ = _strongest((path, _by_source(of, (stage, part), path) if source else _by_bias(of, mover.name, path))
                         for path in of.chain.given if path.startswith(f"{stage}."))
    why = "it is the device's own, and follows from its current"
    return Made("", why, f"{path} moves it most: sweep that" if path else "give the stage's current, and sweep that")


def _strongest(each: Iterable[tuple[str, float]]) -> tuple[str, float]:
    """The path with the greatest share; "" where none has any."""
    return max(((path, share) for path, share in each if share > STEP), key=lambda one: one[1], default=("", 0.0))


def _by_card(of: Ledger, stage: str, part: str, path: str) -> float:
    """Size of d ln(part)/d ln(key of the card), the operating point standing still."""
    chain, points = of.chain, of.solution.circuit.points
    moved = _stepped(of, path)
    own, upper, _ = stage_figures(chain, next(one for one in chain.stages if one.name == stage),
                                  lambda key: moved if key == path else chain.numbers.get(key), points)
    return _share((upper if part.endswith(_UPPER) else own).get(part.removesuffix(_UPPER)))


def _by_bias(of: Ledger, name: str, path: str) -> float:
    """Size of d ln(part)/d ln(number of the file), through the bias."""
    circuit = of.solution.circuit
    parts = [f"{part.stage}.{part.name}" for part in circuit.layout.parts]
    return _share(values(circuit, {path: _stepped(of, path)})[parts.index(name)])


def _by_source(of: Ledger, at: tuple[str, str], path: str) -> float:
    """Size of d ln(density² of a source that is no part)/d ln(number of the file), through the bias."""
    circuit = of.solution.circuit
    spectra = values_and_noise(circuit, {path: _stepped(of, path)})[1]
    owned = circuit.layout.recorder.noises
    found = [one.white for one, owner in zip(spectra, owned, strict=True) if (owner.stage, owner.part) == at]
    return _share(found[0] if found else None)


def _stepped(of: Ledger, path: str) -> complex:
    return of.chain.numbers[path] * (1 + 1j * STEP)


def _share(value: complex | None) -> float:
    return abs(complex(value).imag / STEP / complex(value).real) if value else 0.0
