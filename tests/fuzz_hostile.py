"""Chain files of ill will, by number: every control and bidi character in every text field, and sizes at the limits."""

from __future__ import annotations

import random
import re
import unicodedata
from collections.abc import Callable
from functools import lru_cache
from pathlib import Path

LARGEST, MOST_STAGES, MOST_ARMS, MOST_POLES = 512 * 1024, 64, 256, 64
SEEDS = sorted((Path(__file__).parent.parent / "chains").glob("*.toml"))
_BENCH = """
[[bench]]
date = 2026-05-04
unit = "{unit}"
at = "{at}"
file = "{file}"
note = "{note}"
gain = "60 dB"
"""
_LADDER = """format = 1
[source]
kind = "voltage"
resistance = "50"
[[stage]]
name = "L"
kind = "ladder"
arms = [{{ series_r = "1" }}, {arms}]
[[stage]]
name = "B"
kind = "block"
gain = 2
rin = "1M"
rout = "10"
poles = [{poles}]
[load]
resistance = "1k"
"""
_ARMS = ('{ series_r = "10" }', '{ shunt_c = "10p" }', '{ shunt_r = "1M" }', '{ series_l = "1n" }')


@lru_cache
def characters() -> tuple[str, ...]:
    """What a terminal would obey, hide, join or turn round: controls, formats (all that steers direction is among
    them), separators; then halves of pairs as TOML spells them, and what a width is guessed wrong for."""
    kinds = ("Cc", "Cf", "Zl", "Zp")
    every = [char for char in map(chr, range(0x110000)) if unicodedata.category(char) in kinds]
    return (*every, "\ufffe", "\U0010ffff", "\ue000", "\u034f", "\u115f", "\ufe0f", "\U0001f3fd", "\U0001f1e6",
            "\u0301" * 40, "\u20e3", "\u3000", "\u05d0\u0627", "\ufdfd", "\U000e0100", "\x1b]0;x\x07", "\x1b[2J",
            "\x9b31m", "{0}", "%s", "[bold]x[/]", "\\")


def _keys(text: str, table: str, line: str) -> str:
    """A line put right below a header."""
    return text.replace(table, f"{table}\n{line}", 1)


def _value(key: str, table: str = "") -> Callable[[str, str], str]:
    """The first value of that key behind a header, with something more at its end."""
    found = re.compile(rf'(?ms)({re.escape(table)}.*?^{key}\s*=\s*"[^"\n]*)"')
    return lambda text, char: found.sub(lambda match: f'{match[1]}{char}"', text, count=1)


def _note(table: str) -> Callable[[str, str], str]:
    def put(text: str, char: str) -> str:
        if table not in text:
            return text
        text = re.sub(r'(?ms)^note\s*=\s*("""|\'\'\').*?\1\n|^note\s*=[^\n]*\n', "", text)
        return f'note = "a{char}b"\n{text}' if not table else _keys(text, table, f'note = "a{char}b"')
    return put


def _bench(key: str) -> Callable[[str, str], str]:
    def put(text: str, char: str) -> str:
        words = dict.fromkeys(("unit", "at", "file", "note"), "x")
        return text + _BENCH.format(**words | {key: f"a{char}b"})
    return put


def _device(text: str, char: str) -> str:
    """A card of another name, and the stages that use it."""
    found = re.search(r"(?m)^\[device\.([A-Za-z0-9_-]+)\]", text)
    if found is None:
        return text
    name = found[1]
    text = text.replace(f"[device.{name}]", f'[device."{name}{char}"]')
    return re.sub(rf'(?m)^(device\s*=\s*"{name})"', lambda match: f'{match[1]}{char}"', text)


def _card_note(text: str, char: str) -> str:
    if "\n[device." not in text:
        return text
    return re.sub(r"(?m)^(\[device\.[^\n]*\])\n", lambda match: f'{match[1]}\nnote = "a{char}b"\n',
                  _note("")(text, "x"), count=1)


