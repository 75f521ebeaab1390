"""Random mixtures: the equations are solved, forward and backward."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry.equilibrium import Solution, solve
from formbuf.chemistry.speciation import Particle, particles
from formbuf.chemistry.titration import STRONG_BASE, titrant_for_ph
from formbuf.library import Library
from formbuf.product.composition import ladder_of
from formbuf.qualify.records import Case, Group

Array = NDArray[np.float64]

KIND = "numerics"
SEED = 20
STATES = 500
COMPONENTS = ("acetate", "citrate", "histidine", "phosphate", "tris", "borate")
#: Largest difference allowed, forward [mol/kg of charge] and backward [mol/kg].
LIMIT_MOL_KG = 1e-8
SOURCE = "definition"


def groups(library: Library) -> Iterator[Group]:
    """Yield what is left of the equations over seeded random mixtures."""
    rng = np.random.default_rng(SEED)
    ladders = [ladder_of(library.species[name]) for name in COMPONENTS]
    totals = 10.0 ** rng.uniform(-3.5, -0.8, (STATES, len(ladders)))
    sodium = rng.uniform(0.0, 0.3, STATES)
    chloride = rng.uniform(0.0, 0.3, STATES)
    t = rng.uniform(0.0, 60.0, STATES)
    charge, charge2 = sodium - chloride, sodium + chloride
    solution = solve(ladders, totals, charge, charge2, t)
    left = np.abs(imbalance(solution, charge, particles(ladders, totals, t, solution)))
    base = titrant_for_ph(
        ladders, totals, -chloride, chloride, t, solution.ph, STRONG_BASE
    )
    back = np.abs(base.amount_mol_kg - sodium)
    cases = tuple(
        Case(label, 0.0, float(np.max(values)), LIMIT_MOL_KG, SOURCE, "derived")
        for label, values in (
            (f"largest imbalance of charge in {STATES} mixtures", left),
            (f"sodium hydroxide found back from the pH of {STATES} mixtures", back),
        )
    )
    title = "random mixtures, seeded"
    yield Group(f"{KIND} {title}", KIND, title, "mol/kg", cases, digits=8)


def imbalance(
    solution: Solution, strong: Array, dissolved: Iterable[Particle]
) -> Array:
    """Return the sum of all charges, counted particle by particle [mol/kg]."""
    total: Array = strong + solution.hydrogen_mol_kg - solution.hydroxide_mol_kg
    for particle in dissolved:
        total = total + particle.charge * particle.molality_mol_kg
    return total
