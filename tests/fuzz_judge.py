"""One drawn chain judged: the program's figures beside the independent solver's, and nothing that is no number."""

from __future__ import annotations

import math
import tomllib
import traceback
import warnings
from collections.abc import Iterator
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np

from polebook.book.build import document
from polebook.book.ledger import Ledger, ledger
from polebook.chain.read import examine
from polebook.problem import ProblemsFound
from tests.independent.bias import Bias
from tests.independent.compare import differences
from tests.independent.dense import Dense, Steps
from tests.independent.kinds import COMMON_CONTROL, DEVICE_KINDS, FOLLOWERS, KEYS
from tests.independent.linear import Singular, mp
from tests.independent.modes import exact_system, pieces
from tests.independent.network import Element
from tests.independent.noise import Noise
from tests.independent.oracle import Oracle, plain
from tests.independent.pulse import HIGH, LOW, View, figures, view_of
from tests.independent.solved import TINY

LIMIT = 1e-6  # relative; of shares, heights and dB as they stand
SURE = 1e-7  # of double precision: what parts further is asked of 50 digits
UNTOLD = (KeyError, TypeError, AttributeError)  # the independent bias has no figure that a device needs
PULSES = ("rise_time_s", "overshoot_percent", "settling_1_s", "settling_01_s")


@dataclass
class Judged:
    """What came of one chain: errors by figure, disagreements in words, what could not be judged and why."""

    state: str = "judged"
    errors: dict[str, float] = field(default_factory=dict)
    findings: list[str] = field(default_factory=list)
    said: list[str] = field(default_factory=list)

    def put(self, figure: str, error: float, program: Any, independent: Any) -> None:
        self.errors[figure] = max(error, self.errors.get(figure, 0.0))
        if not error <= LIMIT:
            self.findings.append(f"{figure}: program {program!r}, independent {told(independent)}, error {error:.2g}")


def told(x: Any) -> str:
    return repr(plain(x)) if not isinstance(x, mp.mpc) else repr(complex(x))


def apart(program: Any, independent: Any, least: float = 0.0) -> float:
    """Relative; infinite where only one has a value."""
    if program is None or independent is None:
        return 0.0 if program is independent else math.inf
    size = max(abs(independent), least)
    return float(abs(program - independent) / size) if size else float(abs(program))


def odd_numbers(x: Any, name: str = "document") -> Iterator[str]:
    """Where a document has what is no number."""
    if isinstance(x, dict):
        for key, value in x.items():
            yield from odd_numbers(value, f"{name}.{key}")
    elif isinstance(x, list | tuple):
        for at, value in enumerate(x):
            yield from odd_numbers(value, f"{name}.{at}")
    elif isinstance(x, float) and not math.isfinite(x):
        yield f"{name} is {x}"
    elif not isinstance(x, str | int | float | None):
        yield f"{name} is a {type(x).__name__}"
    elif isinstance(x, str) and {"nan", "inf", "-inf"} & set(x.replace(",", " ").split()):
        yield f"{name} says {x!r}"


class Whole(Oracle, Noise):
    """All independent figures of a chain."""

    @cached_property
    def dense(self) -> Dense:
        return Dense(self.full, self.drive_full(), self.load)

    @cached_property
    def taus(self) -> dict[tuple[int, str], dict[str, Any]]:
        return self.time_constants()

    def level(self, f: Any) -> Any:
        """|H|²·2/gain² - 1: 0 at an edge."""
        return 2 * abs(self.h(f) / self.gain) ** 2 - 1


class Given(Whole):
    """The same with the program's own bias, for chains whose currents come from more than resistors and cards."""

    def __init__(self, doc: dict[str, Any], points: dict[str, Any]) -> None:
        self.points = points
        super().__init__(doc)

    def quiescent(self) -> dict[str, Bias]:
        def bias(name: str) -> Bias | None:
            point = self.points.get(name)
            if point is None:
                return None
            return Bias(*(None if x is None else mp.mpf(x) for x in (
                point.current, point.across, point.control_v, point.lower_v, point.output_v)), bias(f"{name}_upper"))

        return {stage["name"]: bias(stage["name"]) or Bias() for stage in self.doc["stage"]}


