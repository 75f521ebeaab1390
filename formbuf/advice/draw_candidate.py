"""One candidate in every draw: pH, loads, capacity, osmolality, required amount.

The composition is the one proposed; what is drawn is how it turns out. A load is
either the acid or the base of the budget, since each is an allowance that may come
alone: a product stays in its window only if it does so under both.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.draw_inputs import Amount, Builder, Input
from formbuf.advice.draw_mixture import Drawn, drawn
from formbuf.advice.error_model import ErrorModel, error_model
from formbuf.advice.loads import LoadBudget
from formbuf.advice.results import Candidate, Shortlist
from formbuf.advice.sampling import Sampler
from formbuf.advice.sizing import windows_of
from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.chemistry.osmolality import OsmoticLaw
from formbuf.library import Library
from formbuf.product.background import DRUG, drug_extra
from formbuf.product.composition import Extra, mixture
from formbuf.product.osmotics import osmotic_law
from formbuf.product.product_brief import ProductBrief

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]


@dataclass(frozen=True)
class Draws:
    """What every candidate of one shortlist shares.

    Attributes
    ----------
    brief : ProductBrief
    library : Library
    model : ErrorModel
    sampler : Sampler
    law : OsmoticLaw
    drug : Extra or None
    acid_mmol_l, base_mmol_l : ndarray, shape (draws,)
        Loads over shelf life.
    load_inputs : mapping of str to Input
    loads : LoadBudget
        As budgeted.
    gas_factor : ndarray
        On the carbon dioxide that is taken up.
    """

    brief: ProductBrief
    library: Library
    model: ErrorModel
    sampler: Sampler
    law: OsmoticLaw
    drug: Extra | None
    acid_mmol_l: Array
    base_mmol_l: Array
    load_inputs: Mapping[str, Input]
    loads: LoadBudget
    gas_factor: Array


@dataclass(frozen=True)
class CandidateDraws:
    """One candidate in every draw; arrays have shape (draws,).

    Attributes
    ----------
    ph : mapping of temperature to ndarray
        pH of the product without loads.
    read_ph : ndarray
        What a meter reads at release, at the measurement temperature.
    within_release : ndarray of bool
        Whether that lies in the window.
    within_end : mapping of temperature to ndarray of bool
        Whether pH stays in the window whichever load comes: as read at the
        measurement temperature, and at the others in the window moved by the drift.
    capacity_mmol_l_ph, osmolality_mosm_kg : ndarray
        Of the whole product at the measurement temperature.
    buffer_share : ndarray
        Relative error of the buffer's own osmolality.
    required_mmol_l : ndarray
        Concentration that the loads ask for; infinite where none carries them.
    inputs : mapping of str to Input
    """

    ph: Mapping[float, Array]
    read_ph: Array
    within_release: Flags
    within_end: Mapping[float, Flags]
    capacity_mmol_l_ph: Array
    osmolality_mosm_kg: Array
    buffer_share: Array
    required_mmol_l: Array
    inputs: Mapping[str, Input]


def prepare_draws(result: Shortlist, sampler: Sampler) -> Draws:
    """Draw what all candidates share: the loads.

    Raises
    ------
    UnknownNameError
        When the brief states an uncertainty of a species that does not exist.
    """
    library, brief = result.library, result.brief
    model = error_model(library, brief.uncertainty)
    builder = Builder(model, sampler)
    acid, base = np.zeros(sampler.count), np.zeros(sampler.count)
    gas, gas_factor = result.loads.gas, np.ones(sampler.count)
    for item in result.loads.items:
        if item.acid_mmol_l <= 0.0 and item.base_mmol_l <= 0.0:
            continue
        figure = model.figures[
            "load_default_ln" if item.is_default else "load_stated_ln"
        ]
        factor = np.exp(
            builder.draw(
                Input(f"load:{item.name}", item.name, figure.advice, figure.value, "1")
            )
        )
        if gas is not None and item.name == gas.name:
            gas_factor = factor
        acid = acid + item.acid_mmol_l * factor
        base = base + item.base_mmol_l * factor
    return Draws(
        brief,
        library,
        model,
        sampler,
        osmotic_law(library),
        drug_extra(library, brief),
        acid,
        base,
        builder.inputs,
        result.loads,
        gas_factor,
    )


def draw_candidate(draws: Draws, candidate: Candidate) -> CandidateDraws | None:
    """Draw one candidate; None where there is nothing to solve.

    Parameters
    ----------
    draws : Draws
    candidate : Candidate

    Returns
    -------
    CandidateDraws or None
    """
    mixed = candidate.mixture
    if mixed is None or not candidate.states or not mixed.ladders:
        return None
    brief = draws.brief
    at = brief.ph.measure_temperature_c
    made = drawn(
        draws.library,
        draws.model,
        draws.sampler,
        mixed,
        _amounts(draws, candidate),
        at,
    )
    _balance_macro_ions(draws, made, at)
    builder = Builder(draws.model, draws.sampler)
    if draws.model.preparation == "adjusted":
        _adjust(draws, candidate, made, builder)
    solution = made.solve(at)
    ph = {at: solution.ph + made.reading}
    for state in candidate.states:
        if state.temperature_c not in ph:
            ph[state.temperature_c] = made.ph(state.temperature_c)
    slope = next(s.ph_slope_per_k for s in candidate.states if s.temperature_c == at)
    release, end = (_reading(builder, slope, when) for when in ("release", "end"))
    read = ph[at] + release
    low, high = brief.ph.low, brief.ph.high
    water = 1000.0 * float(mixed.water_kg_l)
    osmotic = builder.draw(
        Input(
            f"osmolality:{candidate.key}",
            f"osmotic coefficients of {candidate.name}",
            "measure the osmolality once",
            1.0,
            "1",
        )
    )
    made.inputs.update(builder.inputs)
    return CandidateDraws(
        ph,
        read,
        (read >= low) & (read <= high),
        _within_end(draws, candidate, made, ph, end),
        capacity_mol_kg_ph(solution) * water,
        _osmolality(draws, made, at, osmotic),
        _buffer_share(draws, candidate, at, osmotic),
        _required(draws, candidate, made, ph),
        {**made.inputs, **draws.load_inputs},
    )


def _amounts(draws: Draws, candidate: Candidate) -> list[Amount]:
    """Everything that is weighed, and the drug."""
    library = draws.library
    weighed: dict[str, float] = {}
    rows = [(w.material, w.mmol_l) for w in candidate.composition]
    if candidate.tonicity_fill is not None:
        fill = candidate.tonicity_fill
        rows.append((fill.material, fill.mmol_l))
    rows += [(e.material, e.mmol_l) for e in draws.brief.excipient]
    for material, mmol_l in rows:
        weighed[material] = weighed.get(material, 0.0) + mmol_l
    figure = draws.model.figures["weighing_relative"]
    found = []
    for material, mmol_l in weighed.items():
        record = library.find_material(material)
        label = f"weighing and assay of {record.name}"
        source = Input(
            f"weighing:{record.id}", label, figure.advice, figure.value, figure.unit
        )
        contents = {c: count * mmol_l for c, count in record.contents.items()}
        found.append(Amount(source, contents))
    if draws.drug is not None and draws.drug.mmol_l > 0.0:
        figure = draws.model.figures["drug_concentration_relative"]
        source = Input(
            "drug:concentration", figure.what, figure.advice, figure.value, figure.unit
        )
        contents = {**draws.drug.ions_mmol_l, DRUG: draws.drug.mmol_l}
        found.append(Amount(source, contents))
    return found


def _balance_macro_ions(draws: Draws, made: Drawn, at_c: float) -> None:
    """Let the counter-ions of a protein follow its charge at the target pH.

    Its solution was brought to that pH; an error in the pK of its groups then changes
    what it buffers, not where it sits.
    """
    if draws.brief.drug.counter_ion is not None:
        return
    target = draws.brief.ph.target
    for position, ladder in enumerate(made.mixture.ladders):
        if ladder.is_macro_ion:
            mine = made.charges_at(at_c, target, [position])
            nominal = made.charges_at(at_c, target, [position], shifted=False)
            made.charge_mol_kg = made.charge_mol_kg - (mine - nominal)


def _adjust(draws: Draws, candidate: Candidate, made: Drawn, builder: Builder) -> None:
    """Set every draw to the pH that the meter should read when it is prepared."""
    at = draws.brief.ph.prepare_temperature_c
    state = next(s for s in candidate.states if s.temperature_c == at)
    error = _reading(builder, state.ph_slope_per_k, "preparation")
    made.adjust(at, state.ph + builder.figure("end_point_ph") - error)


def _reading(builder: Builder, slope_per_k: float, when: str) -> Array:
    """Return what meter and temperature of the sample add to a pH that is read."""
    words = {"end": "end of shelf life"}.get(when, when)
    parts = []
    for key in ("meter_ph", "reading_temperature_k"):
        figure = builder.model.figures[key]
        source = Input(
            f"{key}:{when}",
            f"{figure.what}, {words}",
            figure.advice,
            figure.value,
            figure.unit,
        )
        parts.append(builder.draw(source))
    return parts[0] + slope_per_k * parts[1]


def _within_end(
    draws: Draws,
    candidate: Candidate,
    made: Drawn,
    ph: Mapping[float, Array],
    reading: Array,
) -> dict[float, Flags]:
    """Whether pH stays in its window at the end of shelf life, by temperature."""
    brief = draws.brief
    at = brief.ph.measure_temperature_c
    stored = set(brief.liquid_storage_temperatures_c)
    water = 1000.0 * float(made.mixture.water_kg_l)
    found: dict[float, Flags] = {}
    states = {s.temperature_c: s.ph for s in candidate.states}
    for state in candidate.states:
        t = state.temperature_c
        if t != at and t not in stored:
            continue
        inside: Flags = np.ones(made.count, dtype=bool)
        moved = ph[t] - ph[at] if t != at else -reading
        low = brief.ph.low + state.ph - states[at]
        more = draws.gas_factor * draws.loads.more_acid_mmol_l(low, t)
        acid = draws.acid_mmol_l + more
        for load in (-acid, draws.base_mmol_l):
            end = made.ph(t, load / water) if np.any(load) else ph[t]
            as_measured = end - moved
            inside &= (as_measured >= brief.ph.low) & (as_measured <= brief.ph.high)
            if t in stored and brief.ph.storage_low is not None:
                inside &= end >= brief.ph.storage_low
            if t in stored and brief.ph.storage_high is not None:
                inside &= end <= brief.ph.storage_high
        found[t] = inside
    return found


def _osmolality(draws: Draws, made: Drawn, at_c: float, osmotic: Array) -> Array:
    mixed = made.mixture
    error = mixed.osmolality(at_c, mixed.solve(at_c), draws.law)
    nominal = float(error.osmolality_mosm_kg)
    spread = float(error.expected_error_mosm_kg)
    return nominal * (1.0 + made.amounts_relative) + spread * osmotic


def _buffer_share(
    draws: Draws, candidate: Candidate, at_c: float, osmotic: Array
) -> Array:
    """Relative error of the osmolality of the buffer alone."""
    if not candidate.composition:
        return np.zeros(draws.sampler.count)
    bare = mixture(draws.library, {w.material: w.mmol_l for w in candidate.composition})
    found = bare.osmolality(at_c, bare.solve(at_c), draws.law)
    total = float(found.osmolality_mosm_kg)
    spread = float(found.expected_error_mosm_kg) / max(total, 1e-9)
    return spread * osmotic


def _required(
    draws: Draws, candidate: Candidate, made: Drawn, ph: Mapping[float, Array]
) -> Array:
    """Concentration that the loads ask for, from the nominal one by what is carried."""
    own = [made.mixture.index(s) for s in candidate.system.species]
    own = [k for k in own if k >= 0]
    nominal = candidate.required_mmol_l
    if not own or nominal == 0.0:
        return np.zeros(made.count)
    still = made.nominal()
    states = {s.temperature_c: np.array([s.ph]) for s in candidate.states}
    loads = draws.acid_mmol_l, draws.base_mmol_l
    acid, base = (np.array([float(np.median(load))]) for load in loads)
    carried = _carried(draws, made, ph, own, (*loads, draws.gas_factor))
    before = _carried(draws, still, states, own, (acid, base, np.ones(1)))
    if nominal is None:
        nominal = candidate.concentration_mmol_l / max(float(before[0]), 1e-12)
    with np.errstate(divide="ignore"):
        ratio = before[0] / np.maximum(carried, 1e-12)
    required: Array = nominal * ratio
    return required


def _carried(
    draws: Draws,
    made: Drawn,
    ph: Mapping[float, Array],
    own: list[int],
    loads: tuple[Array, Array, Array],
) -> Array:
    """Smallest ratio of what the buffer's own species carry to the load.

    ``loads`` hold acid, base, and the factor on the carbon dioxide taken up.
    """
    window = windows_of(draws.brief)
    water = 1000.0 * float(made.mixture.water_kg_l)
    best: Array = np.full(made.count, np.inf)
    for t in (window.measure_c, *window.others_c):
        if t not in ph:
            continue
        drift = ph[t] - ph[window.measure_c]
        low, high = window.start_low + drift, window.start_high + drift
        more = draws.loads.more_acid_mmol_l(low - window.room_low, t)
        for load, (start, end) in zip(
            (loads[0] + loads[2] * more, loads[1]),
            ((low, low - window.room_low), (high, high + window.room_high)),
            strict=True,
        ):
            if not np.any(load):
                continue
            change = made.charges_at(t, end, own) - made.charges_at(t, start, own)
            best = np.minimum(best, np.abs(change) * water / np.maximum(load, 1e-12))
    return best
