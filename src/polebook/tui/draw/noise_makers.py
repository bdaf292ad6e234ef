"""The rows of the noise page: the figures of the whole chain, and who makes the noise, ranked by part or by line."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import lru_cache

from polebook.book.ledger import Ledger
from polebook.record.posted import Post
from polebook.report import figures as show
from polebook.session.baselines import got, posted
from polebook.tui.draw.moved import FAINT
from polebook.tui.draw.scene import Scene

LEAST_DB, LEAST_POINTS = 0.005, 0.05  # changes that the digits show


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure of the whole chain.

    name  as `working` takes it;  unit "density" (V/√Hz or A/√Hz), "source" (V or A), "V" or "dB"
    path  the key that it goes with, as `polebook set` takes it
    """

    name: str
    word: str
    unit: str
    get: Callable[[Ledger], float | None]
    path: str


def _margin(of: Ledger) -> float | None:
    from polebook.book.levels import over_noise_db  # deferred: the first paint needs none of it

    return over_noise_db(of.chain.get("source.smallest"), of.input_noise)


FIGURES: tuple[Figure, ...] = (
    Figure("overall.noise_density", "density", "density", lambda of: of.noise.density if of.noise else None,
           "target.noise"),
    Figure("overall.noise_figure_db", "noise figure", "dB", lambda of: of.noise.figure_db if of.noise else None,
           "source.resistance"),
    Figure("overall.noise_total_input", "total in", "source", lambda of: of.input_noise, "target.noise_to"),
    Figure("overall.noise_total_output", "total out", "V", lambda of: of.noise.output_rms if of.noise else None,
           "target.noise_to"),
    Figure("overall.noise_margin_db", "margin", "dB", _margin, "source.smallest"),
)


@dataclass(frozen=True, slots=True)
class Maker:
    """Who makes noise: a part of a stage ("" for all of the line), its share at the reference frequency, its sources.
    """

    stage: str
    part: str
    share: float
    places: tuple[int, ...]

    @property
    def name(self) -> str:
        return f"{self.stage}.{self.part}" if self.part else self.stage


def why(of: Ledger) -> str:
    """Why there is nothing to show; "" where there is."""
    from polebook.book.noise import SILENT  # deferred with the figures
    from polebook.book.pulse import unjudged

    if of.noise is None:
        return unjudged(of.solution) or "it has no figures"
    if of.noise.untold:
        return of.noise.untold
    if of.noise.density is None:
        return "the noise is beyond what a number can hold" if of.reference_hz is not None else \
            "there is no frequency to quote it at: state target.reference"
    return "" if of.noise.shares else SILENT


@lru_cache(4)
def makers(of: Ledger, by_line: bool) -> Sequence[Maker]:
    """All that make noise, or all lines, the greatest share at the reference frequency first."""
    if of.noise is None or why(of):
        return ()
    places: dict[tuple[str, str], list[int]] = {}
    if by_line:
        places = {(segment.name, ""): [] for segment in of.solution.circuit.layout.segments}
    for at, (stage, part) in enumerate(of.noise.sources.owners):
        places.setdefault((stage, "" if by_line else part), []).append(at)
    shares = {(name, ""): share for name, share in of.noise.by_line.items()} if by_line else of.noise.shares
    found = [Maker(stage, part, shares.get((stage, part), 0.0), tuple(own)) for (stage, part), own in places.items()]
    return tuple(sorted(found, key=lambda one: -one.share))


def listed(scene: Scene) -> Sequence[Maker]:
    """Those that the page ranks."""
    return makers(scene.figures, scene.view.noise.single)


def chosen(scene: Scene) -> int:
    """The row that is chosen: of FIGURES, then of those that make noise."""
    return min(max(scene.view.row, 0), len(FIGURES) + len(listed(scene)) - 1)


def told(scene: Scene) -> Maker | None:
    """Whose own curve is drawn: the chosen one's, else that of who makes most; None of who makes none."""
    found, at = listed(scene), chosen(scene) - len(FIGURES)
    one = found[max(at, 0)] if found else None
    return one if one is not None and one.places else None


def what(scene: Scene, maker: Maker) -> str:
    """A maker in words: "collector current", "10.0 kΩ", the kind of a line."""
    from polebook.book.noise_rows import what as words  # deferred with the figures

    of = scene.figures
    if not maker.part:
        return next((stage.kind for stage in of.chain.stages if stage.name == maker.stage), "")
    said = words(of, maker.stage, maker.part)
    if said or not maker.places:
        return said
    resistors, values = of.noise.sources.resistors if of.noise else (), of.solution.circuit.network.values
    return show.eng(float(values[resistors[maker.places[0]][0]]), "Ω") if maker.places[0] < len(resistors) else ""


def unit_of(scene: Scene, unit: str) -> str:
    """The unit of a Figure as it is written."""
    source = "V" if scene.chain.source_kind == "voltage" else "A"
    return {"density": f"{source}/√Hz", "source": source}.get(unit, unit)


def text_of(scene: Scene, figure: Figure) -> str:
    """A figure with its unit."""
    value, unit = figure.get(scene.figures), unit_of(scene, figure.unit)
    return show.decibel(value, "dB") if unit == "dB" else show.eng(value, unit)


def baseline(scene: Scene) -> Ledger | None:
    """The pinned ledger, where it is another one than today's."""
    base = scene.session.baseline
    return base if base is not scene.ledger else None


def moved(scene: Scene, figure: Figure) -> str:
    """By how much a figure is off the pinned one; "" where nothing is pinned or nothing would show."""
    base, post = baseline(scene), posted(scene.session)
    if base is None and post is None:
        return ""
    before = _held(post, figure) if post is not None else figure.get(base) if base is not None else None
    after = figure.get(scene.figures)
    if before is None or after is None:
        return ""
    if figure.unit == "dB":
        return show.signed(after - before, "dB") if abs(after - before) >= LEAST_DB else ""
    same = abs(after - before) < FAINT * max(abs(after), abs(before))
    return "" if same else show.signed(after - before, unit_of(scene, figure.unit))


def _held(post: Post, figure: Figure) -> float | None:
    """What a post has of a figure: of the density alone, where that had a target."""
    return got(post, "noise") if figure.path == "target.noise" else None


def share_moved(scene: Scene, maker: Maker) -> str:
    """By how many points a share is off the pinned one."""
    base = baseline(scene)
    if base is None or base.noise is None:
        return ""
    then = base.noise.shares.get((maker.stage, maker.part)) if maker.part else base.noise.by_line.get(maker.stage)
    points = 100.0 * (maker.share - (then or 0.0))
    return f"{points:+.1f}" if abs(points) >= LEAST_POINTS else ""
