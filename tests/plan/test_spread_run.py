"""A spread as a whole: the same in any blocks and by any helpers, stopped, judged, its corners and costs."""

import io
from dataclasses import replace
from math import erf, exp, log, pi, sqrt
from time import monotonic, sleep

import numpy as np
import pytest

from polebook.book.ledger import ledger
from polebook.plan import wire
from polebook.plan.spread import block as blocks
from polebook.plan.spread.alone import alone, with_numbers
from polebook.plan.spread.costs import Sample, estimated
from polebook.plan.spread.draws import drawn
from polebook.plan.spread.helper import Bench, Setting, Task, answer, answered, setting_of
from polebook.plan.spread.judge import judged
from polebook.plan.spread.linear import as_filed, slopes
from polebook.plan.spread.model import MOST_BUILDS, Request
from polebook.plan.spread.nominal import nominal
from polebook.plan.spread.run import spread
from polebook.plan.spread.states import GOOD, UNSOLVED
from polebook.plan.spread.workers import Crew, block_size
from polebook.problem import ProblemsFound
from tests.laws.chains import chain
from tests.plan.spread_chains import LOW_PASS, TWO, parsed, run


def equal(a, b, count=None):
    assert a.columns.keys() == b.columns.keys()
    for name, column in a.columns.items():
        assert column[:count] == pytest.approx(b.columns[name][:count], rel=1e-12, abs=1e-12, nan_ok=True), name
    assert a.state[:count].tolist() == b.state[:count].tolist()
    assert count or (a.alone, a.outside) == (b.alone, b.outside)


@pytest.mark.parametrize("name", ["six-stage", "band-pass", "direct-coupled"])
def test_blocks_do_not_matter(name):
    of = with_numbers(chain(name), {"tolerance.resistor": 0.05})
    whole = run(of, 200, seed=3, workers=1)
    for most in (13, 64, 199):
        equal(run(of, 200, seed=3, workers=1, block=most), whole)
    equal(run(of, 70, seed=3, workers=1), whole, 70)
    with pytest.raises(AssertionError):
        equal(run(of, 200, seed=4, workers=1), whole)


@pytest.fixture
def crew():
    """A crew whose helper has started."""
    with Crew() as found:
        found.grow(1)
        until = monotonic() + 20
        while found.answers.empty() and monotonic() < until:
            sleep(0.005)
        yield found
    assert found.helpers == []


def test_helpers_do_not_matter_and_are_kept(crew):
    """Two spreads of different chains one after the other, by one crew."""
    for of, size in ((chain("six-stage"), 40), (parsed(TWO), 25)):
        request = Request(of, 600, 5, (-10.0, 50.0), corners=False, costs=False, workers=2, block=size)
        by_two = [result for _, _, result in spread(request, crew=crew)][-1]
        assert by_two.complete
        equal(by_two, run(of, 600, seed=5, temperature=(-10.0, 50.0), workers=1))
    assert [helper.there for helper in crew.helpers] == [True]


def test_what_a_lost_helper_had_to_do_is_done_here(crew):
    of = chain("six-stage")
    last = None
    killed = False
    for step in spread(Request(of, 900, 5, corners=False, costs=False, workers=2, block=30), crew=crew):
        last = step[2]
        if not killed and crew.helpers[0].tasks:
            crew.helpers[0]._process.kill()
            killed = True
    assert killed
    assert crew.helpers == []
    assert last.complete
    equal(last, run(of, 900, seed=5, workers=1))


def test_an_answer_of_a_spread_called_off_is_not_taken(crew):
    """A task is known by the number of its spread."""
    of = chain("six-stage")
    for _ in spread(Request(of, 900, 1, corners=False, costs=False, workers=2, block=30), crew=crew):
        if crew.helpers[0].tasks:
            break
    assert crew.helpers[0].tasks
    request = Request(of, 900, 2, corners=False, costs=False, workers=2, block=30)
    again = [result for _, _, result in spread(request, crew=crew)][-1]
    equal(again, run(of, 900, seed=2, workers=1))
    assert Task(1, 0, 30) != Task(2, 0, 30)


