"""Every stage kind by its name in the file. A new topology is entered here."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType

from polebook.stages import block, cascode, common_control, follower, inverting, ladder, opamp
from polebook.stages.base import Kind
from polebook.stages.stamper import Given, Stamper

Stamp = Callable[[Stamper, int, Given], int]

_TOPOLOGIES = (inverting, follower, common_control, cascode, opamp, block, ladder)

KINDS: Mapping[str, Kind] = MappingProxyType({kind.name: kind for file in _TOPOLOGIES for kind in file.KINDS})
"""Name of the kind -> Kind, in the order in which they are listed."""

STAMPS: Mapping[str, Stamp] = MappingProxyType({name: f for file in _TOPOLOGIES for name, f in file.STAMPS.items()})
"""Topology -> the function that stamps it."""
