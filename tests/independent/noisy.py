"""Any chain file's text with noise in every card and block that has none of its own: corners, leakage, densities."""

from __future__ import annotations

import re

_CARD = {
    "bjt": "flicker_corner = 800\n",
    "mosfet": 'flicker_corner = "20k"\nig = "3p"\n',
    "jfet": "flicker_corner = 300\n",
    "triode": "flicker_corner = 900\n",
    "opamp": 'en = "6n"\nen_corner = 250\nin = "p7"\nin_corner = "2k"\n',
}
_BLOCK = ('en = "1n5"\nen_corner = "5k"\nin = "4p"\nin_corner = 700\n', "nf = 3.5\n")


def noisy(text: str) -> str:
    """Keys of noise are put in right below a card's family or a block's kind, where the table has none."""
    parts = re.split(r"(?m)^(?=\[)", text)
    blocks = 0
    for at, part in enumerate(parts):
        if re.search(r"(?m)^ *(en|in|nf|ig|flicker_corner) *=", part):
            continue
        if card := re.search(r'(?m)^family *= *"(\w+)".*\n', part):
            parts[at] = part[: card.end()] + _CARD[card[1]] + part[card.end() :]
        elif block := re.search(r'(?m)^kind *= *"block".*\n', part):
            parts[at] = part[: block.end()] + _BLOCK[blocks % 2] + part[block.end() :]
            blocks += 1
    return "".join(parts)
