"""Hypothesis strategies for mixtures that a solver may meet."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from hypothesis import settings
from hypothesis import strategies as st
from reference_tables import library

from formbuf.chemistry.ionization import Ladder
from formbuf.product.composition import ladder_of

#: Same examples in every run; nothing is written into the checkout.
STEADY = settings(deadline=None, max_examples=120, derandomize=True, database=None)


@dataclass(frozen=True)
class Mix:
    """One state, as the arguments of ``equilibrium.solve``."""

    ladders: tuple[Ladder, ...]
    totals: tuple[float, ...]
    charge: float
    charge2: float
    temperature_c: float

    @property
    def arguments(
        self,
    ) -> tuple[tuple[Ladder, ...], np.ndarray, float, float, float]:
        return (
            self.ladders,
            np.array(self.totals),
            self.charge,
            self.charge2,
            self.temperature_c,
        )


def known_ladders() -> st.SearchStrategy[Ladder]:
    """A species of the library; borate, with its aggregates, among them."""
    names = sorted(library().species)
    return st.sampled_from(names).map(lambda n: ladder_of(library().species[n]))


@st.composite
def invented_ladders(draw: st.DrawFn) -> Ladder:
    """A ladder of one to six steps with ascending pK, close or far apart."""
    steps = draw(st.integers(1, 6))
    first = draw(st.floats(-2.0, 5.0))
    gaps = draw(st.lists(st.floats(0.05, 3.0), min_size=steps - 1, max_size=steps - 1))
    pka = tuple(float(x) for x in np.cumsum([first, *gaps]))
    heats = draw(st.lists(st.floats(-50.0, 60.0), min_size=steps, max_size=steps))
    return Ladder(
        f"invented_{draw(st.integers(0, 10**6))}",
        draw(st.integers(-1, 4)),
        pka,
        tuple(heats),
        (0.0,) * steps,
    )


def amounts(low: float = 1e-6, high: float = 1.0) -> st.SearchStrategy[float]:
    """Molalities, evenly over the decades."""
    exponents = st.floats(float(np.log10(low)), float(np.log10(high)))
    return exponents.map(lambda e: float(10.0**e))


@st.composite
def mixes(
    draw: st.DrawFn,
    least: int = 0,
    most: int = 3,
    coldest_c: float = -20.0,
    hottest_c: float = 100.0,
) -> Mix:
    """Components of the library or invented, strong ions of either sign, any heat."""
    ladders = draw(
        st.lists(
            st.one_of(known_ladders(), invented_ladders()),
            min_size=least,
            max_size=most,
            unique_by=lambda ladder: ladder.name,
        )
    )
    totals = tuple(draw(amounts()) for _ in ladders)
    scale = sum(totals) + 1e-3
    charge = draw(st.floats(-3.0, 3.0)) * scale
    salt = draw(amounts(1e-5, 1.0))
    return Mix(
        tuple(ladders),
        totals,
        charge,
        abs(charge) + 2.0 * salt,
        draw(st.floats(coldest_c, hottest_c)),
    )
