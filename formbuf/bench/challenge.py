"""pH under added strong acid or base, beside the same product without buffer."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from formbuf.bench.exposure import Exposed, expose
from formbuf.bench.setup import Bench, Made, make_product, without_buffer
from formbuf.chemistry import gas
from formbuf.chemistry.capacity import capacity_mol_kg_ph, finite_capacity
from formbuf.errors import InputError
from formbuf.product.composition import Mixture
from formbuf.product.vocabulary import Exposure

Array = NDArray[np.float64]

ACID_ION, BASE_ION = ("chloride", -1), ("sodium", 1)
MOST_ADDED_MMOL_L = 2000.0
MOST_POINTS = 501
USUAL_POINTS = 21
#: The usual series goes this many times beyond what uses up the window.
USUAL_REACH = 1.5


@dataclass(frozen=True, slots=True)
class Point:
    """The product after an addition.

    Attributes
    ----------
    added_mmol_l : float
        Strong base; negative: strong acid.
    temperature_c : float
    ph, ph_unbuffered : float
    capacity_mmol_l_ph : float
    """

    added_mmol_l: float
    temperature_c: float
    ph: float
    ph_unbuffered: float
    capacity_mmol_l_ph: float


@dataclass(frozen=True, slots=True)
class Room:
    """What uses up the window at one temperature.

    Attributes
    ----------
    temperature_c : float
    kinds : tuple of str
    ph, low_ph, high_ph : float
        Start and limits; at other temperatures than that of measurement the limits lie
        as far from the unloaded pH as there.
    acid_mmol_l, base_mmol_l : float
        Strong acid and base to the limits.
    acid_unbuffered_mmol_l, base_unbuffered_mmol_l : float
        The same without buffer.
    """

    temperature_c: float
    kinds: tuple[str, ...]
    ph: float
    low_ph: float
    high_ph: float
    acid_mmol_l: float
    base_mmol_l: float
    acid_unbuffered_mmol_l: float
    base_unbuffered_mmol_l: float


@dataclass(frozen=True, slots=True)
class Challenge:
    """Result of ``challenge``.

    Attributes
    ----------
    bench : Bench
    made, unbuffered : Made
    points : tuple of Point
        By temperature, then by rising addition.
    rooms : tuple of Room
    exposures : tuple of Exposed
        Closed, open to the gas and, where asked for, under a headspace.
    exposures_unbuffered : tuple of Exposed
    notes : tuple of str
    """

    bench: Bench
    made: Made
    unbuffered: Made
    points: tuple[Point, ...]
    rooms: tuple[Room, ...]
    exposures: tuple[Exposed, ...]
    exposures_unbuffered: tuple[Exposed, ...]
    notes: tuple[str, ...]


def challenge(
    bench: Bench,
    *,
    added_mmol_l: Sequence[float] = (),
    to_ph: Sequence[float] = (),
    temperatures_c: Sequence[float] = (),
    air_pressure_pa: float | None = None,
    headspace_ratio: float | None = None,
) -> Challenge:
    """Challenge a product with strong acid and base.

    Parameters
    ----------
    bench : Bench
    added_mmol_l : sequence of float
        Series of additions [mmol of strong base per L of product], negative for acid;
        hydrochloric acid and sodium hydroxide, their volume left out of account.
    to_ph : sequence of float
        pH values to go to instead; the addition is solved for.
    temperatures_c : sequence of float
        Temperatures [C]; that of measurement if empty.
    air_pressure_pa : float, optional
        Carbon dioxide of the gas it meets [Pa]; of the brief, else of the air.
    headspace_ratio : float, optional
        Volume of gas over volume of solution for a closed headspace; of the brief if
        absent.

    Returns
    -------
    Challenge
        Without series and limits, 21 additions up to 1.5 times the acid and base that
        use up the window.

    Raises
    ------
    InputError
        For additions or temperatures outside what can be computed.
    """
    made, bare = make_product(bench), make_product(without_buffer(bench))
    rooms = tuple(
        _room(bench, made.mixture, bare.mixture, t, kinds)
        for t, kinds in bench.temperatures_c.items()
    )
    at = tuple(temperatures_c) or (bench.measure_temperature_c,)
    points: list[Point] = []
    for t in at:
        series = _series(bench, made.mixture, rooms, added_mmol_l, to_ph, t)
        points += _points(made.mixture, bare.mixture, series, t)
    notes = [
        "the volume of the acid and base added is left out of account",
        *bench.notes,
        *made.mixture.notes,
    ]
    out = [r for r in rooms if r.acid_mmol_l < 0.0 or r.base_mmol_l < 0.0]
    if out:
        notes.append(
            f"at {out[0].temperature_c:g} C it stands at pH {out[0].ph:.2f}, outside "
            f"{out[0].low_ph:.2f} to {out[0].high_ph:.2f}, before anything is added: a "
            "negative amount is what would bring it back to that limit"
        )
    if bench.uncounted:
        notes.append(
            "the columns without buffer are those of water and excipients, not of this "
            f"product: what its {bench.uncounted} buffers is not counted, nor carbon "
            "dioxide and carried-over acid"
        )
    elif not bare.mixture.ladders:
        notes.append(
            "without buffer nothing but water holds the pH: the figures are those of a "
            "product free of carbon dioxide and carried-over acid"
        )
    met, met_bare = (
        _exposures(bench, one.mixture, air_pressure_pa, headspace_ratio)
        for one in (made, bare)
    )
    return Challenge(
        bench,
        made,
        bare,
        tuple(points),
        rooms,
        met,
        met_bare,
        tuple(dict.fromkeys(notes)),
    )


def _exposures(
    bench: Bench,
    mixed: Mixture,
    air_pressure_pa: float | None,
    headspace_ratio: float | None,
) -> tuple[Exposed, ...]:
    """Return the product closed, open to the gas, and under a headspace if given."""
    t, stated = bench.measure_temperature_c, bench.carbon_dioxide
    pressure, ratio = air_pressure_pa, headspace_ratio
    if pressure is None and stated is not None:
        pressure = stated.pressure_pa
    if pressure is None:
        fraction = bench.library.carbon_dioxide["air_fraction_dry"].value.value
        pressure = float(gas.air_pressure_pa(fraction, t))
    if ratio is None and stated is not None:
        ratio = stated.headspace_ratio
    ways: list[tuple[Exposure, float]] = [("closed", 0.0), ("open", 0.0)]
    if ratio is not None:
        ways.append(("headspace", ratio))
    return tuple(
        expose(
            bench.library,
            mixed,
            exposure,
            temperature_c=t,
            pressure_pa=pressure,
            headspace_ratio=volume,
        )
        for exposure, volume in ways
    )


def ph_after(
    mixed: Mixture, added_mmol_l: Sequence[float], temperature_c: float
) -> Array:
    """Return the pH after each addition of strong base (negative: acid) [mmol/L]."""
    return _loaded(mixed, added_mmol_l).solve(temperature_c).ph


def base_to_ph_mmol_l(mixed: Mixture, ph: float, temperature_c: float) -> float:
    """Strong base (negative: strong acid) that brings a product to a pH [mmol/L].

    Parameters
    ----------
    mixed : Mixture
        A single state.
    ph : float
    temperature_c : float
        Temperature [C].
    """
    start = float(mixed.solve(temperature_c).ph)
    lower, upper = _limits(mixed, temperature_c, min(ph, start), max(ph, start))
    return upper if ph >= start else -lower


def _limits(
    mixed: Mixture, temperature_c: float, low_ph: float, high_ph: float
) -> tuple[float, float]:
    """Strong acid to the lower and base to the upper limit [mmol/L]."""
    found = finite_capacity(
        mixed.ladders,
        mixed.totals_mol_kg,
        mixed.strong_charge_mol_kg,
        mixed.strong_charge2_mol_kg,
        temperature_c,
        mixed.solve(temperature_c),
        low_ph,
        high_ph,
    )
    litre = 1000.0 * float(mixed.water_kg_l)
    return float(found.acid_mol_kg) * litre, float(found.base_mol_kg) * litre


def _room(
    bench: Bench, mixed: Mixture, bare: Mixture, t: float, kinds: tuple[str, ...]
) -> Room:
    measured = float(mixed.solve(bench.measure_temperature_c).ph)
    bare_measured = float(bare.solve(bench.measure_temperature_c).ph)
    ph, bare_ph = float(mixed.solve(t).ph), float(bare.solve(t).ph)
    down, up = measured - bench.low_ph, bench.high_ph - measured
    acid, base = _limits(mixed, t, ph - down, ph + up)
    bare_down, bare_up = bare_measured - bench.low_ph, bench.high_ph - bare_measured
    bare_acid, bare_base = _limits(bare, t, bare_ph - bare_down, bare_ph + bare_up)
    return Room(t, kinds, ph, ph - down, ph + up, acid, base, bare_acid, bare_base)


def _series(
    bench: Bench,
    mixed: Mixture,
    rooms: Sequence[Room],
    added_mmol_l: Sequence[float],
    to_ph: Sequence[float],
    t: float,
) -> list[float]:
    if len(added_mmol_l) + len(to_ph) > MOST_POINTS:
        msg = (
            f"{len(added_mmol_l) + len(to_ph)} additions, allowed at most {MOST_POINTS}"
        )
        raise InputError(msg)
    for amount in added_mmol_l:
        if not -MOST_ADDED_MMOL_L <= amount <= MOST_ADDED_MMOL_L:
            msg = (
                f"addition of {amount:g} mmol/L, allowed -{MOST_ADDED_MMOL_L:g} to "
                f"{MOST_ADDED_MMOL_L:g}"
            )
            raise InputError(msg)
    for ph in to_ph:
        if not 0.0 <= ph <= 14.0:
            msg = f"challenge to pH {ph:g}, allowed 0 to 14"
            raise InputError(msg)
    wanted = [float(a) for a in added_mmol_l]
    wanted += [base_to_ph_mmol_l(mixed, ph, t) for ph in to_ph]
    if wanted:
        return sorted({0.0, *wanted})
    room = next(r for r in rooms if "measure" in r.kinds)
    ends = (-USUAL_REACH * room.acid_mmol_l, USUAL_REACH * room.base_mmol_l)
    low, high = (_rounded(end) for end in ends)
    return sorted({0.0, *np.round(np.linspace(low, high, USUAL_POINTS), 6).tolist()})


def _rounded(amount: float) -> float:
    """Round outward to two significant digits."""
    if amount == 0.0:
        return 0.0
    size = 10.0 ** (np.floor(np.log10(abs(amount))) - 1.0)
    return float(np.sign(amount) * np.ceil(abs(amount) / size) * size)


def _points(
    mixed: Mixture, bare: Mixture, series: Sequence[float], t: float
) -> list[Point]:
    solution = _loaded(mixed, series).solve(t)
    beta = 1000.0 * capacity_mol_kg_ph(solution) * mixed.water_kg_l
    other = _loaded(bare, series).solve(t).ph
    return [
        Point(float(added), t, float(a), float(b), float(c))
        for added, a, b, c in zip(series, solution.ph, other, beta, strict=True)
    ]


def _loaded(mixed: Mixture, added_mmol_l: Sequence[float]) -> Mixture:
    """Return the mixture with each addition; acid as chloride, base as sodium."""
    amounts = np.asarray(added_mmol_l, dtype=float) / 1000.0 / mixed.water_kg_l
    loaded = mixed.with_ion(*ACID_ION, np.maximum(-amounts, 0.0))
    return loaded.with_ion(*BASE_ION, np.maximum(amounts, 0.0))
