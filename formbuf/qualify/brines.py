"""Concentrated brines: osmotic coefficients, and short ways to a freezing path."""

from __future__ import annotations

import functools
from collections.abc import Iterable, Iterator, Mapping

import numpy as np

from formbuf.chemistry.freezing import freeze_path
from formbuf.chemistry.freezing_records import (
    Assumption,
    Brine,
    FreezingContents,
    FreezingPath,
    IonAmount,
    NeutralAmount,
)
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.pitzer import (
    Coefficient,
    Pair,
    PitzerModel,
    PitzerSet,
    osmotic_coefficient,
)
from formbuf.library import Library
from formbuf.product.composition import ladder_of
from formbuf.product.freezing_data import load_freezing_data
from formbuf.product.osmotics import osmotic_law
from formbuf.qualify.published import case, rows
from formbuf.qualify.records import Case, Group

KIND = "concentrated brines"
#: Cation, anion and the anion's charge of salts with osmotic coefficients.
SALTS = {
    "NaCl": ("sodium", "chloride", -1),
    "KCl": ("potassium", "chloride", -1),
    "NaH2PO4": ("sodium", "phosphate[-1]", -1),
    "KH2PO4": ("potassium", "phosphate[-1]", -1),
    "Na2HPO4": ("sodium", "phosphate[-2]", -2),
    "K2HPO4": ("potassium", "phosphate[-2]", -2),
    "HCl": ("hydrogen", "chloride", -1),
    "NaOH": ("sodium", "hydroxide", -1),
}
#: NaCl and KCl at 25 C: Kim & Frederick 1988, J. Chem. Eng. Data 33, 177.
CHLORIDES_25_C = {
    "sodium": (0.07831, 0.2677, 0.000864),
    "potassium": (0.04874, 0.2215, -0.00098),
}
#: Values of the same parameters computed elsewhere, and measured ones.
COMPUTED_LIMIT, MEASURED_LIMIT = 1e-4, 0.004


def groups(library: Library) -> Iterator[Group]:
    """Yield osmotic coefficients at 25 C, computed elsewhere and measured."""
    for status, title, limit, digits in (
        ("derived", "osmotic coefficients, same parameters", COMPUTED_LIMIT, 5),
        ("published", "osmotic coefficients, measured", MEASURED_LIMIT, 4),
    ):
        cases = osmotic_cases(library, status, limit)
        yield Group(f"brines {title}", KIND, title, "1", cases, digits=digits)


def osmotic_cases(library: Library, status: str, allowed: float) -> tuple[Case, ...]:
    """Return the osmotic coefficients of one status at 25 C."""
    parameters = at_25_c(library)
    cases = []
    for row in rows(library, "tonicity", kind="osmotic_coefficient", status=status):
        name = row.text("substance")
        if name in SALTS:
            m = row.figure("molality_mol_kg")
            found = salt_osmotic_coefficient(parameters, name, m)
            label, value = f"{name} {m:g} mol/kg", row.figure("value")
            cases.append(case(library, row, label, value, found, allowed))
    return tuple(cases)


def salt_osmotic_coefficient(
    parameters: PitzerSet, salt: str, molality_mol_kg: float
) -> float:
    """Return the osmotic coefficient of a single salt at 25 C."""
    cation, anion, charge = SALTS[salt]
    model = PitzerModel(parameters, [cation, anion], [1, charge])
    m = molality_mol_kg * np.array([-float(charge), 1.0])
    _, ln_water = model.evaluate(m, 25.0)
    return float(osmotic_coefficient(ln_water, m))


def at_25_c(library: Library) -> PitzerSet:
    """Return all salts of Kim & Frederick 1988 at 25 C, chlorides too."""
    parameters = load_freezing_data(library).brines["sodium"].parameters
    pairs = parameters.pairs if parameters is not None else ()
    constant = Coefficient.constant
    chlorides = (
        Pair(cation, "chloride", constant(b0), constant(b1), constant(c))
        for cation, (b0, b1, c) in CHLORIDES_25_C.items()
    )
    return PitzerSet("25 C", (*pairs, *chlorides))


@functools.cache
def ladder(library: Library, name: str) -> Ladder:
    """Return the ladder of a species."""
    return ladder_of(library.species[name])


def contents(
    library: Library,
    amounts_mol_kg: Mapping[str, float],
    ph: float | None = None,
    *,
    base: str = "sodium",
    prepare_temperature_c: float = 25.0,
    glass_transition_c: float | None = None,
) -> FreezingContents:
    """Return contents from names of components, each sorted to where it belongs.

    Parameters
    ----------
    library : Library
    amounts_mol_kg : mapping of str to float
        Species, ions and uncharged solutes [mol/kg of water].
    ph : float, optional
        As prepared; absent takes the ions as they are.
    base : str
        Cation of the titrant.
    prepare_temperature_c : float
    glass_transition_c : float, optional
    """
    species = [n for n in amounts_mol_kg if n in library.species]
    slopes = osmotic_law(library).neutrals
    return FreezingContents(
        tuple(ladder(library, n) for n in species),
        tuple(amounts_mol_kg[n] for n in species),
        tuple(
            IonAmount(n, library.ions[n].charge, x)
            for n, x in amounts_mol_kg.items()
            if n in library.ions
        ),
        tuple(
            NeutralAmount(n, x, slopes.get(n, 0.0))
            for n, x in amounts_mol_kg.items()
            if n in library.neutrals
        ),
        ph=ph,
        base_ion=(base, 1),
        prepare_temperature_c=prepare_temperature_c,
        glass_transition_c=glass_transition_c,
    )


def path(
    library: Library,
    amounts_mol_kg: Mapping[str, float],
    ph: float | None,
    temperatures_c: Iterable[float],
    *,
    model: str = "sodium",
    assumption: Assumption = "crystallising",
    with_brine: Brine | None = None,
) -> FreezingPath:
    """Follow a path with a brine of the library, titrated with that brine's cation."""
    return freeze_path(
        contents(library, amounts_mol_kg, ph, base=model),
        temperatures_c,
        assumption=assumption,
        brine=with_brine or load_freezing_data(library).brines[model],
    )
