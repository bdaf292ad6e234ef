"""Where else to begin: values scattered about today's, always the same ones for one seed."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from polebook.plan.apportion.task import Array, Task

SEED = 1
SPREADS = (0.35, 0.7, 1.1)  # neper, standard deviation, in turn


def scattered(task: Task, count: int, seed: int = SEED) -> Iterator[Array]:
    """`count` points about today's values, within the bounds."""
    random = np.random.default_rng(seed)
    low, high = task.bounds
    for number in range(count):
        yield np.clip(task.start + SPREADS[number % len(SPREADS)] * random.standard_normal(low.size), low, high)
