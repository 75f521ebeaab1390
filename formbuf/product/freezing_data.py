"""The freezing tables as brines, solids, observations and classes.

Which parameters and solids go into which brine is written in the tables (columns
``used_in`` and ``models``); nothing is chosen here. One set of phosphate parameters
serves one brine: Kim & Frederick 1988 where sodium is the main cation, Pitzer &
Mayorga 1973 where potassium is. A mixture of both cations takes the set of the
larger one for all its pairs; the two are never mixed.
"""

from __future__ import annotations

import functools
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

from formbuf.chemistry.freezing_records import Brine, Solid, state_name
from formbuf.chemistry.pitzer import ALPHA_1, Coefficient, Pair, PitzerSet
from formbuf.chemistry.solids import Solubility, Surroundings
from formbuf.errors import KnowledgeError
from formbuf.library import Library
from formbuf.library.tables import Row
from formbuf.product import freezing_schemas as schemas
from formbuf.product.composition import ladder_of

#: Published-against-computed error of the crystallising bound (the misses at the
#: published ternary eutectics, rounded up; judgement).
ERROR_PH = MappingProxyType({"sodium": 0.3, "potassium": 0.5})
ERROR_PH_MIXED = 0.5

#: The phosphate ion was measured to 0.8 mol/kg only, and then as the main anion: where
#: it holds more than this share of the phosphate the path ends (judgement).
REFUSED = MappingProxyType({"phosphate[-3]": 0.05})

_TERMS = ("a0", "a1_k", "a2", "a3_per_k", "a4_per_k2", "a5_k2")
_BRINE_NOTES = MappingProxyType(
    {
        "sodium": (
            (
                "phosphate parameters of Kim & Frederick 1988 at 25 C, chloride "
                "parameters with their temperature dependence"
            ),
            (
                "pH on the ion-interaction scale; another single-ion convention moves it "
                "by up to 0.3"
            ),
        ),
        "potassium": (
            (
                "phosphate parameters of Pitzer & Mayorga 1973 at 25 C (the trace of "
                "phosphate ion by Kim & Frederick 1988), chloride parameters with their "
                "temperature dependence"
            ),
            (
                "K2HPO4.6H2O is anchored on its published eutectic, so that eutectic is "
                "no test of it"
            ),
            (
                "pH on the ion-interaction scale; another single-ion convention moves it "
                "by up to 0.3"
            ),
        ),
    }
)


@dataclass(frozen=True, slots=True)
class FreezingClass:
    """What published evidence says of one system on freezing.

    Attributes
    ----------
    system : str
    freezing_class : str
        ``negligible``, ``moderate``, ``severe``, ``sources disagree``, ``unknown``.
    direction : str
        ``acid``, ``basic``, ``both``, ``none`` or empty.
    crystallises : str
        Id of the solid, empty where none does.
    reason : str
    sources : tuple of str
    basis : str
    """

    system: str
    freezing_class: str
    direction: str
    crystallises: str
    reason: str
    sources: tuple[str, ...]
    basis: str


@dataclass(frozen=True, slots=True)
class Observation:
    """One published observation of a frozen buffer.

    ``numbers`` holds the cells of ``observations.csv`` that are numbers, by column,
    and ``texts`` the others; empty cells are left out.
    """

    id: str
    systems: tuple[str, ...]
    numbers: Mapping[str, float]
    texts: Mapping[str, str]
    source: str
    basis: str

    def to_dict(self) -> dict[str, Any]:
        """Return the observation in the shape of the JSON report."""
        return {
            "id": self.id,
            **self.texts,
            **self.numbers,
            "source": self.source,
            "basis": self.basis,
        }


@dataclass(frozen=True, slots=True)
class FreezingData:
    """Everything a freezing calculation takes from the tables.

    Attributes
    ----------
    brines : mapping of str to Brine
        ``sodium`` and ``potassium``.
    watched : tuple of Solid
        Solids that systems without brine parameters may become supersaturated with.
    classes : mapping of str to FreezingClass
        By system.
    """

    brines: Mapping[str, Brine]
    watched: tuple[Solid, ...]
    classes: Mapping[str, FreezingClass]


