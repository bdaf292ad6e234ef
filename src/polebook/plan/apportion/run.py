"""Apportioning from a request to a verified proposal, in pieces of a few milliseconds.

Today's values are the first start; where they don't lead to all targets, or a figure is favoured, further starts are
scattered about them. The best plan is snapped to values that can be bought, and verified by the file that it makes.
"""

from __future__ import annotations

from collections.abc import Callable, Generator, Iterator
from importlib import import_module
from threading import Thread
from typing import TypeVar

from polebook.chain.edits import content
from polebook.chain.read import known_reading
from polebook.plan.apportion.descend import ROUNDS, Reached, descend
from polebook.plan.apportion.giving import Gives, Held, gives, held, levers
from polebook.plan.apportion.goals import check
from polebook.plan.apportion.handles import free
from polebook.plan.apportion.merit import MISSED, NEARLY, Merit, merit, shortfall
from polebook.plan.apportion.prepare import bare, prepared
from polebook.plan.apportion.result import Best, Request, Result
from polebook.plan.apportion.snap import nearest, snap
from polebook.plan.apportion.starts import scattered
from polebook.plan.apportion.task import Task, Trial, trial
from polebook.plan.apportion.yields import got, judged, judging, met_beside, missed
from polebook.plan.proposal import Proposal, propose
from polebook.problem import Problem, ProblemsFound

SCATTERED, TO_FAVOUR = 48, 16  # values that are tried for a start; once one start has met all, to favour a figure
STARTS, STARTS_TO_FAVOUR = 5, 2  # of them, from which the search is begun anew
AGREE, ALIKE = 3, 0.01  # starts that have to come to the same merit, and how near, for no more to be begun
LIFELESS = 300  # values that are tried where the chain has no figures as it is
LAST_ROUNDS = 80
ROOM = (2.0, 4.0, 8.0)  # times the room that a target is given beyond its limit, for a yield
POLL_S = 0.02

T = TypeVar("T")
Progress = tuple[int, int, Best]
Run = Generator[Progress, None, Result]


def apportion(request: Request, stop: Callable[[], bool] = lambda: False) -> Run:
    """A generator of (done, total, best so far) whose value is the result; once `stop` says so it comes to an end.

    No piece between two of its yields takes longer than one ledger with its pulse. Raises ProblemsFound at once where
    the request is at fault, or the file has faults.
    """
    check(request.favour)
    reading = known_reading(request.text, request.file)
    if reading.chain is None:
        raise ProblemsFound(reading.problems, request.text)
    may = free(reading.chain, content(reading, request.text), request.free)
    if not request.favour and not reading.chain.has_targets:
        raise ProblemsFound([Problem(None, f"{request.file} states no targets", "a plan has to know what to reach",
                                     f"state one: polebook set {request.file} target.upper 1M; or favour a figure")])
    return _Search(request, bare(reading.chain, may.handles, may.notes), may.origin, stop).run()


def finished(work: Run) -> Result:
    """The result of a run, done to its end."""
    while True:
        try:
            next(work)
        except StopIteration as done:
            result: Result = done.value
            return result


