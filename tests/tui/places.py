"""Every place of the app where a key can be pressed: how it is reached from the opening, by its name."""

from __future__ import annotations

import os
from functools import cache

from tests.tui.desk import LISTENER, SIX, Desk

PLACES = {
    "sheet of a stage": (),
    "sheet of the source": ("home",),
    "sheet of the load": ("end",),
    "ledger": ("tab",),
    "ledger, lower end": ("tab", "b"),
    "ledger in V/V": ("tab", "g"),
    "ledger, last figure": ("tab", *["."] * 9),
    "nodes": ("tab", "2"),
    "nodes, sheet": ("pagedown",),
    "nodes, a row": ("tab", "2", "down", "down"),
    "nodes of the load": ("end", "tab", "2"),
    "pulse": ("tab", "4", ".", "z"),
    "pulse, lower end": ("tab", "4", "b"),
    "pulse, sheet": ("tab", "4", "tab"),
    "noise": ("tab", "5", ".", "z"),
    "noise, a row": ("tab", "5", *["down"] * 6),
    "noise, by line": ("tab", "5", "s", "v", *["down"] * 6),
    "leverage": ("tab", "7"),
    "leverage, a row": ("tab", "7", "down", "down"),
    "leverage, sheet": ("tab", "7", "tab"),
    "sweep": ("tab", "7", "enter", ".", "."),
    "levels": ("tab", "6"),
    "levels, second bank": ("tab", "6", "b", ".", "."),
    "levels, sheet": ("tab", "6", "tab", "b"),
    "spread": ("tab", "8"),
    "spread, running": ("tab", "8", "s"),
    "spread, sheet": ("tab", "8", "tab", "s"),
    "apportion": ("tab", "9"),
    "apportion, a row": ("tab", "9", "v", *["down"] * 9, "space"),
    "apportion, running": ("tab", "9", "s"),
    "apportion, sheet": ("tab", "9", "tab", "s"),
    "history": ("tab", "0"),
    "history, sheet": ("tab", "0", "tab"),
    "post": ("P",),
    "targets": ("t", "enter"),
    "supply": ("t", "down", "enter"),
    "preferred": ("t", "down", "down", "down", "enter"),
    "card": ("t", "down", "down", "down", "down", "enter"),
    "file": ("t", "end", "up", "enter"),
    "pinned": ("p",),
    "field": ("enter",),
    "field refused": ("4", "V", "enter"),
    "help": ("?",),
    "working": ("=",),
    "cautions": ("!",),
    "find": ("f",),
    "add": ("a",),
    "kind": ("k",),
    "card list": ("f", *"Q1.device", "enter", "enter"),
    "flag list": ("f", *"Q1.left_out", "enter", "enter"),
    "sheets": ("t",),
    "take": ("t", "end", "enter"),
    "note": ("n",),
    "rename": ("r",),
    "text": ("e",),
    "text, looked through": ("e", "ctrl+f", "r"),
    "leave": ("+", "q"),
}
RUNNING = frozenset({"sweep", "spread, running", "spread, sheet"})
"""Places where a job has begun, which goes on but once."""
OVER_TEXT = frozenset({"field", "field refused", "find", "add", "kind", "card list", "flag list", "sheets", "take",
                       "note", "rename", "text", "text, looked through", "post"})
"""Places where every character is text."""


def sample(keys, place, share):
    """One key in `share`, others at each place, so that every key has its turn; all with POLEBOOK_WHOLE=1."""
    return keys if os.environ.get("POLEBOOK_WHOLE") else keys[list(PLACES).index(place) % share :: share]


def at(place, of=LISTENER, plain=False):
    """A desk at the place."""
    return _reached(place, of, plain).again() if place not in RUNNING else _to(place, of, plain)


def _to(place, of, plain):
    return Desk(of, plain=plain).press(*PLACES[place])


_reached = cache(_to)


__all__ = ["LISTENER", "OVER_TEXT", "PLACES", "SIX", "at"]