def test_a_helper_that_cannot_be_started_is_done_without(monkeypatch):
    def refuse(*_, **__):
        raise OSError("no more processes")

    monkeypatch.setattr("polebook.plan.process.subprocess.Popen", refuse)
    assert run(chain("six-stage"), 300, workers=2, block=100).complete


def test_blocks_are_even():
    assert block_size(10_000, 4096, 1) == 3334
    assert block_size(10_000, 4096, 2) == 2500
    assert block_size(1, 4096, 2) == 1
    for builds in (1, 2, 99, 4096, 4097, 1_000_000):
        for workers in (1, 2, 3):
            size = block_size(builds, 4096, workers)
            assert 1 <= size <= 4096
            assert size * -(-builds // size) < builds + size


def test_progress_and_a_stop():
    of = chain("six-stage")
    whole = run(of, 1000, seed=3, workers=1)
    seen = []
    for done, total, result in spread(Request(of, 1000, 3, costs=False, workers=1, block=100), lambda: len(seen) >= 4):
        seen.append((done, total, result))
    assert [(done, total) for done, total, _ in seen] == [(100, 1000), (200, 1000), (300, 1000), (400, 1000)]
    last = seen[-1][2]
    assert (last.done, last.complete, last.corners) == (400, False, ())
    equal(last, whole, 400)
    assert seen[0][2].columns["gain_db"].size == 100  # what was handed out stays as it was
    assert last.statistics("gain_db").mean == pytest.approx(whole.columns["gain_db"][:400].mean())


def test_a_stop_is_heard_within_a_block():
    """Between two looks (some 130 here), and while builds are solved alone, which takes milliseconds each."""
    asked = []

    def stop():
        asked.append(1)
        return len(asked) > 160

    found = list(spread(Request(chain("trap-notch"), 500, 1, costs=False, workers=1), stop))
    assert found == []
    assert len(asked) == 161


def test_everything_is_done_once_all_is_counted():
    of = with_numbers(chain("six-stage"), {"target.upper": 2.5e6, "target.gain": exp(log(10) * 75.3 / 20)})
    steps = [(done, total, result.complete) for done, total, result in spread(Request(of, 400, workers=1, block=150))]
    assert [done for done, _, _ in steps] == sorted(done for done, _, _ in steps)
    assert {total for _, total, _ in steps} == {400 + 3 * 400}
    assert steps[-1] == (1600, 1600, True)
    assert not any(complete for _, _, complete in steps[:-1])


def test_the_linear_estimate_is_the_deviation_of_small_tolerances():
    of = chain("six-stage")
    small = {path: 0.1 * x for path, x in of.numbers.items() if path.startswith("tolerance.")}
    for more in ({}, {"tolerance.matching": 0.02, "tolerance.supply": 0.01}):
        result = run(with_numbers(of, small | more), 6000, seed=2)
        assert set(result.linear) == {"gain_db", "lower_edge_hz", "upper_edge_hz"}
        for name, deviation in result.linear.items():
            assert result.statistics(name).deviation == pytest.approx(deviation, rel=0.03), name
            assert sum(result.shares[name].values()) == pytest.approx(1.0)


def test_the_surroundings_are_in_the_linear_estimate():
    of = chain("six-stage")
    none = {path: 0.0 for path in of.numbers if path.startswith("tolerance.")}
    result = run(with_numbers(of, none), 4000, temperature=(20.0, 30.0))
    assert [draw.name for draw in result.draws] == ["supply.temperature"]
    for name, deviation in result.linear.items():
        assert result.statistics(name).deviation == pytest.approx(deviation, rel=0.03), name
    # the file's 25 °C are not the middle of the range
    aside = run(with_numbers(of, none), 10, temperature=(24.0, 30.0), corners=True)
    for corner in aside.corners:
        assert corner.linear - aside.nominal[corner.figure] == pytest.approx(
            corner.value - aside.nominal[corner.figure], rel=0.1), corner.figure


def one_part(off):
    """A chain that meets its target where its one part is off by `off` at most, and the share of those that do.

    f_H = 1/(2·pi·R·C) is at or above f where C is at or below 1/(2·pi·R·f); the part's deviation is a third of 10 %.
    """
    upper = 1.0 / (2 * pi * 1e3 * 1e-9 * (1 + off))
    of = parsed(LOW_PASS, tolerance='resistor = 0\ncapacitor = "10 %"', target=f"upper = {upper!r}")
    return of, 0.5 * (1 + erf(off / 0.1 * 3 / sqrt(2)))


@pytest.mark.parametrize("off", [-0.05, 0.01, 0.06])
def test_a_yield_known_in_closed_form(off):
    of, exact = one_part(off)
    share = run(of, 40_000, seed=2).yields().shares["upper"]
    assert share.low <= exact <= share.high
    assert share.high - share.low < 0.011


def test_the_interval_holds_the_yield_as_often_as_it_says():
    """Of 60 seeds 95 %, give or take three deviations of that."""
    of, exact = one_part(0.03)
    shares = [run(of, 400, seed=seed).yields().shares["upper"] for seed in range(60)]
    assert 52 <= sum(share.low <= exact <= share.high for share in shares) < 60


def test_an_edge_of_one_pole_and_one_part_has_the_distribution_of_its_part():
    result = run(parsed(LOW_PASS, tolerance='resistor = 0\ncapacitor = "10 %"\nshape = "uniform"'), 20_000)
    told = result.statistics("upper_edge_hz")
    nominal = 1.0 / (2 * pi * 1e3 * 1e-9)
    assert result.nominal["upper_edge_hz"] == pytest.approx(nominal)
    for percent, value in told.percentiles.items():
        u = 1 - 2 * float(percent) / 100  # a high edge comes from a small part
        assert value == pytest.approx(nominal / (1 + 0.1 * u), rel=0.002)
    assert np.isnan(result.columns["lower_edge_hz"]).all()  # down to d.c.
    assert result.statistics("lower_edge_hz") is None


def test_a_corner_is_where_every_part_is_at_its_end():
    of = parsed(LOW_PASS, tolerance='resistor = "2 %"\ncapacitor = "10 %"')
    result = run(of, 500, corners=True)
    corners = {(corner.figure, corner.side): corner for corner in result.corners}
    worst = corners["upper_edge_hz", "low"]
    assert worst.value == pytest.approx(1.0 / (2 * pi * 1e-6 * 1.02 * 1.1), rel=1e-9)
    assert worst.linear == pytest.approx(exp(-0.12) / (2 * pi * 1e-6), rel=1e-6)
    assert worst.signs == {"F.arms.1.series_r": 1, "F.arms.2.shunt_c": 1}
    assert worst.turned == ()
    assert result.beyond(worst) == 0
    assert ("lower_edge_hz", "high") not in corners


@pytest.mark.parametrize("name", ["six-stage", "wire-break-listener", "valves", "rain-radar"])
def test_no_build_is_worse_than_the_corner(name):
    result = run(chain(name), 3000, seed=7, corners=True)
    assert len(result.corners) == 4
    for corner in result.corners:
        assert result.beyond(corner) == 0
        assert set(corner.signs) == {draw.name for draw in result.draws}
        of = drawn(chain(name))
        column = of.values({path: float(sign) for path, sign in corner.signs.items()})
        assert with_numbers(of.chain, column).numbers != of.chain.numbers


def test_a_draw_whose_leverage_turns_over_is_taken_at_its_other_end():
    """A load near the amplifier's own output resistance turns over nothing; the six stages' emitter resistor does."""
    result = run(chain("six-stage"), 10, corners=True)
    turned = [corner for corner in result.corners if corner.turned]
    assert turned
    for corner in turned:
        plain = {name: -sign if name in corner.turned else sign for name, sign in corner.signs.items()}
        of = drawn(chain("six-stage"))
        request = with_numbers(of.chain, of.values({name: float(sign) for name, sign in plain.items()}))
        (figure,) = [figure for figure in result.figures if figure.name == corner.figure]
        other = run(request, 1).nominal[figure.name]
        assert corner.value < other if corner.side == "low" else corner.value > other


def test_a_cost_solved_is_the_yield_of_the_chain_with_that_part_tighter():
    """Told by a spread of its own: the file with half the tolerance, the same seed."""
    numbers = {"target.gain": exp(log(10) * 19.8 / 20), "target.gain_tolerance": 0.2}
    of = with_numbers(chain("frost-line-sounder"), numbers)
    result = run(of, 2000, seed=2, costs=True, workers=1)
    before = result.yields().shares["all"].share
    solved = [cost for cost in result.costs if cost.solved]
    assert len(solved) == 3
    assert result.costs[0].yield_gain > 0.05
    for cost in solved:
        owner, _, key = cost.draw.name.partition(".")
        path = "tolerance.beta" if key.endswith("beta") else f"{owner}.tolerance.{key}"
        assert path.endswith(".beta") or owner != "device"
        tighter = run(with_numbers(of, {path: cost.draw.share / 2}), 2000, seed=2, workers=1)
        assert cost.yield_gain == pytest.approx(tighter.yields().shares["all"].share - before, abs=1e-12)
        assert cost.builds == 2000


def test_an_estimated_cost_is_near_the_solved_one():
    of = parsed(LOW_PASS, tolerance='resistor = "5 %"\ncapacitor = "10 %"', target='upper = "158k"')
    result = run(of, 5000, costs=True)
    split = drawn(of)
    sample = Sample(of, judged(of, result.figures), result.columns, result.state, 1)
    guessed = {cost.draw.name: cost for cost in estimated(
        sample, split.draws, slopes(nominal(split).ledger, split, as_filed(split), result.figures))}
    assert [cost.draw.name for cost in result.costs] == ["F.arms.2.shunt_c", "F.arms.1.series_r"]
    for cost in result.costs:
        assert cost.solved
        assert not guessed[cost.draw.name].solved
        assert guessed[cost.draw.name].yield_gain == pytest.approx(cost.yield_gain, abs=0.004)
    assert result.costs[0].at_none > result.costs[0].yield_gain > 0


def test_a_target_that_no_build_is_judged_by_is_named():
    of = parsed(TWO, target='swing = "1"\nupper = "100k"\nyield = "90 %"')
    told = run(of, 50).yields()
    assert told.unjudged == ("swing",)
    assert set(told.shares) == {"all", "upper"}
    assert run(parsed(TWO), 50).yields().shares == {}
    assert run(parsed(TWO), 50, costs=True).costs == ()


def test_only_the_figures_that_are_asked_for():
    result = run(chain("six-stage"), 100, figures=("upper_edge_hz",), corners=True)
    assert set(result.columns) == {"upper_edge_hz"}
    assert {corner.figure for corner in result.corners} == {"upper_edge_hz"}
    assert result.yields().unjudged == ("gain", "lower", "peaking")


def test_the_gain_is_judged_at_the_reference_where_there_is_one():
    of = chain("stated-currents")
    assert "target.reference" in of.given
    result = run(of, 20)
    assert "gain_at_reference_db" in result.columns
    assert "gain_at_reference_db" not in run(chain("six-stage"), 20).columns


def test_nothing_spreads_where_every_tolerance_is_zero():
    of = chain("six-stage")
    still = with_numbers(of, {path: 0.0 for path in of.numbers if path.startswith("tolerance.")})
    result = run(still, 30, costs=True, corners=True)
    assert [problem.what for problem in result.cautions] == ["nothing spreads"]
    for name, value in result.nominal.items():
        assert result.columns[name] == pytest.approx(np.full(30, value), rel=1e-11)
    assert result.corners == ()
    assert result.costs == ()


def test_a_bias_that_is_not_solved_leaves_its_build_without_figures(monkeypatch):
    solve = blocks.built

    def partly(of, numbers):
        parts, spectra, points = solve(of, numbers)
        count = next(iter(numbers.values())).size
        flags = np.arange(count) % 10 != 3
        return parts, spectra, {**points, "Q2": replace(points["Q2"], converged=points["Q2"].converged & flags)}

    monkeypatch.setattr(blocks, "built", partly)
    result = run(chain("six-stage"), 100, workers=1)
    assert np.nonzero(result.state == UNSOLVED)[0].tolist() == list(range(3, 100, 10))
    assert np.isnan(result.columns["gain_db"][3])
    assert result.failures() == {"unsolved": 10}
    assert result.yields().shares["all"].share <= 0.9


def test_a_bias_that_is_not_solved_leaves_a_chain_alone_without_figures(monkeypatch):
    of = chain("six-stage")

    def unsolved(given):
        found = ledger(given)
        circuit = found.solution.circuit
        points = {**circuit.points, "Q2": replace(circuit.points["Q2"], converged=False)}
        found.solution.circuit = replace(circuit, points=points)
        return found

    assert alone(of)[0] == GOOD
    monkeypatch.setattr("polebook.plan.spread.alone.ledger", unsolved)
    assert alone(of) == (UNSOLVED, None)


@pytest.mark.parametrize(("asked", "what"), [
    ({"builds": 0}, "0 builds can't be drawn"),
    ({"builds": MOST_BUILDS + 1}, "10000001 builds can't be drawn"),
    ({"seed": -1}, "-1 is no seed"),
    ({"seed": 2**64}, "18446744073709551616 is no seed"),
    ({"temperature": (60.0, -20.0)}, "60 to -20 °C is no range of temperatures"),
    ({"temperature": (-300.0, 20.0)}, "-300 to 20 °C is no range of temperatures"),
    ({"temperature": (float("nan"), 20.0)}, "nan to 20 °C is no range of temperatures"),
    ({"figures": ("gain",)}, "a spread has no figure gain"),
])
def test_a_request_that_makes_no_sense_is_refused(asked, what):
    with pytest.raises(ProblemsFound) as refusal:
        list(spread(Request(chain("six-stage"), **asked)))
    (problem,) = refusal.value.problems
    assert problem.what == what
    assert problem.why
    assert problem.fix


def test_a_chain_without_a_ledger_has_no_spread():
    text = TWO.replace('rc = "2k2"\n', "").replace('rin = "10k"\n', "")
    with pytest.raises(ProblemsFound):
        list(spread(Request(parsed(text), 10, workers=1)))


def test_a_setting_can_be_sent():
    of = chain("six-stage")
    setting = Setting(of, None, (), 3, 64)
    task = Task(1, 0, 64, ("Q1.rc", 0.5))
    one, two = Bench(setting_of(sent(setting.message()))).do(task), Bench(setting).do(task)
    assert one.columns["gain_db"].tobytes() == two.columns["gain_db"].tobytes()
    again, piece = answered(sent(answer(task, one)))
    assert again == task and (piece.first, piece.outside, piece.alone) == (one.first, one.outside, one.alone)
    assert {name: column.tobytes() for name, column in piece.columns.items()} == \
        {name: column.tobytes() for name, column in one.columns.items()}
    assert piece.state.tobytes() == one.state.tobytes()


def sent(message):
    """A message as the other side reads it."""
    pipe = io.BytesIO()
    wire.write(pipe, message)
    pipe.seek(0)
    return wire.read(pipe)