FIELDS: dict[str, Callable[[str, str], str]] = {
    "title": _value("title"),
    "note": _note(""),
    "stage.note": _note("[[stage]]"),
    "target.note": _note("[target]"),
    "card.note": _card_note,
    "bench.unit": _bench("unit"),
    "bench.at": _bench("at"),
    "bench.file": _bench("file"),
    "bench.note": _bench("note"),
    "stage.name": _value("name"),
    "source.kind": _value("kind", "[source]"),
    "stage.kind": _value("kind", "[[stage]]"),
    "stage.device": _value("device"),
    "card name": _device,
    "quantity": _value("resistance"),
    "output_to": lambda text, char: _keys(text, "[[stage]]", f'output_to = "ground{char}"'),
    "free": lambda text, char: _keys(text, "[[stage]]", f'free = ["rc{char}"]'),
    "key": lambda text, char: _keys(text, "[[stage]]", f'"rc{char}" = "1k"'),
    "tolerance": lambda text, char: _keys(text, "[[stage]]", f'tolerance = {{ "rc{char}" = "1 %" }}'),
    "table": lambda text, char: f'{text}\n["tar{char}get"]\nx = 1\n',
    "series": lambda text, char: f'{text}\n[preferred]\nresistor = "E24{char}"\n',
    "comment": lambda text, char: f"# a{char}b\n{text}",
    "outside": lambda text, char: text.replace("\n", f"\n{char}x = 1\n", 1),
}


@lru_cache
def cases() -> tuple[tuple[str, str, bool], ...]:
    """(field, character, whether it stands there raw where a string could spell it) of each file of `marked`."""
    found = []
    for field in FIELDS:
        for char in characters():
            found.append((field, char, False))
            if unicodedata.category(char[0]) == "Cc":
                found.append((field, char, True))
    return tuple(found)


def _spelt(char: str) -> str:
    return "".join(one if one.isprintable() and one != "\\" else f"\\U{ord(one):08x}" for one in char)


def marked(number: int) -> bytes:
    """File `number` of those with one hostile character: every field by every character, each field in a row."""
    field, char, raw = cases()[number % len(cases())]
    plain = (raw or unicodedata.category(char[0]) != "Cc" or field in ("comment", "outside")) and char != "\\"
    first = number % len(SEEDS)
    for seed in (*SEEDS[first:], *SEEDS[:first]):
        text = seed.read_text(encoding="utf-8")
        done = FIELDS[field](text, char if plain else _spelt(char))
        if done != text:  # else that chain has no such field
            break
    return done.encode("utf-8", "surrogatepass")


_PADS: tuple[Callable[[int], str], ...] = (
    lambda k: "#" + "x" * 79 + "\n", lambda k: "\n", lambda k: "\r\n", lambda k: f"k{k} = 1\n", lambda k: "[[x]]\n",
    lambda k: f'"k{k}\\n" = "\\u202e"\n', lambda k: f"[[bench]]\ndate = 2026-01-0{k % 9 + 1}\n", lambda k: f"[t{k}]\n",
    lambda k: f'[device.D{k}]\ntype = "npn"\n', lambda k: f'[[stage]]\nname = "S{k}"\nkind = "emitter-follower"\n',
    lambda k: f'[[stage]]\nrc = "{k}kk"\n', lambda k: "#\x85\u2028\x1b\u202e" * 20 + "\n", lambda k: 'x = """\n',
    lambda k: f"[device.D{k}]\nbeta = {k}\nBETA = 1\n", lambda k: f"a{k} = [[1, [2]], {{ b = 'x' }}]\n",
    lambda k: f'[tolerance."{k}"]\n', lambda k: f"k.{k}.c = 1\n",
)  # fmt: skip
_FILLS = ("x", "é", "漢", "🎛", "\\u0007", "\u0301", "\\\\", " ", "\u202e", "9", "\t", "{}", "1.")


