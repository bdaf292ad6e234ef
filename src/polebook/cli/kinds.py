"""`polebook kinds [KIND]`: every kind and key, from the tables that the reader uses."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from polebook.cli.command import MET, Command, Usage
from polebook.cli.out import Out
from polebook.report.keys import index, keys
from polebook.report.sections import paragraph

if TYPE_CHECKING:
    from polebook.chain.kinds import Listing

_ABOUT = """Every kind of stage, every family of card and every other table of a chain file, with the
keys that it takes: unit, role, default, purpose. With a name, that one alone."""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("name", metavar="KIND", nargs="?", help="a kind, family or table: common-emitter, bjt, target")


def _run(args: argparse.Namespace, out: Out) -> int:
    from polebook.chain import kinds  # deferred: --help needs no tables

    if args.name is None:
        listed = kinds.listings()
        blocks = [_keys(one, out) for one in listed]
        blocks.append(_common(out))
        blocks.append(index(((one.name, _summary(one)) for one in listed), out.look))
        out.write("\n".join("\n".join(block) + "\n" for block in blocks))
        return MET
    one = kinds.listing(args.name)
    if one is None:
        near = kinds.nearest_name(args.name)
        fix = f"did you mean {near}?" if near else "polebook kinds lists them all"
        raise Usage(f'polebook kinds: "{args.name}" is no kind, family or table', fix)
    blocks = [_keys(one, out), *([_common(out)] if one.group == "stage" else [])]
    out.write("\n".join("\n".join(block) + "\n" for block in blocks))
    return MET


def _keys(one: Listing, out: Out) -> list[str]:
    look = out.look
    begins = f"   {look.paint(look.text(one.header), 'dim')}" if one.header else ""
    return [
        f" {look.paint(look.text(one.name), 'head')}{begins}",
        *paragraph(_summary(one), look),
        *(keys(one.rows, look) if one.rows else []),
    ]


def _common(out: Out) -> list[str]:
    from polebook.chain import kinds

    return [" " + out.look.paint("keys of every stage", "head"), *keys(kinds.common(), out.look)]


def _summary(one: Listing) -> str:
    takes = f"; card: {' or '.join(one.takes)}" if one.takes else ""
    return f"{one.about}{takes}" if one.about else f"the table {one.header}"


COMMAND = Command(_ABOUT, _arguments, _run)
