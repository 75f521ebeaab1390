"""What goes wrong at the bench: a weighing, a temperature, the wrong hydrate."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from formbuf.bench.batch_records import Allowance, WeighingError, WrongHydrate
from formbuf.bench.challenge import base_to_ph_mmol_l
from formbuf.bench.grades import InHand, grade_of, same_but_water
from formbuf.bench.setup import Bench, Made
from formbuf.constants import ZERO_CELSIUS_K
from formbuf.product.composition import Mixture, mixture

WEIGHING_ERROR = 0.01
TEMPERATURE_ERROR_K = 2.0
NEUTRAL_PH = 7.0
MAKE_UP_FIRST_PERCENT = 95.0


def whole(bench: Bench, materials_mmol_l: Mapping[str, float]) -> Mixture:
    """Return the product with other amounts of its materials."""
    return mixture(
        bench.library,
        dict(materials_mmol_l),
        extras=bench.background.extras,
        volume_temperature_c=bench.background.volume_temperature_c,
    )


def _shown(bench: Bench, mixed: Mixture) -> tuple[float, float]:
    """PH and osmolality at the temperature of measurement."""
    t = bench.measure_temperature_c
    solution = mixed.solve(t)
    osmol = mixed.osmolality(t, solution, bench.law).osmolality_mosm_kg
    return float(solution.ph), float(osmol)


def weighing_errors(bench: Bench, made: Made) -> tuple[WeighingError, ...]:
    """Return the effect of 1 % more of each material, everything else as planned."""
    planned = made.materials_mmol_l
    ph, osmol = _shown(bench, whole(bench, planned))
    found = []
    for key, amount in planned.items():
        off = {**planned, key: amount * (1.0 + WEIGHING_ERROR)}
        ph_off, osmol_off = _shown(bench, whole(bench, off))
        found.append(WeighingError(key, ph_off - ph, osmol_off - osmol))
    return tuple(found)


def wrong_hydrates(bench: Bench, made: Made) -> tuple[WrongHydrate, ...]:
    """Return what each other hydrate, weighed by mistake, would give."""
    planned = made.materials_mmol_l
    ph, osmol = _shown(bench, whole(bench, planned))
    found = []
    for key, amount in planned.items():
        material = bench.library.find_material(key)
        for other in same_but_water(bench.library, material):
            share = material.molar_mass_g_mol.value / other.molar_mass_g_mol.value
            off = {k: v for k, v in planned.items() if k != key}
            off[other.id] = off.get(other.id, 0.0) + amount * share
            ph_off, osmol_off = _shown(bench, whole(bench, off))
            found.append(
                WrongHydrate(
                    key, other.id, ph_off, ph_off - ph, share, osmol_off - osmol
                )
            )
    return tuple(found)


def temperature_errors(bench: Bench, made: Made) -> tuple[float, float]:
    """Errors of the product's pH from reading the meter 2 K off.

    Returns
    -------
    tuple of (float, float)
        The solution 2 K warmer than taken while the pH is set to the reading meant for
        the temperature of preparation; and the compensation of the meter set 2 K too
        high, by the slope of the electrode.
    """
    t = bench.prepare_temperature_c
    read = made.mixture.solve(np.array([t, t + TEMPERATURE_ERROR_K])).ph
    electrode = (float(read[0]) - NEUTRAL_PH) * TEMPERATURE_ERROR_K
    return float(read[0] - read[1]), electrode / (t + ZERO_CELSIUS_K)


def allowance(bench: Bench, made: Made, batch_l: float, in_hand: InHand) -> Allowance:
    """Return the titrant that moves the batch by the release tolerance."""
    library, t = bench.library, bench.prepare_temperature_c
    ph = float(made.mixture.solve(t).ph)
    acid_material = library.find_material("hydrochloric_acid")
    base_material = library.find_material(bench.system.base_titrant)
    grades = tuple(
        grade_of(library, m, in_hand) for m in (acid_material, base_material)
    )
    acid = -base_to_ph_mmol_l(made.mixture, ph - bench.tolerance_ph, t) * batch_l
    base = base_to_ph_mmol_l(made.mixture, ph + bench.tolerance_ph, t) * batch_l
    masses = [m.molar_mass_g_mol.value for m in (acid_material, base_material)]
    return Allowance(
        bench.tolerance_ph,
        grades[0],
        grades[1],
        grades[0].millilitres(acid, masses[0]),
        grades[1].millilitres(base, masses[1]),
        grades[0].grams(acid, masses[0]),
        grades[1].grams(base, masses[1]),
        MAKE_UP_FIRST_PERCENT,
    )