def _padded(rng: random.Random, text: str, size: int) -> bytes:
    """The text, filled up to so many bytes: by lines, or by one long value."""
    room = size - len(text.encode())
    if rng.random() < 0.6:
        pad, parts, k = rng.choice(_PADS), [], 0
        while room > 0:
            part = pad(k)
            room -= len(part.encode())
            parts.append(part)
            k += 1
        grown = "".join(parts)
        return (text + grown if rng.random() < 0.8 else grown + text).encode()[:size].decode("utf-8", "ignore").encode()
    fill = rng.choice(_FILLS)
    before, after = rng.choice((('note = "', '"\n'), ("# ", "\n"), ('x = "', '"\n'), ("x = ", "\n"), ('["', '"]\n'),
                                ("x = [", "1]\n"), ('"', '" = 1\n'), ("x = '''", "'''\n"), ("", "\n"),
                                ('format = "', '"\n')))
    times = (room - len(before) - len(after)) // len(fill.encode())
    line = before + fill * max(times, 0) + after
    line += " " * (size - len((line + text).encode()))
    return (line + "\n" + text[1:] if rng.random() < 0.7 else text + line).encode()


def many_stages(rng: random.Random, count: int) -> str:
    """A demo chain whose stages are repeated under names of their own; without a yield, which takes seconds there."""
    text = rng.choice(SEEDS).read_text(encoding="utf-8")
    first, *rest = re.split(r"(?m)^(?=\[)", text)
    stages = [part for part in rest if part.startswith("[[stage]]")]
    others = [re.sub(r"(?m)^yield.*\n", "", part) for part in rest if not part.startswith("[[stage]]")]
    made = []
    for k in range(count):
        part = re.sub(r'(?m)^name(\s*)=.*$', rf'name\1= "S{k + 1}"', stages[k % len(stages)])
        made.append(re.sub(r"(?m)^(allot|free)\s*=.*\n", "", part))
    return first + "".join(made + others)


def _ladder(rng: random.Random) -> str:
    """A long ladder, or a block of many poles, between source and load."""
    count = rng.choice((1, 40, MOST_ARMS - 1, MOST_ARMS, MOST_ARMS + 1))
    many_poles = rng.choice((1, MOST_POLES, MOST_POLES + 1, 3000))
    return _LADDER.format(arms=", ".join(rng.choice(_ARMS) for _ in range(count)),
                          poles=", ".join(f'"{rng.randrange(1, 900)}M"' for _ in range(many_poles)))


_HUGE = ("1e308", "1.7976931348623157e308", "5e-324", "1e-308", "9" * 300, "1e999999999", "1e-999999999", "-1e308",
         "1_000e3_0", '"9e307"', '"1e308T"', '"' + "0" * 20_000 + '1"', '"1' + "0" * 20_000 + '"', "0x" + "f" * 200,
         "0." + "0" * 5000 + "1", '"6000 dB"', '"-7000 dB"', '"1e30"', '"1e-30"', "9007199254740993", "-0.0")


def _huge(rng: random.Random, text: str) -> str:
    """Some or all of the numbers, as far out as they can be written."""
    share, values = rng.choice((0.02, 0.1, 0.5, 1.0)), rng.sample(_HUGE, rng.choice((1, 3)))

    def put(match: re.Match[str]) -> str:
        return match[1] + rng.choice(values) if rng.random() < share and match[2] != "1" else match[0]

    return re.sub(r'(?m)(=\s*)("[0-9][^"\n]*"|[0-9][^\s,}\]]*)', put, text)


def limit(rng: random.Random) -> bytes:
    """A file at one of the limits."""
    what = rng.randrange(10)
    if what < 4:
        return _padded(rng, rng.choice(SEEDS).read_text(encoding="utf-8"), LARGEST + rng.choice((-1, 0, 0, 0, 1)))
    if what < 5:
        return many_stages(rng, rng.choice((1, 2, 12, 32, MOST_STAGES - 1, MOST_STAGES, MOST_STAGES + 1, 400))).encode()
    if what < 6:
        return _huge(rng, many_stages(rng, rng.choice((2, 8, 24)))).encode()
    if what < 7:
        return _ladder(rng).encode()
    return _huge(rng, rng.choice(SEEDS).read_text(encoding="utf-8")).encode()
