"""Random TOML texts in every spelling that TOML 1.0 has, for property tests."""

from __future__ import annotations

import random

NAMES = ["rc", "re_bypassed", "a-b", "7", '"a b"', "'x.y'", '"µ"', '"q\\"t"', '"\\u0041"', "stage", "tolerance", '""']
SCALARS = [
    "0",
    "-12",
    "1_000",
    "0x1F",
    "1e3",
    "6.02e-23",
    "nan",
    "-inf",
    "true",
    "false",
    "2026-05-04",
    "2026-05-04 07:32:00Z",
    "2026-05-04T07:32:00.5-01:00",
    "07:32:00",
    '"4k7"',
    "'4k7'",
    '""',
    "''",
    '"[[stage]] # no comment"',
    "'a = \"b\"'",
    '"tab\\t quote\\" end\\\\"',
    '"""\nlong "" [x]\n# no comment\n"""',
    "'''\nraw \\ ''\n[[stage]]\n'''",
    '"""""ends in two"""""',
    '"""a\\\n   folded"""',
    '"\\U0001F600 😀"',
]
COMMENTS = ["# plain", "# [[stage]] 'x", '# """ { [', "#", "#\t“”"]


class Maker:
    """Writes one random text with the choices of `rng`."""

    def __init__(self, rng: random.Random) -> None:
        self.rng = rng
        self.lines: list[str] = []

    def text(self) -> str:
        rng = self.rng
        used: set[str] = set()
        self.keys(used)
        tops = [name for name in rng.sample(NAMES, rng.randint(0, 4)) if name not in used]
        for top in tops:
            if rng.random() < 0.4:
                for _ in range(rng.randint(1, 3)):
                    self.table(f"[[{top}]]", top)
            else:
                self.table(f"[{top}]", top)
        newline = rng.choice(["\n", "\n", "\r\n"])
        text = "\n".join(self.lines).replace("\n", newline)
        return text if rng.random() < 0.2 else text + newline

    def table(self, header: str, name: str) -> None:
        rng = self.rng
        self.filler()
        self.lines.append(self.indent() + header + self.comment())
        used: set[str] = set()
        self.keys(used)
        for sub in rng.sample(NAMES, rng.randint(0, 2)):
            if sub not in used:
                used.add(sub)
                self.filler()
                dot = rng.choice([".", " . "])
                self.lines.append(f"{self.indent()}[{name}{dot}{sub}]{self.comment()}")
                self.keys(set())

    def keys(self, used: set[str]) -> None:
        rng = self.rng
        for _ in range(rng.randint(0, 4)):
            if pair := self.pair(used, 0):
                self.lines.append(self.indent() + pair + self.comment())
            if rng.random() < 0.3:
                self.filler()

    def pair(self, used: set[str], depth: int) -> str:
        rng = self.rng
        name = rng.choice(NAMES)
        if name in used:
            return ""
        used.add(name)
        if rng.random() < 0.2:
            name += rng.choice([".", " . "]) + rng.choice(NAMES)
        return name + rng.choice([" = ", "=", "\t= ", "    = "]) + self.value(depth)

    def value(self, depth: int) -> str:
        rng = self.rng
        kind = rng.random()
        if depth > 2 or kind < 0.6:
            return rng.choice(SCALARS)
        if kind < 0.8:
            used: set[str] = set()
            pairs = [pair for _ in range(rng.randint(0, 3)) if (pair := self.pair(used, depth + 1))]
            return "{" + rng.choice(["", " "]) + ", ".join(pairs) + rng.choice(["", " "]) + "}"
        gap = rng.choice(["", " ", "\n  ", " # ] comment\n"])
        items = [self.value(depth + 1) for _ in range(rng.randint(0, 3))]
        tail = "," if items and rng.random() < 0.3 else ""
        return "[" + gap + f"{gap},{gap}".join(items) + gap + tail + gap + "]"

    def filler(self) -> None:
        self.lines += self.rng.choice(
            [[], [""], ["", "  "], [self.rng.choice(COMMENTS)], ["", self.rng.choice(COMMENTS)]]
        )

    def indent(self) -> str:
        return self.rng.choice(["", "", "  ", "\t"])

    def comment(self) -> str:
        return self.rng.choice(["", "", " ", "  " + self.rng.choice(COMMENTS)])


def random_text(seed: int) -> str:
    """A valid TOML text, the same for the same seed."""
    return Maker(random.Random(seed)).text()