@functools.cache
def load_freezing_data(library: Library) -> FreezingData:
    """Read the tables that a calculation needs; kept for the library given.

    Raises
    ------
    KnowledgeError
        Where a table is broken or refers to what is not there.
    """
    states = state_names(library)
    brines = {}
    for model in ("sodium", "potassium"):
        parameters, limits = pitzer_set(library, model, states)
        brines[model] = Brine(
            f"{model} phosphate brine",
            parameters,
            model_solids(library, model),
            error_ph=ERROR_PH[model],
            notes=_BRINE_NOTES[model],
            limits=limits,
            refused=REFUSED,
        )
    classes = {
        row.text("system"): FreezingClass(
            row.text("system"),
            row.text("freezing_class"),
            row.text("direction"),
            row.text("crystallises"),
            row.text("reason"),
            row.ids("sources"),
            row.text("basis"),
        )
        for row in library.read_table(schemas.CLASS_TABLE)
    }
    return FreezingData(
        MappingProxyType(brines),
        model_solids(library, "debye_huckel"),
        MappingProxyType(classes),
    )


def state_names(library: Library) -> Mapping[str, str]:
    """Return the name in the chemistry of each state of ``freezing/states.csv``."""
    names: dict[str, str] = {}
    for row in library.read_table(schemas.STATES):
        component = row.text("component")
        own = row.text("id")
        species = library.species.get(component)
        products = {a.product for a in species.associations} if species else set()
        if component and own not in products:
            names[own] = state_name(component, row.integer("charge"))
        else:
            names[own] = own
    return names


def pitzer_set(
    library: Library, model: str, states: Mapping[str, str]
) -> tuple[PitzerSet, Mapping[str, float]]:
    """Return the parameters marked for a model and the molalities they rest on."""
    charges = {
        row.text("id"): row.integer("charge")
        for row in library.read_table(schemas.STATES)
    }
    singles: dict[tuple[str, ...], dict[str, Row]] = {}
    for row in library.read_table(schemas.PITZER):
        if model not in row.ids("used_in"):
            continue
        members = row.ids("members")
        faults = [m for m in members if m not in states]
        if faults or row.text("parameter") in singles.get(members, {}):
            what = f"unknown state {faults[0]!r}" if faults else "given twice"
            raise KnowledgeError([f"{row.where('members')}: {what} in model {model!r}"])
        singles.setdefault(members, {})[row.text("parameter")] = row
    pairs: list[Pair] = []
    limits: dict[str, float] = {}
    theta: dict[tuple[str, str], Coefficient] = {}
    psi: dict[tuple[str, str, str], Coefficient] = {}
    for members, rows in singles.items():
        names = tuple(states[m] for m in members)
        if "beta0" in rows:
            cation, anion = sorted(members, key=lambda m: -charges[m])
            pairs.append(_pair(states[cation], states[anion], rows))
            highest = rows["beta0"].number("highest_molality_mol_kg")
            if highest is not None and "phosphate" in anion and cation == model:
                limits[states[anion]] = highest
        elif "theta" in rows:
            one, other = sorted(names)
            theta[one, other] = _coefficient(rows["theta"])
        elif "psi" in rows:
            a, b, c = sorted(names)
            psi[a, b, c] = _coefficient(rows["psi"])
    return PitzerSet(model, tuple(pairs), theta, psi), limits


def _pair(cation: str, anion: str, rows: Mapping[str, Row]) -> Pair:
    missing = {"beta0", "beta1", "c_phi"} - set(rows)
    if missing:
        row = next(iter(rows.values()))
        raise KnowledgeError(
            [f"{row.where('parameter')}: {', '.join(sorted(missing))} missing"]
        )
    return Pair(
        cation,
        anion,
        _coefficient(rows["beta0"]),
        _coefficient(rows["beta1"]),
        _coefficient(rows["c_phi"]),
        alpha1=rows["beta1"].number("alpha") or ALPHA_1,
    )


