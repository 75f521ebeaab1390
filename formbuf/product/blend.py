"""Mix two solutions by volume, and make one from dissolved components.

Volumes are taken as additive (right to about 0.1 % for dilute aqueous solutions).
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.osmolality import water_kg_l
from formbuf.errors import InputError, UnknownNameError
from formbuf.library import Library
from formbuf.product.composition import Mixture, combined_notes, ladder_of

Array = NDArray[np.float64]

#: Molality below which a component is not worth a note, mol/kg.
TRACE_MOL_KG = 1e-4


def dissolved(
    library: Library,
    contents_mmol_l: Mapping[str, float],
    *,
    temperature_c: float = 25.0,
) -> Mixture:
    """Return a solution given by its components instead of its materials.

    Parameters
    ----------
    library : Library
    contents_mmol_l : mapping of str to float
        Species, ions and uncharged solutes [mmol per litre of solution].
    temperature_c : float
        Temperature at which the volume was measured [C].

    Returns
    -------
    Mixture

    Raises
    ------
    UnknownNameError
        For a component that the library does not hold.
    """
    volume = sum(
        amount / 1000.0 * _volume_ml_mol(library, name)
        for name, amount in contents_mmol_l.items()
    )
    water = np.asarray(water_kg_l(volume, temperature_c))
    ladders: list[Ladder] = []
    totals: list[Array] = []
    ions: dict[str, Array] = {}
    neutrals: dict[str, Array] = {}
    for name, amount in contents_mmol_l.items():
        molal = np.asarray(amount / 1000.0 / water)
        if name in library.species:
            ladders.append(ladder_of(library.species[name]))
            totals.append(molal)
        elif name in library.ions:
            ions[name] = molal
        else:
            neutrals[name] = molal
    return Mixture(
        tuple(ladders),
        np.stack(totals, axis=-1) if totals else np.zeros(0),
        ions,
        {name: library.ions[name].charge for name in ions},
        neutrals,
        water,
        notes=combined_notes(ions, [ladder.name for ladder in ladders]),
    )


def _volume_ml_mol(library: Library, name: str) -> float:
    """Volume of one mole of a component; ions as the halves of a salt."""
    volumes = library.partial_volumes
    if name in library.neutrals:
        known = volumes.get(name, volumes["default_organic"])
        return library.neutrals[name].molar_mass_g_mol * known.volume_ml_g.value
    if name in library.ions:
        salt = volumes["sodium_chloride"].volume_ml_g.value
        return library.ions[name].molar_mass_g_mol * salt
    if name in library.species:
        for material in library.materials.values():
            if dict(material.contents) == {name: 1.0} and not material.waters:
                mass = material.molar_mass_g_mol.value
                return mass * volumes["default_organic"].volume_ml_g.value
        return 0.0
    known_names = [*library.species, *library.ions, *library.neutrals]
    raise UnknownNameError("component", name, known_names)


def blend(first: Mixture, second: Mixture, second_share: ArrayLike) -> Mixture:
    """Mix two solutions.

    Parameters
    ----------
    first, second : Mixture
        Single states, closed to gases.
    second_share : array_like, shape (...)
        Volume of the second over the volume of both, 0 to 1.

    Returns
    -------
    Mixture, shape (...)

    Raises
    ------
    InputError
        For a share outside 0 to 1, or two different components of one name.
    """
    share = np.asarray(second_share, dtype=float)
    if not np.all((share >= 0.0) & (share <= 1.0)):
        msg = "the share of a solution in a mixture must lie between 0 and 1"
        raise InputError(msg)
    parts = ((first, 1.0 - share), (second, share))
    water: Array = sum((f * m.water_kg_l for m, f in parts), np.zeros(share.shape))
    per_litre: dict[str, dict[str, Array]] = {"ions": {}, "neutrals": {}, "ladders": {}}
    ladders: dict[str, Ladder] = {}
    charges: dict[str, int] = {}
    for m, f in parts:
        for ladder, total in zip(m.ladders, _columns(m), strict=True):
            if ladders.setdefault(ladder.name, ladder) != ladder:
                msg = f"two different components are both called {ladder.name!r}"
                raise InputError(msg)
            _add(per_litre["ladders"], ladder.name, f * total * m.water_kg_l)
        for name, amount in m.ions_mol_kg.items():
            charges[name] = m.ion_charges[name]
            _add(per_litre["ions"], name, f * amount * m.water_kg_l)
        for name, amount in m.neutrals_mol_kg.items():
            _add(per_litre["neutrals"], name, f * amount * m.water_kg_l)
    molal = {
        kind: {name: amount / water for name, amount in table.items()}
        for kind, table in per_litre.items()
    }
    totals = [molal["ladders"][name] for name in ladders]
    stacked = np.stack(totals, axis=-1) if totals else np.zeros((*share.shape, 0))
    present = [
        name for name in ladders if np.max(molal["ladders"][name]) > TRACE_MOL_KG
    ]
    notes = (*first.notes, *second.notes, *combined_notes(molal["ions"], present))
    return Mixture(
        tuple(ladders.values()),
        stacked,
        molal["ions"],
        charges,
        molal["neutrals"],
        water,
        notes=tuple(dict.fromkeys(notes)),
    )


def _columns(mixed: Mixture) -> list[Array]:
    return [mixed.totals_mol_kg[..., j] for j in range(len(mixed.ladders))]


def _add(table: dict[str, Array], name: str, amount: Array) -> None:
    table[name] = table.get(name, np.zeros(())) + amount
