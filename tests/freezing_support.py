"""What the freezing tests share: brines of the library and short ways to a path."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from functools import cache

from reference_tables import library

from formbuf.chemistry.freezing_records import (
    Assumption,
    Brine,
    FreezingContents,
    FreezingPath,
)
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.pitzer import Coefficient, Pair, PitzerSet
from formbuf.chemistry.solids import Surroundings, anchor_solubility, fit_solubility
from formbuf.product.composition import ladder_of
from formbuf.product.freezing_data import (
    FreezingData,
    bare_solids,
    load_freezing_data,
    solubility_rows,
    surroundings,
)
from formbuf.qualify import brines

DSP = "disodium_hydrogen_phosphate_dodecahydrate"
MSP = "sodium_dihydrogen_phosphate_dihydrate"
MKP = "potassium_dihydrogen_phosphate"
DKP = "dipotassium_hydrogen_phosphate_hexahydrate"


def data() -> FreezingData:
    """The freezing tables of the checkout."""
    return load_freezing_data(library())


def brine(model: str) -> Brine:
    """The sodium or the potassium brine."""
    return data().brines[model]


@cache
def ladder(name: str) -> Ladder:
    """The ladder of a species."""
    return ladder_of(library().species[name])


def contents(
    amounts_mol_kg: Mapping[str, float],
    ph: float | None = None,
    *,
    base: str = "sodium",
    prepare_temperature_c: float = 25.0,
    glass_transition_c: float | None = None,
) -> FreezingContents:
    """Contents from component names: ladders, strong ions and sugars sort themselves."""
    return brines.contents(
        library(),
        amounts_mol_kg,
        ph,
        base=base,
        prepare_temperature_c=prepare_temperature_c,
        glass_transition_c=glass_transition_c,
    )


def path(
    amounts_mol_kg: Mapping[str, float],
    ph: float | None,
    temperatures_c: Iterable[float],
    *,
    model: str = "sodium",
    assumption: Assumption = "crystallising",
    with_brine: Brine | None = None,
) -> FreezingPath:
    """A path with one of the library's brines; titrated with that brine's cation."""
    return brines.path(
        library(),
        amounts_mol_kg,
        ph,
        temperatures_c,
        model=model,
        assumption=assumption,
        with_brine=with_brine,
    )


def with_changes(
    parameters: PitzerSet,
    *,
    theta: Mapping[tuple[str, str], float] | None = None,
    psi: Mapping[tuple[str, str, str], float] | None = None,
    lambdas: Mapping[tuple[str, str], float] | None = None,
    pairs: Iterable[Pair] = (),
) -> PitzerSet:
    """A set of parameters with some of them replaced or added."""
    changed = {(p.cation, p.anion): p for p in parameters.pairs}
    changed |= {(p.cation, p.anion): p for p in pairs}
    constant = Coefficient.constant
    return PitzerSet(
        f"{parameters.name}, changed",
        tuple(changed.values()),
        {**parameters.theta, **{k: constant(v) for k, v in (theta or {}).items()}},
        {**parameters.psi, **{k: constant(v) for k, v in (psi or {}).items()}},
        {**parameters.lambdas, **{k: constant(v) for k, v in (lambdas or {}).items()}},
    )


def refitted(
    model: str,
    parameters: PitzerSet,
    *,
    enthalpies_kj_mol: Mapping[str, float] | None = None,
) -> Brine:
    """The brine of a model with other parameters and its solids fitted to them."""
    around = surroundings(library(), model)
    around = Surroundings(parameters, around.ladders, around.ion_charges)
    solids = []
    for solid, row in bare_solids(library(), model):
        anchor = row.number("anchor_temperature_c")
        if anchor is None:
            rows = solubility_rows(library(), solid.id, "fit")
            solids.append(fit_solubility(solid, rows, around).solid)
        else:
            enthalpy = (enthalpies_kj_mol or {}).get(
                solid.id, row.figure("dissolution_enthalpy_kj_mol")
            )
            solids.append(anchor_solubility(solid, anchor, enthalpy, around).solid)
    return replace(brine(model), parameters=parameters, solids=tuple(solids))
