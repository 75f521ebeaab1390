"""Freezing and thawing of several systems side by side, or of one composition.

Each system gets both bounding paths (one where nothing can be quantified), its pH as
a liquid, and the published observations. A brief is answered with its shortlisted
systems, as made; the quick form is a brief of a few lines with one formula in it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from formbuf.advice.case import Case, case_for
from formbuf.advice.evaluate import evaluate, single
from formbuf.advice.freeze_thaw_results import (
    ACCIDENT_C,
    FreezeThaw,
    QuickQuestion,
)
from formbuf.advice.freeze_thaw_system import Made, made_of, system_of, trace_of
from formbuf.advice.frozen import lowest_frozen_c
from formbuf.advice.shortlist import shortlist
from formbuf.chemistry.freezing_records import LOWEST_C
from formbuf.constants import EXTRAPOLATION_LIMIT_C, LIQUID_HIGH_C
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.product.brief import Brief, Origin, brief_from_mapping, complete
from formbuf.product.freezing_assess import assess_freezing
from formbuf.product.freezing_contents import freezing_contents, freezing_temperatures
from formbuf.product.overlay_changes import overlay_notice
from formbuf.product.recipe import make

#: Liquid temperature shown beside the one at which pH is set, quick form [C].
REFRIGERATED_C = 5.0
#: pH of the quick form is as set at this temperature [C].
SET_AT_C = 25.0


def compare_freezing(
    brief: Brief,
    library: Library,
    *,
    to_c: float | None = None,
    at_c: Sequence[float] = (),
) -> FreezeThaw:
    """Freeze and thaw every shortlisted system of a brief.

    Parameters
    ----------
    brief : Brief
    library : Library
    to_c : float, optional
        Coldest temperature [C], -30 to 0, instead of the brief's own.
    at_c : sequence of float
        Further temperatures, frozen or liquid [C].

    Returns
    -------
    FreezeThaw
        Without systems where none is acceptable.

    Raises
    ------
    InputError
        As `shortlist`, and for a temperature that is not allowed.
    ConvergenceError
        When a state is not solved within its cap.
    """
    cold, warm = _split(at_c)
    if to_c is not None:
        _check_frozen(to_c, "--to")
    completed = complete(brief, library)
    case = case_for(completed)
    own = lowest_frozen_c(case)
    lowest = to_c if to_c is not None else ACCIDENT_C if own is None else own
    temperatures = _path_temperatures(lowest, cold)
    result = shortlist(brief, library)
    systems, left_out = [], []
    for c in result.ranked:
        if c.mixture is None or not c.mixture.ladders:
            left_out.append(f"{c.name}: nothing in it is known to bind protons")
            continue
        made = made_of(c)
        frozen = trace_of(case, made, lowest)(temperatures)
        if not frozen.assessment.paths:
            what = frozen.assessment
            left_out.append(f"{c.name}: {what.freezing_class}, {what.reason}")
            continue
        systems.append(
            system_of(case, made, frozen, lowest, warm, is_frozen=own is not None)
        )
    stated = [t for t in completed.brief.temperatures_c("frozen") if t in temperatures]
    return FreezeThaw(
        case.library,
        case.brief,
        completed.assumptions,
        False,
        own is not None,
        lowest,
        temperatures,
        _shown(temperatures, [*stated, *cold]),
        tuple(systems),
        tuple(left_out),
        result.warnings,
    )


def freeze_composition(
    question: QuickQuestion, library: Library, *, at_c: Sequence[float] = ()
) -> FreezeThaw:
    """Freeze and thaw one composition.

    Parameters
    ----------
    question : QuickQuestion
    library : Library
    at_c : sequence of float
        Further temperatures, frozen or liquid [C].

    Returns
    -------
    FreezeThaw
        With one system.

    Raises
    ------
    InputError
        For an unknown system, a value that is not allowed, or a pH that the
        materials cannot give; the message names the option.
    ConvergenceError
        When a state is not solved within its cap.
    """
    cold, warm = _split(at_c)
    _check_frozen(question.to_c, "--to")
    completed = complete(_brief_of(question), library)
    case = case_for(completed)
    system = case.library.get_system(case.brief.candidate[0].system or "")
    if not system.species:
        msg = f"--system: {system.id} holds no buffer, allowed a buffer system"
        raise InputError(
            msg, hint="Without a buffer, the uptake of ions by ice decides."
        )
    recipe = make(
        case.library,
        system,
        question.concentration_mmol_l,
        question.ph,
        SET_AT_C,
        case.background,
        case.law,
    )
    buffer, fill = single(recipe)
    product = evaluate(
        case.library,
        case.brief,
        buffer,
        fill,
        recipe.mixture,
        system.species,
        None,
        case.law,
    )
    if "sodium" not in recipe.mixture.ions_mol_kg:
        # the contents are stated in full: no sodium comes from elsewhere
        case = replace(case, brief=replace(case.brief, exclude=("sodium",)))
    temperatures = _path_temperatures(question.to_c, cold)
    made = Made(system.id, system.name, system, product, question.concentration_mmol_l)
    frozen = trace_of(case, made, question.to_c)(temperatures)
    if not frozen.assessment.paths:
        _raise_refusal(case, made, question.to_c, temperatures)
    one = system_of(case, made, frozen, question.to_c, warm, is_frozen=True)
    liquid = (p for p in one.liquid if p.kinds != ("body",) or p.temperature_c in warm)
    one = replace(one, liquid=tuple(liquid))
    return FreezeThaw(
        case.library,
        case.brief,
        (),
        True,
        True,
        question.to_c,
        temperatures,
        temperatures,
        (one,),
        warnings=tuple(filter(None, (overlay_notice(library),))),
    )


def _brief_of(question: QuickQuestion) -> Brief:
    """Write the quick form as a brief; messages name its options."""
    options: dict[tuple[str | int, ...], str] = {
        ("candidate", 0, "system"): "--system",
        ("candidate", 0, "concentration_mmol_l"): "--concentration",
        ("ph", "target"): "--ph",
        ("storage", 0, "temperature_c"): "--to",
    }
    excipients: list[dict[str, Any]] = []
    for position, (option, (material, unit, amount)) in enumerate(
        question.added.items()
    ):
        excipients.append({"material": material, unit: amount})
        options["excipient", position] = option
    data = {
        "product": {"route": "intravenous", "form": "frozen"},
        "ph": {
            "target": question.ph,
            "measure_temperature_c": SET_AT_C,
            "prepare_temperature_c": SET_AT_C,
        },
        "storage": [
            {"temperature_c": question.to_c, "state": "frozen"},
            {"temperature_c": REFRIGERATED_C, "kind": "use", "state": "liquid"},
        ],
        "tonicity": {"fill": False},
        "excipient": excipients,
        "candidate": [
            {
                "system": question.system,
                "concentration_mmol_l": question.concentration_mmol_l,
            }
        ],
    }
    return brief_from_mapping(data, origin=Origin("options", options=options))


def _raise_refusal(
    case: Case, made: Made, lowest_c: float, temperatures_c: tuple[float, ...]
) -> None:
    """Let the model say why it has no path, with its own error.

    Raises
    ------
    InputError, ConvergenceError
        Whichever the model raised.
    """
    contents = freezing_contents(
        case.library,
        made.product.mixture,
        case.brief.ph.target,
        system=made.system,
        prepare_temperature_c=SET_AT_C,
        osmotic_slopes=case.law.neutrals,
    )
    assess_freezing(
        case.library,
        made.system,
        contents,
        lowest_c=lowest_c,
        temperatures_c=temperatures_c,
    )
    msg = f"{made.system.id}: no freezing path, allowed a composition that has one"
    raise InputError(msg)


def _check_frozen(temperature_c: float, option: str) -> None:
    if LOWEST_C <= temperature_c <= 0.0:
        return
    if not math.isfinite(temperature_c):
        msg = (
            f"{option}: {temperature_c} is no temperature, allowed {LOWEST_C:g} to 0 C"
        )
        raise InputError(msg)
    msg = f"{option}: {temperature_c:g} C"
    if temperature_c > 0.0:
        msg += f" is above freezing, allowed {LOWEST_C:g} to 0 C"
        raise InputError(
            msg, hint=f"For the pH of the liquid, add --at {temperature_c:g}."
        )
    msg += f" is below the data, allowed {LOWEST_C:g} to 0 C"
    raise InputError(
        msg,
        hint=f"Ask for --to {EXTRAPOLATION_LIMIT_C:g}: pH ends there, colder samples "
        "are mostly solid or a glass.",
    )


def _split(at_c: Sequence[float]) -> tuple[list[float], list[float]]:
    """Part the temperatures asked for into cold (below 0 C) and liquid ones."""
    for t in at_c:
        if not LOWEST_C <= t <= LIQUID_HIGH_C:
            msg = f"--at: {t:g} C, allowed {LOWEST_C:g} to {LIQUID_HIGH_C:g} C"
            raise InputError(msg)
    return [t for t in at_c if t < 0.0], [t for t in at_c if t >= 0.0]


def _path_temperatures(lowest_c: float, cold_c: Sequence[float]) -> tuple[float, ...]:
    """Return the temperatures of the paths, falling, with those asked for."""
    usual, _ = freezing_temperatures(lowest_c)
    wanted = {*usual, *cold_c}
    if lowest_c >= LOWEST_C:
        wanted.add(lowest_c)
    return tuple(sorted(wanted, reverse=True))


def _shown(
    temperatures_c: tuple[float, ...], asked: Sequence[float]
) -> tuple[float, ...]:
    """Return what a table of several systems has room for: way stations and the end."""
    kept = {*asked, -5.0, -10.0, max(min(temperatures_c), EXTRAPOLATION_LIMIT_C)}
    return tuple(t for t in temperatures_c if t in kept)
