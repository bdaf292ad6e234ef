"""Plans for the tests of the apportion page: real ones kept, and made-up ones of anything."""

from __future__ import annotations

import json
import random
from functools import cache
from typing import Any

from polebook.session import state as sessions
from polebook.session.state import Session
from polebook.text.edit import Edit
from polebook.tui import apportion_apart
from polebook.tui.apportion_work import question, run_of, steps
from polebook.tui.apportions import FAVOURS, Asked, Going, Reached, Run
from polebook.tui.view import Apportion

NAMES = ("gain", "lower", "upper", "peaking", "noise", "swing", "current", "overshoot", "rise", "sag", "yield")


@cache
def pieces(asked: str) -> tuple[Any, ...]:
    """All steps of a run, from its question as JSON; computed here, and once."""
    return tuple(steps(json.loads(asked)))


def here(monkeypatch) -> None:
    """Runs are had from `pieces`, and begin no process."""
    def none(*_):
        raise OSError(11, "Resource temporarily unavailable")

    monkeypatch.setattr(apportion_apart, "Apart", none)
    monkeypatch.setattr(apportion_apart, "steps", lambda asked, stop: iter(pieces(json.dumps(asked))))


def plan_of(text: str, asked: Asked) -> Run:
    """The plan of a text."""
    found = pieces(json.dumps(question(asked, text, "chain.toml")))
    return run_of(found[-1][2], asked, text)


def random_apportion(rng: random.Random, session: Session, words: tuple[str, ...]) -> Apportion:
    """Anywhere on the page, with a plan of anything or with none."""
    text = session.history.text
    paths = [row.path for sheet in sessions.sheets_of(session)[:4] for row in sessions.keys_of(session, sheet)[:6]]
    paths += [*words, "Q1.rc", "Q2.c_comp"]
    some = frozenset(rng.sample(paths, rng.randrange(min(len(paths), 5))))
    going = run = None
    if rng.random() < 0.7:
        other = text + "\n" if rng.random() < 0.5 else text
        after = rng.choice((text, other + "\n"))
        asked = Asked(tuple(some), rng.choice(FAVOURS), rng.choice((0, 1, 2**64)))
        run = Run(asked, other, after, Edit(()), random_told(rng, words, paths))
    if rng.random() < 0.4:
        targets = tuple(session.ledger.targets) if session.ledger is not None else ()
        going = Going(Asked((), "", 1), rng.choice((text, "")), targets,
                      tuple(Reached(name, random_number(rng), rng.choice((True, False, None)))
                            for name in rng.sample(NAMES, 4)), rng.random() < 0.7)
    return Apportion(rng.choice((None, some)), tuple(rng.sample(paths, 2)), rng.choice(FAVOURS),
                     rng.choice((0, 1, 2**64)), rng.choice(paths), going, run)


def random_number(rng: random.Random) -> float | None:
    return rng.choice((None, 0.0, 1e-300, 1e300, -12.0, float("inf"), 10 ** rng.uniform(-12, 12)))


def random_told(rng: random.Random, words: tuple[str, ...], paths: list[str]) -> dict[str, Any]:
    """A plan as its answer has it, with anything in it."""
    def side() -> dict[str, Any]:
        got = random_number(rng)
        return {"got": got, "margin": random_number(rng), "why": rng.choice(words),
                "met": rng.choice((True, None) if got is None else (True, False, None))}

    def overall() -> dict[str, Any]:
        return {**{key: random_number(rng) for key in (
            "gain_db", "lower_edge_hz", "upper_edge_hz", "peaking_db", "rise_time_s", "overshoot_percent",
            "sag_percent", "group_delay_s", "noise_density", "noise_figure_db", "noise_total_input",
            "supply_current_a", "largest_source", "dynamic_range_db", "full_power_hz")},
            "gain_unit": rng.choice(("V/V", "V/A"))}

    keys = [{"path": path, "unit": "Ω", "now": 1.0, "now_text": rng.choice((*words, None)),
             "value": rng.choice((None, 0.0, 1e-30, 2.5, -1e30)), "text": rng.choice((*words, None)),
             "moved": rng.random() < 0.6} for path in rng.sample(paths, rng.randrange(len(paths)))]
    return {
        "file": rng.choice(words), "free": {"from": rng.choice(("chosen", "file", "fitted")), "keys": paths},
        "favour": rng.choice((None, "upper")), "seed": 1, "starts": rng.choice((0, 1, 5)), "trials": 24,
        "stopped": rng.random() < 0.3, "keys": keys,
        "targets": [{"name": name, "want": 10 ** rng.uniform(-12, 12), "before": side(), "after": side()}
                    for name in rng.sample(NAMES, rng.randrange(len(NAMES)))],
        "overall": {"before": overall(), "after": overall()},
        "cautions": rng.sample(words, rng.randrange(3)), "mended": rng.sample(words, rng.randrange(3)), "met": True,
        "gives": [{"target": "upper", "want": 1e6, "got": 1e300}] if rng.random() < 0.5 else [],
        "held": [{"path": rng.choice(words), "value": 1.0, "bound": "upper", "target": "upper", "leverage": 0.5}],
        "levers": [], "notes": rng.sample(words, rng.randrange(3)), "written": False,
    }
