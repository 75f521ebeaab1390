"""The stretches of the way to a pH: from which material to which, and with what.

A system is started from its acid form and exchanged towards its base form; beyond
either form a titrant goes on. Two species that share their total are exchanged one for
the other.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from formbuf.chemistry.titration import Titrant
from formbuf.library import Library
from formbuf.library.records import System


@dataclass(frozen=True, slots=True)
class Piece:
    """One stretch of the way to a pH: where it starts and what is added.

    ``start`` and ``added`` map materials to moles per mole of buffering species and
    per mole of titration; ``limit`` is the amount per mole of species at which the
    stretch ends.
    """

    start: Mapping[str, float]
    added: Mapping[str, float]
    limit: float


def pieces(library: Library, system: System) -> list[Piece]:
    """Return the stretches from the most acid to the most basic way of making it."""
    if not system.species:
        return [
            Piece({}, {system.acid_titrant: 1.0}, np.inf),
            Piece({}, {system.base_titrant: 1.0}, np.inf),
        ]
    first = system.species[0]
    acid = _share(library, system.acid_material, first)
    base = _share(library, system.base_material, first)
    if len(system.species) == 2:
        return _two_species_pieces(library, system, base)
    down = [Piece(m, {system.acid_titrant: 1.0}, np.inf) for m in (acid or base,) if m]
    up = [Piece(m, {system.base_titrant: 1.0}, np.inf) for m in (base or acid,) if m]
    if not acid or not base:
        return [*down, *up]
    exchange = {k: -v for k, v in acid.items()}
    for key, value in base.items():
        exchange[key] = exchange.get(key, 0.0) + value
    return [*down, Piece(acid, exchange, 1.0), *up]


def _two_species_pieces(
    library: Library, system: System, base: Mapping[str, float]
) -> list[Piece]:
    second = system.species[1]
    acid_is_first = _count(library, system.acid_material, system.species[0]) > 0.0
    if acid_is_first:
        # the two species share the total: exchange the first for the second
        acid = _share(library, system.acid_material, system.species[0])
        other = _share(library, system.base_material, second)
        exchange = {**{k: -v for k, v in acid.items()}, **other}
        return [
            Piece(acid, {system.acid_titrant: 1.0}, np.inf),
            Piece(acid, exchange, 1.0),
            Piece(other, {system.base_titrant: 1.0}, np.inf),
        ]
    return [
        Piece(base, {system.acid_titrant: 1.0}, np.inf),
        Piece(base, {system.base_titrant: 1.0}, np.inf),
    ]


def _count(library: Library, material: str | None, species: str) -> float:
    if material is None:
        return 0.0
    return library.find_material(material).contents.get(species, 0.0)


def _share(library: Library, material: str | None, species: str) -> dict[str, float]:
    """Moles of a material per mole of a species; empty where there is none."""
    count = _count(library, material, species)
    return {str(material): 1.0 / count} if count else {}


def titrant_of(library: Library, added: Mapping[str, float]) -> Titrant:
    """Return what one mole of titration brings to the charge balance."""
    charge, charge2 = 0.0, 0.0
    components: dict[str, float] = {}
    for key, moles in added.items():
        for component, count in library.find_material(key).contents.items():
            if component in library.ions:
                z = library.ions[component].charge
                charge += moles * count * z
                charge2 += moles * count * z * z
            elif component in library.species:
                components[component] = components.get(component, 0.0) + moles * count
    return Titrant(
        charge, charge2, {k: v for k, v in components.items() if abs(v) > 1e-12}
    )
