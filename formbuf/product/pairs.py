"""Buffer systems of any two species that the user names, such as histidine + acetate.

The two species share the total concentration; their mole ratio sets the pH. The acid
side comes from one, the basic side from the other: of the ways whose two stocks lie
apart in pH, the one that brings fewer strong ions.
"""

from __future__ import annotations

from dataclasses import dataclass

from formbuf.errors import InputError, UnknownNameError
from formbuf.library import Library
from formbuf.library.records import Material, System
from formbuf.product.composition import mixture

SIGN = "+"
SODIUM_HYDROXIDE = "sodium_hydroxide"
#: Least distance in pH of the two stocks, and the strength at which they are compared.
LEAST_SPAN = 1.0
STOCK_MMOL_L = 20.0


@dataclass(frozen=True, slots=True)
class Forms:
    """The materials of one species: its most acid and its most basic form."""

    species: str
    acid: Material
    base: Material
    base_titrant: str


def is_pair(text: str) -> bool:
    """Whether a text names two species."""
    return SIGN in text


def system_named(library: Library, text: str, *, where: str = "--system") -> System:
    """Return the system of a name: an id of the tables, or two species with a plus.

    Parameters
    ----------
    library : Library
    text : str
        ``sodium_phosphate``, or ``histidine + acetate``.
    where : str
        Option or key, for the message.

    Raises
    ------
    UnknownNameError
        For a name that no table holds.
    InputError
        For a pair that is no pair, a species alone, or the system without species.
    """
    if is_pair(text):
        return pair_system(library, text, where=where)
    name = text.strip()
    if name in library.species and name not in library.systems:
        made_of = [s.id for s in library.systems.values() if name in s.species]
        msg = f"{where}: {name!r} is a species, allowed one of its systems"
        raise InputError(msg, hint=f"Its systems are {', '.join(made_of)}.")
    return library.get_system(name, where=where)


def pair_system(library: Library, text: str, *, where: str = "--system") -> System:
    """Return the system of two species.

    Parameters
    ----------
    library : Library
    text : str
        Two species (or one-species systems) with a plus between them.
    where : str
        Option or key, for the message.

    Returns
    -------
    System
        The first of its species comes with the acid form, the second with the basic.

    Raises
    ------
    UnknownNameError
        For a name that is neither a species nor a system of one.
    InputError
        For more or fewer than two names, twice the same, or a species of which no
        material is known.
    """
    names = [part.strip() for part in text.split(SIGN)]
    if len(names) != 2 or not all(names):
        msg = f"{where}: {text!r} does not name two species, allowed two with one plus"
        raise InputError(msg, hint='Write for example "histidine + acetate".')
    first, second = (_forms(library, name, where) for name in names)
    if first.species == second.species:
        msg = f"{where}: {text!r} names the same species twice, allowed two different"
        raise InputError(msg)
    ways = [
        (acid, base)
        for acid, base in ((first, second), (second, first))
        if _stock_ph(library, base.base) - _stock_ph(library, acid.acid) > LEAST_SPAN
    ]
    if not ways:
        msg = f"{where}: the stocks of {text!r} lie at the same pH, so no ratio sets it"
        raise InputError(msg, hint="Name an acid and a base that differ in pH.")
    acid, base = min(
        ways,
        key=lambda pair: (
            _strong_ions(library, pair[0].acid) + _strong_ions(library, pair[1].base)
        ),
    )
    return System(
        id=f"{first.species} + {second.species}",
        name=f"{_shown(library, first)} with {_shown(library, second)}",
        role="buffer",
        species=(acid.species, base.species),
        acid_material=acid.acid.id,
        base_material=base.base.id,
        acid_titrant="hydrochloric_acid",
        base_titrant=base.base_titrant,
        note="two species share the total concentration; the mole ratio sets the pH",
    )


def species_forms(library: Library, species: str) -> Forms | None:
    """Return the most acid and most basic material of a species, or None.

    The materials of its own system come first; else every material that holds only
    the species and strong ions is weighed by its charge.
    """
    own = [s for s in library.systems.values() if s.species == (species,)]
    own.sort(key=lambda system: system.base_titrant != SODIUM_HYDROXIDE)
    if own:
        return _forms_of(library, own[0])
    pure = [m for m in library.materials.values() if _is_pure(library, m, species)]
    if not pure:
        return None
    pure.sort(key=lambda m: (_charge_per_mole(library, m, species), m.waters))
    base = min(
        (m for m in pure if _same_charge(library, m, pure[-1], species)),
        key=lambda m: m.waters,
    )
    return Forms(species, pure[0], base, SODIUM_HYDROXIDE)


def _forms_of(library: Library, system: System) -> Forms:
    found = [system.acid_material, system.base_material]
    records = [library.find_material(name) for name in found if name is not None]
    return Forms(system.species[0], records[0], records[-1], system.base_titrant)


def _forms(library: Library, name: str, where: str) -> Forms:
    if name in library.systems and len(library.systems[name].species) == 1:
        return _forms_of(library, library.systems[name])
    if name not in library.species:
        known = [*library.species, *library.systems]
        raise UnknownNameError("species", name, known, where=where)
    forms = species_forms(library, name)
    if forms is None:
        msg = f"{where}: no material brings {name!r} alone"
        raise InputError(msg, hint="Describe one as [[material]] in a brief.")
    return forms


def _is_pure(library: Library, material: Material, species: str) -> bool:
    others = set(material.contents) - {species}
    has_it = species in material.contents
    return has_it and material.modelled and others <= set(library.ions)


def _charge_per_mole(library: Library, material: Material, species: str) -> float:
    """Strong positive charge per mole of the species; the basic forms carry most."""
    total = sum(
        count * library.ions[name].charge
        for name, count in material.contents.items()
        if name in library.ions
    )
    return total / material.contents[species]


def _same_charge(
    library: Library, one: Material, other: Material, species: str
) -> bool:
    a, b = (_charge_per_mole(library, m, species) for m in (one, other))
    return abs(a - b) < 1e-9


def _stock_ph(library: Library, material: Material) -> float:
    return float(mixture(library, {material.id: STOCK_MMOL_L}).solve(25.0).ph)


def _strong_ions(library: Library, material: Material) -> float:
    return sum(n for name, n in material.contents.items() if name in library.ions)


def _shown(library: Library, forms: Forms) -> str:
    return library.species[forms.species].name
