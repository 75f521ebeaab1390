"""An own formula as the bench makes it: a list of materials, nothing titrated."""

from __future__ import annotations

from collections.abc import Collection, Mapping

from formbuf.library import Library
from formbuf.product.composition import Mixture, mixture
from formbuf.product.recipe import Background


def is_titrant(library: Library, material: str) -> bool:
    """Whether a material is a strong acid or base: one strong ion and no species."""
    contents = library.find_material(material).contents
    charge = sum(
        count * library.ions[name].charge
        for name, count in contents.items()
        if name in library.ions
    )
    return bool(charge) and all(name in library.ions for name in contents)


def parts(
    library: Library, given_mmol_l: Mapping[str, float], species: Collection[str]
) -> tuple[dict[str, float], dict[str, float]]:
    """Part a formula into its buffer with titrant, and everything else.

    Parameters
    ----------
    library : Library
    given_mmol_l : mapping of str to float
        The formula [mmol/L].
    species : collection of str
        What buffers in it.
    """
    buffer: dict[str, float] = {}
    rest: dict[str, float] = {}
    for key, amount in given_mmol_l.items():
        buffers = set(library.find_material(key).contents) & set(species)
        kept = buffer if buffers or is_titrant(library, key) else rest
        kept[key] = float(amount)
    return buffer, rest


def beside(
    background_mmol_l: Mapping[str, float], rest_mmol_l: Mapping[str, float]
) -> dict[str, float]:
    """Return the excipients of the product with those of the formula [mmol/L]."""
    total = dict(background_mmol_l)
    for key, amount in rest_mmol_l.items():
        total[key] = total.get(key, 0.0) + amount
    return total


def mixed(
    library: Library,
    buffer_mmol_l: Mapping[str, float],
    others_mmol_l: Mapping[str, float],
    background: Background,
) -> Mixture:
    """Return the whole product of a formula."""
    return mixture(
        library,
        beside(others_mmol_l, buffer_mmol_l),
        extras=background.extras,
        volume_temperature_c=background.volume_temperature_c,
    )
