"""What the bench works on: a system, its strength and pH, in a product.

A `Bench` comes from a completed brief or from a few options; every calculation of the
bench takes it, so that the quick forms and the brief forms are one.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

from formbuf.bench import given
from formbuf.chemistry.osmolality import OsmoticLaw
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.background import background_of
from formbuf.product.brief import Completed
from formbuf.product.composition import Mixture
from formbuf.product.liquid import liquid_temperatures
from formbuf.product.osmotics import osmotic_law
from formbuf.product.overlay_changes import overlay_notice
from formbuf.product.product_parts import CarbonDioxideInfo
from formbuf.product.recipe import Background, make

NO_BUFFER = "none"
ROOM_C = 25.0
#: Half width of the window of pH where nobody states one (judgement).
USUAL_HALF_WIDTH_PH = 0.5
#: Allowance for setting the pH of a batch where nobody states one (judgement).
USUAL_TOLERANCE_PH = 0.1
CONCENTRATION_LIMIT_MMOL_L = 2000.0
MOST_DOSE_ML = 20000.0


@dataclass(frozen=True)
class Bench:
    """A buffered product as the bench sees it.

    Attributes
    ----------
    library : Library
    law : OsmoticLaw
    system : System
    concentration_mmol_l : float
        Total of the buffering species (of both, for a pair).
    target_ph : float
        As measured at ``measure_temperature_c``.
    low_ph, high_ph : float
        Window, at the same temperature.
    tolerance_ph : float
        By which a batch may miss the target.
    measure_temperature_c, prepare_temperature_c : float
        Temperatures [C] at which pH is specified and at which it is set.
    temperatures_c : mapping of float to tuple of str
        Every liquid temperature with what it stands for.
    background : Background
        Excipients, drug and tonicity agent.
    dose_volume_ml : float or None
    carbon_dioxide : CarbonDioxideInfo or None
        None for closed.
    notes : tuple of str
        What a reader should know.
    given_mmol_l : mapping of str to float or None
        Materials of an own formula, made as they are [mmol/L]; None where the system is
        made to the target.
    uncounted : str
        ``protein`` or ``drug`` where what it buffers is not known and left out.
    excluded : tuple of str
        What the brief wants in no formula: materials, species, ions.
    """

    library: Library
    law: OsmoticLaw
    system: System
    concentration_mmol_l: float
    target_ph: float
    low_ph: float
    high_ph: float
    tolerance_ph: float
    measure_temperature_c: float = ROOM_C
    prepare_temperature_c: float = ROOM_C
    temperatures_c: Mapping[float, tuple[str, ...]] = field(default_factory=dict)
    background: Background = field(default_factory=Background)
    dose_volume_ml: float | None = None
    carbon_dioxide: CarbonDioxideInfo | None = None
    notes: tuple[str, ...] = ()
    given_mmol_l: Mapping[str, float] | None = None
    uncounted: str = ""
    excluded: tuple[str, ...] = ()

    @property
    def storage_temperatures_c(self) -> tuple[float, ...]:
        """Liquid storage temperatures, ascending."""
        return tuple(
            t for t, kinds in self.temperatures_c.items() if "storage" in kinds
        )


@dataclass(frozen=True)
class Made:
    """A product made on the bench.

    Attributes
    ----------
    mixture : Mixture
        The whole product, a single state.
    buffer_mmol_l : mapping of str to float
        The buffer's own materials, titrant included [mmol/L].
    others_mmol_l : mapping of str to float
        Excipients and tonicity agent [mmol/L].
    """

    mixture: Mixture
    buffer_mmol_l: Mapping[str, float]
    others_mmol_l: Mapping[str, float]

    @property
    def materials_mmol_l(self) -> dict[str, float]:
        """Everything that is weighed [mmol/L]."""
        total = dict(self.others_mmol_l)
        for key, amount in self.buffer_mmol_l.items():
            total[key] = total.get(key, 0.0) + amount
        return total


def bench_from_brief(
    completed: Completed, system: System, concentration_mmol_l: float
) -> Bench:
    """Return the bench of a completed brief.

    Parameters
    ----------
    completed : Completed
    system : System
        Of the completed brief's library, or a pair.
    concentration_mmol_l : float
        0 only for the system without buffer.

    Raises
    ------
    InputError
        For a concentration outside 0 to 2000 mmol/L.
    """
    brief, library = completed.brief, completed.library
    _check_concentration(system, concentration_mmol_l)
    ph, drug = brief.ph, brief.drug
    uncounted = ""
    if drug.kind != "none" and drug.charge_known_from is None:
        uncounted = "protein" if drug.is_protein else "drug"
    return Bench(
        library,
        osmotic_law(library),
        system,
        concentration_mmol_l,
        ph.target,
        ph.low,
        ph.high,
        ph.release_tolerance,
        ph.measure_temperature_c,
        ph.prepare_temperature_c,
        liquid_temperatures(brief),
        background_of(library, brief),
        brief.dose.volume_ml,
        brief.carbon_dioxide,
        completed.warnings,
        uncounted=uncounted,
        excluded=tuple(brief.exclude),
    )


def bench_from_formula(
    completed: Completed,
    system: System,
    concentration_mmol_l: float,
    materials_mmol_l: Mapping[str, float],
) -> Bench:
    """Return the bench of an own formula that is a list of materials.

    Parameters
    ----------
    completed : Completed
    system : System
        What buffers in it, under the name of the formula.
    concentration_mmol_l : float
        Total of the buffering species.
    materials_mmol_l : mapping of str to float
        The formula, beside the excipients and drug of the brief.

    Returns
    -------
    Bench
        Nothing is titrated and no osmolality filled up: the formula is what it is.
    """
    bench = bench_from_brief(completed, system, concentration_mmol_l)
    background = replace(bench.background, agent=None, target_mosm_kg=None)
    return replace(bench, background=background, given_mmol_l=dict(materials_mmol_l))


def bench_from_options(
    library: Library,
    system: System,
    *,
    concentration_mmol_l: float,
    ph: float,
    measure_temperature_c: float = ROOM_C,
    prepare_temperature_c: float | None = None,
    storage_c: Sequence[float] = (),
    window_ph: tuple[float, float] | None = None,
    materials_mmol_l: Mapping[str, float] | None = None,
    agent: str | None = None,
    target_mosm_kg: float | None = None,
    dose_volume_ml: float | None = None,
) -> Bench:
    """Return a bench from a few options instead of a brief.

    Parameters
    ----------
    library : Library
    system : System
    concentration_mmol_l : float
        Total of the buffering species.
    ph : float
        Target as measured at ``measure_temperature_c``.
    measure_temperature_c, prepare_temperature_c : float
        Temperatures [C]; prepared where measured if absent.
    storage_c : sequence of float
        Storage temperatures [C].
    window_ph : (float, float), optional
        Limits of pH; 0.5 either side of the target if absent.
    materials_mmol_l : mapping of str to float, optional
        Further materials [mmol/L].
    agent : str, optional
        Tonicity agent, filled up to ``target_mosm_kg``.
    target_mosm_kg : float, optional
    dose_volume_ml : float, optional

    Returns
    -------
    Bench

    Raises
    ------
    InputError
        For values outside what can be meant, an unknown material, or an agent without
        a target.
    """
    _check_concentration(system, concentration_mmol_l)
    _check("--ph", ph, 0.0, 14.0)
    prepare = (
        measure_temperature_c
        if prepare_temperature_c is None
        else prepare_temperature_c
    )
    _check("--prepare-at", prepare, -20.0, 121.0)
    if dose_volume_ml is not None:
        _check("--dose-ml", dose_volume_ml, 0.0, MOST_DOSE_ML)
    low, high = window_ph or (ph - USUAL_HALF_WIDTH_PH, ph + USUAL_HALF_WIDTH_PH)
    if not low < ph < high:
        msg = (
            f"--low and --high: {low:g} to {high:g} does not hold the target pH {ph:g}"
        )
        raise InputError(msg)
    _check_agent(agent, target_mosm_kg)
    found = {
        library.find_material(name, where="--add").id: float(amount)
        for name, amount in (materials_mmol_l or {}).items()
    }
    filled = (
        library.find_material(agent, where="--tonicity-agent").id if agent else None
    )
    return Bench(
        library,
        osmotic_law(library),
        system,
        concentration_mmol_l,
        ph,
        low,
        high,
        min(USUAL_TOLERANCE_PH, 0.5 * min(ph - low, high - ph)),
        measure_temperature_c,
        prepare,
        _temperatures(measure_temperature_c, prepare, storage_c),
        Background(found, (), filled, target_mosm_kg, measure_temperature_c),
        dose_volume_ml,
        notes=tuple(filter(None, (overlay_notice(library),))),
    )


def _check_agent(agent: str | None, target_mosm_kg: float | None) -> None:
    """Refuse a tonicity agent without a target, or a target without one."""
    if (agent is None) == (target_mosm_kg is None):
        return
    names = ("--osmolality", "--tonicity-agent")
    given, other = names if agent is None else names[::-1]
    msg = f"{given}: given without {other}, allowed both or neither"
    raise InputError(msg)


def _temperatures(
    measure_c: float, prepare_c: float, storage_c: Sequence[float]
) -> dict[float, tuple[str, ...]]:
    """Return every temperature with what it stands for, ascending."""
    kinds: dict[float, list[str]] = {measure_c: ["measure"]}
    kinds.setdefault(prepare_c, []).append("prepare")
    for t in storage_c:
        _check("--store", t, -20.0, 121.0)
        kinds.setdefault(float(t), []).append("storage")
    return {t: tuple(kinds[t]) for t in sorted(kinds)}


def make_product(
    bench: Bench, *, system: System | None = None, temperature_c: float | None = None
) -> Made:
    """Make the product of a bench.

    Parameters
    ----------
    bench : Bench
    system : System, optional
        Another way of making it.
    temperature_c : float, optional
        Temperature at which the target holds [C], if not where it is measured.

    Raises
    ------
    InputError
        When the materials cannot give this pH.
    """
    if bench.given_mmol_l is not None and system is None:
        library, background = bench.library, bench.background
        buffer, rest = given.parts(library, bench.given_mmol_l, bench.system.species)
        others = given.beside(background.materials_mmol_l, rest)
        return Made(given.mixed(library, buffer, others, background), buffer, others)
    used = system or bench.system
    at = bench.measure_temperature_c if temperature_c is None else temperature_c
    recipe = make(
        bench.library,
        used,
        bench.concentration_mmol_l or 1.0,
        bench.target_ph,
        at,
        bench.background,
        bench.law,
    )
    buffer = {k: float(v) for k, v in recipe.buffer_mmol_l.items() if float(v) > 0.0}
    others = dict(bench.background.materials_mmol_l)
    fill = float(recipe.fill_mmol_l)
    if bench.background.agent is not None and fill > 0.0:
        agent = bench.background.agent
        others[agent] = others.get(agent, 0.0) + fill
    return Made(recipe.mixture, buffer, others)


def without_buffer(bench: Bench) -> Bench:
    """Return the same product with no buffer, set to its pH with acid or base alone."""
    system = bench.library.systems[NO_BUFFER]
    background = bench.background
    if bench.given_mmol_l is not None:
        formula, species = bench.given_mmol_l, bench.system.species
        _, rest = given.parts(bench.library, formula, species)
        others = given.beside(background.materials_mmol_l, rest)
        background = replace(background, materials_mmol_l=others)
    return replace(
        bench,
        system=system,
        concentration_mmol_l=0.0,
        background=background,
        given_mmol_l=None,
    )


def _check_concentration(system: System, concentration_mmol_l: float) -> None:
    if system.role == "none":
        return
    _check("--concentration", concentration_mmol_l, 0.001, CONCENTRATION_LIMIT_MMOL_L)


def _check(option: str, value: float, low: float, high: float) -> None:
    if not low <= value <= high:
        msg = f"{option}: value {value:g}, allowed {low:g} to {high:g}"
        raise InputError(msg)