def _coefficient(row: Row) -> Coefficient:
    a0, a1, a2, a3, a4, a5 = (row.number(name) or 0.0 for name in _TERMS)
    return Coefficient((a0, a1, a2, a3, a4, a5))


def model_solids(library: Library, model: str) -> tuple[Solid, ...]:
    """Return the solids of a model with their solubility constants."""
    constants = {
        row.text("solid"): (row.figure("ln_k_a"), row.figure("ln_k_b_k"))
        for row in library.read_table(schemas.CONSTANTS)
        if row.text("model") == model
    }
    found = []
    for solid, row in bare_solids(library, model):
        if solid.id not in constants:
            raise KnowledgeError(
                [f"{row.where('models')}: no solubility constant for model {model!r}"]
            )
        ln_k = constants[solid.id]
        found.append(
            Solid(
                solid.id,
                solid.formula,
                solid.states,
                solid.components,
                solid.waters,
                ln_k,
            )
        )
    return tuple(found)


def bare_solids(library: Library, model: str) -> tuple[tuple[Solid, Row], ...]:
    """Return the solids of a model before any constant, each with its row."""
    states = state_names(library)
    found = []
    for row in library.read_table(schemas.SOLIDS):
        if model in row.ids("models"):
            solid = Solid(
                row.text("id"),
                row.text("formula"),
                {states[name]: count for name, count in _state_counts(row, states)},
                dict(row.counts("components")),
                row.figure("waters"),
                (0.0, 0.0),
            )
            found.append((solid, row))
    return tuple(found)


def _state_counts(row: Row, states: Mapping[str, str]) -> Iterable[tuple[str, float]]:
    for part in row.text("states").split(" "):
        name, colon, count = part.partition(":")
        if name not in states or not colon or not count.isdecimal():
            raise KnowledgeError(
                [f"{row.where('states')}: {part!r}, allowed state:count state:count"]
            )
        yield name, float(count)


def solubility_rows(library: Library, solid: str, use: str) -> tuple[Solubility, ...]:
    """Return the solubilities of a solid that are marked for a use."""
    mass = {
        row.text("id"): row.figure("molar_mass_anhydrous_g_mol")
        for row in library.read_table(schemas.SOLIDS)
    }
    return tuple(
        Solubility(
            row.figure("temperature_c"),
            10.0 * row.figure("g_anhydrous_per_100g_water") / mass[solid],
        )
        for row in library.read_table(schemas.SOLUBILITY)
        if row.text("solid") == solid and row.text("use") == use
    )


def surroundings(library: Library, model: str) -> Surroundings:
    """Return the ladders, ions and parameters that a model dissolves solids in."""
    parameters = None
    if model != "debye_huckel":
        parameters, _ = pitzer_set(library, model, state_names(library))
    return Surroundings(
        parameters,
        {name: ladder_of(species) for name, species in library.species.items()},
        {name: ion.charge for name, ion in library.ions.items()},
    )


def observations(
    library: Library, system: str | None = None
) -> tuple[Observation, ...]:
    """Return the published observations, of one system where it is named."""
    found = []
    for row in library.read_table(schemas.OBSERVATIONS):
        if system is not None and system not in row.ids("systems"):
            continue
        numbers: dict[str, float] = {}
        texts: dict[str, str] = {}
        for name, value in row.values.items():
            if name in ("id", "systems", "source", "basis"):
                continue
            if isinstance(value, str):
                texts[name] = value
            elif isinstance(value, int | float):
                numbers[name] = float(value)
        found.append(
            Observation(
                row.text("id"),
                row.ids("systems"),
                numbers,
                texts,
                row.text("source"),
                row.text("basis"),
            )
        )
    return tuple(found)
