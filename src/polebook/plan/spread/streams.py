"""Random numbers by seed, name and build: a draw depends on nothing else.

Each name has a stream of its own, and build number n takes its n-th word; so neither block nor worker nor what else
a chain has can move a draw, and two chains that share a part share its draws build by build.
"""

from __future__ import annotations

import hashlib

import numpy as np

from polebook.plan.spread.normal import Array, quantile

WORDS = 4  # that the generator makes at a time
SIGMAS = 3.0  # a tolerance is so many standard deviations
LEAST_SEED, MOST_SEED = 0, 2**64 - 1


def words(seed: int, name: str, first: int, count: int) -> np.ndarray[tuple[int], np.dtype[np.uint64]]:
    """64-bit words of builds `first` to `first + count`.

    Philox, counter-based (J. K. Salmon, M. A. Moraes, R. O. Dror and D. E. Shaw, Parallel random numbers: as easy as
    1, 2, 3, 2011), keyed by the seed and 64 bits of the name's SHA-256.
    """
    digest = int.from_bytes(hashlib.sha256(name.encode("utf-8")).digest()[:8], "little")
    block, skip = divmod(first, WORDS)
    generator = np.random.Philox(key=np.array([seed, digest], dtype=np.uint64), counter=block)
    return generator.random_raw(skip + count)[skip:]


def uniform(seed: int, name: str, first: int, count: int) -> Array:
    """Evenly spread between -1 and 1, neither included; from 53 bits."""
    share = (words(seed, name, first, count) >> np.uint64(11)).astype(np.float64)
    share += 0.5
    share *= 2.0**-52
    share -= 1.0
    return share


def clipped_normal(seed: int, name: str, first: int, count: int) -> Array:
    """Normal with a third as deviation, what lies past ±1 set to that."""
    share = (words(seed, name, first, count) >> np.uint64(11)).astype(np.float64)
    share += 0.5
    share *= 2.0**-53
    z = quantile(share)
    z /= SIGMAS
    return np.clip(z, -1.0, 1.0, out=z)