def fed(doc: dict[str, Any]) -> bool:
    """Whether a device hangs on a current source: no resistor at its output, or at a lower terminal in the signal."""
    for stage in doc["stage"]:
        if stage["kind"] in DEVICE_KINDS and not stage.get("left_out"):
            _, _, out, low, *_ = KEYS[doc["device"][stage["device"]]["family"]]
            if out not in stage and stage["kind"] not in FOLLOWERS:
                return True
            if low not in stage and stage["kind"] in (*FOLLOWERS, *COMMON_CONTROL):
                return True
    return False


class Roots:
    """The finite poles of some elements: how many by exact count, where by 50 digits."""

    def __init__(self, elements: list[Element]) -> None:
        system = exact_system(elements)
        self.pieces = pieces(system, system.unknowns, system.unknowns)
        self.at_zero = sum(piece.order for piece in self.pieces)
        self.count = sum(piece.degree - piece.order for piece in self.pieces)

    @cached_property
    def exact(self) -> list[Any]:
        return [s for piece in self.pieces for s in piece.roots()]

    def error(self, found: np.ndarray, net: Dense) -> float:
        """How far a list lies off: by the trace all over the band; where that doubts, by the roots themselves."""
        if found.size != self.count:
            return math.inf
        if not found.size:
            return 0.0
        s = np.concatenate([np.abs(found) * np.exp(1j * angle) for angle in (0.4, 1.1)])
        with np.errstate(all="ignore"):
            sums = (1 / (s[:, None] - found)).sum(axis=1) + self.at_zero / s
            try:
                error = float(np.max(np.abs(s * (sums - net.trace(s)))))
            except np.linalg.LinAlgError:
                error = math.inf
        if error < SURE and bool((np.abs(found.real) > 1e-6 * np.abs(found)).all()):
            return error
        left, worst = found.tolist(), 0.0
        for p in sorted(map(complex, self.exact), key=abs):
            near = min(left, key=lambda q, p=p: abs(q - p))
            left.remove(near)
            worst = max(worst, abs(near - p) / abs(p))
            if max(abs(near.real), abs(p.real)) > 1e-12 * abs(p) and (near.real > 0) != (p.real > 0):
                worst = math.inf
        return worst


def judge(text: str, deep: bool = False) -> Judged:
    """Every figure of a chain file."""
    out = Judged()
    chain, problems = examine(text, "drawn.toml")
    if chain is None or any(p.severity == "fault" for p in problems):
        out.state = "refused"
        return out
    with warnings.catch_warnings(record=True) as warned:
        warnings.simplefilter("always")
        try:
            of = ledger(chain)
            found = document(of)
        except ProblemsFound as refused:
            out.state = "no ledger"
            _refused(out, refused, text)
            return out
        except Exception:
            out.findings.append("traceback: " + " / ".join(traceback.format_exc().strip().splitlines()[-3:]))
            return out
        finally:
            out.findings += [f"warning: {one.message} at {one.filename}:{one.lineno}" for one in warned]
    out.findings += odd_numbers(found)
    doc = tomllib.loads(text)
    try:
        points = of.solution.circuit.points
        if fed(doc) or any(row["current_a"] is None for row in found["bias"]):
            out.said.append("bias: current sources, or a current that can't be had")
            again: Whole = Given(doc, points)
        elif not all(point.converged for point in points.values()):
            out.said.append("bias: the program says that it is not solved")
            again = Given(doc, points)
        else:
            again = Whole(doc)
    except (Singular, ValueError, ZeroDivisionError) as error:
        out.put("gain", math.inf, of.solution.gain, None)
        out.findings[-1] += f" ({type(error).__name__} {error})"
        return out
    except UNTOLD as error:
        out.said.append(f"the independent bias tells no figure ({type(error).__name__})")
        return out
    try:
        Judge(out, of, found, again).all(deep)
    except Exception:
        out.findings.append("judge: " + " / ".join(traceback.format_exc().strip().splitlines()[-4:]))
    return out


