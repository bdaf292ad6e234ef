"""Figures and moves in words, for comparisons."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.report.apportion import FIGURES
from polebook.report.document import Entry

_FURTHER = (
    ("gain_at_reference_db", "gain at the reference", "dB"), ("reference_hz", "reference frequency", "Hz"),
    ("octc_upper_hz", "upper edge by the sum", "Hz"), ("sctc_lower_hz", "lower edge by the sum", "Hz"),
    ("node_upper_hz", "upper edge by the nodes", "Hz"), ("shrinkage", "edge over lowest pole", ""),
    ("settling_1_s", "settled within 1 %", "s"), ("settling_01_s", "settled within 0.1 %", "s"),
    ("group_delay_spread_s", "spread of the delay", "s"), ("noise_total_output", "noise at the output", "V"),
    ("noise_from_hz", "noise band from", "Hz"), ("noise_to_hz", "noise band to", "Hz"),
    ("noise_margin_db", "noise margin", "dB"),
)
_WHOLE = {**{key: (words, unit) for key, words, unit, _ in FIGURES}, **{key: rest for key, *rest in _FURTHER}}
_TARGET_OF = {key: target for key, _, _, target in FIGURES if target}
_ACCOUNT = {"lost_db": "lost at the {} end", "left_db": "left at the {} end", "edge_hz": "edge of the account, {}"}
_TARGETS = {"swing.got": ("swing at the load", "V"), "yield.got": ("yield", "share")}
_LINES = {"k": "K of {}", "pole_hz": "pole of {}", "owns_upper": "upper edge owned by {}",
          "owns_lower": "lower edge owned by {}", "lost_upper_db": "lost at the upper end, {}",
          "lost_lower_db": "lost at the lower end, {}", "allotted_upper_db": "allotted at the upper end, {}",
          "allotted_lower_db": "allotted at the lower end, {}"}
_UNITS = {"hz": "Hz", "db": "dB", "v": "V", "a": "A", "s": "s", "percent": "%", "v_rthz": "V/√Hz", "a_rthz": "A/√Hz"}
_SHARES = frozenset({"owns_upper", "owns_lower"})
_NEAR, _TWICE = 9.95, 2.0  # per cent below which a decimal is told; ratio from which it is told as one


def called(name: str) -> str:
    """A figure in words: "upper edge", "pole of Q1"."""
    group, _, rest = name.partition(".")
    if group == "overall":
        return str(_WHOLE[rest][0]) if rest in _WHOLE else rest.replace("_", " ")
    owner, _, key = rest.partition(".")
    if group == "targets" and rest in _TARGETS:
        return _TARGETS[rest][0]
    if group == "account":
        return _ACCOUNT[key].format(owner)
    return _LINES.get(key, key.rpartition("_")[0].replace("_", " ") + " of {}").format(owner)


def target_of(name: str) -> str:
    """The target that is judged by a figure; "" for none."""
    return _TARGET_OF.get(name.removeprefix("overall."), "")


def unit_of(name: str, gain_unit: str) -> str:
    """The unit of a figure by its name; "share" for a share of one."""
    group, _, rest = name.partition(".")
    if group == "overall" and rest in _WHOLE:
        unit = str(_WHOLE[rest][1])
        amplitude = "V" if gain_unit == "V/V" else "A"
        unit = {"noise": f"{amplitude}/√Hz", "source": amplitude}.get(unit, unit)
    elif group == "targets" and rest in _TARGETS:
        unit = _TARGETS[rest][1]
    else:
        key = rest.rpartition(".")[2]
        known = next((unit for end, unit in _UNITS.items() if key.endswith(f"_{end}")), "")
        unit = "share" if key in _SHARES else known
    return "dBΩ" if unit == "dB" and gain_unit == "V/A" and rest.startswith("gain") else unit


def figure(value: float | None, name: str, gain_unit: str) -> str:
    """A figure with its unit."""
    unit = unit_of(name, gain_unit)
    if unit == "%":
        return show.share(None if value is None else value / 100.0)
    return show.by_unit(value, unit)


def move(before: float | None, after: float | None, way: str, unit: str = "") -> str:
    """How far a figure moved: "+63 %", "×2.4", "-0.31 dB", "+1.2 points"; "" for what would not show."""
    if before is None or after is None:
        return "" if before is after else "new" if before is None else "gone"
    if way == "difference":
        return f"{text} dB" if (text := show.signed(after - before, "dB")) else ""
    if way == "points":
        points = (after - before) * (100.0 if unit == "share" else 1.0)
        return f"{points:+.1f} points" if round(points, 1) else ""
    if before == 0.0 or after / before <= 0.0:
        return show.signed(after - before, unit or "-")
    return times(after / before)


def times(ratio: float) -> str:
    """A ratio as the change that it is: "+0.4 %", "+63 %", "×2.4"."""
    if ratio >= _TWICE or ratio <= 1.0 / _TWICE:
        return f"×{ratio:.2g}" if ratio < 99.5 else f"×{show.eng(ratio, '', 2)}"
    change = 100.0 * (ratio - 1.0)
    text = f"{change:+.{1 if abs(change) < _NEAR else 0}f} %"
    return text if any(digit in text for digit in "123456789") else ""


def short(change: Entry) -> str:
    """A change in the few cells of a table: "Q2.c_comp", "Q4 added"."""
    sort, path = change["sort"], change["path"]
    if sort.startswith("stage ") or sort in ("left out", "taken in"):
        return f"{path} {sort.removeprefix('stage ')}"
    return f"{path} kind" if sort == "kind changed" else str(path)