class _Search:
    """One run: what is asked, the best so far, and how far it is."""

    def __init__(self, request: Request, task: Task, origin: str, stop: Callable[[], bool]) -> None:
        self.request, self.task, self.origin, self.stop = request, task, origin, stop
        self.total = ROUNDS + SCATTERED + STARTS * ROUNDS + ROUNDS
        self.best = trial(task, task.start)
        self.starts = 0

    def run(self) -> Run:
        seen = self.best if self.best.lives else (yield from self._alive())
        self.task = task = prepared(self.task, self.request.favour, seen)
        self.best = today = trial(task, task.start)
        of = merit(task)
        if self.stop():
            return self._stopped()
        if not seen or (not task.favour and not shortfall(task, today)):
            proposal = yield from self._judged(self._proposed(today))
            if seen and missed(proposal):
                yield from self._imported()
                proposal, today = yield from self._roomier(proposal, today, today)
            return self._result(proposal, today)
        yield from self._imported()
        reached = yield from self._reached(of, today, trial(task, seen.x))
        if self.stop():
            return self._stopped()
        if shortfall(task, reached.trial) > NEARLY:  # then nothing else counts
            of = merit(task, much=0.0)
            reached = yield from self._watched(descend(task, of, reached.trial, LAST_ROUNDS))
        final = yield from self._watched(snap(task, of, reached))
        if shortfall(task, final) > MISSED and shortfall(task, reached.trial) <= NEARLY:  # by rounding
            cautious = merit(task, much=2.0)
            reached = yield from self._watched(descend(task, cautious, reached.trial))
            again = yield from self._watched(snap(task, cautious, reached))
            final = min(final, again, key=lambda one: shortfall(task, one))
        if not final.lives:
            final = yield from self._bought(of, final)
        if today.lives and of.settled(today) <= of.settled(final):
            final = today
        self.best = final
        if self.stop():
            return self._stopped()
        proposal = yield from self._judged(self._proposed(final))
        if met_beside(proposal):
            proposal, final = yield from self._roomier(proposal, reached.trial, final)
            return self._result(proposal, final)
        if not final.lives:
            return self._result(proposal, final)
        giving = yield from self._watched(gives(task, reached.trial, final))
        holding = yield from self._watched(held(task, final))
        return self._result(proposal, final, giving, holding)

    def _imported(self) -> Iterator[Progress]:
        """scipy's linear programs, imported beside whatever else goes on."""
        thread = Thread(target=import_module, args=("scipy.optimize",), daemon=True)
        thread.start()
        while thread.is_alive():
            thread.join(POLL_S)
            yield self._progress()

    def _alive(self) -> Generator[Progress, None, Trial | None]:
        """Values at which a chain has figures that has none as it is."""
        for x in scattered(self.task, LIFELESS, self.request.seed):
            found = trial(self.task, x)
            yield self._progress()
            if found.lives:
                return found
            if self.stop():
                break
        return None

    def _reached(self, of: Merit, today: Trial, seen: Trial) -> Generator[Progress, None, Reached]:
        """The best plan that any start leads to; `seen` has figures, also where today's values have none."""
        task, found = self.task, list[Reached]()
        if today.lives:
            found.append((yield from self._from(of, today)))
        if not self._enough(found):
            others = [] if today.lives else [seen]
            for x in scattered(task, TO_FAVOUR if task.favour and found else SCATTERED, self.request.seed):
                there = trial(task, x)
                yield self._progress()
                if there.lives:
                    others.append(there)
                if self.stop():
                    break
            others.sort(key=lambda one: of.worth(one.rows, one.x))
            for start in others[:STARTS_TO_FAVOUR if task.favour and found else STARTS]:
                if self.stop() or self._enough(found, last=True):
                    break
                found.append((yield from self._from(of, start)))
        return min(found, key=lambda one: one.worth, default=Reached(seen, of.worth(seen.rows, seen.x)))

    def _enough(self, found: list[Reached], last: bool = False) -> bool:
        """Whether a plan meets all, or several starts come to the same; to favour a figure one start is not enough."""
        if any(shortfall(self.task, one.trial) <= NEARLY for one in found):
            return not self.task.favour or (last and self.starts > STARTS_TO_FAVOUR)
        best = sorted(one.worth for one in found)[:AGREE]
        return len(best) == AGREE and best[-1] - best[0] < ALIKE * abs(best[0])

    def _bought(self, of: Merit, final: Trial) -> Generator[Progress, None, Trial]:
        """The best that scattered values lead to which have figures at the nearest ones that can be bought, where the
        plan has none there; `final` where no others have."""
        task, best = self.task, final
        for x in scattered(task, LIFELESS, self.request.seed):
            there = trial(task, x)
            near = trial(task, *nearest(task, there)) if there.lives else there
            yield self._progress()
            if self.stop():
                break
            if near.lives and (not best.lives or of.settled(near) < of.settled(best)):
                best = near
        if not best.lives:
            return final
        there = yield from self._watched(snap(task, of, Reached(best, of.worth(best.rows, best.x))))
        return there if there.lives else best

    def _from(self, of: Merit, start: Trial) -> Generator[Progress, None, Reached]:
        self.starts += 1
        known = self.best
        work = descend(self.task, of, start)
        while True:
            try:
                here = next(work)
            except StopIteration as done:
                result: Reached = done.value
                self.best = self._better(of, known, result.trial)
                return result
            if self.stop():
                work.close()
                return Reached(here, of.worth(here.rows, here.x))
            self.best = self._better(of, known, here)
            yield self._progress()

    def _better(self, of: Merit, known: Trial, other: Trial) -> Trial:
        if not known.lives or not known.rows.size:
            return other
        return other if of.worth(other.rows, other.x) < of.worth(known.rows, known.x) else known

    def _watched(self, work: Generator[Trial, None, T]) -> Generator[Progress, None, T]:
        while True:
            try:
                next(work)
            except StopIteration as done:
                result: T = done.value
                return result
            yield self._progress()

    def _progress(self) -> Progress:
        done = min(self.task.tally.trials, self.total)
        return done, self.total, Best(self.task, self.best, self.origin, self.starts)

    def _stopped(self) -> Result:
        return concluded(self.request, self._progress()[2])

    def _judged(self, proposal: Proposal) -> Generator[Progress, None, Proposal]:
        """The proposal with its yield told, where the file asks for one."""
        yield self._progress()
        for _ in judging(proposal, self.stop):
            yield self._progress()
        return judged(proposal)

    def _roomier(self, proposal: Proposal, start: Trial,
                 final: Trial) -> Generator[Progress, None, tuple[Proposal, Trial]]:
        """Where the yield alone is missed: plans with more room to every target, which is what built ones take up."""
        task = self.task
        for much in ROOM:
            if self.stop() or not missed(proposal):
                break
            of = merit(task, much=much)
            start = (yield from self._watched(descend(task, of, start))).trial
            there = yield from self._watched(snap(task, of, Reached(start, of.worth(start.rows, start.x))))
            if shortfall(task, there) <= MISSED:
                other = yield from self._judged(self._proposed(there))
                if got(other) > got(proposal):
                    proposal, final = other, there
        return proposal, final

    def _proposed(self, at: Trial) -> Proposal:
        return proposed(self.request, self.task, at)

    def _result(self, proposal: Proposal, at: Trial, giving: tuple[Gives, ...] = (),
                holding: tuple[Held, ...] = ()) -> Result:
        return Result(proposal, self.origin, self.task.favour, self.request.seed, self.task.tally.trials, self.starts,
                      False, giving, holding, levers(self.task, proposal), self.task.notes)


def concluded(request: Request, best: Best) -> Result:
    """The result of a run that is stopped: the best so far at the nearest values that can be bought."""
    task = best.task
    there = trial(task, *nearest(task, best.trial)) if best.trial.lives else best.trial
    return Result(proposed(request, task, there if there.lives else best.trial), best.origin, task.favour,
                  request.seed, task.tally.trials, best.starts, True, (), (), (), task.notes)


def proposed(request: Request, task: Task, at: Trial) -> Proposal:
    """The proposal of a trial's values, read from the file that it makes."""
    values = dict(zip((handle.path for handle in task.handles), at.values, strict=True))
    moved = sum(value != handle.now for value, handle in zip(at.values, task.handles, strict=True))
    label = f"apportioned: {moved} value{'s' * (moved != 1)}"
    return propose(request.text, request.file, values, label)
