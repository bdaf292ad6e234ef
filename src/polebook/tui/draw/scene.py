"""What one drawing of the screen needs of its state, each piece when it is first asked for."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property

from polebook.book.account import Account
from polebook.book.build import by_stage
from polebook.book.compare import Moves
from polebook.book.ledger import Ledger
from polebook.book.lines import Line
from polebook.book.sites import Site, interstage_names
from polebook.chain.model import Chain
from polebook.problem import Problem
from polebook.session.state import KeyRow, keys_of, moved, sheets_of
from polebook.tui.draw.pen import Pen, pen
from polebook.tui.view import State


class Scene:
    """The last good ledger of the open file, read for drawing. Without one `ledger` is None and no figure is drawn.

    beyond  why the ledger's figures can't be had, where that was found while they were drawn
    """

    def __init__(self, state: State, beyond: tuple[Problem, ...] = ()) -> None:
        self.state, self.view, self.session = state, state.view, state.session
        self.pen: Pen = pen(state.plain)
        self.ledger: Ledger | None = None if beyond else state.session.good
        self.problems = beyond or state.session.problems

    @property
    def stale(self) -> bool:
        """The figures are those of an earlier text, as that of now has none."""
        return self.session.ledger is None or self.ledger is None

    @property
    def figures(self) -> Ledger:
        """The ledger, for what is drawn only where there is one."""
        if self.ledger is None:
            raise LookupError("there is no ledger to draw")
        return self.ledger

    @property
    def chain(self) -> Chain:
        """The chain of the figures."""
        return self.figures.chain

    @property
    def end(self) -> str:
        """The end of the band that is shown."""
        return "upper" if self.view.upper else "lower"

    @cached_property
    def names(self) -> list[str]:
        """Names of the lines, source first."""
        return [segment.name for segment in self.figures.solution.circuit.layout.segments]

    @cached_property
    def sheets(self) -> list[str]:
        """The sheets of the lines of the text as it is now: source, stages, load."""
        known = sheets_of(self.session)
        return known[:known.index("load") + 1]

    @cached_property
    def line(self) -> str:
        """The selected line of the text as it is now."""
        return self.sheets[min(max(self.view.line, 0), len(self.sheets) - 1)]

    @property
    def sheet(self) -> str:
        """The sheet that is shown."""
        return self.view.sheet or self.line

    @cached_property
    def at(self) -> int:
        """The selected line in the ledger; where that is an old one the line of that name, or one near it."""
        if self.line in self.names:
            return self.names.index(self.line)
        return min(max(self.view.line, 0), len(self.names) - 1)

    @cached_property
    def keys(self) -> list[KeyRow]:
        """The keys of the sheet that is shown."""
        return keys_of(self.session, self.sheet)

    @property
    def key(self) -> int:
        """The focused key's row on the sheet."""
        return min(max(self.view.key, 0), max(len(self.keys) - 1, 0))

    @property
    def lines(self) -> list[Line]:
        return self.figures.lines

    @cached_property
    def nodes(self) -> list[str]:
        """The node at the output of each line; a line that is a wire has the one before it."""
        layout = self.figures.solution.circuit.layout
        between = interstage_names(layout)
        return [between[node] for node in layout.after]

    def own_node(self, at: int) -> str:
        """The node that line `at` makes; "" where it is a wire."""
        return "" if at and self.nodes[at] == self.nodes[at - 1] else self.nodes[at]

    @cached_property
    def sites(self) -> dict[str, Site]:
        return {site.name: site for site in self.figures.sites}

    @property
    def account(self) -> Account:
        """The account of the end of the band that is shown."""
        return self.figures.upper_account if self.view.upper else self.figures.lower_account

    @property
    def edge_hz(self) -> float | None:
        """The exact edge of the end that is shown."""
        return self.figures.upper_hz if self.view.upper else self.figures.lower_hz

    @cached_property
    def owns_parts(self) -> Mapping[int, float]:
        """Share of the shown edge by part."""
        return self.figures.owns_upper if self.view.upper else self.figures.owns_lower

    @cached_property
    def owns(self) -> list[float | None]:
        """Share of the shown edge by line; None where there is none."""
        sums = by_stage(self.figures, dict(self.owns_parts))
        left_out = {stage.name for stage in self.chain.stages if stage.left_out}
        return [None if name in left_out else sums.get(name) for name in self.names]

    @cached_property
    def greatest(self) -> int:
        """The line that owns most of the shown edge; -1 where nobody does."""
        shares = [share or 0.0 for share in self.owns]
        most = max(shares)
        return shares.index(most) if most > 0 else -1

    @cached_property
    def changes(self) -> Moves | None:
        """What moved against the baseline; None where nothing is pinned, or nothing to compare it with."""
        return None if self.ledger is None else moved(self.session)
