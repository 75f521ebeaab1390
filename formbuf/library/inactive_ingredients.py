"""Lay a regulator's list of inactive ingredients over the table of precedent.

Rows are matched by CAS number, then by name; what a row lists for a material becomes
an amount of each species in it. On a route the highest concentration listed for any
material of a species replaces our ceiling, and is marked; a daily exposure caps what a
day may bring; a species that we know no precedent of, but that is listed, counts as
``limited``. What we call ``avoid`` stays so: a list of what was once used is no advice.
"""

from __future__ import annotations

import dataclasses
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from types import MappingProxyType

from formbuf.library.inactive_file import (
    InactiveFile,
    Listed,
    PrecedentFile,
    read_inactive_file,
)
from formbuf.library.library import Library
from formbuf.library.records import Material, Precedent, Source
from formbuf.library.schemas import INGREDIENT_NAMES

SOURCE_ID = "precedent_file"
#: Words for a route, in small letters and without signs, and our route.
ROUTES: Mapping[str, str] = {
    "auricular otic": "otic",
    "epidural": "intrathecal_epidural",
    "inhalation": "inhalation",
    "intra articular": "intra_articular",
    "intraarticular": "intra_articular",
    "intracameral": "intracameral",
    "intradermal": "intradermal",
    "intramuscular": "intramuscular",
    "intraocular": "intracameral",
    "intrathecal": "intrathecal_epidural",
    "intravenous": "intravenous",
    "intravitreal": "intravitreal",
    "irrigation": "irrigation",
    "iv infusion": "intravenous",
    "nasal": "nasal",
    "ophthalmic": "ophthalmic_topical",
    "oral": "oral_liquid",
    "otic": "otic",
    "respiratory inhalation": "inhalation",
    "subcutaneous": "subcutaneous",
    "topical": "topical",
}


@dataclass(frozen=True, slots=True)
class _Figure:
    """What the file says of one species on one route."""

    ceiling_mmol_l: float | None = None
    ceiling_row: Listed | None = None
    daily_mmol: float | None = None
    daily_row: Listed | None = None


def with_precedent_file(library: Library, path: Path) -> Library:
    """Return the library with a list of inactive ingredients over its precedents.

    Parameters
    ----------
    library : Library
        Left as it is.
    path : Path
        Comma-separated file; see `formbuf.library.inactive_file`.

    Raises
    ------
    InputError
        If the file cannot be read or holds bad rows; all are told.
    """
    return laid_over(library, read_inactive_file(path))


def laid_over(library: Library, listed: InactiveFile) -> Library:
    """Return the library with the rows of a file over its precedents."""
    matcher = _Matcher(library)
    unused: Counter[str] = Counter()
    figures: dict[tuple[str, str], _Figure] = {}
    matched = 0
    for row in listed.rows:
        material, conflict = matcher.find(row)
        if conflict:
            unused["CAS number and name disagree"] += 1
        if material is None:
            matched += conflict
            continue
        matched += 1
        species = [c for c in material.contents if c in library.species]
        route = ROUTES.get(_words(row.route))
        why = _why_unused(row, species, route)
        if why or route is None:
            unused[why] += 1
            continue
        for name in species:
            key = (name, route)
            figures[key] = _merged(figures.get(key, _Figure()), row, material, name)
    source = Source(
        SOURCE_ID,
        "",
        "",
        f"List of inactive ingredients as given by the user, {Path(listed.path).name}",
        f"sha256 {listed.sha256[:12]}",
        overlay=True,
    )
    rows = dict(library.precedents)
    rows |= {key: _replaced(rows.get(key), key, f) for key, f in figures.items()}
    summary = PrecedentFile(
        listed.path,
        listed.sha256,
        len(listed.rows),
        matched,
        len(listed.rows) - matched,
        MappingProxyType(dict(unused)),
        len(figures),
    )
    return dataclasses.replace(
        library,
        precedents=MappingProxyType(rows),
        sources=MappingProxyType({**library.sources, SOURCE_ID: source}),
        precedent_file=summary,
    )


