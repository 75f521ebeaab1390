"""From a composition to the contents and the brine of a freezing calculation."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from formbuf.chemistry.freezing import EXTENDED_DEBYE_HUCKEL
from formbuf.chemistry.freezing_records import (
    Brine,
    FreezingContents,
    IonAmount,
    NeutralAmount,
)
from formbuf.constants import EXTRAPOLATION_LIMIT_C
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.composition import Mixture
from formbuf.product.freezing_data import ERROR_PH_MIXED, FreezingData

#: Temperatures at which paths are computed unless others are asked for, C.
USUAL_TEMPERATURES_C = (-0.5, -1.0, -2.0, -3.0, -5.0, -7.5, -10.0, -15.0, -20.0)
#: Ions and ladders that the brine parameters cover.
_BRINE_IONS = frozenset({"sodium", "potassium", "chloride"})
_BRINE_LADDER = "phosphate"
#: Other charged solutes may make up this share of the phosphate (judgement).
_MINOR_SHARE = 0.1
#: Share of the other cation above which a brine counts as mixed (judgement).
_MIXED_SHARE = 0.01
#: How far the onset of supersaturation can be trusted (misses in the tests).
WATCHED_NOTE = (
    "temperatures of supersaturation hold within 0.4 K for solids that dissolve to "
    "less than 3 mol/kg at 0 C; very soluble ones (citric acid, sodium acetate) come "
    "out up to 6 K too warm"
)


def freezing_temperatures(lowest_c: float) -> tuple[tuple[float, ...], str]:
    """Return the temperatures for a frozen storage temperature, and what to say.

    Parameters
    ----------
    lowest_c : float
        Coldest temperature asked for [C], 0 or below.

    Returns
    -------
    temperatures_c : tuple of float
        Down to ``lowest_c`` or -20 C, whichever is warmer.
    note : str
        Empty unless the answer ends above ``lowest_c``.

    Raises
    ------
    InputError
        Above 0 C or not finite.
    """
    if not -273.15 <= lowest_c <= 0.0:
        msg = f"frozen temperature {lowest_c:g} C, allowed -273.15 to 0 C"
        raise InputError(msg, hint="a product above 0 C is liquid: ask for its pH")
    end = max(lowest_c, EXTRAPOLATION_LIMIT_C)
    note = ""
    if lowest_c < EXTRAPOLATION_LIMIT_C:
        note = (
            f"computed to {EXTRAPOLATION_LIMIT_C:g} C only: pK is not extrapolated "
            f"to {lowest_c:g} C, where most products are solid or a glass"
        )
    return (*(t for t in USUAL_TEMPERATURES_C if t > end), end), note


def freezing_contents(
    library: Library,
    mixture: Mixture,
    ph: float,
    *,
    system: System | None = None,
    prepare_temperature_c: float = 25.0,
    osmotic_slopes: Mapping[str, float] | None = None,
    glass_transition_c: float | None = None,
) -> FreezingContents:
    """Turn one solved composition into the contents of a freezing calculation.

    Parameters
    ----------
    library : Library
    mixture : Mixture
        One state (scalar amounts), closed to gases.
    ph : float
        pH of the liquid at ``prepare_temperature_c``; the ion of the titrant is
        trimmed so that the freezing model starts at it.
    system : System, optional
        Gives the ions that are trimmed; sodium and chloride without it.
    osmotic_slopes : mapping of str to float, optional
        b of phi = 1 + b m of the neutral solutes [kg/mol].
    glass_transition_c : float, optional

    Raises
    ------
    InputError
        For several states at once or a composition open to a gas.
    """
    if np.size(mixture.water_kg_l) != 1:
        msg = f"freezing contents: {np.size(mixture.water_kg_l)} compositions, allowed one"
        raise InputError(msg)
    if mixture.open_components:
        msg = (
            f"freezing contents: open to {', '.join(mixture.open_components)}, allowed "
            "closed compositions"
        )
        raise InputError(msg, hint="freeze the closed composition")
    slopes = osmotic_slopes or {}
    totals = np.ravel(mixture.totals_mol_kg)
    ions = {name: float(np.ravel(x)[0]) for name, x in mixture.ions_mol_kg.items()}
    neutrals = {
        name: float(np.ravel(x)[0]) for name, x in mixture.neutrals_mol_kg.items()
    }
    ladders = [
        (ladder, float(total))
        for ladder, total in zip(mixture.ladders, totals, strict=True)
        if not ladder.is_macro_ion
    ]
    ions = _without_macro_ions(mixture, ions, prepare_temperature_c)
    return FreezingContents(
        tuple(ladder for ladder, _ in ladders),
        tuple(total for _, total in ladders),
        tuple(IonAmount(n, mixture.ion_charges[n], x) for n, x in ions.items()),
        tuple(NeutralAmount(n, x, slopes.get(n, 0.0)) for n, x in neutrals.items()),
        ph=ph,
        trim=True,
        prepare_temperature_c=prepare_temperature_c,
        base_ion=_titrant_ion(library, system.base_titrant if system else "", 1),
        acid_ion=_titrant_ion(library, system.acid_titrant if system else "", -1),
        glass_transition_c=glass_transition_c,
    )


def _without_macro_ions(
    mixture: Mixture, ions: dict[str, float], temperature_c: float
) -> dict[str, float]:
    """Leave a protein out of the freezing brine together with its counter-ions."""
    macro = [j for j, ladder in enumerate(mixture.ladders) if ladder.is_macro_ion]
    if not macro:
        return ions
    solved = mixture.solve(temperature_c).charge_mol_kg
    charge = float(np.ravel(solved[..., macro].sum(axis=-1))[0])
    ion = "chloride" if charge > 0.0 else "sodium"
    left = {**ions, ion: max(ions.get(ion, 0.0) - abs(charge), 0.0)}
    return {name: amount for name, amount in left.items() if amount > 1e-6}


def _titrant_ion(library: Library, material: str, sign: int) -> tuple[str, int]:
    if material:
        for name in library.find_material(material).contents:
            ion = library.ions.get(name)
            if ion is not None and ion.charge * sign > 0:
                return name, ion.charge
    return ("sodium", 1) if sign > 0 else ("chloride", -1)


def choose_brine(
    data: FreezingData, contents: FreezingContents
) -> tuple[Brine, str | None, tuple[str, ...]]:
    """Return the activity model of a composition, its label and what to say of it.

    The label is ``sodium`` or ``potassium`` where both bounds are quantified, None
    where only the supersaturated path is given.
    """
    ladders = dict(
        zip((x.name for x in contents.ladders), contents.totals_mol_kg, strict=True)
    )
    phosphate = ladders.pop(_BRINE_LADDER, 0.0)
    ions = {i.name: i.mol_kg for i in contents.ions}
    foreign = ladders | {k: x for k, x in ions.items() if k not in _BRINE_IONS}
    others = sum(foreign.values())
    sodium, potassium = ions.get("sodium", 0.0), ions.get("potassium", 0.0)
    if phosphate == 0.0 or others > _MINOR_SHARE * phosphate:
        plain = replace(EXTENDED_DEBYE_HUCKEL, watched=data.watched)
        if phosphate == 0.0:
            return plain, None, (WATCHED_NOTE,)
        return plain, None, (WATCHED_NOTE, _why_not_brine(foreign, phosphate))
    label = "sodium" if sodium >= potassium else "potassium"
    brine, notes = data.brines[label], []
    if min(sodium, potassium) > _MIXED_SHARE * max(sodium, potassium):
        brine = replace(brine, error_ph=ERROR_PH_MIXED)
        notes.append(
            f"sodium and potassium together: the {label} set is used for all pairs, "
            "double salts are left out"
        )
    if others > 0.0:
        notes.append("other charged solutes enter without parameters of their own")
    if any(n.mol_kg > 0.0 for n in contents.neutrals):
        notes.append("sugars and polyols act on the water only, not on single ions")
    return brine, label, tuple(notes)


def _why_not_brine(foreign: Mapping[str, float], phosphate: float) -> str:
    """Say why a phosphate buffer is not followed with its brine model."""
    most = max(foreign, key=lambda name: foreign[name])
    share = sum(foreign.values()) / phosphate
    return (
        "the brine model of phosphate, which lets its salts crystallise, is left out: "
        f"charged solutes without parameters, most of all {most.replace('_', ' ')}, "
        f"come to {100.0 * share:.0f} % of the phosphate, allowed {100.0 * _MINOR_SHARE:.0f} %"
    )
