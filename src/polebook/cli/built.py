"""What `audit` and `post` share: the yield of built chains, with a bar where that takes long."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from polebook.cli.out import Out, Pace

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger



def hand_yield(ledger: Ledger, file: str, out: Out) -> dict[str, Any] | None:
    """Hands the ledger the yield that its file wants; what that was found from, None where nothing is built."""
    from polebook.book.reach import within_reach  # deferred: the help of an audit needs no book

    with within_reach(ledger.chain):
        judged = ledger.judged
    if "target.yield" not in ledger.chain.given or not judged:
        return None
    from polebook.plan import yielded  # deferred: few files ask for a yield

    work, pace = yielded.hand(ledger), Pace()
    try:
        while True:
            try:
                done, total = next(work)
            except StopIteration as end:
                row: dict[str, Any] | None = end.value
                return row
            if pace.due():
                out.progress(f" {file}: {done} of {total} built (ctrl-c stops)")
    finally:
        out.progress("")
