"""The operational amplifier: its card and its small-signal figures."""

from __future__ import annotations

from polebook.devices.missing import Lack, settle
from polebook.devices.num import TWO_PI, Reading, Value
from polebook.devices.ratings import FREE_TEXT, RATINGS, family_key
from polebook.devices.spectrum import Noise, Spectrum
from polebook.formula import Formula
from polebook.param import Param

GBW = Formula("parts.gbw", "tau = a0/(2·pi·gbw)", "definition: the dominant pole lies at gbw/a0")
F2 = Formula("parts.f2", "tau = 1/(2·pi·f2)", "definition")
NOISE_EN = Formula("noise.opamp.en", "S = en^2·(1 + en_corner/f)", "the data sheet's density and corner")
NOISE_IN = Formula("noise.opamp.in", "S = in^2·(1 + in_corner/f)", "the data sheet's density and corner")
FORMULAS = (GBW, F2, NOISE_EN, NOISE_IN)

PARAMS = (
    family_key("opamp"),
    FREE_TEXT,
    Param("gbw", "frequency", "gain-bandwidth product", role="high"),
    Param("a0", "ratio", "open-loop gain at d.c.", default="1e5"),
    Param("f2", "frequency", "second pole of the open-loop gain", role="high"),
    Param("rin", "resistance", "resistance between the inputs; absent: open"),
    Param("cin_diff", "capacitance", "capacitance between the inputs", role="high", sign="nonnegative"),
    Param("cin_cm", "capacitance", "capacitance from each input to ground", role="high", sign="nonnegative"),
    Param("rout", "resistance", "open-loop output resistance", sign="nonnegative", default="50"),
    Param("en", "density_v", "voltage noise density", sign="nonnegative"),
    Param("en_corner", "frequency", "corner of the voltage noise", sign="nonnegative"),
    Param("in", "density_a", "current noise density of each input", sign="nonnegative"),
    Param("in_corner", "frequency", "corner of the current noise", sign="nonnegative"),
    Param("slew", "per_second", "slew rate"),
    Param("headroom", "voltage", "nearest that the output comes to either rail", sign="nonnegative", default="1.5"),
    Param("iq", "current", "quiescent supply current", sign="nonnegative"),
    *RATINGS,
)

A0 = 1e5  # V/V, where the card has none
ROUT_OHM = 50.0
HEADROOM_V = 1.5


def small_signal(card: Reading) -> dict[str, Value]:
    """a0 (V/V), rin and rout (Ω), cin_diff and cin_cm (F); gbw and f2 as the time constants (s) of their storages.

    Dominant pole gbw/a0, so its time constant is a0/(2·pi·gbw); the second one is 1/(2·pi·f2). Absent figures are
    missing. Raises `Missing` without gbw.
    """
    found: dict[str, Value | None] = {key: card(key) for key in ("rin", "cin_diff", "cin_cm")}
    a0, rout, gbw, second = card("a0"), card("rout"), card("gbw"), card("f2")
    found["a0"] = a0 = A0 if a0 is None else a0
    found["rout"] = ROUT_OHM if rout is None else rout
    lacks = [] if gbw is not None else [Lack("gbw", "gbw", "the dominant pole lies at gbw/a0")]
    found["gbw"] = None if gbw is None else a0 / (TWO_PI * gbw)
    found["f2"] = None if second is None else 1.0 / (TWO_PI * second)
    return settle({key: value for key, value in found.items() if value is not None}, lacks)


def noise(card: Reading) -> Noise:
    """Voltage noise between the inputs ("en") and current noise of each of them ("in"), as far as the card has them."""
    found: Noise = {}
    for key in ("en", "in"):
        density, corner = card(key), card(f"{key}_corner")
        if density is not None:
            found[key] = Spectrum(density * density, 0.0 if corner is None else corner)
    return found
