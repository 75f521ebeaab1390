"""Options of the commands of the bench, and the bench that they describe."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated

import typer

from formbuf.cli.numbers import number, numbers
from formbuf.cli.wording import check_needed
from formbuf.errors import InputError, UsageError

if TYPE_CHECKING:
    from formbuf.bench.setup import Bench
    from formbuf.library import Library
    from formbuf.library.records import System
    from formbuf.product.brief import Brief, Completed
    from formbuf.product.product_parts import CandidateInfo

QUICK_HINT = "Give a brief file and --system, or --system, --concentration and --ph."
BriefOption = Annotated[
    str | None, typer.Argument(metavar="BRIEF", help="Product brief, a TOML file.")
]
SystemOption = Annotated[
    str | None,
    typer.Option(
        metavar="SYSTEM",
        help='Buffer system, a pair ("histidine + acetate"), or the name of a formula '
        "of the brief.",
    ),
]
ConcentrationOption = Annotated[
    str | None,
    typer.Option(
        metavar="MMOL_L",
        help="Total of the buffer, mmol/L; from the brief if absent.",
    ),
]
PhOption = Annotated[str | None, typer.Option(metavar="PH", help="Target pH.")]
AddOption = Annotated[
    list[str] | None,
    typer.Option(metavar="MATERIAL=MMOL_L", help="Further material; may be repeated."),
]
AgentOption = Annotated[
    str | None,
    typer.Option(metavar="MATERIAL", help="Material that fills up to --osmolality."),
]
OsmolalityOption = Annotated[
    str | None,
    typer.Option(metavar="MOSM_KG", help="Osmolality to fill up to, mosmol/kg."),
]
StoreOption = Annotated[
    list[str] | None,
    typer.Option(
        metavar="C", help="Storage temperature, degrees Celsius; may be repeated."
    ),
]
PrepareOption = Annotated[
    str | None,
    typer.Option(
        metavar="C", help="Temperature of preparation; of measurement if absent."
    ),
]
MeasureOption = Annotated[
    str | None,
    typer.Option(
        metavar="C", help="Temperature at which pH is measured; 25 if absent."
    ),
]
LowOption = Annotated[
    str | None,
    typer.Option(metavar="PH", help="Lower limit of pH; 0.5 below target if absent."),
]
HighOption = Annotated[
    str | None,
    typer.Option(metavar="PH", help="Upper limit of pH; 0.5 above target if absent."),
]
DoseOption = Annotated[str | None, typer.Option(metavar="ML", help="Dose volume, mL.")]


@dataclass(frozen=True, slots=True)
class Asked:
    """What the command line says about the product.

    Attributes
    ----------
    brief : str or None
    system, concentration, ph : str or None
    add : sequence of str
    tonicity_agent, osmolality : str or None
    store : sequence of str
    prepare_at, measure_at, low, high, dose_ml : str or None
    """

    brief: str | None
    system: str | None
    concentration: str | None
    ph: str | None
    add: Sequence[str] = ()
    tonicity_agent: str | None = None
    osmolality: str | None = None
    store: Sequence[str] = ()
    prepare_at: str | None = None
    measure_at: str | None = None
    low: str | None = None
    high: str | None = None
    dose_ml: str | None = None

    def of_the_quick_form(self) -> dict[str, str | Sequence[str]]:
        """Return the options that a brief replaces, those given."""
        every: dict[str, str | Sequence[str] | None] = {
            "--ph": self.ph,
            "--add": self.add,
            "--tonicity-agent": self.tonicity_agent,
            "--osmolality": self.osmolality,
            "--store": self.store,
            "--prepare-at": self.prepare_at,
            "--measure-at": self.measure_at,
            "--low": self.low,
            "--high": self.high,
            "--dose-ml": self.dose_ml,
        }
        return {option: value for option, value in every.items() if value}


def check_form(asked: Asked) -> None:
    """Refuse a mixture of both forms, or too little of either, before any loading.

    Raises
    ------
    UsageError
        Both forms, no system, a quick form without strength and pH, or half of a
        tonicity.
    """
    quick = asked.of_the_quick_form()
    if asked.brief is not None and quick:
        first = next(iter(quick))
        msg = (
            f"{first} is given beside the brief {asked.brief}, allowed one or the other"
        )
        raise UsageError(msg, hint=f"Set it in {asked.brief}, or leave the brief out.")
    if asked.brief is None:
        needed = {
            "--system": asked.system,
            "--concentration": asked.concentration,
            "--ph": asked.ph,
        }
        check_needed(needed, QUICK_HINT)
    elif asked.system is None:
        msg = (
            "--system is not given, allowed a buffer system, a pair or a formula of "
            "the brief"
        )
        raise UsageError(msg, hint="See `formbuf knowledge show systems`.")
    if (asked.tonicity_agent is None) != (asked.osmolality is None):
        names = ("--osmolality", "--tonicity-agent")
        one, other = names if asked.tonicity_agent is None else names[::-1]
        msg = f"{one} is given without {other}, allowed both or neither"
        raise UsageError(msg)


def bench_of(asked: Asked, library: Library) -> Bench:
    """Return the bench that the command line describes.

    Raises
    ------
    InputError
        For a value, name or brief that cannot be used.
    """
    if asked.brief is not None:
        return _from_brief(asked, library)
    from formbuf.bench.setup import bench_from_options
    from formbuf.product.pairs import system_named

    assert asked.system is not None
    ph = _required("--ph", asked.ph)
    low, high = number("--low", asked.low), number("--high", asked.high)
    window = None
    if low is not None or high is not None:
        window = (ph - 0.5 if low is None else low, ph + 0.5 if high is None else high)
    measure = number("--measure-at", asked.measure_at)
    return bench_from_options(
        library,
        system_named(library, asked.system),
        concentration_mmol_l=_required("--concentration", asked.concentration),
        ph=ph,
        measure_temperature_c=25.0 if measure is None else measure,
        prepare_temperature_c=number("--prepare-at", asked.prepare_at),
        storage_c=numbers("--store", list(asked.store)),
        window_ph=window,
        materials_mmol_l=pairs("--add", asked.add),
        agent=asked.tonicity_agent,
        target_mosm_kg=number("--osmolality", asked.osmolality),
        dose_volume_ml=number("--dose-ml", asked.dose_ml),
    )


def _required(option: str, text: str | None) -> float:
    value = number(option, text)
    assert value is not None  # check_form has looked
    return value


def _from_brief(asked: Asked, library: Library) -> Bench:
    from formbuf.bench.setup import bench_from_brief
    from formbuf.product.brief import complete, read_brief
    from formbuf.product.pairs import system_named

    assert asked.brief is not None
    assert asked.system is not None
    brief = read_brief(asked.brief)
    completed = complete(brief, library)
    own = _own_formula(completed, asked.system)
    concentration = number("--concentration", asked.concentration)
    if own is not None and own.materials:
        if concentration is not None:
            msg = (
                f"--concentration is given beside the formula {own.name!r}, whose "
                "materials fix it, allowed one or the other"
            )
            raise UsageError(msg)
        return _of_materials(completed, own)
    name = own.system if own and own.system else asked.system
    system = system_named(completed.library, name)
    if concentration is None and own:
        concentration = own.concentration_mmol_l
    if concentration is None:
        concentration = _proposed_mmol_l(brief, completed, system)
    return bench_from_brief(completed, system, concentration)


def _own_formula(completed: Completed, name: str) -> CandidateInfo | None:
    """Return the formula of the brief that bears the name, or has it as its key."""
    wanted = name.strip().casefold().removeprefix("own:")
    for own in completed.brief.candidate:
        if own.name.casefold() == wanted:
            return own
    return None


def _of_materials(completed: Completed, own: CandidateInfo) -> Bench:
    """Return the bench of a formula that is a list of materials."""
    from formbuf.advice.case import case_for
    from formbuf.advice.own_formula import system_of_materials
    from formbuf.bench.setup import bench_from_formula

    system, total = system_of_materials(case_for(completed), own)
    return bench_from_formula(completed, system, total, own.materials)


def _proposed_mmol_l(brief: Brief, completed: Completed, system: System) -> float:
    """Return the strength that the loads of the brief ask for."""
    if system.role == "none":
        return 0.0
    from formbuf.advice.candidates import judge_system
    from formbuf.advice.case import case_for

    judged = judge_system(case_for(completed), system)
    if judged.concentration_mmol_l <= 0.0:
        reason = judged.screens[0].text if judged.screens else "it cannot be sized"
        msg = f"--system: {system.id} has no proposed concentration: {reason}"
        raise InputError(msg, hint="Give --concentration to have it all the same.")
    return judged.concentration_mmol_l


def pairs(option: str, texts: Sequence[str] | None) -> dict[str, float]:
    """Return names and numbers from texts such as ``sucrose=240``.

    Raises
    ------
    UsageError
        A text without ``=``, or a name given twice.
    InputError
        A text that is no number, or not finite.
    """
    found: dict[str, float] = {}
    for name, text in named(option, texts).items():
        value = number(option, text)
        if value is None or not 0.0 <= value < float("inf"):
            msg = f"{option}: {name}={text}, allowed a number of 0 or more"
            raise InputError(msg)
        found[name] = value
    return found


def named(option: str, texts: Sequence[str] | None) -> Mapping[str, str]:
    """Return names and values from texts such as ``hydrochloric_acid=...``.

    Raises
    ------
    UsageError
        A text without ``=``, or a name given twice.
    """
    found: dict[str, str] = {}
    for text in texts or ():
        name, equals, value = text.rpartition("=")
        name, value = name.strip(), value.strip()
        if not equals or not name or not value:
            msg = f"{option}: {text!r} lacks a name or a value, allowed NAME=VALUE"
            raise UsageError(msg)
        if name in found:
            msg = f"{option}: {name} is given twice, allowed once"
            raise UsageError(msg)
        found[name] = value
    return found
