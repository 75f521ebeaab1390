"""A tonicity agent that buffers near the target pH, and how much of it all it is."""

from __future__ import annotations

from collections.abc import Sequence

from formbuf.advice.case import Case
from formbuf.advice.results import Candidate
from formbuf.advice.wording import percent, plain
from formbuf.chemistry.capacity import component_capacity_mol_kg_ph
from formbuf.library.records import Material

#: Distance of a pK from the target within which an agent is said to buffer [pH]: at
#: 1.5 a species still has a tenth of the capacity it has at its pK.
NEAR_PH = 1.5


def buffering_agent_note(case: Case, candidates: Sequence[Candidate]) -> str:
    """Say that the tonicity agent buffers, and its share of the capacity of the lead.

    Parameters
    ----------
    case : Case
    candidates : sequence of Candidate
        In their order; the first with a place is the lead. Where none has one, the
        share is left out.

    Returns
    -------
    str
        Empty where the agent brings no species with a pK within 1.5 of the target.
    """
    if case.background.agent is None:
        return ""
    agent = case.library.find_material(case.background.agent)
    target = case.brief.ph.target
    near = {
        name: step.pka.value
        for name in agent.contents
        if name in case.library.species
        for step in case.library.species[name].steps
        if abs(step.pka.value - target) <= NEAR_PH
    }
    if not near:
        return ""
    shown = ", ".join(f"{name} with pK {plain(pk)}" for name, pk in near.items())
    text = (
        f"the tonicity agent {agent.name} buffers at the target pH itself ({shown}), "
        "which is credited to no buffer: sizing and ranking take it as background"
    )
    lead = next((c for c in candidates if c.rank is not None), None)
    share = None if lead is None else _share(case, agent, lead)
    if lead is None or share is None:
        return text
    return f"{text}; in {lead.name} it has {percent(share)} of the whole capacity"


def _share(case: Case, agent: Material, candidate: Candidate) -> float | None:
    """Share of the agent in the capacity of a product at the measured temperature."""
    fill, whole = candidate.tonicity_fill, candidate.mixture
    state = candidate.state_at("measure")
    if fill is None or whole is None or state is None or not whole.ladders:
        return None
    per_kg = component_capacity_mol_kg_ph(whole.solve(state.temperature_c))
    scale = 1000.0 * float(whole.water_kg_l)
    brought = 0.0
    for name, count in agent.contents.items():
        if name not in case.library.species:
            continue
        at = whole.index(name)
        total = float(whole.totals_mol_kg[..., at]) * scale
        own = min(count * fill.mmol_l / total, 1.0) if total > 0.0 else 0.0
        brought += own * float(per_kg[..., at]) * scale
    if state.capacity_mmol_l_ph <= 0.0:
        return None
    return brought / state.capacity_mmol_l_ph
