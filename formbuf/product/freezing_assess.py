"""What freezing does to the pH of one composition, with evidence and class.

Sodium and potassium phosphate, with or without their chlorides, are quantified by
two bounding paths. Every other composition gets the supersaturated path with its
assumption, the published observations and the class they support; where there is
no evidence the class is ``unknown``.

The class goes by what freezing adds: the pH of a path against the same liquid
cooled without ice. The drift of pK on cooling, which frozen and unfrozen liquid
share, is given beside it.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import Any

from formbuf.chemistry.freezing import freeze_path, unfrozen_ph
from formbuf.chemistry.freezing_prepare import Prepared, let_solids_form, prepare
from formbuf.chemistry.freezing_records import (
    HIGHEST_C,
    Assumption,
    Brine,
    FreezingContents,
    FreezingPath,
)
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.freezing_contents import (
    choose_brine,
    freezing_contents,
    freezing_temperatures,
)
from formbuf.product.freezing_data import (
    FreezingClass,
    Observation,
    load_freezing_data,
    observations,
)
from formbuf.product.freezing_schemas import CLASSES

__all__ = [
    "FreezingAssessment",
    "assess_freezing",
    "class_of",
    "evidence_of",
    "freezing_contents",
    "freezing_temperatures",
    "lowest_computed_c",
    "where_samples_fall",
]

#: Limits of the classes, pH (design of the tool; judgement).
NEGLIGIBLE_BELOW, SEVERE_ABOVE = 0.3, 1.0
#: Amorphous sugar that holds back crystallisation: % w/v, and ratio by mass.
SUGAR_PERCENT, SUGAR_TO_BUFFER = 5.0, 5.0
DILUTE_MMOL_L, CONCENTRATED_MMOL_L = 10.0, 50.0
_PARAMETER_SOURCE = {
    "sodium": "kim_frederick_1988",
    "potassium": "pitzer_mayorga_1973",
}
#: From the least to the most worrying, for systems of several species.
_WORRY = ("negligible", "moderate", "unknown", "sources disagree", "severe")


@dataclass(frozen=True, slots=True)
class FreezingAssessment:
    """What freezing does to one composition.

    Attributes
    ----------
    system : str
    freezing_class : str
        ``negligible`` (below 0.3), ``moderate`` (0.3 to 1), ``severe`` (above 1),
        ``sources disagree``, ``unknown``.
    basis : str
        ``derived`` where computed from bounding paths, else that of the evidence.
    reason : str
    sources : tuple of str
    quantified : bool
        Whether both bounds are given with an error.
    paths : tuple of FreezingPath
        One or two.
    freezing_shift : float or None
        Largest difference of a path from the unfrozen liquid at the same
        temperature, with sign; of the supersaturated path where that is the only one.
    cooling_shift : float or None
        Change of the unfrozen liquid from preparation to the coldest of those.
    where_samples_fall : str
    observations : tuple of Observation
    notes : tuple of str
    """

    system: str
    freezing_class: str
    basis: str
    reason: str
    sources: tuple[str, ...]
    quantified: bool
    paths: tuple[FreezingPath, ...]
    freezing_shift: float | None
    cooling_shift: float | None
    where_samples_fall: str
    observations: tuple[Observation, ...]
    notes: tuple[str, ...]

    def to_dict(self) -> dict[str, Any]:
        """Return the assessment in the shape of the JSON report."""
        return {
            "system": self.system,
            "freezing_class": self.freezing_class,
            "basis": self.basis,
            "reason": self.reason,
            "sources": list(self.sources),
            "quantified": self.quantified,
            "freezing_shift": self.freezing_shift,
            "cooling_shift": self.cooling_shift,
            "where_samples_fall": self.where_samples_fall,
            "paths": [{"system": self.system, **p.to_dict()} for p in self.paths],
            "observations": [o.to_dict() for o in self.observations],
            "notes": list(self.notes),
        }


def assess_freezing(
    library: Library,
    system: System,
    contents: FreezingContents,
    *,
    lowest_c: float,
    temperatures_c: Iterable[float] | None = None,
    concentration_mmol_l: float | None = None,
    sugar_percent: float = 0.0,
    buffer_g_l: float | None = None,
) -> FreezingAssessment:
    """Assess one composition on freezing.

    Parameters
    ----------
    library : Library
    system : System
        Names the evidence.
    contents : FreezingContents
    lowest_c : float
        Coldest temperature of the product [C]; the answer ends at -20 C.
    temperatures_c : iterable of float, optional
        Temperatures of the paths; a usual set without them.
    concentration_mmol_l, buffer_g_l : float, optional
        Of the buffer, to say where real samples fall.
    sugar_percent : float
        Amorphous sugar [% w/v].

    Returns
    -------
    FreezingAssessment

    Raises
    ------
    InputError, ConvergenceError
        As `freeze_path`.
    """
    data = load_freezing_data(library)
    usual, note = freezing_temperatures(lowest_c)
    wanted = tuple(temperatures_c) if temperatures_c is not None else usual
    brine, label, said = choose_brine(data, contents)
    assumptions: tuple[Assumption, ...] = ("supersaturated",)
    if label is not None:
        assumptions = ("crystallising", "supersaturated")
    liquid = prepare(contents, brine, with_solids=False)
    paths = tuple(
        freeze_path(
            contents,
            wanted,
            assumption=a,
            brine=brine,
            prepared=liquid
            if a == "supersaturated"
            else let_solids_form(liquid, contents, brine),
        )
        for a in assumptions
    )
    shift, cooling = _largest_shift(contents, brine, liquid, paths)
    evidence = evidence_of(library, system)
    verdict, basis = evidence.freezing_class, evidence.basis
    reason, sources = evidence.reason, evidence.sources
    if label is not None:
        verdict, basis = class_of(shift), "derived"
        reason = _computed_reason(paths, shift)
        sources = (_PARAMETER_SOURCE[label], *evidence.sources)
    if all(p.state == "liquid" for path in paths for p in path.points):
        verdict, basis = "negligible", "derived"
        reason = "no ice forms at the temperatures asked for"
    return FreezingAssessment(
        system.id,
        verdict,
        basis,
        reason,
        sources,
        label is not None,
        paths,
        shift,
        cooling,
        where_samples_fall(
            concentration_mmol_l, sugar_percent=sugar_percent, buffer_g_l=buffer_g_l
        ),
        observations(library, system.id),
        (*([note] if note else []), *said, *_unlike(label, evidence, shift)),
    )


def class_of(shift: float | None) -> str:
    """Return the class of a difference that freezing makes [pH]."""
    if shift is None:
        return "unknown"
    if abs(shift) < NEGLIGIBLE_BELOW:
        return "negligible"
    return "severe" if abs(shift) > SEVERE_ABOVE else "moderate"


def evidence_of(library: Library, system: System) -> FreezingClass:
    """Return what is published of a system, or the worst of its species' systems."""
    classes = load_freezing_data(library).classes
    own = classes.get(system.id)
    if own is not None:
        return own
    related = [
        found
        for name, found in classes.items()
        if name != "none" and set(library.get_system(name).species) <= {*system.species}
    ]
    if len(system.species) > 1 and related:
        worst = max(related, key=lambda c: _WORRY.index(c.freezing_class))
        reason = f"no observation of the mixture; {worst.system}: {worst.reason}"
        return replace(worst, system=system.id, reason=reason)
    return FreezingClass(
        system.id,
        CLASSES[-1],
        "",
        "",
        "no observation of this buffer on freezing is known to the tables",
        (),
        "judgement",
    )


