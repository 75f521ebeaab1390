"""Count the ionisable groups of a protein from its chains, and weigh it.

One-letter codes of the twenty usual amino acids. Left out: glycans, pyroglutamate at
the first glutamine, a clipped last lysine and any other modification.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from formbuf.errors import InputError
from formbuf.library.formulas import molar_mass_g_mol

#: Residues as they stand in a chain (the amino acid less one water).
RESIDUES: Mapping[str, str] = {
    "A": "C3H5NO",
    "C": "C3H5NOS",
    "D": "C4H5NO3",
    "E": "C5H7NO3",
    "F": "C9H9NO",
    "G": "C2H3NO",
    "H": "C6H7N3O",
    "I": "C6H11NO",
    "K": "C6H12N2O",
    "L": "C6H11NO",
    "M": "C5H9NOS",
    "N": "C4H6N2O2",
    "P": "C5H7NO",
    "Q": "C5H8N2O2",
    "R": "C6H12N4O",
    "S": "C3H5NO2",
    "T": "C4H7NO2",
    "V": "C5H9NO",
    "W": "C11H10N2O",
    "Y": "C9H9NO2",
}
#: Letter of the residue -> group of ``side_chains.csv``.
IONISABLE: Mapping[str, str] = {
    "C": "cysteine",
    "D": "aspartate",
    "E": "glutamate",
    "H": "histidine",
    "K": "lysine",
    "R": "arginine",
    "Y": "tyrosine",
}
WATER = "H2O"
HYDROGENS_PER_BOND = "H2"


@dataclass(frozen=True, slots=True)
class Chain:
    """One polypeptide chain and how often the molecule holds it.

    Attributes
    ----------
    sequence : str
        One-letter codes, upper case, no blanks.
    copies : int
    """

    sequence: str
    copies: int = 1


def read_sequence(text: str, *, where: str = "sequence") -> str:
    """Return a sequence without blanks and line ends, in capitals.

    Parameters
    ----------
    text : str
        One-letter codes; blanks, line ends and digits of numbering are dropped.
    where : str
        File and key, for the message.

    Raises
    ------
    InputError
        For a letter that stands for no amino acid, or an empty sequence.
    """
    letters = "".join(c for c in text.upper() if not c.isspace() and not c.isdigit())
    if not letters:
        msg = f"{where}: holds no residues, allowed one-letter codes"
        raise InputError(msg)
    for position, letter in enumerate(letters, start=1):
        if letter not in RESIDUES:
            known = "".join(sorted(RESIDUES))
            msg = (
                f"{where}: {letter!r} at residue {position} is no amino acid, "
                f"allowed {known}"
            )
            hint = (
                "Give modified residues as the amino acid they come from, or count "
                "the groups under [drug.residues]."
            )
            raise InputError(msg, hint=hint)
    return letters


def paired_cysteines(chains: Iterable[Chain]) -> int:
    """Return the disulfide bonds if every cysteine has a partner (an odd one is free)."""
    return sum(c.sequence.count("C") * c.copies for c in chains) // 2


def count_groups(
    chains: Iterable[Chain], disulfides: int, *, where: str = "disulfides"
) -> dict[str, float]:
    """Count the ionisable groups of a molecule.

    Parameters
    ----------
    chains : iterable of Chain
    disulfides : int
        Disulfide bonds of the whole molecule; each takes two cysteines away.
    where : str
        Key of the disulfides, for the message.

    Returns
    -------
    dict of str to float
        Groups per molecule by the names of ``side_chains.csv``, the free ends
        included.

    Raises
    ------
    InputError
        For more bonds than cysteines allow.
    """
    chains = tuple(chains)
    ends = float(sum(chain.copies for chain in chains))
    found = {"n_terminus": ends, "c_terminus": ends}
    for letter, group in IONISABLE.items():
        found[group] = float(
            sum(chain.sequence.count(letter) * chain.copies for chain in chains)
        )
    most = int(found["cysteine"]) // 2
    if disulfides > most:
        msg = (
            f"{where}: {disulfides} bonds need {2 * disulfides} cysteines, the chains "
            f"hold {found['cysteine']:g}, allowed at most {most}"
        )
        raise InputError(msg)
    found["cysteine"] -= 2.0 * disulfides
    return {group: count for group, count in found.items() if count > 0.0}


def molar_mass_of(chains: Iterable[Chain], disulfides: int) -> float:
    """Return the molar mass of the bare protein [g/mol]; glycans are left out."""
    parts = {letter: molar_mass_g_mol(formula) for letter, formula in RESIDUES.items()}
    total = -disulfides * molar_mass_g_mol(HYDROGENS_PER_BOND)
    for chain in chains:
        one = sum(parts[letter] for letter in chain.sequence)
        total += chain.copies * (one + molar_mass_g_mol(WATER))
    return total
