"""The equations of a freeze-concentrated mixture, assembled from its contents.

Lists the dissolved species, the reactions between them, the component balances and
the phases (ice first, then solids) with their constants at any temperature. Solving
them is the business of `formbuf.chemistry.freezing_state`.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.freezing_records import (
    Brine,
    FreezingContents,
    Solid,
    state_name,
)
from formbuf.chemistry.ionization import Ladder, log10_aggregate_constants, pk_at
from formbuf.chemistry.pitzer import PitzerModel
from formbuf.chemistry.water import debye_huckel_slope, ln_ice_activity, pkw
from formbuf.constants import LN10, WATER_MOLAR_MASS_KG_MOL, ZERO_CELSIUS_K

Array = NDArray[np.float64]

HYDROGEN, HYDROXIDE = "hydrogen", "hydroxide"
ICE = 0


class ActivityModel(Protocol):
    """What the equations need from a model of the liquid."""

    def evaluate(
        self, molality_mol_kg: ArrayLike, temperature_c: float
    ) -> tuple[Array, Array]:
        """Return ln gamma per species and ln of the water activity."""
        ...


class ExtendedDebyeHueckel:
    """Extended Debye-Hueckel activities, for liquids without brine parameters.

    ln gamma = -z^2 A ln10 sqrt(I)/(1 + sqrt(I)) for ions (Guentelberg's form), the
    osmotic coefficient that goes with it, and phi = 1 + b m for neutral solutes. No
    term linear in ionic strength, which would run away in a brine. Above about
    0.1 mol/kg it is an assumption; for sodium phosphate without crystallisation it
    stays within 0.2 pH of the brine model down to -20 C (shown in the tests).

    Parameters
    ----------
    charges : sequence of int, length n
    slopes_kg_mol : array_like, shape (n,)
        b of each species [kg/mol], zero for ions.
    """

    def __init__(self, charges: Sequence[int], slopes_kg_mol: ArrayLike) -> None:
        self.squares = np.asarray(charges, dtype=float) ** 2
        self.slopes = np.asarray(slopes_kg_mol, dtype=float)
        self._a: dict[float, float] = {}

    def evaluate(
        self, molality_mol_kg: ArrayLike, temperature_c: float
    ) -> tuple[Array, Array]:
        """Return ln gamma (..., n) and ln a_w (...) at molalities [mol/kg]."""
        a = self._a.get(temperature_c)
        if a is None:
            a = self._a[temperature_c] = LN10 * float(debye_huckel_slope(temperature_c))
        m = np.asarray(molality_mol_kg, dtype=float)
        root = np.sqrt(0.5 * (m @ self.squares))
        x = 1.0 + root
        term = (a * root / x)[..., np.newaxis]
        ln_gamma = 2.0 * self.slopes * m - self.squares * term
        lost = 2.0 * a * (x - 2.0 * np.log(x) - 1.0 / x)
        osmoles = m.sum(axis=-1) + (m * m) @ self.slopes - lost
        return ln_gamma, -WATER_MOLAR_MASS_KG_MOL * osmoles


class Network:
    """Species, reactions, balances and phases of one mixture.

    Parameters
    ----------
    contents : FreezingContents
    brine : Brine
    extra_ion : tuple of (str, int), optional
        An ion that the contents lack but the titrant brings.
    with_solids : bool
        Whether the solids of the brine may form at all; if not they are watched.

    Attributes
    ----------
    species : list of str
        n dissolved species; hydrogen and hydroxide ion first.
    charges : ndarray, shape (n,)
    components : list of str
        k balanced components.
    counts : ndarray, shape (k, n)
        Units of each component in each species.
    totals : ndarray, shape (k,)
        mol per kg of initial water.
    reactions, waters : ndarray, shapes (r, n) and (r,)
        Stoichiometry of ln K = sum nu ln a; water counted apart.
    phases : list of str
        ``ice``, then the ids of the solids that may form.
    phase_states, phase_counts, phase_waters : ndarray
        Stoichiometry of each phase, shapes (p, n), (p, k) and (p,).
    """

    def __init__(
        self,
        contents: FreezingContents,
        brine: Brine,
        *,
        extra_ion: tuple[str, int] | None = None,
        with_solids: bool = True,
    ) -> None:
        self.ladders: tuple[Ladder, ...] = tuple(
            ladder
            for ladder, total in zip(
                contents.ladders, contents.totals_mol_kg, strict=True
            )
            if total > 0.0
        )
        amounts: dict[str, float] = {}
        rows: list[tuple[str, int, dict[str, float]]] = [
            (HYDROGEN, 1, {}),
            (HYDROXIDE, -1, {}),
        ]
        for ladder, total in zip(contents.ladders, contents.totals_mol_kg, strict=True):
            if total > 0.0:
                amounts[ladder.name] = total
                rows += _ladder_species(ladder)
        ions = [(i.name, i.charge, i.mol_kg) for i in contents.ions]
        if extra_ion is not None and extra_ion[0] not in {i[0] for i in ions}:
            ions.append((*extra_ion, 0.0))
        for name, charge, amount in ions:
            if amount > 0.0 or (extra_ion is not None and name == extra_ion[0]):
                amounts[name] = amount
                rows.append((name, charge, {name: 1.0}))
        slopes: dict[str, float] = {}
        for neutral in contents.neutrals:
            if neutral.mol_kg > 0.0:
                amounts[neutral.name] = neutral.mol_kg
                slopes[neutral.name] = neutral.osmotic_slope_kg_mol
                rows.append((neutral.name, 0, {neutral.name: 1.0}))
        self.species = [name for name, _, _ in rows]
        self.index = {name: i for i, name in enumerate(self.species)}
        self.charges = np.array([charge for _, charge, _ in rows], dtype=float)
        self.components = list(amounts)
        self.totals = np.array(list(amounts.values()), dtype=float)
        self.counts = np.array(
            [[held.get(c, 0.0) for _, _, held in rows] for c in self.components]
        ).reshape(len(self.components), len(rows))
        self._reactions()
        may_form = brine.solids if with_solids else ()
        watched = (*(() if with_solids else brine.solids), *brine.watched)
        self._phases(may_form, watched)
        self.refused = [
            (self.index[name], self._component_of(name), share)
            for name, share in brine.refused.items()
            if name in self.index
        ]
        self.activity = self._activity(brine, slopes)
        self._constants: dict[float, tuple[Array, Array]] = {}

    def _component_of(self, species: str) -> int:
        return int(np.argmax(self.counts[:, self.index[species]]))

    def is_refused(self, ln_m: Array) -> bool:
        """Return whether a state without parameters has grown beyond its share."""
        m = np.exp(ln_m)
        return any(
            m[i] > share * float(self.counts[k] @ m) for i, k, share in self.refused
        )

    def _activity(self, brine: Brine, slopes: Mapping[str, float]) -> ActivityModel:
        charges = [int(z) for z in self.charges]
        if brine.parameters is not None:
            return PitzerModel(brine.parameters, self.species, charges, slopes)
        per_species = [slopes.get(name, 0.0) for name in self.species]
        return ExtendedDebyeHueckel(charges, per_species)

    def _reactions(self) -> None:
        n = len(self.species)
        rows: list[Array] = [np.zeros(n)]
        rows[0][[0, 1]] = 1.0
        for ladder in self.ladders:
            for upper in ladder.charges[:-1]:
                row = np.zeros(n)
                row[0] = 1.0
                row[self.index[state_name(ladder.name, upper)]] = -1.0
                row[self.index[state_name(ladder.name, upper - 1)]] = 1.0
                rows.append(row)
            for aggregate in ladder.aggregates:
                row = np.zeros(n)
                row[0] = -aggregate.charge
                row[self.index[state_name(ladder.name, 0)]] = -aggregate.units
                row[self.index[aggregate.name]] = 1.0
                rows.append(row)
        self.reactions = np.array(rows)
        self.waters = np.zeros(len(rows))
        self.waters[0] = -1.0

    def _phases(self, solids: Sequence[Solid], watched: Sequence[Solid]) -> None:
        def fits(solid: Solid) -> bool:
            return all(name in self.index for name in solid.states)

        kept = [s for s in solids if fits(s)]
        seen = [s for s in watched if fits(s)]
        self.solids = kept
        self.watched = seen
        self.phases = ["ice", *(s.id for s in kept)]
        self.phase_states = np.array(
            [np.zeros(len(self.species)), *(self._states(s) for s in kept)]
        )
        self.phase_counts = np.array(
            [
                np.zeros(len(self.components)),
                *([s.components.get(c, 0.0) for c in self.components] for s in kept),
            ]
        ).reshape(len(self.phases), len(self.components))
        self.phase_waters = np.array([1.0, *(s.waters for s in kept)])
        self.watched_states = np.array([self._states(s) for s in seen]).reshape(
            len(seen), len(self.species)
        )
        self.watched_waters = np.array([s.waters for s in seen])

    def _states(self, solid: Solid) -> Array:
        row = np.zeros(len(self.species))
        for name, count in solid.states.items():
            row[self.index[name]] = count
        return row

    def constants(self, temperature_c: float) -> tuple[Array, Array]:
        """Return ln K of the reactions and of the phases at a temperature [C]."""
        found = self._constants.get(temperature_c)
        if found is not None:
            return found
        log10_k = [-float(pkw(temperature_c))]
        for ladder in self.ladders:
            log10_k += (-pk_at(ladder, temperature_c)).tolist()
            if ladder.aggregates:
                log10_k += log10_aggregate_constants(ladder, temperature_c).tolist()
        ice = float(ln_ice_activity(temperature_c))
        phases = [ice, *(ln_solubility(s, temperature_c) for s in self.solids)]
        found = (LN10 * np.array(log10_k), np.array(phases))
        self._constants[temperature_c] = found
        return found

    def watched_ln_k(self, temperature_c: float) -> Array:
        """Return ln K of the watched solids at a temperature [C]."""
        return np.array([ln_solubility(s, temperature_c) for s in self.watched])


def ln_solubility(solid: Solid, temperature_c: float) -> float:
    """Return ln K of a solid at a temperature [C]."""
    a, b = solid.ln_k
    return a + b / (temperature_c + ZERO_CELSIUS_K)


def _ladder_species(ladder: Ladder) -> list[tuple[str, int, dict[str, float]]]:
    species = [
        (state_name(ladder.name, charge), charge, {ladder.name: 1.0})
        for charge in ladder.charges
    ]
    species += [
        (a.name, a.charge, {ladder.name: float(a.units)}) for a in ladder.aggregates
    ]
    return species
