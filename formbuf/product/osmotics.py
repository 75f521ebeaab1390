"""The fitted osmotic coefficients of the library, as the law that chemistry uses."""

from __future__ import annotations

from formbuf.chemistry.osmolality import OsmoticLaw
from formbuf.library import Library
from formbuf.library.records import BASES
from formbuf.library.store import TableFaults
from formbuf.library.tables import Column, Row, Schema

OSMOTIC = Schema(
    "osmotic.csv",
    (
        Column("kind", required=True, choices=("pair", "neutral")),
        Column("cation"),
        Column("anion"),
        Column("neutral"),
        Column("coefficient_kg_mol", "number", required=True, low=-2.0, high=2.0),
        Column("uncertainty_kg_mol", "number", required=True, low=0.0, high=1.0),
        Column("rows_fitted", "integer", low=1, high=1000),
        Column("highest_osmol_kg", "number", low=0.0, high=5.0),
        Column("rms_osmol_kg", "number", low=0.0, high=1.0),
        Column("source", "id", refers_to="sources.csv"),
        Column("locator"),
        Column("basis", required=True, choices=BASES),
        Column("note"),
    ),
    ("cation", "anion", "neutral"),
)
#: Ions of water, which are neither a species nor a strong ion of the library.
WATER_IONS = {"hydrogen": (1,), "hydroxide": (-1,)}


def osmotic_law(library: Library) -> OsmoticLaw:
    """Return the osmotic coefficients of the library.

    Parameters
    ----------
    library : Library

    Returns
    -------
    OsmoticLaw
        Pair and single-solute coefficients [kg/mol], from ``osmotic.csv``.

    Raises
    ------
    KnowledgeError
        If the table is broken or names a particle that the library does not have;
        every fault as ``file:line:column``.
    InputError
        If a row of the user's overlay is broken.
    """
    pairs: dict[tuple[str, str], float] = {}
    neutrals: dict[str, float] = {}
    faults = TableFaults()
    for row in library.read_table(OSMOTIC):
        for column, what in _faults(library, row):
            faults.add(row, column, what)
        value = row.figure("coefficient_kg_mol")
        if row.text("kind") == "pair":
            pairs[row.text("cation"), row.text("anion")] = value
        else:
            neutrals[row.text("neutral")] = value
    faults.raise_if_any()
    return OsmoticLaw(pairs, neutrals)


def _faults(library: Library, row: Row) -> list[tuple[str, str]]:
    """Say what a row names wrongly, by column."""
    cation, anion, neutral = (row.text(c) for c in ("cation", "anion", "neutral"))
    if row.text("kind") == "neutral":
        if cation or anion or not neutral:
            return [("neutral", "a neutral row names one solute only")]
        if neutral in library.neutrals or _charge(library, neutral) == 0:
            return []
        return [("neutral", f"{neutral!r} is no uncharged solute of the library")]
    if neutral:
        return [("neutral", "a pair row names no uncharged solute")]
    found = []
    for column, key, sign in (("cation", cation, 1), ("anion", anion, -1)):
        charge = _charge(library, key)
        if charge is None or charge * sign <= 0:
            what = f"{key!r} is no {column} of the library, allowed name:charge"
            found.append((column, what))
    return found


def _charge(library: Library, key: str) -> int | None:
    """Return the charge of a key such as ``phosphate:-2``; None where it is unknown."""
    name, _, text = key.partition(":")
    if not text or not text.lstrip("+-").isdigit():
        return None
    charge = int(text)
    if name in library.species:
        return charge if charge in library.species[name].charges else None
    if name in library.ions:
        return charge if charge == library.ions[name].charge else None
    return charge if charge in WATER_IONS.get(name, ()) else None
