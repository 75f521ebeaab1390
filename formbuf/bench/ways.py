"""The two ways of making a buffer: both forms together, or one form with strong titrant."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Literal

from formbuf.bench.given import is_titrant
from formbuf.bench.grades import same_but_water
from formbuf.bench.setup import NO_BUFFER, Bench, Made, make_product
from formbuf.errors import ConvergenceError, InputError
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.pairs import species_forms

WayId = Literal["forms", "titrant", "as_given"]
#: Share of an ion by which one way must exceed the other to be worth saying; less
#: comes from the volumes that the materials take up.
WORTH_SAYING = 0.01


@dataclass(frozen=True, slots=True)
class Way:
    """One way of making the product.

    Attributes
    ----------
    id : {"forms", "titrant", "as_given"}
    title : str
    made : Made
    titrants : tuple of str
        Strong acids and bases among its materials.
    by_product : mapping of str to float
        Strong ions it brings beyond the way with fewest [mmol/L].
    """

    id: WayId
    title: str
    made: Made
    titrants: tuple[str, ...]
    by_product: Mapping[str, float]


def with_hydrates_in_hand(bench: Bench, hydrates: tuple[str, ...]) -> Bench:
    """Return a bench whose materials are the hydrates in hand.

    Raises
    ------
    InputError
        For a material that takes the place of none.
    """
    for name in hydrates:
        wanted = bench.library.find_material(name, where="--use")
        others = {m.id for m in same_but_water(bench.library, wanted)}
        swapped = _swapped(bench, others, wanted.id)
        if swapped is bench and wanted.id not in _materials(bench):
            held = ", ".join(sorted(_materials(bench)))
            msg = (
                f"--use: {wanted.id} is no other hydrate of a material here, allowed "
                f"hydrates of {held}"
            )
            raise InputError(msg)
        bench = swapped
    return bench


def _materials(bench: Bench) -> set[str]:
    system, background = bench.system, bench.background
    found: set[str | None] = {background.agent, *background.materials_mmol_l}
    if bench.given_mmol_l is None:
        found |= {system.acid_material, system.base_material}
    return {name for name in (*found, *(bench.given_mmol_l or {})) if name}


def _swapped(bench: Bench, others: set[str], wanted: str) -> Bench:
    if not others & _materials(bench):
        return bench
    system, background = bench.system, bench.background

    def taken(name: str | None) -> str | None:
        return wanted if name in others else name

    return replace(
        bench,
        system=replace(
            system,
            acid_material=taken(system.acid_material),
            base_material=taken(system.base_material),
        ),
        background=replace(
            background,
            agent=taken(background.agent),
            materials_mmol_l={
                str(taken(name)): amount
                for name, amount in background.materials_mmol_l.items()
            },
        ),
        given_mmol_l=None
        if bench.given_mmol_l is None
        else {str(taken(k)): amount for k, amount in bench.given_mmol_l.items()},
    )


def ways_of(bench: Bench, *, temperature_c: float | None = None) -> tuple[Way, ...]:
    """Return the ways of making the product, both forms first.

    Parameters
    ----------
    bench : Bench
    temperature_c : float, optional
        Temperature at which the target holds [C], if not where it is measured.

    Raises
    ------
    InputError
        When no way reaches the pH.
    """
    if bench.given_mmol_l is not None:
        one = make_product(bench)
        strong = tuple(k for k in one.buffer_mmol_l if is_titrant(bench.library, k))
        return (Way("as_given", "the formula as it is given", one, strong, {}),)
    made: list[tuple[WayId, str, Made]] = []
    failure: InputError | None = None
    try:
        first = make_product(bench, temperature_c=temperature_c)
    except InputError as error:
        first, failure = None, error
    both = bench.system.acid_material and bench.system.base_material
    if first is not None:
        title = (
            "acid and base forms together" if both else "one form with strong titrant"
        )
        kind: WayId = "forms" if both else "titrant"
        made.append((kind, title, first))
    if bench.system.role != "none" and both:
        second = _with_titrant(bench, first, temperature_c)
        if second is not None and not _same(first, second):
            made.append(("titrant", "one form with strong titrant", second))
    if not made:
        assert failure is not None
        raise failure
    ions = [_strong_ions(bench.library, m) for _, _, m in made]
    return tuple(
        Way(
            kind,
            title,
            one,
            tuple(k for k in one.buffer_mmol_l if is_titrant(bench.library, k)),
            _beyond(own, ions),
        )
        for (kind, title, one), own in zip(made, ions, strict=True)
    )


def _with_titrant(
    bench: Bench, first: Made | None, temperature_c: float | None
) -> Made | None:
    """Return the way with fewest strong ions that starts from one form of each species."""
    tries: list[Made] = []
    for system, extra in _starts(bench, first):
        started = bench
        if extra:
            materials = dict(bench.background.materials_mmol_l)
            for key, amount in extra.items():
                materials[key] = materials.get(key, 0.0) + amount
            started = replace(
                bench, background=replace(bench.background, materials_mmol_l=materials)
            )
        try:
            made = make_product(started, system=system, temperature_c=temperature_c)
        except (InputError, ConvergenceError):
            continue
        if extra:
            made = _as_buffer(made, extra)
        if any(is_titrant(bench.library, key) for key in made.buffer_mmol_l):
            tries.append(made)
    return min(
        tries,
        key=lambda m: round(sum(_strong_ions(bench.library, m).values()), 6),
        default=None,
    )


def _starts(bench: Bench, first: Made | None) -> list[tuple[System, dict[str, float]]]:
    """Systems with one form left out; for two species their forms as materials."""
    system = bench.system
    if len(system.species) == 1:
        return [
            (replace(system, base_material=None), {}),
            (replace(system, acid_material=None), {}),
        ]
    if first is None:
        return []
    none = bench.library.systems[NO_BUFFER]
    bare = replace(
        none, acid_titrant="hydrochloric_acid", base_titrant=system.base_titrant
    )
    starts = []
    for side in ("acid", "base"):
        extra: dict[str, float] = {}
        for species in system.species:
            forms = species_forms(bench.library, species)
            if forms is None:
                return []
            material = forms.acid if side == "acid" else forms.base
            total = sum(
                bench.library.find_material(key).contents.get(species, 0.0) * amount
                for key, amount in first.buffer_mmol_l.items()
            )
            extra[material.id] = total / material.contents[species]
        starts.append((bare, extra))
    return starts


def _same(first: Made | None, second: Made) -> bool:
    """Whether two ways weigh the same materials."""
    return first is not None and set(first.buffer_mmol_l) == set(second.buffer_mmol_l)


def _as_buffer(made: Made, extra: Mapping[str, float]) -> Made:
    """Count the forms that were laid in as excipients among the buffer again."""
    others = dict(made.others_mmol_l)
    for key, amount in extra.items():
        others[key] -= amount
    return Made(
        made.mixture,
        {**extra, **made.buffer_mmol_l},
        {k: v for k, v in others.items() if v > 1e-9},
    )


def _strong_ions(library: Library, made: Made) -> dict[str, float]:
    total: dict[str, float] = {}
    for key, amount in made.buffer_mmol_l.items():
        for name, count in library.find_material(key).contents.items():
            if name in library.ions:
                total[name] = total.get(name, 0.0) + count * amount
    return total


def _beyond(own: Mapping[str, float], ions: list[dict[str, float]]) -> dict[str, float]:
    least = min(ions, key=lambda table: sum(table.values()))
    return {
        name: amount - least.get(name, 0.0)
        for name, amount in own.items()
        if amount - least.get(name, 0.0) > WORTH_SAYING * max(amount, 1.0)
    }
