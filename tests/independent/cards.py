"""Small-signal figures of a device from its card, current and voltage: CHAIN_FORMAT, "Device cards"."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from tests.independent.linear import mp
from tests.independent.quantity import number

BOLTZMANN = mp.mpf("1.380649e-23")
CHARGE = mp.mpf("1.602176634e-19")

NAMES = {  # input, bridge, output-to-ground and output-to-lower capacitances by family
    "bjt": ("cpi", "cmu", "ccs", ""),
    "mosfet": ("cgs", "cgd", "cdb", "cds"),
    "jfet": ("cgs", "cgd", "cdb", "cds"),
    "triode": ("cgk", "cga", "", "cak"),
}


class Card:
    """A `[device.NAME]` table with its quantities read."""

    def __init__(self, table: Mapping[str, Any], celsius: float) -> None:
        self.family: str = table["family"]
        self.mirrored = table.get("polarity") in ("pnp", "p")
        self.numbers = {k: mp.mpf(number(v, k)) for k, v in table.items() if k not in ("family", "polarity", "note")}
        if self.family == "bjt" and {"gm", "rpi"} <= set(self.numbers):
            self.numbers.setdefault("beta", self.numbers["gm"] * self.numbers["rpi"])
        self.thermal = BOLTZMANN * (mp.mpf(celsius) + mp.mpf("273.15")) / CHARGE
        self.vbe = self.numbers.get("vbe", mp.mpf("0.65")) - mp.mpf("0.002") * (mp.mpf(celsius) - 25)

    def get(self, key: str, default: Any = None) -> Any:
        return self.numbers.get(key, default)

    def pinch_off(self, current: Any = None) -> Any:
        """vgs_off of a jfet, from the card or from gm at gm_id, else at the operating point's current."""
        if "vgs_off" in self.numbers:
            return self.numbers["vgs_off"]
        return 2 * mp.sqrt(self.numbers["idss"] * self.numbers.get("gm_id", current)) / self.numbers["gm"]

    def k_factor(self, current: Any) -> Any:
        """k of a mosfet (A/V²), or None."""
        if "k" in self.numbers:
            return self.numbers["k"]
        at = self.numbers.get("gm_id", current)
        return self.numbers["gm"] ** 2 / (2 * at) if at is not None and "gm" in self.numbers else None

    def perveance(self, current: Any = None) -> Any:
        """P of a triode's ia = P·(vgk + vak/mu)^1.5, gm at gm_ia, else at the current; None where neither is told."""
        at, gm = self.get("gm_ia", current), self.triode_gm()
        return None if at is None else at / (mp.mpf(3) / 2 * at / gm) ** (mp.mpf(3) / 2)

    def triode_gm(self) -> Any:
        return self.numbers["gm"] if "gm" in self.numbers else self.numbers["mu"] / self.numbers["rp"]

    def mu(self) -> Any:
        n = self.numbers
        return n["mu"] if "mu" in n else n["gm"] * n["rp"]

    def small_signal(self, current: Any, across: Any) -> dict[str, Any]:
        """gm, rpi, ro (absent = infinite), rx and the capacitances by the ledger's part names."""
        return {"bjt": self._bjt, "mosfet": self._fet, "jfet": self._fet, "triode": self._triode}[self.family](
            current, across
        )

    def _bjt(self, current: Any, across: Any) -> dict[str, Any]:
        n = self.numbers
        gm = n["gm"] if "gm" in n else current / self.thermal
        out = {"gm": gm, "rx": n.get("rx")}
        if "rpi" in n or gm:
            out["rpi"] = n["rpi"] if "rpi" in n else n["beta"] / gm
        if "ro" in n:
            out["ro"] = n["ro"]
        elif "early_voltage" in n and current:
            out["ro"] = n["early_voltage"] / current
        if "cmu" in n:
            out["cmu"] = n["cmu"]
        elif "cob" in n:
            built_in = n.get("built_in", mp.mpf("0.75"))
            reverse = max(across - self.vbe, mp.mpf(0)) if across is not None else mp.mpf(0)
            ratio = (1 + n["cob_v"] / built_in) / (1 + reverse / built_in)
            out["cmu"] = n["cob"] * ratio ** n.get("grading", mp.mpf("0.33"))
        if "cpi" in n:
            out["cpi"] = n["cpi"]
        elif "ft" in n:
            depletion = n.get("c_be0", mp.mpf(0))
            feedback = n["cmu"] if "cmu" in n else n.get("cob", mp.mpf(0))
            tau = 1 / (2 * mp.pi * n["ft"]) - (depletion + feedback) / (n["ft_ic"] / self.thermal)
            out["cpi"] = gm * tau + depletion
        elif "c_be0" in n:
            out["cpi"] = n["c_be0"]
        if "ccs" in n:
            out["ccs"] = n["ccs"]
        return out

    def _fet(self, current: Any, across: Any) -> dict[str, Any]:
        n = self.numbers
        if "gm" in n and "gm_id" not in n:
            gm = n["gm"]
        elif self.family == "mosfet":
            gm = mp.sqrt(2 * self.k_factor(current) * current)
        else:
            gm = 2 * n["idss"] / self.pinch_off() * mp.sqrt(current / n["idss"])
        out = {"gm": gm, "rx": n.get("rx")}
        if "ro" in n:
            out["ro"] = n["ro"]
        elif n.get("channel_slope") and current:
            out["ro"] = 1 / (n["channel_slope"] * current)
        crss = n.get("crss")
        out["cgd"] = n.get("cgd", crss)
        out["cgs"] = n["cgs"] if "cgs" in n else (n["ciss"] - crss if "ciss" in n else None)
        out["cds"] = n["cds"] if "cds" in n else (n["coss"] - crss if "coss" in n else None)
        out["cdb"] = n.get("cdb")
        return {k: v for k, v in out.items() if v is not None}

    def _triode(self, current: Any, across: Any) -> dict[str, Any]:
        n = self.numbers
        gm = self.triode_gm()
        if "gm_ia" in n and current is not None:
            gm = gm * (current / n["gm_ia"]) ** (mp.mpf(1) / 3)
        out = {"gm": gm, "ro": self.mu() / gm} if gm else {"gm": gm}
        return out | {k: n[k] for k in ("cgk", "cga", "cak") if k in n}
