"""Order of addition and cautions of a batch sheet, in words (practice of the trade)."""

from __future__ import annotations

from formbuf.bench.batch_records import Allowance, Line
from formbuf.bench.setup import Bench

#: Material -> what to say when strong acid meets it.
GAS_WITH_ACID = "carbonate"
STRONG_FROM_MOL_L = 2.0
STRONG_FROM_PERCENT = 20.0


def ordered(lines: list[Line]) -> tuple[Line, ...]:
    """Return the lines in the order of addition: solutes, buffer, titrant last."""
    order = {"excipient": 0, "tonicity agent": 1, "buffer": 2, "titrant": 3, "drug": 4}
    return tuple(sorted(lines, key=lambda line: order[line.role]))


def steps(
    bench: Bench,
    lines: tuple[Line, ...],
    batch_l: float,
    water_g: float,
    meter: float,
    allowance: Allowance,
) -> tuple[str, ...]:
    """Return the order of addition in words."""
    t = bench.prepare_temperature_c
    solids = [
        line.name for line in lines if line.role in ("excipient", "tonicity agent")
    ]
    buffer = [line.name for line in lines if line.role == "buffer"]
    titrants = [line for line in lines if line.role == "titrant"]
    first = allowance.make_up_first_percent
    part = f"{0.8 * water_g / 1000.0:.4g} L"
    less = ", less what comes with the drug" if bench.background.extras else ""
    found = [f"Take about 80 % of the water ({part}{less}) at {t:g} C."]
    if buffer:
        way = ", each before the next" if len(buffer) > 1 else ""
        found.append(f"Dissolve {_listed(buffer)}{way}.")
    if solids:
        found.append(f"Dissolve {_listed(solids)}.")
    names = _listed([line.grade.name for line in titrants])
    if titrants:
        found.append(
            f"Add nine tenths of the {names} worked out, slowly and with stirring."
        )
    if bench.background.extras:
        found.append(
            "Add the drug in water at its own pH; never put concentrated acid or base "
            "onto it."
        )
    made_up = f"{first:g} % ({first / 100.0 * batch_l:.4g} L)"
    titrants_here = f"{allowance.acid_grade.name} or {allowance.base_grade.name}"
    found.append(f"Bring to {t:g} C, make up to {made_up}.")
    if titrants:
        found.append(
            f"Add the rest of the {names} in portions until the pH reads {meter:.2f} at "
            f"{t:g} C. If the total differs from the amount worked out by more than the "
            "adjustment allowance, stop and look for a mistake."
        )
    else:
        found.append(
            f"Read the pH: it should be {meter:.2f} at {t:g} C. Set it with "
            f"{titrants_here}; more than the adjustment allowance points to a mistake: "
            "stop and look for it."
        )
    found.append(
        f"Make up with water to {batch_l:.4g} L, mix, read pH and osmolality, filter."
    )
    return tuple(found)


def cautions(
    bench: Bench, lines: tuple[Line, ...], allowance: Allowance
) -> tuple[str, ...]:
    """Return what to look out for with these materials."""
    found: list[str] = []
    setting = [allowance.acid_grade, allowance.base_grade]
    grades = [*(line.grade for line in lines), *setting]
    for grade in grades:
        if grade.caution:
            found.append(f"{grade.name}: {grade.caution}")
        if grade.note and (grade.form != "solid" or grade.stated):
            found.append(f"{grade.name}: {grade.note}")
    setting += [line.grade for line in lines if line.role == "titrant"]
    strong = [
        g
        for g in setting
        if g.strength_mol_l is None or g.strength_mol_l > STRONG_FROM_MOL_L
    ]
    if bench.background.extras and strong:
        found.append(
            "a titrant this strong damages a protein where it falls in: use 1 mol/L or "
            "less once the drug is in"
        )
    held = {
        line.material: set(bench.library.find_material(line.material).contents)
        for line in lines
        if line.role != "drug"
    }
    acid = any(
        line.role == "titrant" and "chloride" in held[line.material] for line in lines
    )
    if acid and any(GAS_WITH_ACID in names for names in held.values()):
        found.append(
            "acid on bicarbonate gives off carbon dioxide: the pH rises as it leaves"
        )
    return tuple(dict.fromkeys(found))


def _listed(names: list[str]) -> str:
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} and {names[-1]}"
