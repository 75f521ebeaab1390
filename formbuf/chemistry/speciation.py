"""Molality of every dissolved particle of a solved mixture."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.ionization import (
    Ladder,
    log10_aggregate_constants,
    pk_at,
    state_fractions,
)
from formbuf.chemistry.moments import Equilibrium, free_monomer
from formbuf.constants import LN10

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Particle:
    """One kind of dissolved particle.

    Attributes
    ----------
    component : str
        Component it belongs to; an aggregate bears its own name after a slash.
    charge : int
    molality_mol_kg : ndarray, shape (...)
    """

    component: str
    charge: int
    molality_mol_kg: Array

    @property
    def key(self) -> str:
        """Key of the particle in the osmotic tables, for example ``phosphate:-2``."""
        return f"{self.component}:{self.charge}"


def particles(
    ladders: Sequence[Ladder],
    totals_mol_kg: ArrayLike,
    temperature_c: ArrayLike,
    solution: Solution,
    *,
    open_components: Sequence[str] = (),
) -> list[Particle]:
    """List the molality of each protonation state and aggregate.

    Parameters
    ----------
    ladders, totals_mol_kg, temperature_c, open_components
        The mixture, as for ``formbuf.chemistry.equilibrium.solve``.
    solution : Solution
        The solved mixture.

    Returns
    -------
    list of Particle
        Hydrogen and hydroxide ions are left out; see ``water_ions``.
    """
    totals = np.asarray(totals_mol_kg, dtype=float)
    found: list[Particle] = []
    for j, ladder in enumerate(ladders):
        fractions = state_fractions(
            ladder, solution.ph, temperature_c, solution.unit_charge_term
        )
        total = np.broadcast_to(totals[..., j], solution.ph.shape)
        if ladder.name in open_components:
            total = total / fractions[..., 0]
        elif ladder.aggregates:
            free, formed = _aggregated(ladder, total, temperature_c, solution)
            found += [
                Particle(f"{ladder.name}/{a.name}", a.charge, m)
                for a, m in zip(ladder.aggregates, formed, strict=True)
            ]
            total = free / fractions[..., 0]
        found += [
            Particle(ladder.name, z, total * fractions[..., k])
            for k, z in enumerate(ladder.charges)
        ]
    return found


def water_ions(solution: Solution) -> list[Particle]:
    """Hydrogen and hydroxide ions of a solved mixture.

    Parameters
    ----------
    solution : Solution

    Returns
    -------
    list of Particle
        With the keys ``hydrogen:1`` and ``hydroxide:-1`` of the osmotic tables.
    """
    return [
        Particle("hydrogen", 1, solution.hydrogen_mol_kg),
        Particle("hydroxide", -1, solution.hydroxide_mol_kg),
    ]


def _aggregated(
    ladder: Ladder, total: Array, temperature_c: ArrayLike, solution: Solution
) -> tuple[Array, list[Array]]:
    """Free first state and aggregates of an aggregating component."""
    shape = solution.ph.shape
    t = np.broadcast_to(np.asarray(temperature_c, dtype=float), shape).ravel()
    steps = 10.0 ** -pk_at(ladder, t)
    formed = 10.0 ** log10_aggregate_constants(ladder, t)
    eq = Equilibrium(
        ladder,
        tuple(steps[..., k] for k in range(steps.shape[-1])),
        tuple(formed[..., k] for k in range(formed.shape[-1])),
        is_open=False,
    )
    ph, d = solution.ph.ravel(), solution.unit_charge_term.ravel()
    u, g = np.exp(LN10 * ph), np.exp(LN10 * d)
    fractions = state_fractions(ladder, ph, t, d)
    weights = np.ascontiguousarray((fractions / fractions[..., :1]).T)
    free, parts = free_monomer(eq, total.ravel(), u, g, weights)
    return free.reshape(shape), [p.reshape(shape) for p in parts]
