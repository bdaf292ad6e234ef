"""A built chain as a file's table of its own: drawn numbers put where the file has them."""

from __future__ import annotations

import copy
from collections.abc import Mapping
from typing import Any


def table(doc: Mapping[str, Any], numbers: Mapping[str, float]) -> dict[str, Any]:
    """The file's table with numbers by path ("Q1.rc", "L1.arms.2.shunt_c", "B1.poles.1", "device.D.beta") replaced."""
    built: dict[str, Any] = copy.deepcopy(dict(doc))
    stages = {stage["name"]: stage for stage in built.get("stage", [])}
    for path, value in numbers.items():
        owner, *keys = path.split(".")
        into: Any = stages.get(owner) if owner in stages else built.setdefault(owner, {})
        for key in keys[:-1]:
            into = into[int(key) - 1] if isinstance(into, list) else into[key]
        last = keys[-1]
        if isinstance(into, list):
            into[int(last) - 1] = value
        else:
            into[last] = value
    return built
