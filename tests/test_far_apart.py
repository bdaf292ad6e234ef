"""Values at the ends of what a number can be: figures or a plain statement, no fault and no warning of ours."""

import warnings

import pytest

from polebook.book.levels import Level, over_noise_db
from polebook.cli.main import main
from polebook.series import NAMES, holds

LEAST, MOST = "5e-324", "1e308"
APART = "the values of this chain lie too far apart to be computed"
VOLT = '[device.VOLT]\nfamily = "opamp"\ngbw = "10M"\n'
BJT = '[device.VF]\nfamily = "bjt"\nbeta = 180\n'
SOURCE = '[source]\nkind = "voltage"\nresistance = "600"\n'
OPEN = SOURCE.replace('"600"', "1e300")
BIAS = 'rb1 = "56k"\nrb2 = "12k"\nrc = "2k2"\nre = "680"\n'
CE = '[[stage]]\nname = "Q1"\nkind = "common-emitter"\ndevice = "VF"\n'
INVERTING = f"""[source]
kind = "current"
[[stage]]
name = "U1"
kind = "transimpedance"
device = "VOLT"
rf = "220k"
[[stage]]
name = "U2"
kind = "inverting"
device = "VOLT"
rg = {LEAST}
rf = "10k"
cf = "22p"
"""
FOLLOWER = f"""[source]
kind = "current"
[[stage]]
name = "U1"
kind = "noninverting"
device = "VOLT"
r_bias = {LEAST}
rf = {LEAST}
"""
VALVE = f"""[source]
kind = "voltage"
resistance = {MOST}
[[stage]]
name = "V1"
kind = "common-cathode"
device = "HALF"
rk = {MOST}
rk_bypassed = {MOST}
[device.HALF]
family = "triode"
mu = {MOST}
gm = {MOST}
"""
LADDER = f"""{SOURCE}[[stage]]
name = "L"
kind = "ladder"
arms = [{', '.join(['{ series_r = "10" }', '{ series_l = "1n" }', '{ shunt_c = "10p" }'] * 40)}]
"""
DIVIDER = f"""{SOURCE}[[stage]]
name = "L"
kind = "ladder"
arms = [{{ series_r = 1e20 }}, {{ shunt_r = 1 }}]
"""


@pytest.mark.parametrize(("text", "told"), [
    (INVERTING + VOLT, APART),
    (FOLLOWER + VOLT, APART),
    (VALVE, APART),
    (f'{SOURCE}{CE}couple = "3n3"\nrb2 = "12k"\nrc = "2k2"\nre = "47"\nre_bypassed = 1e-308\nce = "1u"\n{BJT}', ""),
    (f'{SOURCE}largest = {MOST}\n[supply]\npositive = "12"\n{CE}{BIAS.replace("re =", "re_bypassed =")}{BJT}', ""),
    (f'{OPEN}{CE}rc = "2k2"\n{BJT}ft = "600M"\nft_ic = "5m"\ncob = "1p2"\ncob_v = 5\n', ""),
    (f"{DIVIDER}[target]\ngain = {MOST}\n", APART),
    (LADDER, ""),
])
def test_far_values_are_shown_or_told(text, told, tmp_path, capsys):
    path = tmp_path / "far.toml"
    path.write_text(f"format = 1\n{text}", encoding="utf-8")
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        codes = [main([command, str(path)]) for command in ("audit", "show", "parts")]
    err = capsys.readouterr().err
    if told:
        assert codes[:2] == [2, 2] and err.count(told) == 2
    else:
        assert (max(codes) < 2 and err == "") or "    fix  " in err


def test_no_decibels_of_a_ratio_that_no_number_holds():
    assert Level("n1", 1e308, None, 1e-20, "Q1", "cut off").headroom_db is None
    assert Level("n1", 1e-20, None, 1e308, "Q1", "cut off").headroom_db is None
    assert Level("n1", 1.0, None, 10.0, "Q1", "cut off").headroom_db == pytest.approx(20.0)
    assert over_noise_db(5e-324, 1e10) is None
    assert over_noise_db(1.0, 1e-3) == pytest.approx(56.9897)


@pytest.mark.parametrize("value", [5e-324, 1e-301, 2e299, 1.7e308])
def test_no_series_has_a_value_beyond_its_decades(value):
    assert not any(holds(value, name) for name in NAMES)


def test_nothing_is_posted_of_values_that_lie_too_far_apart(tmp_path, capsys):
    path = tmp_path / "far.toml"
    path.write_text(f"format = 1\n{INVERTING}{VOLT}[target]\nyield = 0.9\n", encoding="utf-8")
    assert main(["post", str(path)]) == 2
    assert APART in capsys.readouterr().err
    assert [one.name for one in tmp_path.iterdir()] == ["far.toml"]
