"""pH, capacity and osmolality of a product diluted into an infusion fluid.

A diluent is never neutral: its pharmacopoeial pH range is wide, since it holds a trace
of acid and of carbon dioxide that nothing buffers. Each dilution is therefore computed
thrice: with the diluent at the acid end of its range (carbon dioxide of the air and as
much strong acid as that takes), with carbon dioxide of the air alone, and at the
basic end (no carbon dioxide, a trace of base).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from formbuf.bench.exposure import expose, with_carbonate
from formbuf.bench.setup import Bench, Made, make_product
from formbuf.chemistry import gas
from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.chemistry.titration import STRONG_ACID, STRONG_BASE
from formbuf.errors import InputError, UnknownNameError
from formbuf.library import Library
from formbuf.library.records import Diluent
from formbuf.product.blend import blend, dissolved
from formbuf.product.composition import Mixture
from formbuf.product.liquid import titratable_acidity_mmol_l
from formbuf.product.vocabulary import Exposure

DiluentState = Literal["acid end", "air", "basic end"]
STATES: tuple[DiluentState, ...] = ("acid end", "air", "basic end")
USUAL_FOLDS = (1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0)
MOST_FOLDS = 1e9


@dataclass(frozen=True, slots=True)
class DilutedState:
    """The product at one dilution.

    Attributes
    ----------
    fold : float
        Volume after over volume before.
    diluent_state : {"acid end", "air", "basic end"}
    diluent_ph : float
        pH of the diluent alone.
    temperature_c : float
    ph : float
    capacity_mmol_l_ph : float
    osmolality_mosm_kg : float
    titratable_acidity_mmol_l : float
        Strong base to pH 7.4 per litre of the dilution; negative: acid.
    titratable_acidity_mmol_dose : float or None
        Of all that is given with one dose.
    """

    fold: float
    diluent_state: DiluentState
    diluent_ph: float
    temperature_c: float
    ph: float
    capacity_mmol_l_ph: float
    osmolality_mosm_kg: float
    titratable_acidity_mmol_l: float
    titratable_acidity_mmol_dose: float | None


@dataclass(frozen=True, slots=True)
class Dilution:
    """Result of ``dilute``.

    Attributes
    ----------
    bench : Bench
    made : Made
    diluent : Diluent
    exposure : {"closed", "open"}
    states : tuple of DilutedState
    notes : tuple of str
    """

    bench: Bench
    made: Made
    diluent: Diluent
    exposure: Exposure
    states: tuple[DilutedState, ...]
    notes: tuple[str, ...]


def find_diluent(library: Library, name: str) -> Diluent:
    """Return a diluent by id or name.

    Raises
    ------
    UnknownNameError
        Where there is none of that name.
    """
    wanted = name.strip().casefold()
    for diluent in library.diluents.values():
        if wanted in (diluent.id, diluent.name.casefold()):
            return diluent
    raise UnknownNameError("diluent", name, library.diluents, where="--into")


def dilute(
    bench: Bench,
    diluent: str,
    *,
    folds: Sequence[float] = USUAL_FOLDS,
    temperature_c: float | None = None,
    exposure: Exposure = "closed",
    air_pressure_pa: float | None = None,
) -> Dilution:
    """Dilute a product.

    Parameters
    ----------
    bench : Bench
    diluent : str
        Id or name of a diluent of the library.
    folds : sequence of float
        Volume after over volume before, 1 to 1e9.
    temperature_c : float, optional
        Temperature [C]; that of measurement if absent.
    exposure : {"closed", "open"}
        Whether the dilution stands open to the air (a bag that breathes counts).
    air_pressure_pa : float, optional
        Carbon dioxide of the air [Pa]; from the tables if absent.

    Returns
    -------
    Dilution

    Raises
    ------
    InputError
        For a dilution below 1, an unknown diluent, or a headspace.
    """
    if exposure == "headspace":
        msg = "a dilution is closed or open, not under a headspace"
        raise InputError(msg)
    for fold in folds:
        if not 1.0 <= fold <= MOST_FOLDS:
            msg = f"--fold: value {fold:g}, allowed 1 to {MOST_FOLDS:g}"
            raise InputError(msg)
    library = bench.library
    found = find_diluent(library, diluent)
    made = make_product(bench)
    t = bench.measure_temperature_c if temperature_c is None else temperature_c
    pressure = air_pressure_pa
    if pressure is None:
        fraction = library.carbon_dioxide["air_fraction_dry"].value.value
        pressure = float(gas.air_pressure_pa(fraction, t))
    product = with_carbonate(library, made.mixture)
    states: list[DilutedState] = []
    notes = [*bench.notes]
    for which in STATES:
        fluid = diluent_mixture(library, found, which, t, pressure)
        for fold in folds:
            mixed = blend(product, fluid, np.float64(1.0 - 1.0 / fold))
            if exposure == "open":
                out = expose(
                    library, mixed, "open", temperature_c=t, pressure_pa=pressure
                )
                mixed = out.mixture
            states.append(_state(bench, mixed, fluid, which, float(fold), t))
            notes += mixed.notes
    if found.note:
        notes.append(f"{found.name}: {found.note}")
    notes.append(_precipitation_note(found, product))
    return Dilution(
        bench,
        made,
        found,
        exposure,
        tuple(states),
        tuple(note for note in dict.fromkeys(notes) if note),
    )


def diluent_mixture(
    library: Library,
    diluent: Diluent,
    state: DiluentState,
    temperature_c: float,
    air_pressure_pa: float,
) -> Mixture:
    """Return a diluent at one end of its pH range, or with carbon dioxide of the air.

    Parameters
    ----------
    library : Library
    diluent : Diluent
    state : {"acid end", "air", "basic end"}
    temperature_c : float
        Temperature [C] at which the range holds.
    air_pressure_pa : float
        Carbon dioxide of the air [Pa].
    """
    plain = with_carbonate(library, dissolved(library, diluent.contents_mmol_l))
    aired = expose(
        library,
        plain,
        "open",
        temperature_c=temperature_c,
        pressure_pa=air_pressure_pa,
    )
    if state == "air":
        return aired.mixture
    if state == "acid end":
        if aired.ph <= diluent.ph_low:
            return aired.mixture
        return _set_to(aired.mixture, diluent.ph_low, temperature_c)
    return _set_to(plain, diluent.ph_high, temperature_c)


def _set_to(mixed: Mixture, ph: float, temperature_c: float) -> Mixture:
    """Add the trace of strong acid or base that gives a fluid its pH."""
    acid = float(mixed.titrate(temperature_c, ph, STRONG_ACID).amount_mol_kg)
    if acid >= 0.0:
        return mixed.with_ion("chloride", -1, acid)
    base = float(mixed.titrate(temperature_c, ph, STRONG_BASE).amount_mol_kg)
    return mixed.with_ion("sodium", 1, max(base, 0.0))


def _state(
    bench: Bench,
    mixed: Mixture,
    fluid: Mixture,
    which: DiluentState,
    fold: float,
    t: float,
) -> DilutedState:
    solution = mixed.solve(t)
    acidity = float(titratable_acidity_mmol_l(mixed, t, solution.ph))
    dose = bench.dose_volume_ml
    return DilutedState(
        fold,
        which,
        float(fluid.solve(t).ph),
        t,
        float(solution.ph),
        1000.0 * float(capacity_mol_kg_ph(solution)) * float(mixed.water_kg_l),
        float(mixed.osmolality(t, solution, bench.law).osmolality_mosm_kg),
        acidity,
        None if dose is None else acidity * dose * fold / 1000.0,
    )


def _precipitation_note(diluent: Diluent, product: Mixture) -> str:
    metals = {"calcium", "magnesium"} & set(diluent.contents_mmol_l)
    anions = {"phosphate", "carbonate"} & {
        ladder.name
        for j, ladder in enumerate(product.ladders)
        if float(np.max(product.totals_mol_kg[..., j])) > 1e-4
    }
    if not (metals and anions):
        return ""
    return (
        f"{', '.join(sorted(anions))} with {', '.join(sorted(metals))} may "
        "precipitate: solubility is not judged here"
    )
