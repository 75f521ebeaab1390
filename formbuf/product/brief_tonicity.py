"""Complete the osmolality aimed at and the solute that fills the room."""

from __future__ import annotations

from formbuf.product.brief_cases import Case
from formbuf.product.brief_filler import Filler
from formbuf.product.brief_messages import Fault, raise_faults
from formbuf.product.brief_storage import is_surely_frozen
from formbuf.product.product_parts import ExcipientInfo, StorageInfo, TonicityInfo
from formbuf.product.vocabulary import AMORPHOUS_SUGARS, is_biologic


def complete_tonicity(
    filler: Filler,
    storage: tuple[StorageInfo, ...],
    excipients: tuple[ExcipientInfo, ...],
) -> TonicityInfo:
    """Return target, limits, agent and known sugar.

    Where the route has no osmolality limits and the brief asks for nothing, the
    target stays None and nothing fills.
    """
    stated = filler.brief.tonicity
    limits = filler.library.route_limits.get(filler.brief.product.route)
    low, high, target = stated.low_mosm_kg, stated.high_mosm_kg, stated.target_mosm_kg
    route_low = limits.osmolality_low_mosm_kg if limits else None
    route_high = limits.osmolality_high_mosm_kg if limits else None
    wanted = stated.fill or (stated.agent is not None and stated.fill is None)
    if target is None and (route_high is not None or wanted):
        target = _target(filler, low, high)
    for key, value in (("low_mosm_kg", low), ("high_mosm_kg", high)):
        own = route_low if key == "low_mosm_kg" else route_high
        if value is None and own is not None and limits is not None:
            reason = "range that the route bears"
            filler.assume(
                f"tonicity.{key}", own, "mosmol/kg", limits.basis, reason, limits.source
            )
    low = route_low if low is None else low
    high = route_high if high is None else high
    fill = stated.fill
    wants = fill is None and target is not None and stated.agent is None
    if wants and _free_agent(filler) is None:
        fill = False
        reason = "the brief excludes every customary agent: state tonicity.agent"
        filler.assume("tonicity.fill", fill, "", "judgement", reason)
    if fill is None:
        fill = target is not None and bool(filler.take("tonicity.fill"))
    agent = _agent(filler) if fill or stated.agent is not None else None
    sugar, is_assumed = _amorphous_sugar(filler, storage, excipients)
    return TonicityInfo(
        target_mosm_kg=target,
        low_mosm_kg=low,
        high_mosm_kg=high,
        agent=agent,
        fill=fill,
        agent_is_default=agent is not None and stated.agent is None,
        amorphous_sugar_percent_w_v=sugar,
        amorphous_sugar_is_assumed=is_assumed,
    )


def _target(filler: Filler, low: float | None, high: float | None) -> float:
    """Return the default target, moved into stated limits."""
    key = "tonicity.target_mosm_kg"
    usual = float(filler.case(key).value)
    target = usual if low is None else max(usual, low)
    target = target if high is None else min(target, high)
    if target == usual:
        return float(filler.take(key))
    reason = f"the stated limit nearest to the usual {usual:g}"
    filler.assume(key, target, "mosmol/kg", "judgement", reason)
    return target


def _agent(filler: Filler) -> str:
    """Return the stated agent, or the first default that nothing excludes.

    What was passed over is said in the assumption.

    Raises
    ------
    InputError
        The brief asks for a fill and excludes every default.
    """
    stated = filler.brief.tonicity.agent
    if stated is not None:
        return filler.library.find_material(stated).id
    key = "tonicity.agent"
    usual, free = filler.case(key), _free_agent(filler)
    if free is None:
        what = "asks for a fill, yet the brief excludes every customary agent"
        fault = Fault(("tonicity", "fill"), what, "an agent stated beside it", True)
        raise_faults(filler.brief.origin, [fault])
        return ""
    reason = free.reason
    if free is not usual:
        names = ", ".join(sorted(_barred(filler, usual)))
        reason = f"instead of {usual.value}, since the brief excludes {names}"
    filler.assume(key, free.value, free.unit, free.basis, reason, free.source)
    return str(free.value)


def _free_agent(filler: Filler) -> Case | None:
    """Return the first default agent that the brief does not exclude."""
    return filler.find("tonicity.agent", lambda case: not _barred(filler, case))


def _barred(filler: Filler, case: Case) -> set[str]:
    """Return what the brief excludes of a default agent, itself or what it holds."""
    material = filler.library.materials[str(case.value)]
    return material.named_in(filler.brief.exclude)


def _amorphous_sugar(
    filler: Filler,
    storage: tuple[StorageInfo, ...],
    excipients: tuple[ExcipientInfo, ...],
) -> tuple[float, bool]:
    """Return the known content of glassy sugar, % w/v, and whether it is assumed."""
    library = filler.library
    stated = sum(
        row.g_l / 10.0
        for row in excipients
        if AMORPHOUS_SUGARS & set(library.materials[row.material].contents)
    )
    has_agent = filler.brief.tonicity.agent is not None
    hardened = filler.form != "liquid" or any(map(is_surely_frozen, storage))
    excluded = set(filler.brief.exclude)
    barred = {
        name
        for key in excluded
        for name in (
            library.materials[key].contents if key in library.materials else (key,)
        )
    }
    is_barred = barred >= AMORPHOUS_SUGARS
    if stated or has_agent or not hardened or not is_biologic(filler.kind) or is_barred:
        return stated, False
    return float(filler.take("tonicity.amorphous_sugar_percent_w_v")), True
