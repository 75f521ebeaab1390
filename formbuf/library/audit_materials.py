"""Check that what a material is made of agrees with its formula and its mass."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from formbuf.library.formulas import count_atoms, molar_mass_g_mol
from formbuf.library.records import Ion, Neutral, Species
from formbuf.library.store import TableFaults
from formbuf.library.tables import Row

#: Largest difference between a molar mass and that of its formula, g/mol.
MASS_TOLERANCE_G_MOL = 0.01
_SAME = 1e-6
#: Elements by which the units of a species are recognised in any of its salts;
#: oxygen and hydrogen may leave as water.
_SKELETON = ("B", "C", "N", "P", "S")


class MaterialCheck:
    """Checks the rows of ``materials.csv`` against the components they name.

    Parameters
    ----------
    species, ions, neutrals : mapping
        Components by id.
    neutral_formulas : mapping of str to str
        Formula of each neutral component.
    ion_formulas : mapping of str to str
        Formula of each ion.
    """

    def __init__(
        self,
        species: Mapping[str, Species],
        ions: Mapping[str, Ion],
        neutrals: Mapping[str, Neutral],
        ion_formulas: Mapping[str, str],
        neutral_formulas: Mapping[str, str],
    ) -> None:
        self._species = species
        self._ions = ions
        self._neutrals = neutrals
        self._neutral_formulas = neutral_formulas
        self._elements = {
            formula: name
            for name, formula in ion_formulas.items()
            if sum(count_atoms(formula).values()) == 1
        }
        self._skeletons: dict[str, tuple[dict[str, float], str]] = {}

    def check(self, rows: Iterable[Row], faults: TableFaults) -> None:
        """Note every row whose mass, formula, contents or charge disagree."""
        read = []
        for row in rows:
            if not row.text("formula"):
                continue
            try:
                atoms = count_atoms(row.text("formula"))
            except ValueError as error:
                faults.add(row, "formula", f"{error}, allowed a chemical formula")
                continue
            _check_mass(row, faults)
            rest = self._without_ions(row, atoms, faults)
            read.append((row, rest))
            self._check_charge(row, rest, faults)
            self._learn_skeleton(row, rest)
        for row, rest in read:
            self._check_skeleton(row, rest, faults)
            self._check_neutrals(row, rest, faults)

    def _without_ions(
        self, row: Row, atoms: Mapping[str, float], faults: TableFaults
    ) -> dict[str, float]:
        """Return the atoms left without simple ions and water of crystallisation."""
        contents = row.counts("contents")
        rest = dict(atoms)
        for element, ion in self._elements.items():
            found = rest.pop(element, 0.0)
            if abs(found - contents.get(ion, 0.0)) > _SAME:
                faults.add(
                    row,
                    "contents",
                    f"{ion}:{contents.get(ion, 0.0):g} but the formula has {found:g} "
                    f"{element}, allowed the same number",
                )
        waters = row.figure("waters")
        rest["H"] = rest.get("H", 0.0) - 2.0 * waters
        rest["O"] = rest.get("O", 0.0) - waters
        if min(rest["H"], rest["O"]) < -_SAME:
            faults.add(
                row,
                "waters",
                f"{waters:g} is more than the formula holds, allowed less",
            )
        return rest

    def _check_charge(
        self, row: Row, rest: Mapping[str, float], faults: TableFaults
    ) -> None:
        """Note contents that no number of dissociable protons makes neutral."""
        contents = row.counts("contents")
        ions = sum(
            n * self._ions[c].charge for c, n in contents.items() if c in self._ions
        )
        ladders = [
            (n, self._species[c]) for c, n in contents.items() if c in self._species
        ]
        if ladders:
            low = sum(n * entry.charges[-1] for n, entry in ladders)
            high = sum(
                n * (entry.charges[0] + entry.steps[0].step - 1) for n, entry in ladders
            )
            if not low - _SAME <= -ions <= high + _SAME:
                faults.add(
                    row,
                    "contents",
                    f"ions carry a charge of {ions:+g}, which the species cannot "
                    f"balance, allowed {-high:+g} to {-low:+g}",
                )
        elif not any(component in self._neutrals for component in contents):
            oxygens = max(ions, 0.0)
            hydrogens = abs(ions)
            left = {element: n for element, n in rest.items() if abs(n) > _SAME}
            wanted = {"H": hydrogens, "O": oxygens}
            wanted = {element: n for element, n in wanted.items() if n}
            if left != wanted:
                faults.add(
                    row,
                    "contents",
                    f"ions carry a charge of {ions:+g}, allowed that of the protons or "
                    "hydroxide ions in the formula",
                )

    def _learn_skeleton(self, row: Row, rest: Mapping[str, float]) -> None:
        parts = [name for name in row.counts("contents") if name not in self._ions]
        if len(parts) == 1 and parts[0] not in self._skeletons:
            units = row.counts("contents")[parts[0]]
            skeleton = {e: rest.get(e, 0.0) / units for e in _SKELETON}
            self._skeletons[parts[0]] = (skeleton, row.text("id"))

    def _check_skeleton(
        self, row: Row, rest: Mapping[str, float], faults: TableFaults
    ) -> None:
        contents = row.counts("contents")
        parts = {name: n for name, n in contents.items() if name in self._species}
        if not parts or any(name not in self._skeletons for name in parts):
            return
        for element in _SKELETON:
            wanted = sum(
                n * self._skeletons[name][0][element] for name, n in parts.items()
            )
            found = rest.get(element, 0.0)
            if abs(found - wanted) > _SAME:
                others = ", ".join(self._skeletons[name][1] for name in parts)
                faults.add(
                    row,
                    "contents",
                    f"the formula has {found:g} {element}, allowed {wanted:g} as in "
                    f"{others}",
                )

    def _check_neutrals(
        self, row: Row, rest: Mapping[str, float], faults: TableFaults
    ) -> None:
        contents = row.counts("contents")
        parts = [name for name in contents if name not in self._ions]
        if not parts or any(name not in self._neutral_formulas for name in parts):
            return
        wanted: dict[str, float] = {}
        for name in parts:
            for element, n in count_atoms(self._neutral_formulas[name]).items():
                wanted[element] = wanted.get(element, 0.0) + contents[name] * n
        elements = {*wanted, *rest}
        if any(abs(wanted.get(e, 0.0) - rest.get(e, 0.0)) > _SAME for e in elements):
            faults.add(
                row, "contents", "formula is not that of the contents, allowed the same"
            )


def _check_mass(row: Row, faults: TableFaults) -> None:
    expected = molar_mass_g_mol(row.text("formula"))
    stated = row.figure("molar_mass_g_mol")
    if abs(stated - expected) > MASS_TOLERANCE_G_MOL:
        faults.add(
            row,
            "molar_mass_g_mol",
            f"{stated:g} is not the mass of {row.text('formula')}, allowed "
            f"{expected:.3f} within {MASS_TOLERANCE_G_MOL:g}",
        )