class _Matcher:
    """Finds the material that a row of the file means."""

    def __init__(self, library: Library) -> None:
        self.materials = library.materials
        self.by_cas = {m.cas: m for m in library.materials.values() if m.cas}
        self.by_name = {_words(m.name): m for m in library.materials.values()}
        for row in library.read_table(INGREDIENT_NAMES):
            name = _words(row.text("name"))
            self.by_name[name] = library.materials[row.text("material")]

    def find(self, row: Listed) -> tuple[Material | None, bool]:
        """Return the material, and whether CAS number and name contradict each other."""
        by_cas = self.by_cas.get(row.cas) if row.cas else None
        by_name = self.by_name.get(_words(row.ingredient))
        if by_cas is None or by_name is None:
            return by_cas or by_name, False
        if set(by_cas.contents) != set(by_name.contents):
            return None, True
        return by_cas, False


def _words(text: str) -> str:
    """Return the words of a name in a fixed order, without signs and case."""
    plain = "".join(c if c.isalnum() else " " for c in text.casefold())
    return " ".join(sorted(plain.split()))


def _why_unused(row: Listed, species: Iterable[str], route: str | None) -> str:
    if not list(species):
        return "no acid-base species in it"
    if route is None:
        return "route is none of ours"
    if row.grams_per_litre is None and row.grams_per_day is None:
        return row.why_unused
    return ""


def _merged(kept: _Figure, row: Listed, material: Material, species: str) -> _Figure:
    """Return the figure with a row added; the highest row of each kind stands."""
    per_gram = 1000.0 * material.contents[species] / material.molar_mass_g_mol.value
    if row.grams_per_litre is not None:
        ceiling = row.grams_per_litre * per_gram
        if kept.ceiling_mmol_l is None or ceiling > kept.ceiling_mmol_l:
            kept = dataclasses.replace(kept, ceiling_mmol_l=ceiling, ceiling_row=row)
    if row.grams_per_day is not None:
        daily = row.grams_per_day * per_gram
        if kept.daily_mmol is None or daily > kept.daily_mmol:
            kept = dataclasses.replace(kept, daily_mmol=daily, daily_row=row)
    return kept


def _replaced(
    ours: Precedent | None, key: tuple[str, str], figure: _Figure
) -> Precedent:
    """Return a precedent with what the file says in it, and the mark of that."""
    species, route = key
    base = ours or Precedent(
        species=species,
        route=route,
        level="none",
        usual_low_mmol_l=None,
        usual_high_mmol_l=None,
        ceiling_mmol_l=None,
        monographs=MappingProxyType(dict.fromkeys(("usp_nf", "ph_eur", "jp"), "no")),
        monograph_note="",
        usual_forms="",
        reason="listed in the file of the user",
        source="",
        level_basis="published",
        concentration_basis=None,
        monograph_basis="judgement",
    )
    words = []
    if figure.ceiling_mmol_l is not None and figure.ceiling_row is not None:
        row = figure.ceiling_row
        before = base.ceiling_mmol_l
        was = "none was known" if before is None else f"{before:.3g} before"
        words.append(
            f"{species}: ceiling {figure.ceiling_mmol_l:.3g} mmol/L ({was}), "
            f"{_told(row)} {row.amount_text}"
        )
    if figure.daily_mmol is not None and figure.daily_row is not None:
        words.append(
            f"{species}: {figure.daily_mmol:.3g} mmol a day at most, "
            f"{_told(figure.daily_row)} daily exposure"
        )
    level = base.level
    if level == "none":
        level = "limited"
        words.append(f"{species}: listed on this route, counts as limited")
    keeps = figure.ceiling_mmol_l is None
    promoted = level != base.level
    return dataclasses.replace(
        base,
        level=level,
        level_basis="published" if promoted else base.level_basis,
        ceiling_mmol_l=base.ceiling_mmol_l if keeps else figure.ceiling_mmol_l,
        concentration_basis=base.concentration_basis if keeps else "published",
        daily_mmol=figure.daily_mmol,
        source=SOURCE_ID if promoted or not base.source else base.source,
        listed="; ".join(words),
        overlay=True,
    )


def _told(row: Listed) -> str:
    form = f", {row.form.casefold()}" if row.form else ""
    return f"line {row.line}: {row.ingredient.casefold()}{form},"