def _refused(out: Judged, refused: ProblemsFound, text: str) -> None:
    """A refusal has a remedy; and there is no midband gain where it says so."""
    for problem in refused.problems:
        if not (problem.what and problem.why and problem.fix):
            out.findings.append(f"refusal without a remedy: {problem}")
    what = refused.problems[0].what
    doc = tomllib.loads(text)
    if "cannot be told" in what:
        out.said.append("refusal: " + (what if "edge" in what else "the midband gain cannot be told"))
    if "cannot be" in what or fed(doc):
        return
    try:
        gain = float(Whole(doc).gain)
    except (Singular, ValueError, ZeroDivisionError, *UNTOLD):
        out.errors["refusal"] = 0.0
        return
    if not 1e-20 < abs(gain) < 1e290:
        return
    out.findings.append(f"refusal: {what}, yet the midband gain is {gain!r}")


class Judge:
    """One chain's figures, one by one."""

    def __init__(self, out: Judged, of: Ledger, found: dict[str, Any], again: Whole) -> None:
        self.out, self.of, self.found, self.again = out, of, found, again
        self.overall = found["overall"]

    def all(self, deep: bool) -> None:
        if not isinstance(self.again, Given):
            self.bias()
        if self.out.findings:
            return  # all else follows from it
        self.gain()
        if self.out.findings:
            return
        self.constants()
        if self.stable():
            self.edges()
            self.noise()
            self.pulse()
        elif self.overall["unstable"] is None:
            self.out.said.append("stability: the program says that it can't be told")
        if deep:
            self.deep()

    # -- bias, midband ----------------------------------------------------------------------------------------------

    def bias(self) -> None:
        rows = {row["stage"]: row for row in self.found["bias"]}
        volts = max((abs(v) for row in rows.values() for k, v in row.items() if k.endswith("_v") and v is not None),
                    default=0.0)
        for row in self.again.bias_rows():
            mine = rows.get(row["stage"])
            if mine is None:
                continue
            if row["current_a"] is None and mine["current_a"] is not None:
                self.out.said.append("bias: solved by the program alone")
                continue
            for key in ("current_a", "across_v", "control_v", "lower_v", "output_v"):
                if row[key] is not None and mine[key] is not None:
                    self.out.put("bias", apart(mine[key], row[key], volts * 1e-3 if key.endswith("_v") else 1e-30),
                                 f"{row['stage']}.{key} {mine[key]!r}", row[key])
                elif row[key] is not None:
                    self.out.said.append(f"bias: {key} told by the independent solver alone")

    def gain(self) -> None:
        self.out.put("gain", apart(self.overall["gain"], self.again.gain), self.overall["gain"], self.again.gain)

    def constants(self) -> None:
        rows = {(row["stage"], row["part"]): row["tau_s"] for row in self.found["parts"]}
        constants = self.of.solution.constants
        layout = self.of.solution.circuit.layout
        untold = {(layout.parts[k].stage, layout.parts[k].name) for k in constants.untold}
        size = {role: sum(abs(t["tau"] if role == "high" else 1 / t["tau"]) for t in self.again.taus.values()
                          if t["role"] == role and t["tau"] is not None) for role in ("high", "low")}
        for (line, part), row in self.again.taus.items():
            tau, mine = row["tau"], rows.get((self.again.names[line], part))
            if (self.again.names[line], part) in untold:
                self.out.said.append("time constants: the program says that they can't be told")
                continue
            if tau is None or mine is None:
                least = tau if mine is None else mine  # next to nothing in the sums is as good as nothing
                if least is not None and size[row["role"]]:
                    share = abs(least if row["role"] == "high" else 1 / least) / size[row["role"]]
                    least = None if share < 1e-9 else least
                error = 0.0 if least is None else math.inf
            else:
                error = apart(mine, tau)
            self.out.put("time constants", error, f"{self.again.names[line]}.{part} {mine!r}", tau)
        if untold:
            return
        for key, value in zip(("octc_upper_hz", "sctc_lower_hz"), self._estimates(), strict=True):
            self.out.put("estimates", apart(self.overall[key], value), f"{key} {self.overall[key]!r}", value)

    def _estimates(self) -> tuple[Any, Any]:
        taus = self.again.taus.values()
        upper = sum((t["tau"] for t in taus if t["role"] == "high" and t["tau"] is not None), mp.mpf(0))
        lower = sum((1 / t["tau"] for t in taus if t["role"] == "low" and t["tau"] is not None), mp.mpf(0))
        return (1 / (2 * mp.pi * upper) if upper > 0 else None), (lower / (2 * mp.pi) if lower > 0 else None)

    # -- stability, poles -------------------------------------------------------------------------------------------

    def stable(self) -> bool:
        roots = Roots(self.again.elements)
        rows = self.found["poles"]
        if rows is None:
            self.out.said.append("poles: the program says that they are not resolved")
            right = sum(mp.re(p) > mp.mpf(10) ** -25 * abs(p) for p in roots.exact)
        else:
            listed = np.array([complex(row["re"], row["im"]) for row in rows if row["hz"]], dtype=complex)
            zero = len(rows) - listed.size
            error = roots.error(listed, self.again.dense)
            self.out.put("poles", error, len(rows), roots.count + roots.at_zero)
            if zero != roots.at_zero:
                self.out.put("poles", math.inf, f"{zero} at 0", roots.at_zero)
            right = int((listed.real > 0).sum())
        unstable = self.overall["unstable"]
        if unstable is not None:
            self.out.put("stability", 0.0 if unstable == bool(right) else math.inf, unstable, right)
        return unstable is False and not right

    # -- band -------------------------------------------------------------------------------------------------------

    def edges(self) -> None:
        band, again = self.of.solution.band, self.again
        seed = again.seed(again.taus)[2]
        clean = again.clean(seed)
        if bool(clean) != band.clean:
            self.out.put("midband", math.inf, band.clean, f"seed {float(seed)!r}, clean {clean}")
            return
        self._seed(band.seed_hz, seed)
        span = again.range(again.taus)
        for end, direction in (("upper", 1), ("lower", -1)):
            edge = self.overall[f"{end}_edge_hz"]
            if not clean:
                self.out.put("edges", 0.0 if edge is None else math.inf, edge, None)
                continue
            self._edge(end, edge, direction, band.seed_hz, span)
            if edge is not None:
                self._owned(end, edge)

    def _seed(self, mine: float, seed: Any) -> None:
        """Frequencies of the grid that are as near to the midband gain as each other are one as good as the other."""
        error = apart(mine, seed)
        if error > LIMIT:
            off = [abs(abs(self.again.h(mp.mpf(f)) / self.again.gain) - 1) for f in (mine, seed)]
            error = 0.0 if abs(off[0] - off[1]) < 3e-9 else error
        self.out.put("seed", error, mine, seed)

    def _edge(self, end: str, edge: float | None, direction: int, seed: float, span: tuple[float, float]) -> None:
        again = self.again
        reach = math.log10(edge) if edge else span[(1 + direction) // 2]
        decades = abs(reach - math.log10(seed))
        f = seed * 10.0 ** (direction * np.linspace(0, decades, max(3, int(decades * 300)))[:-1])
        early = (np.abs(again.dense.h(2j * np.pi * f)) < float(abs(again.gain)) * math.sqrt(0.5) * (1 - 1e-6))
        if early[1:].any():
            at = f[1:][early[1:]][0]
            if again.level(mp.mpf(at)) < -1e-6:
                self.out.put("edges", math.inf, f"{end} {edge!r}", f"below the line at {at!r}")
                return
        if edge is None:
            self.out.put("edges", 0.0, None, None)
            return
        for off in (1e-8, LIMIT):
            inside, outside = mp.mpf(edge) * (1 - direction * off), mp.mpf(edge) * (1 + direction * off)
            if again.level(inside) > 0 > again.level(outside):
                self.out.put("edges", off, edge, edge)
                return
        flat = abs(again.level(mp.mpf(edge)))
        error = float(flat) if flat > LIMIT else 0.0
        self.out.put("edges", error, f"{end} {edge!r}", f"2|H|²/gain² - 1 = {float(flat)!r}")

    def _owned(self, end: str, edge: float) -> None:
        again = self.again
        slopes = again.dense.slopes(again.elements, 2j * math.pi * edge)
        whole = sum(one.real for one in slopes.values())
        rows = {(row["stage"], row["part"]): row[f"owns_{end}"] for row in self.found["parts"]}

        def worst(owned: dict[tuple[int, str], Any]) -> tuple[float, Any, Any]:
            errors = [(apart(rows.get((again.names[line], part)), share, max(1.0, steep)),
                       f"{end} {again.names[line]}.{part} {rows.get((again.names[line], part))!r}", share)
                      for (line, part), share in owned.items()]
            return max(errors, key=lambda row: row[0], default=(0.0, None, None))

        steep = max((abs(one.real / whole) for one in slopes.values()), default=1.0) if whole else 1.0
        found = worst({key: one.real / whole for key, one in slopes.items()}) if whole else (math.inf, None, None)
        if not found[0] < SURE:
            owned = again.owned(mp.mpf(edge), again.taus)
            steep = float(max(map(abs, owned.values()), default=1))
            found = worst(owned)
        self.out.put("owned shares", *found)

    # -- noise ------------------------------------------------------------------------------------------------------

    def noise(self) -> None:
        of, again = self.of, self.again
        assert of.noise is not None
        if of.noise.untold:
            self.out.said.append("noise: a current is not known")
            return
        try:
            sources = again.sources
        except UNTOLD:
            self.out.said.append("noise: the independent solver knows a current less")
            return
        at, density = of.reference_hz, self.overall["noise_density"]
        if not again.h(mp.mpf(at)):
            self.out.said.append("noise: nothing passes at the reference frequency")
            return
        if not of.solution.told_at(at):
            self.out.put("noise density", 0.0 if density is None else math.inf, density, None)
            return
        value = again.input_density(mp.mpf(at)) if sources else mp.mpf(0)
        self.out.put("noise density", apart(density, value), density, value)
        figure = again.figure_db(mp.mpf(at))
        mine = self.overall["noise_figure_db"]
        if figure is not None or mine is not None:
            self.out.put("noise figure", apart(mine, figure, 1.0), mine, figure)
        total = self.overall["noise_total_output"]
        if total is None:
            self.out.said.append("noise total: the program says why there is none")
            return
        band = of.noise.totals.band
        value = self.total(band.from_hz, band.to_hz, total)
        if value is None:
            self.out.said.append("noise total: no grid fine enough")
            return
        self.out.put("noise total", apart(total, value), total, value)

    def total(self, low: float, high: float, told: float) -> float | None:
        """V rms over a band by Gauss's rule on panels that close in on every pole; an open end eight decades on."""
        roots = np.array([complex(row["re"], row["im"]) for row in self.found["poles"] or [] if row["hz"]])
        if self.found["poles"] is None:
            return None
        corners = [abs(p) / 2 / np.pi for p in roots] + [float(s.corner) for s in self.again.sources if s.corner]
        corners += [of for of in (low, high) if 0 < of < math.inf] or [1.0]
        first = math.log(low) if low > 0 else math.log(min(corners)) - 20
        last = math.log(high) if high < math.inf else math.log(max(corners)) + 20
        marks = [np.linspace(first, last, max(2, int((last - first) / 0.6)))]
        for p in roots[roots.imag > 0]:
            width = abs(p.real) / abs(p)
            if width < 0.3:
                steps = max(width, 1e-9) * 2.0 ** np.arange(-1, 34)
                marks.append(math.log(abs(p.imag) / 2 / np.pi) + np.concatenate([-steps, steps])[np.tile(steps < 1, 2)])
        edges = np.unique(np.concatenate(marks))
        edges = edges[(edges >= first) & (edges <= last)]
        value = self._gauss(edges, 10)
        if abs(math.sqrt(value) / told - 1) < SURE:
            return math.sqrt(value)
        values = [value, self._gauss(edges, 15)]
        if abs(values[0] - values[1]) > 1e-9 * values[1]:
            return None
        return math.sqrt(values[1])

    def _gauss(self, edges: np.ndarray, points: int) -> float:
        again = self.again
        x, w = np.polynomial.legendre.leggauss(points)
        half = np.diff(edges) / 2
        f = np.exp(((edges[:-1] + edges[1:]) / 2)[:, None] + half[:, None] * x).ravel()
        y = Dense(again.system, {}, again.load).adjoint(2j * np.pi * f)
        place = {key: at for at, key in enumerate(again.system.unknowns)}
        square = np.zeros(f.size)
        for one in again.sources:
            through = sum(complex(value) * y[:, place[row]] for row, value in one.into.items())
            square += np.abs(through) ** 2 * float(one.white) * (1 + float(one.corner) / f)
        return float((square * f).reshape(-1, points) @ w @ half)

    # -- pulse ------------------------------------------------------------------------------------------------------

    def pulse(self) -> None:
        pulse, again = self.of.pulse, self.again
        if pulse.why:
            self.out.said.append(f"pulse: {pulse.why}")
        else:
            self._steps(View(again, HIGH))
        if self.of.sag.percent is not None:
            try:
                value = 100 * (1 - view_of(again, LOW).step(mp.mpf(self.of.chain.get("target.pulse"))))
            except ValueError:
                self.out.said.append("sag: no pole but those at 0")
                return
            if abs(value) > 1e9:  # a circle about poles at 0 that reaches far to the right
                self.out.said.append("sag: several poles at 0, beyond 50 digits")
                return
            size = max(100.0, *(float(abs(a)) * 100 for _, a in view_of(again, LOW).terms))
            self.out.put("sag", apart(self.of.sag.percent, value, size), self.of.sag.percent, value)

    def _steps(self, view: View) -> None:
        pulse, again = self.of.pulse, self.again
        marks, roots = pulse.marks, Roots(view.elements)
        assert marks is not None
        net = Dense(view.full, view.drive_full(), view.load)
        poles = pulse.poles
        if roots.error(poles, net) > LIMIT:
            poles = np.array([complex(p) for p in roots.exact], dtype=complex)
        live = poles[poles.real < 0]
        try:
            steps = Steps(net, float(again.gain), live)
        except np.linalg.LinAlgError:
            self.out.said.append("pulse: singular in double precision")
            return
        window = pulse.window_s
        t = np.concatenate([window * np.linspace(0, 1, 9), window * np.geomspace(1e-4, 10, 9)])
        size = max(1.0, float(np.abs(pulse.at(t)).max()), abs(marks.start), abs(marks.top or 0.0), abs(marks.dip))
        if steps.miss < SURE:
            self.out.put("step response", float(np.abs(pulse.at(t) - steps.at(t)).max() / size), "at", "at")
            self._marks(steps, live)
            return
        view = view_of(again, HIGH)
        grows = max(float(mp.re(s)) for s, _ in view.terms)  # a circle about poles at 0 reaches to the right
        t = t[t * max(grows, 0.0) < 8]
        exact = [float(view.step(mp.mpf(x))) for x in t]
        self.out.put("step response", float(np.abs(pulse.at(t) - np.array(exact)).max() / size), "at", "at (50 digits)")
        self._exact_marks()

    def _marks(self, steps: Steps, live: np.ndarray) -> None:
        """The times that the program tells are those of this response, and nothing comes before or after them."""
        marks = self.of.pulse.marks
        assert marks is not None
        if not live.size:
            return
        slow, fast = 1 / np.abs(live.real).min(), 1 / np.abs(live).max()
        rings = np.abs(live.imag).max()
        t = np.geomspace(fast * 1e-2, 40 * slow, 1200)
        if rings * slow > 4e3:
            self.out.said.append("pulse: rings too long for a grid")
            return
        if rings:
            t = np.unique(np.concatenate([t, np.arange(0, 15 * slow, 0.3 / rings)]))
        y = steps.at(np.concatenate([[0.0], t]))
        t = np.concatenate([[0.0], t])
        ok = True
        for level, mine in ((0.1, marks.low_s), (0.9, marks.high_s)):
            above = np.nonzero(y >= level)[0]
            if mine is None or not above.size:
                ok = False
            elif mine == 0.0:
                ok &= bool(y[0] >= level - 1e-9)
            else:
                near = steps.at(np.array([mine * (1 - SURE), mine * (1 + SURE)])) - level
                ok &= bool(near[0] <= 0 <= near[1]) and bool((y[t < mine * (1 - SURE)] < level).all())
        top = max(1.0, float(y.max()))
        ok &= marks.top is not None and top - 1e-7 * top <= marks.top
        for share, mine in marks.settled_s.items():
            off = np.abs(y - 1)
            if mine is None:
                ok = False
            elif mine == 0.0:
                ok &= bool((off <= share + 1e-9).all())
            else:
                near = np.abs(steps.at(np.array([mine * (1 - SURE), mine * (1 + SURE)])) - 1) - share
                ok &= bool(near[0] >= 0 >= near[1]) and bool((off[t > mine * (1 + SURE)] < share).all())
        if ok and marks.top_s is not None:
            ok = abs(steps.at(np.array([marks.top_s]))[0] - marks.top) < SURE * marks.top
        if ok:
            self.out.put("pulse figures", SURE, None, None)
        else:
            self._exact_marks()

    def _exact_marks(self) -> None:
        """The figures in 50 digits."""
        try:
            exact = figures(self.again, 3000)
        except (IndexError, ValueError, ZeroDivisionError, OverflowError) as error:
            self.out.said.append(f"pulse: no figures in 50 digits ({type(error).__name__})")
            return
        for key in PULSES:
            mine, value = self.overall[key], exact[key]
            least = 100.0 if key == "overshoot_percent" else 0.0
            if mine is None:
                self.out.said.append(f"pulse: {key} did not come in reasonable time")
                continue
            if key == "rise_time_s" and value < TINY:
                least = self.of.pulse.window_s
            share = {"settling_1_s": 0.01, "settling_01_s": 0.001}.get(key)
            if share and mine > value:  # the grid of the other ended before, or stepped over the last swing
                off = [abs(view_of(self.again, HIGH).step(mp.mpf(mine) * (1 + by * LIMIT)) - 1) for by in (-1, 1)]
                value = mine if off[0] >= share >= off[1] else value
            self.out.put("pulse figures", apart(mine, value, least), f"{key} {mine!r}", value)

    # -- all of it --------------------------------------------------------------------------------------------------

    def deep(self) -> None:
        """The whole of the independent ledger."""
        wanted = plain({k: v for k, v in self.again.document().items() if k not in ("poles", "zeros", "bias")})
        for one in differences(self.found, wanted):
            if not one.error <= LIMIT:
                self.out.findings.append(f"deep: {one}")
        self.out.errors["whole ledger"] = 0.0
