"""What a buffer is sized in: excipients, drug and the salt that fills the tonicity.

A salt sets the ionic strength at which capacity is judged, and how much of it there
is room for depends on the buffer; so each concentration is made with its own.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry import activity
from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.ionization import state_fractions
from formbuf.chemistry.osmolality import OsmoticLaw
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.composition import ladder_of, mixture
from formbuf.product.recipe import Background, Recipe, make

Array = NDArray[np.float64]

#: Estimates of the salt that fills the room: osmoles per mole of ions, by how much
#: they fall per charge of the buffer beyond one, and the root of ionic strength
#: [mol^0.5 kg^-0.5] at which that charge is taken.
OSMOLES_PER_ION = 0.93
LESS_PER_CHARGE = 0.08
ROOT_IONIC_STRENGTH = 0.4
#: Share of the ionic strength by which the estimate may miss, and rounds to mend it.
FILL_SHARE = 0.04
FILL_ROUNDS = 3


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What a buffer is sized in.

    Attributes
    ----------
    background : Background
        Without an agent that brings no ions: sugar changes no ionic strength.
    fill_mmol_l : float
        Of a salt, what fills the product without buffer to its osmolality [mmol/L].
    """

    background: Background
    fill_mmol_l: float = 0.0


def surroundings_of(
    background: Background, library: Library, law: OsmoticLaw
) -> Surroundings:
    """Return what buffers are sized in."""
    bare = replace(background, agent=None, target_mosm_kg=None)
    if background.agent is None or background.target_mosm_kg is None:
        return Surroundings(bare)
    contents = library.find_material(background.agent).contents
    if not any(component in library.ions for component in contents):
        return Surroundings(bare)
    whole = mixture(
        library,
        background.materials_mmol_l,
        extras=background.extras,
        volume_temperature_c=background.volume_temperature_c,
    )
    t = background.volume_temperature_c
    held = float(whole.osmolality(t, whole.solve(t), law).osmolality_mosm_kg)
    room = max(background.target_mosm_kg - held, 0.0) * float(whole.water_kg_l)
    fill = room / OSMOLES_PER_ION / sum(contents.values())
    return Surroundings(background, fill)


def made_in(
    library: Library,
    system: System,
    concentration_mmol_l: Array,
    ph: Array,
    temperature_c: float,
    surroundings: Surroundings,
    law: OsmoticLaw,
) -> tuple[Recipe, Solution]:
    """Make a system for sizing, at each concentration with the salt it leaves room for.

    The room is estimated from the charge of the buffer and set right, at most
    ``FILL_ROUNDS`` times, where the ionic strength would be off by more than
    ``FILL_SHARE``. What fills without ions is left out.

    Returns
    -------
    (Recipe, Solution)
        The latter at ``temperature_c``.
    """
    c, background = concentration_mmol_l, surroundings.background
    if background.agent is None or background.target_mosm_kg is None:
        recipe = make(library, system, c, ph, temperature_c, background, law)
        return recipe, recipe.mixture.solve(temperature_c)
    contents = library.find_material(background.agent).contents
    slope = OSMOLES_PER_ION * sum(contents.values())
    charges2 = sum(
        count * library.ions[component].charge ** 2
        for component, count in contents.items()
        if component in library.ions
    )
    taken = _osmoles_per_buffer(library, system, ph, temperature_c)
    fill = np.maximum(surroundings.fill_mmol_l - taken * c / slope, 0.0)
    for _ in range(FILL_ROUNDS):
        recipe = make(
            library, system, c, ph, temperature_c, background, law, fill_mmol_l=fill
        )
        mixed = recipe.mixture
        solution = mixed.solve(temperature_c)
        osmol = mixed.osmolality(temperature_c, solution, law).osmolality_mosm_kg
        gap = (background.target_mosm_kg - osmol) * mixed.water_kg_l / slope
        right = np.maximum(fill + gap, 0.0)
        off = 0.5 * charges2 * np.abs(right - fill) / 1000.0
        if np.all(off <= FILL_SHARE * solution.ionic_strength_mol_kg):
            break
        fill = right
    return recipe, solution


def _osmoles_per_buffer(
    library: Library, system: System, ph: Array, temperature_c: float
) -> Array:
    """Osmoles per mole of buffer, from its mean charge: its counter-ions are as many.

    A second species of opposite charge is the counter-ion.
    """
    d = activity.unit_charge_term(
        activity.slope(temperature_c, "guggenheim"), ROOT_IONIC_STRENGTH
    )
    charge, uncharged = [], []
    for name in system.species[:2]:
        ladder = ladder_of(library.species[name])
        at = state_fractions(ladder, ph, temperature_c, d)
        z = np.asarray(ladder.charges, dtype=float)
        charge.append(at @ z)
        uncharged.append(at @ (z == 0.0))
    ions = 1.0 - uncharged[0] + np.abs(charge[0])
    plain = uncharged[0]
    if len(charge) == 2 and np.all(charge[0] * charge[1] < 0.0):
        second = np.abs(charge[0] / charge[1])
        ions = 1.0 - uncharged[0] + second * (1.0 - uncharged[1])
        plain = uncharged[0] + second * uncharged[1]
    beyond_one = np.maximum(np.abs(charge[0]) - 1.0, 0.0)
    total: Array = (OSMOLES_PER_ION - LESS_PER_CHARGE * beyond_one) * ions + plain
    return total
