"""pH of a solution as it freezes: two bounding paths.

As ice forms, the liquid concentrates until its water activity is that of ice. On
the ``crystallising`` path every salt leaves at its solubility; on the
``supersaturated`` path none does. Real samples lie between: slow cooling of a
concentrated buffer near the first, fast cooling, dilution or an amorphous sugar
near the second. Nothing here knows a rate: no model of nucleation is attempted.

Below the last eutectic there is no liquid at equilibrium and pH is undefined
(None); the metastable extension, with the last salt held back, is kept apart and
labelled.

Left out: loss of carbon dioxide or other volatiles, incorporation of ions into ice
(matters below about 1 mmol/L of buffer), double salts of sodium and potassium.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry.freezing_network import ICE
from formbuf.chemistry.freezing_prepare import Prepared, prepare
from formbuf.chemistry.freezing_records import (
    ASSUMPTIONS,
    HIGHEST_C,
    LOWEST_C,
    Assumption,
    Brine,
    FreezingContents,
    FreezingEvent,
    FreezingPath,
    FreezingPoint,
)
from formbuf.chemistry.freezing_state import (
    at_fold,
    saturation,
    watched_saturation,
)
from formbuf.chemistry.freezing_trace import Trace
from formbuf.constants import EXTRAPOLATION_LIMIT_C, LN10, WATER_MOLAR_MASS_KG_MOL
from formbuf.errors import ConvergenceError, InputError

Array = NDArray[np.float64]

#: Brine of systems without ion-interaction parameters.
EXTENDED_DEBYE_HUCKEL = Brine(
    "extended Debye-Hueckel",
    notes=(
        (
            "activities by the extended Debye-Hueckel form (Guentelberg), an "
            "assumption above 0.1 mol/kg; no salt is let crystallise"
        ),
    ),
)


def freeze_path(
    contents: FreezingContents,
    temperatures_c: Iterable[float],
    *,
    assumption: Assumption = "crystallising",
    brine: Brine = EXTENDED_DEBYE_HUCKEL,
    prepared: Prepared | None = None,
) -> FreezingPath:
    """Follow one bounding path from the preparation temperature down.

    Parameters
    ----------
    contents : FreezingContents
        What is dissolved per kg of water, and the pH as prepared.
    temperatures_c : iterable of float
        Temperatures wanted [C], -30 to 0, in any order.
    assumption : {"crystallising", "supersaturated"}
    brine : Brine
        Activity model and solids.
    prepared : Prepared, optional
        The liquid before cooling, where it is known: of ``prepare`` with the same
        contents and brine, with solids for the crystallising path only.

    Returns
    -------
    FreezingPath
        Points in the order asked for.

    Raises
    ------
    InputError
        On a temperature above 0 C or below -30 C, an unknown assumption, a path
        that needs solids the brine lacks, or a salt that does not dissolve at the
        preparation temperature.
    ConvergenceError
        When a state cannot be solved; the message holds the state.
    """
    wanted = _check_temperatures(temperatures_c)
    if assumption not in ASSUMPTIONS:
        msg = f"assumption {assumption!r}, allowed {', '.join(ASSUMPTIONS)}"
        raise InputError(msg)
    if assumption == "crystallising" and not brine.solids:
        msg = (
            f"crystallising path: {brine.name} holds no solids, allowed supersaturated"
        )
        raise InputError(msg)
    with_solids = assumption == "crystallising"
    if prepared is None:
        prepared = prepare(contents, brine, with_solids=with_solids)
    run = _Run(prepared, contents, brine, assumption)
    return run.finish(wanted)


def thaw_path(
    contents: FreezingContents,
    temperatures_c: Iterable[float],
    *,
    assumption: Assumption = "crystallising",
    brine: Brine = EXTENDED_DEBYE_HUCKEL,
) -> tuple[FreezingPoint, ...]:
    """Freeze to the coldest temperature, then follow equilibrium back up.

    Parameters
    ----------
    contents, temperatures_c, assumption, brine
        As in `freeze_path`.

    Returns
    -------
    tuple of FreezingPoint
        In rising temperature. At equilibrium they equal those of `freeze_path`; in
        practice a crystallised salt dissolves late.
    """
    wanted = sorted(_check_temperatures(temperatures_c))
    with_solids = assumption == "crystallising"
    prepared = prepare(contents, brine, with_solids=with_solids)
    trace = Trace(prepared.net, prepared.state, [], [])
    trace.advance(wanted[0])
    points = []
    if trace.gone_at_c is not None:
        bottom = trace.gone_at_c
        points = [_empty(trace, t) for t in wanted if t < bottom]
        trace = Trace(prepared.net, prepared.state, [], [])
        trace.advance(bottom + 1e-9)
    for t in wanted[len(points) :]:
        trace.advance(t)
        points.append(_point(trace, t))
    return tuple(points)


def unfrozen_ph(
    contents: FreezingContents,
    temperatures_c: Iterable[float],
    *,
    brine: Brine = EXTENDED_DEBYE_HUCKEL,
    prepared: Prepared | None = None,
) -> tuple[float | None, ...]:
    """Return the pH of the same liquid cooled without ice or salt forming.

    What a path differs from this is what freezing itself does; the rest is the
    drift of pK with temperature, which any cooled liquid shows.

    Parameters
    ----------
    contents, temperatures_c, brine, prepared
        As in `freeze_path`; prepared without solids.

    Returns
    -------
    tuple of float or None
        In the order asked for; None below the limit of pK extrapolation, -20 C.
    """
    wanted = _check_temperatures(temperatures_c)
    if prepared is None:
        prepared = prepare(contents, brine, with_solids=False)
    trace = Trace(prepared.net, prepared.state, [], [], banned=frozenset({ICE}))
    found: dict[float, float | None] = {}
    for t in sorted(set(wanted), reverse=True):
        if t < EXTRAPOLATION_LIMIT_C:
            found[t] = None
            continue
        trace.advance(t)
        found[t] = trace.state.ph
    return tuple(found[t] for t in wanted)


class _Run:
    """One path: trace, points, events and notes."""

    def __init__(
        self,
        prepared: Prepared,
        contents: FreezingContents,
        brine: Brine,
        assumption: Assumption,
    ) -> None:
        self.prepared = prepared
        self.contents, self.brine, self.assumption = contents, brine, assumption
        self.trace = Trace(prepared.net, prepared.state, [], [])
        self.notes = list(brine.notes)
        unknown = [x.name for x in prepared.net.ladders if x.has_unknown_enthalpy]
        if unknown:
            self.notes.append(
                f"pK of {', '.join(unknown)} without an enthalpy is held at 25 C"
            )
        self.outside: float | None = None
        self.trace.note_watched_at_start()

    def finish(self, wanted: list[float]) -> FreezingPath:
        """Walk down the wanted temperatures and gather the path."""
        glass = self.contents.glass_transition_c
        found: dict[float, FreezingPoint] = {}
        held: FreezingPoint | None = None
        for t in sorted(set(wanted), reverse=True):
            if glass is not None and t < glass:
                if held is None:
                    held = self._glass(glass)
                found[t] = replace(held, temperature_c=t, ph=None, state="glass")
                continue
            found[t] = self._at(t)
        self._limits(found)
        return FreezingPath(
            self.assumption,
            self.brine.name,
            self.brine.error_ph,
            self.prepared.state.ph,
            self.prepared.titrant,
            self.prepared.titrant_mol_kg,
            tuple(found[t] for t in wanted),
            tuple(self.trace.events),
            self._metastable([t for t in wanted if glass is None or t >= glass]),
            tuple(self.notes),
        )

    def _at(self, t: float) -> FreezingPoint:
        if self.outside is not None:
            return _outside(t)
        reason = (
            "a protonation state without parameters of its own has grown beyond its "
            "allowed share"
        )
        try:
            self.trace.advance(t)
        except ConvergenceError:
            if not at_fold(self.trace.net, self.trace.state, self.trace.active):
                raise
            self.trace.outside_at_c = self.trace.state.temperature_c
            reason = "concentrating it no longer lowers its freezing point"
        if self.trace.outside_at_c is None:
            return _point(self.trace, t)
        self.outside = self.trace.outside_at_c
        self.trace.events.append(
            FreezingEvent(self.outside, "outside model", self.trace.state.ph)
        )
        self.notes.append(
            f"the activity model of the liquid ends at {self.outside:.1f} C, where "
            f"{reason}; no number is given below"
        )
        return _outside(t)

    def _glass(self, glass: float) -> FreezingPoint:
        point = self._at(glass)
        self.trace.events.append(FreezingEvent(glass, "glass transition", point.ph))
        self.notes.append(
            f"at the glass transition {glass:g} C composition and protonation are "
            "arrested; nothing is computed below"
        )
        return point

    def _limits(self, found: dict[float, FreezingPoint]) -> None:
        """Say where pK extrapolation ends and where the composition leaves the data."""
        if any(t < EXTRAPOLATION_LIMIT_C for t in found):
            self.trace.events.append(
                FreezingEvent(EXTRAPOLATION_LIMIT_C, "pK extrapolation limit")
            )
            self.notes.append(
                f"no pH below {EXTRAPOLATION_LIMIT_C:g} C: pK is not extrapolated "
                "further"
            )
        if any(p.state == "frozen" and t < 0.0 for t, p in found.items()):
            self.notes.append("pK below 0 C is an extrapolation of data above 0 C")
        for t in sorted(found, reverse=True):
            over = [
                f"{name} {found[t].species_mol_kg[name]:.1f} mol/kg against {limit:g}"
                for name, limit in self.brine.limits.items()
                if found[t].species_mol_kg.get(name, 0.0) > limit
            ]
            if over:
                self.notes.append(
                    f"from {t:g} C down the liquid is more concentrated than the "
                    f"measurements behind its parameters: {'; '.join(over)}"
                )
                break
        self.trace.events.sort(key=lambda e: -e.temperature_c)

    def _metastable(self, wanted: list[float]) -> tuple[FreezingPoint, ...]:
        """Continue below the last eutectic with its last salt held back."""
        bottom = self.trace.gone_at_c
        below = [t for t in wanted if bottom is not None and t < bottom]
        if bottom is None or not below:
            return ()
        net = self.trace.net
        onsets = [e.solid for e in self.trace.events if e.event == "onset"]
        last = net.phases.index(onsets[-1]) if onsets else None
        if last is None:
            return ()
        trace = Trace(net, self.prepared.state, [], [], banned=frozenset({last}))
        points = []
        for t in sorted(set(below), reverse=True):
            try:
                trace.advance(t)
            except ConvergenceError:
                break
            if trace.gone_at_c is not None or trace.outside_at_c is not None:
                break
            points.append(_point(trace, t))
        if points:
            self.notes.append(
                f"metastable extension below {bottom:.1f} C: {net.phases[last]} is "
                "held back; not an equilibrium"
            )
        return tuple(points)


def _check_temperatures(temperatures_c: Iterable[float]) -> list[float]:
    wanted = [float(t) for t in temperatures_c]
    if not wanted:
        msg = "freezing path: no temperature given, allowed one or more"
        raise InputError(msg)
    for t in wanted:
        if not LOWEST_C <= t <= HIGHEST_C:
            msg = (
                f"freezing path: temperature {t:g} C, allowed {LOWEST_C:g} to "
                f"{HIGHEST_C:g} C"
            )
            hint = (
                "ask for the pH of the liquid instead"
                if t > HIGHEST_C
                else "the brine data end here; pH already ends at "
                f"{EXTRAPOLATION_LIMIT_C:g} C"
            )
            raise InputError(msg, hint=hint)
    return wanted


def _point(trace: Trace, temperature_c: float) -> FreezingPoint:
    """Return the point of a trace that stands at a temperature."""
    if trace.gone_at_c is not None:
        return _empty(trace, temperature_c)
    net, state = trace.net, trace.state
    m, w = np.exp(state.ln_m), float(np.exp(state.ln_w))
    excess = saturation(net, state)[1:] / LN10
    ratios = {s.id: float(x) for s, x in zip(net.solids, excess, strict=True)}
    watched = watched_saturation(net, state) / LN10
    ratios |= {s.id: float(x) for s, x in zip(net.watched, watched, strict=True)}
    held = net.counts @ m
    ice = ICE in trace.active
    return FreezingPoint(
        temperature_c,
        state.ph if temperature_c >= EXTRAPOLATION_LIMIT_C - 1e-9 else None,
        float(state.amounts[ICE]) * WATER_MOLAR_MASS_KG_MOL,
        1000.0 * w,
        float(0.5 * (net.charges**2) @ m),
        _solids(trace),
        {name: float(x) for name, x in zip(net.components, held, strict=True)},
        {name: float(x) for name, x in zip(net.species, m, strict=True)},
        ratios,
        "frozen" if ice else "liquid",
    )


def _empty(trace: Trace, temperature_c: float) -> FreezingPoint:
    ice = float(trace.state.amounts[ICE]) * WATER_MOLAR_MASS_KG_MOL
    return FreezingPoint(
        temperature_c, None, ice, 0.0, None, _solids(trace), state="no liquid"
    )


def _outside(temperature_c: float) -> FreezingPoint:
    return FreezingPoint(
        temperature_c, None, None, None, None, {}, state="outside model"
    )


def _solids(trace: Trace) -> dict[str, float]:
    return {
        trace.net.phases[p]: float(trace.state.amounts[p])
        for p in range(1, len(trace.net.phases))
        if trace.state.amounts[p] > 0.0
    }
