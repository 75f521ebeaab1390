"""Freezing points, eutectics and the measured pH of frozen buffers."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace

import numpy as np

from formbuf.chemistry.freezing import EXTENDED_DEBYE_HUCKEL, freeze_path
from formbuf.chemistry.freezing_records import (
    FreezingContents,
    FreezingPath,
    FreezingPoint,
    IonAmount,
    Solid,
)
from formbuf.errors import ConvergenceError
from formbuf.library import Library
from formbuf.library.tables import Row
from formbuf.product import freezing_schemas as schemas
from formbuf.product.freezing_data import load_freezing_data, observations
from formbuf.qualify.brines import ladder, path
from formbuf.qualify.published import case, rows
from formbuf.qualify.records import Case, Group

POINTS = "freezing points"
EUTECTICS = "eutectics"
FROZEN = "pH of frozen buffers"
DOWN = tuple(np.arange(-0.5, -24.1, -0.5).tolist())
DSP = "disodium_hydrogen_phosphate_dodecahydrate"
#: Water of a litre of dilute solution [kg].
WATER_KG_L = 0.997

#: On the binary line of each salt [mol/kg], its brine and the largest miss [K].
BINARY: Mapping[str, tuple[dict[str, float], str, float]] = {
    "na2hpo4_eutectic": ({"sodium": 0.1, "phosphate": 0.05}, "sodium", 0.2),
    "nah2po4_eutectic": ({"sodium": 0.1, "phosphate": 0.1}, "sodium", 0.4),
    "kh2po4_eutectic": ({"potassium": 0.1, "phosphate": 0.1}, "potassium", 0.2),
    "nacl_eutectic": ({"sodium": 0.1, "chloride": 0.1}, "sodium", 0.3),
    "kcl_eutectic": ({"potassium": 0.1, "chloride": 0.1}, "sodium", 0.2),
}


@dataclass(frozen=True, slots=True)
class Ternary:
    """A ternary eutectic: points of the table and largest misses."""

    point: str
    ph_point: str
    temperature_k: float
    ph: float
    total: float
    ratio: float
    ratio_known_miss: str
    total_known_miss: str = ""


TERNARY = {
    "sodium": Ternary(
        "na_phosphate_ternary",
        "na_phosphate_ternary_ph",
        0.5,
        0.3,
        0.2,
        1.0,
        "acid/base of the sodium ternary liquid comes out near 440 against 57: no "
        "parameter for H2PO4 with HPO4 is published, and one fitted to this single "
        "recalled ratio would put the measured frozen pH of an 8 mmol/L buffer outside "
        "the bounds",
    ),
    "potassium": Ternary(
        "k_phosphate_ternary",
        "k_phosphate_ternary",
        3.0,
        0.5,
        0.1,
        0.2,
        "the potassium ternary liquid comes out at acid/base 0.13 and 3.1 mol/kg "
        "against 0.30 and 3.7, and 2.4 K too warm, for the same missing parameter",
        "the potassium ternary liquid comes out at 3.1 mol/kg against 3.7, 2.4 K too "
        "warm, for the same missing parameter",
    ),
}
COMPOSITION_POINTS = ("na2hpo4_eutectic", "kh2po4_eutectic")
COMPOSITION_LIMIT = 0.06
#: Salts with freezing points: amounts per mole, brine and why a series misses.
FREEZING_SALTS: Mapping[str, tuple[dict[str, float], str, str]] = {
    "Sodium chloride": ({"sodium": 1.0, "chloride": 1.0}, "sodium", ""),
    "NaCl": (
        {"sodium": 1.0, "chloride": 1.0},
        "sodium",
        (
            "the 1956 row at 0.75 mol/kg (2.60 K) contradicts the 2021 table, which gives "
            "2.54 K there by interpolation"
        ),
    ),
    "Potassium chloride": ({"potassium": 1.0, "chloride": 1.0}, "sodium", ""),
    "KCl": (
        {"potassium": 1.0, "chloride": 1.0},
        "sodium",
        (
            "the 1956 row at 0.25 mol/kg (0.86 K) contradicts the 2021 table, which gives "
            "0.84 K there by interpolation"
        ),
    ),
    "Sucrose": ({"sucrose": 1.0}, "sodium", ""),
    "Sodium hydrogen phosphate": ({"sodium": 2.0, "phosphate": 1.0}, "sodium", ""),
    "Potassium hydrogen phosphate": (
        {"potassium": 2.0, "phosphate": 1.0},
        "potassium",
        "",
    ),
}
PHOSPHATE_HIGHEST_K = 0.25 * 1.858
#: Solids that are only watched, their eutectic and the largest miss [K].
WATCHED: Mapping[str, tuple[str, float | None]] = {
    "boric_acid": ("boric_acid_eutectic", 0.4),
    "glycine": ("glycine_eutectic", 0.4),
    "sodium_tetraborate_decahydrate": ("borax_eutectic", 0.4),
    "sodium_hydrogen_carbonate": ("nahco3_eutectic", 0.4),
    "sodium_carbonate_decahydrate": ("na2co3_eutectic", 0.4),
    "citric_acid_monohydrate": ("citric_acid_eutectic", None),
    "sodium_acetate_trihydrate": ("na_acetate_eutectic", None),
}
#: Onset of crystallisation of 50 and 100 mmol/kg sodium phosphate pH 7.4 [C].
ONSET_LOW_C, ONSET_HIGH_C = -1.0, -0.4
#: Observations of sodium phosphate at -10 C that must lie between the two paths.
BETWEEN = (
    "gomez_50_74",
    "gomez_100_74",
    "gomez_8_74",
    "gomez_8_57",
    "gomez_100_57",
)


def groups(library: Library) -> Iterator[Group]:
    """Yield freezing points, eutectics and frozen buffers."""
    for substance in FREEZING_SALTS:
        yield from freezing_points(library, substance)
    table = {row.text("id"): row for row in library.read_table(schemas.PHASE_POINTS)}
    yield binary_eutectics(library, table)
    yield binary_compositions(library, table)
    for model in TERNARY:
        yield from ternary_eutectics(library, table, model)
    yield from watched_eutectics(library, table)
    yield onsets(library)
    yield between_the_paths(library)


def eutectic_c(run: FreezingPath) -> float:
    """Return the temperature at which the last liquid goes."""
    event = run.event("eutectic")
    if event is None:
        msg = f"no eutectic was found down to {DOWN[-1]:g} C"
        raise ConvergenceError(msg)
    return event.temperature_c


def first_ice_c(run: FreezingPath) -> float:
    """Return the temperature at which ice first forms."""
    event = run.event("first ice")
    if event is None:
        msg = "no ice was found on a freezing path"
        raise ConvergenceError(msg)
    return event.temperature_c


def freezing_points(library: Library, substance: str) -> Iterator[Group]:
    """Yield the published freezing-point depressions of one substance.

    A phosphate is judged up to 0.25 osmol/kg, and shown above; the others are judged
    over the whole series.
    """
    per_mole, model, known_miss = FREEZING_SALTS[substance]
    is_phosphate = "phosphate" in per_mole
    judged: list[Case] = []
    shown: list[Case] = []
    for row in rows(
        library, "tonicity", kind="freezing", use="test", substance=substance
    ):
        m = row.number("molality_mol_kg")
        if not m:
            continue
        amounts = {name: count * m for name, count in per_mole.items()}
        run = path(
            library, amounts, None, [-18.0], model=model, assumption="supersaturated"
        )
        published = row.figure("value")
        allowed: float | None = max(0.02 * published, 0.01)
        if is_phosphate:
            wide = max(0.04 * published, 0.03)
            allowed = wide if published <= PHOSPHATE_HIGHEST_K else None
        label = f"{substance} {m:g} mol/kg"
        found = case(library, row, label, published, -first_ice_c(run), allowed)
        (shown if allowed is None else judged).append(found)
    key = f"freezing points {substance}"
    yield Group(key, POINTS, substance, "K", tuple(judged), known_miss=known_miss)
    if shown:
        above = f"{substance}, above 0.25 osmol/kg"
        yield Group(f"freezing points {above}", POINTS, above, "K", tuple(shown))


def binary_run(library: Library, point: str) -> FreezingPath:
    """Return the path of a salt alone down to its eutectic."""
    amounts, model, _ = BINARY[point]
    return path(library, amounts, None, DOWN, model=model)


def binary_eutectics(library: Library, table: Mapping[str, Row]) -> Group:
    """Return the eutectics of ice with one salt."""
    cases = []
    for point, (_, _, allowed) in BINARY.items():
        row = table[point]
        found = eutectic_c(binary_run(library, point))
        published = row.figure("temperature_c")
        cases.append(case(library, row, row.text("system"), published, found, allowed))
    return _group("binary eutectics", "C", cases)


def binary_compositions(library: Library, table: Mapping[str, Row]) -> Group:
    """Return the phosphate in the liquid of binary eutectics."""
    cases = []
    for point in COMPOSITION_POINTS:
        amounts, model, _ = BINARY[point]
        end = eutectic_c(binary_run(library, point))
        liquid = path(library, amounts, None, [end + 1e-4], model=model).points[0]
        row = table[point]
        published = row.figure("composition_mol_kg")
        found = liquid.liquid_mol_kg["phosphate"]
        allowed = COMPOSITION_LIMIT * published
        cases.append(case(library, row, row.text("system"), published, found, allowed))
    return _group("composition of binary eutectics", "mol/kg", cases)


def ternary_liquid(library: Library, model: str) -> tuple[float, float, FreezingPoint]:
    """Return temperature, pH and last liquid of the ternary eutectic of a phosphate."""
    amounts = {"phosphate": 0.1}
    run = path(library, amounts, 7.0, DOWN, model=model)
    end = eutectic_c(run)
    event = run.event("eutectic")
    if event is None or event.ph is None:
        msg = f"no pH at the ternary eutectic of {model} phosphate"
        raise ConvergenceError(msg)
    last = path(library, amounts, 7.0, [end + 1e-4], model=model).points[0]
    return end, event.ph, last


def ternary_eutectics(
    library: Library, table: Mapping[str, Row], model: str
) -> Iterator[Group]:
    """Yield temperature, pH and composition of a ternary eutectic."""
    wanted = TERNARY[model]
    end, ph, liquid = ternary_liquid(library, model)
    row, ph_row = table[wanted.point], table[wanted.ph_point]
    title = f"ternary eutectic of {model} phosphate"
    published = row.figure("temperature_c")
    cases = [case(library, row, title, published, end, wanted.temperature_k)]
    yield _group(f"{title}, temperature", "C", cases)
    cases = [case(library, ph_row, title, ph_row.figure("ph"), ph, wanted.ph)]
    yield _group(f"{title}, pH", "pH", cases)
    total = row.figure("composition_mol_kg")
    found = liquid.liquid_mol_kg["phosphate"]
    cases = [case(library, row, title, total, found, wanted.total * total)]
    known = wanted.total_known_miss
    yield _group(f"{title}, total phosphate", "mol/kg", cases, known_miss=known)
    species = liquid.species_mol_kg
    ratio = species["phosphate[-1]"] / species["phosphate[-2]"]
    published = row.figure("acid_base_ratio")
    cases = [case(library, row, title, published, ratio, wanted.ratio * published)]
    known = wanted.ratio_known_miss
    yield _group(f"{title}, acid to base", "1", cases, known_miss=known)


def watched_eutectics(library: Library, table: Mapping[str, Row]) -> Iterator[Group]:
    """Yield the onset of supersaturation of solids without brine parameters."""
    watched = {s.id: s for s in load_freezing_data(library).watched}
    for is_tested, title in (
        (True, "onset of supersaturation, sparingly soluble"),
        (False, "onset of supersaturation, concentrated liquids"),
    ):
        cases = []
        for name, (point, allowed) in WATCHED.items():
            if (allowed is not None) is is_tested:
                found = _supersaturation_c(library, watched[name])
                row = table[point]
                published = row.figure("temperature_c")
                label = row.text("system")
                cases.append(case(library, row, label, published, found, allowed))
        yield _group(title, "C", cases)


def _supersaturation_c(library: Library, solid: Solid) -> float:
    """Return where a solution of one solid, 0.05 mol/kg, becomes supersaturated."""
    species = [c for c in solid.components if c in library.species]
    dissolved = FreezingContents(
        tuple(ladder(library, c) for c in species),
        tuple(0.05 * solid.components[c] for c in species),
        tuple(
            IonAmount(c, library.ions[c].charge, 0.05 * n)
            for c, n in solid.components.items()
            if c in library.ions
        ),
    )
    model = replace(EXTENDED_DEBYE_HUCKEL, watched=(solid,))
    run = freeze_path(dissolved, DOWN, assumption="supersaturated", brine=model)
    event = run.event("supersaturated", solid.id)
    if event is None:
        msg = f"{solid.id} does not become supersaturated down to {DOWN[-1]:g} C"
        raise ConvergenceError(msg)
    return event.temperature_c


def onsets(library: Library) -> Group:
    """Return the onset of crystallisation of sodium phosphate; the nearest end allowed.

    Seen between -0.5 and -4.0 C on cooling (Gomez, Pikal & Rodriguez-Hornedo 2001,
    Pharm. Res. 18, 90); at equilibrium it begins at the warm end.
    """
    cases = []
    for amount in (0.05, 0.1):
        run = path(library, {"phosphate": amount}, 7.4, DOWN)
        event = run.event("onset", DSP)
        if event is None:
            msg = f"{DSP} does not crystallise down to {DOWN[-1]:g} C"
            raise ConvergenceError(msg)
        found = event.temperature_c
        nearest = float(np.clip(found, ONSET_LOW_C, ONSET_HIGH_C))
        label = f"sodium phosphate {1000 * amount:g} mmol/kg pH 7.4"
        reference = library.source("gomez_2001")
        source = f"{reference.authors} {reference.year}"
        cases.append(Case(label, nearest, found, 0.0, source, "derived"))
    title = f"onset of crystallisation, {ONSET_LOW_C:g} to {ONSET_HIGH_C:g} C"
    return Group(f"freezing {title}", FROZEN, title, "C", tuple(cases))


def between_the_paths(library: Library) -> Group:
    """Return the measured pH at -10 C beside the nearest pH between the two paths."""
    seen = {o.id: o for o in observations(library)}
    rows_ = {r.text("id"): r for r in library.read_table(schemas.OBSERVATIONS)}
    cases = []
    for name in BETWEEN:
        numbers = seen[name].numbers
        amount = numbers["concentration_mmol_l"] / 1000.0 / WATER_KG_L
        low, high = bounds(library, {"phosphate": amount}, numbers["ph_initial"], -10.0)
        measured = numbers["ph_frozen"]
        found = float(np.clip(measured, low, high))
        allowed = numbers.get("ph_frozen_error", 0.0)
        label = (
            f"{numbers['concentration_mmol_l']:g} mmol/L pH {numbers['ph_initial']:g} "
            f"at -10 C, paths {low:.2f} and {high:.2f}"
        )
        cases.append(case(library, rows_[name], label, measured, found, allowed))
    title = "measured pH of sodium phosphate lies between the two paths"
    return Group(f"freezing {title}", FROZEN, title, "pH", tuple(cases))


def bounds(
    library: Library, amounts: Mapping[str, float], ph: float, temperature_c: float
) -> tuple[float, float]:
    """Return the pH of the crystallising path, metastable below its eutectic, and of the other."""
    low = path(library, amounts, ph, [temperature_c])
    point = low.metastable[0] if low.metastable else low.points[0]
    high = path(
        library, amounts, ph, [temperature_c], assumption="supersaturated"
    ).points[0]
    if point.ph is None or high.ph is None:
        msg = f"no pH of the liquid at {temperature_c:g} C"
        raise ConvergenceError(msg)
    return point.ph, high.ph


def _group(
    title: str, unit: str, cases: Iterable[Case], *, known_miss: str = ""
) -> Group:
    key = f"freezing {title}"
    return Group(key, EUTECTICS, title, unit, tuple(cases), known_miss=known_miss)
