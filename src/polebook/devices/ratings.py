"""The keys that every device card may carry, and the cautions of a stage past a rating."""

from __future__ import annotations

from collections.abc import Mapping

from polebook.devices.num import Reading
from polebook.param import Param
from polebook.quantity import engineering

FREE_TEXT = Param("note", "text", "free text")

RATINGS = (
    Param("p_max", "power", "rating: most power dissipated"),
    Param("v_max", "voltage", "rating: most voltage across the device"),
    Param("i_max", "current", "rating: most current through the device"),
    Param("theta", "thermal", "rating: thermal resistance, junction or body to air"),
)


def family_key(family: str) -> Param:
    """The required `family` row of a card's table."""
    return Param("family", "choice", "the family that the card belongs to", required=True, choices=(family,))


def exceeded(card: Reading, current: float | None, across: float | None) -> list[tuple[str, str]]:
    """(key, sentence) of every rating of the card that a quiescent current (A) and voltage (V) go past."""
    watts = None if current is None or across is None else current * across
    return past(card, {"p_max": watts, "v_max": across, "i_max": current})


VERBS = {"p_max": ("dissipates", "W"), "v_max": ("stands at", "V"), "i_max": ("carries", "A")}


def why(key: str, card: str) -> str:
    """Why a stage past a rating of its card is told."""
    return f"past {key} of card {card} a device can fail{' and get hot enough to burn' if key == 'p_max' else ''}"


def past(card: Reading, figures: Mapping[str, float | None]) -> list[tuple[str, str]]:
    """(key, sentence) of every rating that the figure beside it (W, V, A; None: not known) goes past."""
    told = []
    for key, value in figures.items():
        verb, unit = VERBS[key]
        most = card(key)
        if most is not None and value is not None and value > most:
            told.append((key, f"{verb} {engineering(value, unit)}, its rating {key} is {engineering(most, unit)}"))
    return told