def where_samples_fall(
    concentration_mmol_l: float | None,
    *,
    sugar_percent: float = 0.0,
    buffer_g_l: float | None = None,
) -> str:
    """Return in words where between the two bounds a real sample falls.

    Parameters
    ----------
    concentration_mmol_l : float or None
        Of the buffer.
    sugar_percent : float
        Amorphous sugar (sucrose, trehalose) [% w/v].
    buffer_g_l : float, optional
        Mass of buffer salts, for the ratio of sugar to buffer.

    Notes
    -----
    Gomez, Pikal & Rodriguez-Hornedo 2001 (concentration), Croyle et al. 1998
    (sugars), Murase & Franks 1989 (cooling rate); the limits are judgement.
    """
    ratio = 10.0 * sugar_percent / buffer_g_l if buffer_g_l else 0.0
    if sugar_percent >= SUGAR_PERCENT or ratio >= SUGAR_TO_BUFFER:
        return (
            "near the supersaturated path: an amorphous sugar at this level holds "
            "back crystallisation"
        )
    if concentration_mmol_l is None:
        return "between the two paths; slow cooling lies nearer the crystallising one"
    if concentration_mmol_l < DILUTE_MMOL_L:
        return (
            "between the two paths: below 10 mmol/L crystallisation is slow and the "
            "equilibrium is not reached"
        )
    if concentration_mmol_l >= CONCENTRATED_MMOL_L:
        return (
            "near the crystallising path on slow cooling; fast cooling moves it "
            "towards the supersaturated one"
        )
    return "between the two paths, nearer the crystallising one on slow cooling"


def _largest_shift(
    contents: FreezingContents,
    brine: Brine,
    liquid: Prepared,
    paths: tuple[FreezingPath, ...],
) -> tuple[float | None, float | None]:
    """Return the largest difference from the unfrozen liquid, and what that one does.

    The events of a path count too: the last liquid stands at one of them, between the
    temperatures asked for.
    """
    every = [(p.temperature_c, p.ph) for path in paths for p in path.points]
    every += [(e.temperature_c, e.ph) for path in paths for e in path.events]
    reached = [(t, ph) for t, ph in every if ph is not None and t <= HIGHEST_C]
    if not reached:
        return None, None
    calm = unfrozen_ph(contents, [t for t, _ in reached], brine=brine, prepared=liquid)
    gaps = [
        (ph - still, still - paths[0].ph_prepared)
        for (_, ph), still in zip(reached, calm, strict=True)
        if still is not None
    ]
    return max(gaps, key=lambda gap: abs(gap[0]), default=(None, None))


def _unlike(
    label: str | None, evidence: FreezingClass, shift: float | None
) -> tuple[str, ...]:
    """Say where the computed path and the evidence point different ways."""
    if label is not None or shift is None or evidence.freezing_class != "negligible":
        return ()
    if class_of(shift) == "negligible":
        return ()
    words = (
        f"the extended Debye-Hueckel path moves by {shift:+.1f} where no such shift was "
        "measured: the class follows the measurement"
    )
    return (words,)


def lowest_computed_c(path: FreezingPath) -> float:
    """Return the coldest temperature [C] at which a path has a pH; 0 without any."""
    return min((p.temperature_c for p in path.points if p.ph is not None), default=0.0)


def _computed_reason(paths: tuple[FreezingPath, ...], shift: float | None) -> str:
    crystallising = paths[0]
    onset = crystallising.event("onset")
    if onset is None:
        moved = "" if shift is None else f", which moves pH by {shift:+.1f}"
        lowest = lowest_computed_c(crystallising)
        return (
            f"no salt reaches its solubility down to {lowest:g} C; the liquid only "
            f"concentrates{moved}"
        )
    words = "" if shift is None else f", up to {shift:+.1f} pH against unfrozen liquid"
    solid = onset.solid.replace("_", " ")
    return f"{solid} may crystallise from {onset.temperature_c:.1f} C{words}"
