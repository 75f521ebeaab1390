"""Run mixtures through PHREEQC with the parameters of one of our brines."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from formbuf.chemistry.pitzer import PitzerSet

NAMES = {
    "hydrogen": "H+",
    "hydroxide": "OH-",
    "sodium": "Na+",
    "potassium": "K+",
    "chloride": "Cl-",
    "phosphate[0]": "H3PO4",
    "phosphate[-1]": "H2PO4-",
    "phosphate[-2]": "HPO4-2",
    "phosphate[-3]": "PO4-3",
}
CHARGES = dict(zip(NAMES, (1, -1, 1, 1, -1, 0, -1, -2, -3), strict=True))
#: Ladder of phosphoric acid at 25 C, as PO4-3 + n H+ (any values would do here).
LADDER = """
SOLUTION_MASTER_SPECIES
 P PO4-3 2 30.9738 30.9738
SOLUTION_SPECIES
 PO4-3 = PO4-3
  log_k 0
 PO4-3 + H+ = HPO4-2
  log_k 12.35
 PO4-3 + 2H+ = H2PO4-
  log_k 19.548
 PO4-3 + 3H+ = H3PO4
  log_k 21.696
"""


@dataclass(frozen=True)
class Result:
    """Molalities and activity coefficients of one mixture."""

    molality: Mapping[str, float]
    ln_gamma: Mapping[str, float]
    charge: Mapping[str, int]
    water_activity: float


def activities(
    parameters: PitzerSet,
    sodium: float,
    potassium: float,
    chloride: float,
    phosphate: float,
) -> Result | None:
    """Speciate a mixture [mol/kg]; None where PHREEQC finds no solution."""
    from phreeqpython import PhreeqPython

    engine = PhreeqPython(database="pitzer.dat").ip
    columns = [f'MOL("{n}"), LG("{n}")' for n in NAMES.values()]
    heads = " ".join(f"m{i} g{i}" for i in range(len(NAMES)))
    text = (
        f"{LADDER}{pitzer_block(parameters)}END\n"
        "SELECTED_OUTPUT\n -reset false\n"
        f"USER_PUNCH\n -headings {heads} aw\n"
        f' 10 PUNCH {", ".join(columns)}, ACT("H2O")\n'
        "SOLUTION 1\n units mol/kgw\n temp 25\n pH 7 charge\n"
        f" Na {sodium}\n K {potassium}\n Cl {chloride}\n P {phosphate}\nEND\n"
    )
    try:
        engine.run_string(text)
    except Exception as error:  # its wrapper raises plain exceptions
        print(f"not solved by PHREEQC: {str(error).splitlines()[0]}")
        return None
    values = [float(x) for x in engine.get_selected_output_array()[-1]]
    ln10 = 2.302585092994046
    return Result(
        {n: values[2 * i] for i, n in enumerate(NAMES)},
        {n: ln10 * values[2 * i + 1] for i, n in enumerate(NAMES)},
        CHARGES,
        values[-1],
    )


def pitzer_block(parameters: PitzerSet) -> str:
    """Our 25 C parameters in the form of a PHREEQC input; absent ones are zero."""
    pairs = {(p.cation, p.anion): p for p in parameters.pairs}
    cations = [n for n, z in CHARGES.items() if z > 0]
    anions = [n for n, z in CHARGES.items() if z < 0]
    lines: dict[str, list[str]] = {k: [] for k in ("B0", "B1", "C0", "THETA", "PSI")}
    for c in cations:
        for a in anions:
            found = pairs.get((c, a))
            values = (
                (found.beta0, found.beta1, found.c_phi) if found else (None, None, None)
            )
            for key, value in zip(("B0", "B1", "C0"), values, strict=True):
                number = value.terms[0] if value else 0.0
                lines[key].append(f"  {NAMES[c]} {NAMES[a]} {number:.12g}")
    for group, others in ((cations, anions), (anions, cations)):
        for i, one in enumerate(group):
            for two in group[i + 1 :]:
                first, second = sorted((one, two))
                theta = parameters.theta.get((first, second))
                number = theta.terms[0] if theta else 0.0
                lines["THETA"].append(f"  {NAMES[one]} {NAMES[two]} {number:.12g}")
                for third in others:
                    a, b, c = sorted((one, two, third))
                    psi = parameters.psi.get((a, b, c))
                    number = psi.terms[0] if psi else 0.0
                    lines["PSI"].append(
                        f"  {NAMES[one]} {NAMES[two]} {NAMES[third]} {number:.12g}"
                    )
    body = "".join(f" -{key}\n" + "\n".join(rows) + "\n" for key, rows in lines.items())
    return f"PITZER\n{body}"
