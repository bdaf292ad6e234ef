"""The keys that every device card may carry, and the cautions of a stage past a rating."""

from __future__ import annotations

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
    figures = {
        "p_max": ("dissipates", None if current is None or across is None else current * across, "W"),
        "v_max": ("stands at", across, "V"),
        "i_max": ("carries", current, "A"),
    }
    told = []
    for key, (verb, value, unit) in figures.items():
        most = card(key)
        if most is not None and value is not None and value > most:
            told.append((key, f"{verb} {engineering(value, unit)}, its rating {key} is {engineering(most, unit)}"))
    return told
