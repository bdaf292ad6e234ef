"""The program's step responses, sags and group delays beside the independent ones, and beside python-control."""

from __future__ import annotations

import tomllib
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from polebook.book.ledger import Ledger, ledger
from polebook.book.pulse import sag
from polebook.chain.read import load
from polebook.solve.poles import poles
from tests.helpers import DEMOS
from tests.independent.linear import mp
from tests.independent.pulse import HIGH, LOW, delay_spread, figures, group_delay, sag_percent, view_of
from tests.independent.random_chains import text
from tests.independent.solved import Solved
from tests.independent.state_space import state_space

HERE = Path(__file__).parent
DEMO_NAMES = [path.stem for path in sorted(DEMOS.glob("*.toml"))]
FILES = {path.stem: path for path in [*sorted(DEMOS.glob("*.toml")), *sorted((HERE / "chains").glob("*.toml"))]}
UNSTABLE = ("follower-into-trap", "oscillating")
STABLE = [name for name in FILES if name not in UNSTABLE]
SEEDS = range(10)
EXACT = 1e-9


@cache
def both(name: str | int, folder: str = "") -> tuple[Ledger, Solved]:
    """The program's ledger and the independent solution of a file, or of a random chain by its seed."""
    if isinstance(name, int):
        path = Path(folder) / f"random-{name}.toml"
        path.write_text(text(name), encoding="utf-8")
    else:
        path = FILES[name]
    return ledger(load(str(path))), Solved(tomllib.loads(path.read_text(encoding="utf-8")))


@pytest.fixture(scope="module")
def folder(tmp_path_factory) -> str:
    return str(tmp_path_factory.mktemp("random"))


def agree(ours: Ledger, chain: Solved) -> None:
    for key, value in figures(chain, 1000).items():
        found = getattr(ours.pulse, key)
        if key == "overshoot_percent":
            assert found == pytest.approx(float(value), rel=EXACT, abs=100 * EXACT), key
        else:
            assert found == pytest.approx(float(value), rel=EXACT, abs=0), key
    view = view_of(chain, HIGH)
    t = np.linspace(0, ours.pulse.window_s, 9)
    np.testing.assert_allclose(ours.pulse.at(t), [float(view.step(x)) for x in t], atol=EXACT, rtol=0)
    reference = ours.reference_hz
    assert ours.delay_s == pytest.approx(float(group_delay(chain, mp.mpf(reference))), rel=EXACT)


@pytest.mark.parametrize("role", [HIGH, LOW])
@pytest.mark.parametrize("name", STABLE)
def test_poles_of_either_network(name, role):
    """As many, and each in its place: like ones as a set. One at 0 may be a node that an open part has left hanging."""
    ours, chain = both(name)
    hz, net = ours.solution.sweep.hz, ours.solution.circuit.network
    found = poles(net, float(hz[0]), float(hz[-1]), 0, "upper" if role == HIGH else "lower")
    assert found.trusted, found.why
    wanted = [complex(p) for p in view_of(chain, role).poles if p != 0]
    left = found.roots.tolist()
    assert len(left) == len(wanted)
    for p in wanted:
        nearest = min(left, key=lambda q, p=p: abs(q - p))
        left.remove(nearest)
        assert abs(nearest - p) <= EXACT * abs(p)


@pytest.mark.parametrize("name", STABLE)
def test_step_response(name):
    agree(*both(name))


@pytest.mark.parametrize("name", STABLE)
def test_sag(name):
    """Of a pulse of three tenths of the fastest of its time constants."""
    ours, chain = both(name)
    taus = [tau for k, tau in ours.solution.constants.by_part.items()
            if tau and ours.solution.circuit.layout.parts[k].role == "low"]
    pulse = 0.3 * min(map(abs, taus), default=1e-3)
    found = sag(ours.solution, pulse)
    assert found.percent == pytest.approx(float(sag_percent(chain, pulse)), rel=EXACT, abs=100 * EXACT), found.why


@pytest.mark.parametrize("seed", SEEDS)
def test_random_chains(seed, folder):
    ours, chain = both(seed, folder)
    if ours.unstable:
        assert ours.pulse.rise_time_s is None and ours.sag.percent is None
        return
    agree(ours, chain)
    wanted = float(sag_percent(chain, ours.chain.get("target.pulse")))
    assert ours.sag.percent == pytest.approx(wanted, rel=EXACT, abs=100 * EXACT)


def test_the_random_chains_try_something(folder):
    found = [both(seed, folder)[0] for seed in SEEDS]
    stable = [one for one in found if not one.unstable]
    assert len(stable) >= 8
    by_matrix = [one.pulse.transient.residues is None for one in stable]
    assert any(by_matrix) and not all(by_matrix)


@pytest.mark.parametrize("name", DEMO_NAMES)
def test_spread_of_the_group_delay(name):
    ours, chain = both(name)
    wanted = delay_spread(chain, mp.mpf(ours.lower_hz), mp.mpf(ours.upper_hz), 40)
    assert ours.delays.seconds == pytest.approx(float(wanted), rel=EXACT)


@pytest.mark.parametrize(
    ("name", "role"), [*((name, HIGH) for name in (*DEMO_NAMES, 0, 3)), *((name, LOW) for name in DEMO_NAMES)]
)
def test_beside_python_control(name, role, folder):
    """Its step response of a state space of the view, on 200 points of the window or of a few slow constants."""
    import control  # deferred: only what runs here pays its second of imports, not each process that collects

    ours, chain = both(name, folder)
    view = view_of(chain, role)
    end = ours.pulse.window_s if role == HIGH else 2.0 / min(abs(complex(p)) for p in view.poles)
    t = np.linspace(0.0, end, 201)
    system = control.ss(*state_space(view, 1.0 / end))
    wanted = control.step_response(system, T=t / end).outputs / float(chain.gain)
    if role == HIGH:
        found = ours.pulse.at(t)
    else:
        t, wanted = t[10::30], wanted[10::30]
        found = [1.0 - sag(ours.solution, float(x)).percent / 100.0 for x in t]
    np.testing.assert_allclose(found, wanted, atol=1e-6, rtol=0)


@pytest.mark.parametrize("name", UNSTABLE)
def test_an_unstable_chain_has_none_of_it(name):
    ours, _ = both(name)
    assert ours.pulse.why == ours.sag.why == "the chain is unstable"
    assert ours.delay_s is None and ours.delays is None
    assert ours.pulse.rise_time_s is ours.pulse.overshoot_percent is ours.pulse.settling_01_s is None
