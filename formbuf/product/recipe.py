"""How a buffer system is made to a pH: which materials, how much of each.

A system is started from its acid form and exchanged towards its base form until
the charge balance closes at the wanted pH. Beyond either form a titrant goes on
(hydrochloric acid, or the hydroxide of the system). Systems of two species, such as
histidine with acetic acid, are the same problem with a titrant that buffers. The
tonicity agent fills what room is left; since a salt changes the ionic strength, the
two are settled together.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.osmolality import OsmoticLaw
from formbuf.chemistry.titration import Titrant
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.records import Material, System
from formbuf.product.composition import Extra, Mixture, ladder_of, mixture
from formbuf.product.recipe_pieces import Piece, pieces, titrant_of
from formbuf.product.recipe_search import searched_mmol_l, titrated_mmol_l

Array = NDArray[np.float64]

FILL_CAP = 12
FILL_TOLERANCE_MOSM_KG = 0.05
#: More of a titrant than this is no recipe: the pH is out of reach [mmol/L].
MOST_TITRANT_MMOL_L = 5000.0


@dataclass(frozen=True)
class Background:
    """Everything in the product that is not the buffer.

    Attributes
    ----------
    materials_mmol_l : mapping of str to float
        Excipients [mmol/L].
    extras : tuple of Extra
        The drug.
    agent : str or None
        Material that fills the room to the osmolality target.
    target_mosm_kg : float or None
        Osmolality to fill up to; None for no filling.
    volume_temperature_c : float
        Temperature at which volumes are measured [C].
    """

    materials_mmol_l: Mapping[str, float] = field(default_factory=dict)
    extras: tuple[Extra, ...] = ()
    agent: str | None = None
    target_mosm_kg: float | None = None
    volume_temperature_c: float = 25.0


@dataclass(frozen=True)
class Recipe:
    """A system made to a pH at one or many concentrations.

    Attributes
    ----------
    system : str
    concentration_mmol_l : ndarray, shape (...)
        Total of the buffering species (of the first one where a second is titrant).
    buffer_mmol_l : mapping of str to ndarray
        Materials of the buffer itself, titrant included [mmol/L].
    fill_mmol_l : ndarray, shape (...)
        Tonicity agent added [mmol/L].
    mixture : Mixture
        The whole product.
    target_ph : ndarray, shape (...)
    """

    system: str
    concentration_mmol_l: Array
    buffer_mmol_l: Mapping[str, Array]
    fill_mmol_l: Array
    mixture: Mixture
    target_ph: Array


def make(
    library: Library,
    system: System,
    concentration_mmol_l: ArrayLike,
    target_ph: ArrayLike,
    temperature_c: float,
    background: Background,
    law: OsmoticLaw,
    *,
    fill_mmol_l: ArrayLike | None = None,
) -> Recipe:
    """Make a system to a pH in a product, at one or many concentrations.

    Parameters
    ----------
    library : Library
    system : System
        With at least one material.
    concentration_mmol_l : array_like, shape (...)
        Total of the buffering species [mmol/L], above 0.
    target_ph : array_like, shape (...)
        pH as measured at ``temperature_c``.
    temperature_c : float
        Temperature at which pH is measured [C].
    background : Background
    law : OsmoticLaw
    fill_mmol_l : array_like, shape (...), optional
        Tonicity agent to add [mmol/L]; found from the osmolality target if absent.

    Returns
    -------
    Recipe

    Raises
    ------
    InputError
        When the materials cannot give this pH.
    """
    c, ph = np.broadcast_arrays(
        np.asarray(concentration_mmol_l, dtype=float),
        np.asarray(target_ph, dtype=float),
    )
    given = 0.0 if fill_mmol_l is None else fill_mmol_l
    fill: Array = np.broadcast_to(np.asarray(given, dtype=float), c.shape)
    ways = sorted(pieces(library, system), key=lambda piece: np.isinf(piece.limit))
    buffer, mixed = _titrated(
        library, system, ways, c, ph, temperature_c, background, fill
    )
    target = background.target_mosm_kg
    if background.agent is None or target is None or fill_mmol_l is not None:
        return Recipe(system.id, c, buffer, fill, mixed, ph)
    slope = np.full(
        c.shape, _fill_slope(library.find_material(background.agent), library)
    )
    before: tuple[Array, Array] | None = None
    for _ in range(FILL_CAP):
        solution = mixed.solve(temperature_c)
        osmol = mixed.osmolality(temperature_c, solution, law).osmolality_mosm_kg
        gap = target - osmol
        molal = fill / mixed.water_kg_l
        if before is not None:
            slope = _secant(slope, molal - before[0], osmol - before[1])
        before = molal, osmol
        new = np.maximum(fill + gap * mixed.water_kg_l / slope, 0.0)
        settled = (np.abs(gap) <= FILL_TOLERANCE_MOSM_KG) | (
            (new <= 0.0) & (fill <= 0.0)
        )
        if np.all(settled):
            break
        fill = new
        buffer, mixed = _titrated(
            library,
            system,
            ways,
            c,
            ph,
            temperature_c,
            background,
            fill,
            water=mixed.water_kg_l,
        )
    else:
        msg = (
            f"{system.id}: the tonicity agent {background.agent} did not settle at "
            f"{target:g} mosmol/kg within {FILL_CAP} rounds"
        )
        raise InputError(msg, hint="choose another agent or target")
    return Recipe(system.id, c, buffer, fill, mixed, ph)


def _fill_slope(agent: Material, library: Library) -> float:
    """Approximate mosmol/kg that 1 mmol/kg of the agent adds."""
    particles = sum(agent.contents.values())
    charged = any(component in library.ions for component in agent.contents)
    return particles * (0.92 if charged else 1.06)


def _secant(slope: Array, step: Array, gained: Array) -> Array:
    """Osmolality gained per molality of agent over the last step, where it is sound."""
    moved = np.abs(step) > 1e-6
    seen = np.divide(gained, step, out=slope.copy(), where=moved)
    sound = (seen > 0.5 * slope) & (seen < 2.0 * slope)
    return np.where(sound, seen, slope)


def _titrated(
    library: Library,
    system: System,
    ways: list[Piece],
    c: Array,
    ph: Array,
    temperature_c: float,
    background: Background,
    fill: Array,
    *,
    water: Array | None = None,
) -> tuple[dict[str, Array], Mixture]:
    """Close the charge balance; the volume of the titrant is settled in a second pass.

    With the water of an earlier round one pass is enough.
    """
    others: dict[str, ArrayLike] = dict(background.materials_mmol_l)
    if background.agent is not None:
        others[background.agent] = fill + background.materials_mmol_l.get(
            background.agent, 0.0
        )
    buffer: dict[str, Array] = {}
    for _ in range(2 if water is None else 1):
        buffer = _close(
            library, system, ways, c, ph, temperature_c, others, background, water
        )
        mixed = _whole(library, buffer, others, background)
        water = mixed.water_kg_l
    return buffer, mixed


def _whole(
    library: Library,
    buffer: Mapping[str, ArrayLike],
    others: Mapping[str, ArrayLike],
    background: Background,
) -> Mixture:
    materials: dict[str, ArrayLike] = dict(others)
    for key, amount in buffer.items():
        materials[key] = np.asarray(materials.get(key, 0.0)) + amount
    return mixture(
        library,
        materials,
        extras=background.extras,
        volume_temperature_c=background.volume_temperature_c,
    )


def _close(
    library: Library,
    system: System,
    ways: list[Piece],
    c: Array,
    ph: Array,
    temperature_c: float,
    others: Mapping[str, ArrayLike],
    background: Background,
    water: Array | None,
) -> dict[str, Array]:
    """Return the buffer's materials [mmol/L], taking the stretch that fits each state.

    The stretch that closed the balance of the last state comes first among ``ways`` in
    the next round, which mostly asks for the same one.
    """
    done = np.zeros(c.shape, dtype=bool)
    result: dict[str, Array] = {}
    for piece in tuple(ways):
        start = {k: v * c for k, v in piece.start.items()}
        mixed = _whole(library, start, others, background)
        titrant = titrant_of(library, piece.added)
        mixed = _with_components(library, mixed, titrant)
        if water is not None:
            mixed = _rescaled(mixed, water)
        moles = titrated_mmol_l(
            mixed, titrant, temperature_c, ph, has_end=bool(np.isfinite(piece.limit))
        )
        if moles is None:
            moles = _searched(library, piece, c, ph, temperature_c, others, background)
        most = np.minimum(piece.limit * c + 1e-12, MOST_TITRANT_MMOL_L)
        fits = ~done & (moles >= -1e-12) & (moles <= most)
        for key, base in start.items():
            result[key] = np.where(fits, base, result.get(key, 0.0))
        for key, share in piece.added.items():
            before = result.get(key, np.zeros(c.shape))
            result[key] = np.where(fits, before + share * moles, before)
        done |= fits
        if done.all():
            ways.remove(piece)
            ways.insert(0, piece)
            break
    if not done.all():
        worst = float(ph[~done].flat[0])
        titrants = (
            library.find_material(key).name
            for key in (system.acid_titrant, system.base_titrant)
        )
        msg = (
            f"{system.name} cannot be brought to pH {worst:.2f} with its materials and "
            f"{' or '.join(titrants)}"
        )
        raise InputError(msg)
    return {k: np.maximum(v, 0.0) for k, v in result.items() if np.any(v > 1e-9)}


def _searched(
    library: Library,
    piece: Piece,
    c: Array,
    ph: Array,
    temperature_c: float,
    others: Mapping[str, ArrayLike],
    background: Background,
) -> Array:
    """Return the amount along a stretch that exchanges an aggregating species."""

    def ph_at(moles: Array) -> Array:
        amounts = {k: v * c for k, v in piece.start.items()}
        for key, share in piece.added.items():
            amounts[key] = amounts.get(key, 0.0) + share * moles
        made = {k: np.maximum(v, 0.0) for k, v in amounts.items()}
        return _whole(library, made, others, background).solve(temperature_c).ph

    return searched_mmol_l(ph_at, ph, piece.limit * c)


def _with_components(library: Library, mixed: Mixture, titrant: Titrant) -> Mixture:
    """Add ladders that only the titrant brings, at zero amount."""
    missing = [name for name in titrant.components if mixed.index(name) < 0]
    if not missing:
        return mixed
    zeros = np.zeros((*np.shape(mixed.water_kg_l), len(missing)))
    return replace(
        mixed,
        ladders=mixed.ladders + tuple(ladder_of(library.species[m]) for m in missing),
        totals_mol_kg=np.concatenate([mixed.totals_mol_kg, zeros], axis=-1),
    )


def _rescaled(mixed: Mixture, water: Array) -> Mixture:
    """Return the mixture as if dissolved in another amount of water per litre."""
    factor = mixed.water_kg_l / water
    return replace(
        mixed,
        totals_mol_kg=mixed.totals_mol_kg * factor[..., np.newaxis],
        ions_mol_kg={k: v * factor for k, v in mixed.ions_mol_kg.items()},
        neutrals_mol_kg={k: v * factor for k, v in mixed.neutrals_mol_kg.items()},
        water_kg_l=water,
    )


def weighed(
    library: Library, amounts_mmol_l: Mapping[str, float]
) -> Sequence[tuple[str, float, float]]:
    """Return (material, mmol/L, g/L) for each material that is there."""
    rows = []
    for key, mmol_l in amounts_mmol_l.items():
        if mmol_l > 0.0:
            mass = library.find_material(key).molar_mass_g_mol.value
            rows.append((key, float(mmol_l), float(mmol_l) * mass / 1000.0))
    return rows
