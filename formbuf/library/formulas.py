"""Chemical formulas: count the atoms, add up the molar mass.

Knows round brackets, hydrates after a middle dot with a whole or decimal factor
(``Na2C6H6O7·1.5H2O``), and the elements that excipients are made of. Charges,
isotopes and square brackets are left out.
"""

from __future__ import annotations

import re
from collections.abc import Mapping

#: Standard atomic weights, abridged values, g/mol. IUPAC Commission on Isotopic
#: Abundances and Atomic Weights 2021 (Prohaska et al. 2022, Pure Appl. Chem. 94, 573).
ATOMIC_WEIGHTS_G_MOL: Mapping[str, float] = {
    "H": 1.0080,
    "Li": 6.94,
    "B": 10.81,
    "C": 12.011,
    "N": 14.007,
    "O": 15.999,
    "F": 18.998,
    "Na": 22.990,
    "Mg": 24.305,
    "Al": 26.982,
    "Si": 28.085,
    "P": 30.974,
    "S": 32.06,
    "Cl": 35.45,
    "K": 39.098,
    "Ca": 40.078,
    "Fe": 55.845,
    "Zn": 65.38,
    "Br": 79.904,
    "I": 126.90,
}

_PART = re.compile(r"(?:(\d+(?:\.\d+)?))?([A-Z(].*)")
_TOKEN = re.compile(r"([A-Z][a-z]?)(\d*)|(\()|\)(\d*)")


def count_atoms(formula: str) -> dict[str, float]:
    """Return the atoms of one formula unit, water of crystallisation included.

    Raises
    ------
    ValueError
        If the formula cannot be read; the message names the place.

    Examples
    --------
    >>> count_atoms("Na2HPO4·7H2O")
    {'Na': 2.0, 'H': 15.0, 'P': 1.0, 'O': 11.0}
    """
    total: dict[str, float] = {}
    for part in formula.split("·"):
        match = _PART.fullmatch(part)
        if match is None:
            msg = f"{part!r} does not begin with an element"
            raise ValueError(msg)
        factor = float(match[1] or 1)
        for element, count in _count_part(match[2]).items():
            total[element] = total.get(element, 0.0) + factor * count
    return total


def molar_mass_g_mol(formula: str) -> float:
    """Return the molar mass of a formula [g/mol]; see `count_atoms`."""
    atoms = count_atoms(formula)
    return sum(ATOMIC_WEIGHTS_G_MOL[element] * n for element, n in atoms.items())


def _count_part(text: str) -> dict[str, float]:
    groups: list[dict[str, float]] = [{}]
    position = 0
    while position < len(text):
        token = _TOKEN.match(text, position)
        if token is None:
            msg = f"{text[position]!r} in {text!r} is no part of a formula"
            raise ValueError(msg)
        element, count, opened, factor = token.groups()
        if element:
            if element not in ATOMIC_WEIGHTS_G_MOL:
                msg = f"{element!r} in {text!r} is no known element"
                raise ValueError(msg)
            _add(groups[-1], {element: 1.0}, float(count or 1))
        elif opened:
            groups.append({})
        else:
            if len(groups) == 1:
                msg = f"bracket closed but never opened in {text!r}"
                raise ValueError(msg)
            inner = groups.pop()
            _add(groups[-1], inner, float(factor or 1))
        position = token.end()
    if len(groups) > 1:
        msg = f"bracket never closed in {text!r}"
        raise ValueError(msg)
    return groups[0]


def _add(into: dict[str, float], atoms: Mapping[str, float], factor: float) -> None:
    for element, count in atoms.items():
        into[element] = into.get(element, 0.0) + factor * count
