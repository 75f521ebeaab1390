"""The batch sheet: what to weigh, in which order, and what the meter must read."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from formbuf.bench import batch_errors, batch_steps
from formbuf.bench.batch_records import (
    BatchSheet,
    CheckSums,
    Line,
    Reading,
    Role,
    StorageReading,
    WaySheet,
)
from formbuf.bench.grades import Grade, InHand, grade_of
from formbuf.bench.setup import ROOM_C, Bench, Made, make_product
from formbuf.bench.ways import Way, ways_of, with_hydrates_in_hand
from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.chemistry.speciation import water_ions
from formbuf.constants import WATER_MOLAR_MASS_KG_MOL
from formbuf.errors import InputError
from formbuf.product.composition import Extra
from formbuf.product.liquid import slope_ends_c

LEAST_BATCH_L, MOST_BATCH_L = 1e-6, 1e6
#: Share of the batch below which the water to add is too little to work with (practice).
LITTLE_WATER = 0.5
#: Osmolality above the target from which it is worth a word [mosmol/kg].
OVERFULL_MOSM_KG = 5.0
WATER_G_MOL = 1000.0 * WATER_MOLAR_MASS_KG_MOL


def batch_sheet(
    bench: Bench,
    *,
    volume_l: float | None = None,
    mass_kg: float | None = None,
    in_hand: InHand | None = None,
    right_at_c: float | None = None,
) -> BatchSheet:
    """Work out a batch.

    Parameters
    ----------
    bench : Bench
    volume_l, mass_kg : float
        Size of the batch, one of the two [L], [kg].
    in_hand : InHand, optional
        Grades, assays, strengths and hydrates in hand.
    right_at_c : float, optional
        Temperature at which the target pH shall hold [C]; where it is measured if
        absent.

    Returns
    -------
    BatchSheet

    Raises
    ------
    InputError
        For a size that is none, a grade that cannot be, or a pH that no way reaches.
    """
    hand = (in_hand or InHand()).checked(bench.library)
    bench = with_hydrates_in_hand(bench, hand.hydrates)
    _check_size(volume_l, mass_kg)
    if right_at_c is not None and bench.given_mmol_l is not None:
        msg = (
            f"--right-at: the formula {bench.system.name!r} is a list of materials and "
            "made as it is, allowed for a system, whose pH is set"
        )
        raise InputError(msg)
    at = bench.measure_temperature_c if right_at_c is None else right_at_c
    ways = ways_of(bench, temperature_c=at)
    if volume_l is None:
        assert mass_kg is not None
        volume_l = mass_kg / _density_kg_l(bench, ways[0].made)
    sheets = tuple(_sheet(bench, way, volume_l, hand) for way in ways)
    notes = [*bench.notes, *ways[0].made.mixture.notes]
    if bench.given_mmol_l is not None:
        notes = [*_as_given(bench, ways[0].made), *notes]
    elif len(ways) == 1 and bench.system.role != "none":
        notes.append("one way of making it: the materials of the tables allow no other")
    notes += [
        f"{sheet.way.title}: only {100.0 * sheet.sums.water_g / sheet.sums.batch_g:.0f} % "
        "of the batch is water to add: whether all dissolves and the titrant is strong "
        "enough is open"
        for sheet in sheets
        if sheet.sums.water_g < LITTLE_WATER * sheet.sums.batch_g
    ]
    notes += _excluded(bench, sheets)
    target = bench.background.target_mosm_kg
    over = max(sheet.osmolality_mosm_kg for sheet in sheets)
    if target is not None and over > target + OVERFULL_MOSM_KG:
        notes.append(
            f"without any tonicity agent it has {over:.0f} mosmol/kg, above the "
            f"{target:g} aimed at: none is added"
        )
    for way in ways:
        extra = ", ".join(f"{v:.3g} mmol/L {k}" for k, v in way.by_product.items())
        if extra:
            notes.append(f"{way.title} brings {extra} more than the other way")
    return BatchSheet(
        bench,
        volume_l,
        mass_kg,
        at,
        sheets,
        _mole_ratio(bench, ways[0].made),
        tuple(dict.fromkeys(notes)),
    )


def _excluded(bench: Bench, sheets: Sequence[WaySheet]) -> list[str]:
    """Name what a sheet weighs or adjusts with although the brief excludes it."""
    found: dict[str, None] = {}
    for sheet in sheets:
        used = [line.material for line in sheet.lines if line.role != "drug"]
        used += [
            sheet.allowance.acid_grade.material,
            sheet.allowance.base_grade.material,
        ]
        for key in used:
            material = bench.library.materials.get(key)
            if material and material.named_in(bench.excluded):
                found[material.name] = None
    if not found:
        return []
    return [f"the brief excludes what this sheet uses: {', '.join(found)}"]


def _check_size(volume_l: float | None, mass_kg: float | None) -> None:
    if (volume_l is None) == (mass_kg is None):
        msg = "the batch needs --volume or --mass, one of the two"
        raise InputError(msg)
    option, size = ("--volume", volume_l) if mass_kg is None else ("--mass", mass_kg)
    assert size is not None
    if not LEAST_BATCH_L <= size <= MOST_BATCH_L:
        unit = "L" if mass_kg is None else "kg"
        msg = f"{option}: value {size:g} {unit}, allowed {LEAST_BATCH_L:g} to {MOST_BATCH_L:g}"
        raise InputError(msg)


def _as_given(bench: Bench, made: Made) -> list[str]:
    """Say what a formula of materials leaves no choice about, and how far its pH is off."""
    t = bench.measure_temperature_c
    ph = float(made.mixture.solve(t).ph)
    window = f"{bench.low_ph:g} to {bench.high_ph:g}"
    within = "within" if bench.low_ph <= ph <= bench.high_ph else "outside"
    made_as_given = (
        "the formula is weighed as it is given: making it from acid and base forms "
        "together, or from one form with strong titrant, does not apply"
    )
    reads = (
        f"as given it reads pH {ph:.2f} at {t:g} C, {within} the window {window}; the "
        f"target is {bench.target_ph:.2f}"
    )
    return [made_as_given, reads]


def _sheet(bench: Bench, way: Way, batch_l: float, hand: InHand) -> WaySheet:
    made = way.made
    t = bench.measure_temperature_c
    solution = made.mixture.solve(t)
    readings = _readings(bench, made)
    meter = next(r.ph for r in readings if "prepare" in r.kinds)
    allowance = batch_errors.allowance(bench, made, batch_l, hand)
    lines = batch_steps.ordered(_lines(bench, way, batch_l, hand))
    sums = _sums(bench, made, lines, batch_l)
    if sums.water_g <= 0.0:
        msg = (
            f"{way.title}: what is weighed takes up more than the batch of "
            f"{batch_l:g} L ({sums.weighed_g:.4g} g), allowed room for water"
        )
        raise InputError(
            msg, hint="Take a stronger titrant (--strength) or a solid one."
        )
    warmer, electrode = batch_errors.temperature_errors(bench, made)
    return WaySheet(
        way,
        lines,
        batch_steps.steps(bench, lines, batch_l, sums.water_g, meter, allowance),
        readings,
        _storage_readings(bench),
        float(made.mixture.osmolality(t, solution, bench.law).osmolality_mosm_kg),
        1000.0 * float(capacity_mol_kg_ph(solution)) * float(made.mixture.water_kg_l),
        float(solution.ionic_strength_mol_kg),
        batch_errors.weighing_errors(bench, made),
        warmer,
        electrode,
        batch_errors.wrong_hydrates(bench, made),
        allowance,
        sums,
        batch_steps.cautions(bench, lines, allowance),
    )


def _lines(bench: Bench, way: Way, batch_l: float, hand: InHand) -> list[Line]:
    found = []
    sources = [
        (way.made.buffer_mmol_l, "buffer"),
        (way.made.others_mmol_l, "excipient"),
    ]
    for table, kind in sources:
        for key, mmol_l in table.items():
            material = bench.library.find_material(key)
            role: Role = "buffer" if kind == "buffer" else "excipient"
            if key in way.titrants and kind == "buffer":
                role = "titrant"
            elif key == bench.background.agent and kind == "excipient":
                role = "tonicity agent"
            grade = grade_of(bench.library, material, hand)
            mass = material.molar_mass_g_mol.value
            mmol = mmol_l * batch_l
            found.append(
                Line(
                    key,
                    material.name,
                    material.formula,
                    role,
                    grade,
                    mmol_l,
                    mmol,
                    mmol * mass / 1000.0,
                    grade.grams(mmol, mass),
                    grade.millilitres(mmol, mass),
                )
            )
    return found + [_drug_line(extra, batch_l) for extra in bench.background.extras]


def _drug_line(extra: Extra, batch_l: float) -> Line:
    """Return the drug as a line; its own counter-ions come with it."""
    grams = extra.mg_ml * batch_l
    grade = Grade(extra.name, "drug substance, as 100 %", extra.name, "solid")
    return Line(
        extra.name,
        "drug",
        "",
        "drug",
        grade,
        extra.mmol_l,
        extra.mmol_l * batch_l,
        grams,
        grams,
        None,
    )


def _readings(bench: Bench, made: Made) -> tuple[Reading, ...]:
    kinds = {t: list(k) for t, k in bench.temperatures_c.items()}
    kinds.setdefault(bench.measure_temperature_c, []).append("measure")
    kinds.setdefault(bench.prepare_temperature_c, []).append("prepare")
    kinds.setdefault(ROOM_C, [])
    at = np.array(sorted(kinds))
    ph = made.mixture.solve(at).ph
    warmer, cooler = slope_ends_c(at)
    rise = made.mixture.solve(warmer).ph - made.mixture.solve(cooler).ph
    slope = rise / (warmer - cooler)
    return tuple(
        Reading(float(t), tuple(dict.fromkeys(kinds[float(t)])), float(p), float(s))
        for t, p, s in zip(at, ph, slope, strict=True)
    )


def _storage_readings(bench: Bench) -> tuple[StorageReading, ...]:
    """Return what the meter should read to have the target at each storage."""
    found: list[StorageReading] = []
    if bench.given_mmol_l is not None:  # its pH is what it is
        return ()
    for t in bench.storage_temperatures_c:
        made = make_product(bench, temperature_c=t)
        at = np.array([bench.prepare_temperature_c, ROOM_C])
        prepare, room = made.mixture.solve(at).ph
        found.append(
            StorageReading(
                t,
                bench.target_ph,
                bench.prepare_temperature_c,
                float(prepare),
                float(room),
            )
        )
    return tuple(found)


def _dry_g_l(bench: Bench, made: Made) -> float:
    """Mass of everything dissolved, crystal water left out [g/L]."""
    total = sum(extra.mg_ml for extra in bench.background.extras)
    for key, mmol_l in made.materials_mmol_l.items():
        material = bench.library.find_material(key)
        dry = material.molar_mass_g_mol.value - WATER_G_MOL * material.waters
        total += mmol_l * dry / 1000.0
    return total


def _density_kg_l(bench: Bench, made: Made) -> float:
    """Estimate the density of the product from water and partial volumes."""
    return float(made.mixture.water_kg_l) + _dry_g_l(bench, made) / 1000.0


def _sums(
    bench: Bench, made: Made, lines: tuple[Line, ...], batch_l: float
) -> CheckSums:
    t = bench.measure_temperature_c
    solution = made.mixture.solve(t)
    litre = 1000.0 * float(made.mixture.water_kg_l)
    positive = negative = 0.0
    for p in (*made.mixture.dissolved(t, solution), *water_ions(solution)):
        charge = p.charge * float(p.molality_mol_kg) * litre
        positive += max(charge, 0.0)
        negative += max(-charge, 0.0)
    for j, ladder in enumerate(made.mixture.ladders):
        if ladder.is_macro_ion:
            charge = float(solution.charge_mol_kg[..., j]) * litre
            positive += max(charge, 0.0)
            negative += max(-charge, 0.0)
    density = _density_kg_l(bench, made)
    weighed = sum(line.weigh_g for line in lines)
    batch_g = 1000.0 * density * batch_l
    return CheckSums(
        positive, negative, weighed, batch_g - weighed, batch_g, density, batch_l
    )


def _mole_ratio(bench: Bench, made: Made) -> dict[str, float]:
    """Return the share of each species of a system of two."""
    if len(bench.system.species) < 2:
        return {}
    totals = {
        species: sum(
            bench.library.find_material(key).contents.get(species, 0.0) * amount
            for key, amount in made.buffer_mmol_l.items()
        )
        for species in bench.system.species
    }
    whole = sum(totals.values())
    return {name: amount / whole for name, amount in totals.items()}
