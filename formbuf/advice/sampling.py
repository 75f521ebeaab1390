"""Seeded normal draws, one Latin hypercube over named inputs.

Each input is a column of a Latin hypercube (McKay, Beckman & Conover 1979), made by
scipy. It has its own stream, made from the seed and its name: an input draws the
same numbers whatever else is drawn and in whatever order. Within an input the draws
are the midpoints of equal shares of the normal distribution in a random order, so
that means and small chances settle faster than with independent draws.
"""

from __future__ import annotations

import hashlib
import math
from functools import lru_cache
from statistics import NormalDist

import numpy as np
from numpy.typing import NDArray

from formbuf.errors import InputError

Array = NDArray[np.float64]

DEFAULT_DRAWS = 2500
DEFAULT_SEED = 1
FEWEST_DRAWS, MOST_DRAWS = 100, 1_000_000
LARGEST_SEED = 2**63 - 1


class Sampler:
    """Draws of named standard normal inputs.

    Parameters
    ----------
    count : int
        Draws, 100 to 1,000,000.
    seed : int
        0 or more; the same seed gives the same draws.
    mirrored : bool
        Whether every normal draw changes its sign (the antithetic set).

    Raises
    ------
    InputError
        For a count or seed that is not allowed.
    """

    def __init__(
        self,
        count: int = DEFAULT_DRAWS,
        seed: int = DEFAULT_SEED,
        *,
        mirrored: bool = False,
    ) -> None:
        if not FEWEST_DRAWS <= count <= MOST_DRAWS:
            msg = f"{count} draws, allowed {FEWEST_DRAWS} to {MOST_DRAWS}"
            raise InputError(msg)
        if not 0 <= seed <= LARGEST_SEED:
            msg = f"a seed of {seed}, allowed 0 to {LARGEST_SEED}"
            raise InputError(msg)
        self.count = count
        self.seed = seed
        self.mirrored = mirrored
        self._orders: dict[str, NDArray[np.intp]] = {}

    def _entropy(self, name: str) -> list[int]:
        digest = hashlib.blake2b(name.encode(), digest_size=16).digest()
        return [self.seed, int.from_bytes(digest, "little")]

    def order(self, name: str) -> NDArray[np.intp]:
        """Return the share (0 to count - 1) in which each draw of an input lies."""
        kept = self._orders.get(name)
        if kept is None:
            from scipy.stats import qmc

            stream = np.random.Generator(np.random.PCG64(self._entropy(name)))
            column = qmc.LatinHypercube(d=1, scramble=False, rng=stream)
            shares = column.random(self.count).ravel()
            kept = np.floor(shares * self.count).astype(np.intp)
            self._orders[name] = kept
        if self.mirrored:
            return self.count - 1 - kept
        return kept

    def normal(self, name: str) -> Array:
        """Return the standard normal draws of an input, shape (count,)."""
        return normal_quantiles(self.count)[self.order(name)]

    def exponential(self, name: str) -> Array:
        """Return draws of an exponential distribution of mean one, shape (count,)."""
        shares = (self.order(name) + 0.5) / self.count
        return -np.log1p(-shares)

    def gamma(self, name: str, shape: float) -> Array:
        """Return draws of a gamma distribution of unit scale, shape (count,)."""
        stream = np.random.Generator(np.random.PCG64(self._entropy(name)))
        return stream.gamma(shape, size=self.count)


@lru_cache(maxsize=8)
def normal_quantiles(count: int) -> Array:
    """Midpoints of ``count`` equal shares of the standard normal distribution."""
    inverse = NormalDist().inv_cdf
    values = np.array([inverse((k + 0.5) / count) for k in range(count)])
    values *= 1.0 / math.sqrt(float(np.mean(values * values)))
    values.flags.writeable = False
    return values
