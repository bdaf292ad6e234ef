"""Chain files with one fault: a sound small file with one piece exchanged."""

from __future__ import annotations

from tests.chain.good import LADDER, STAGE, small, stage

MARK = " #!"  # ends the line that the fault stands on


def q1(keys: str) -> str:
    return small(stage=STAGE + keys)


def source(keys: str) -> str:
    return small(source="[source]\n" + keys)


def rest(text: str) -> str:
    return small(rest=text)


def arms(text: str) -> str:
    return small(stage=LADDER + f"arms = [ {text} ]{MARK}\n")


def fet(keys: str, family: str = "mosfet") -> str:
    return small(stage=stage("common-source", "id = 1e-3", "F"), card=f'[device.F]\nfamily = "{family}"\n{keys}\n')
