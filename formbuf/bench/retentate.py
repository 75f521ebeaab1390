"""pH and concentrations of a protein solution after ultrafiltration or diafiltration.

Forward: the buffer diafiltered against is known; the retentate follows from Donnan
equilibrium and from the volume the protein takes up. Backward: the retentate is wanted
(the product as made); what it must be diafiltered against follows. No public numbers
were found to test the pH offset of a real retentate against.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

from formbuf.bench.retained import Protein, protein_of
from formbuf.bench.setup import Bench, make_product
from formbuf.chemistry.activity import ActivityModel
from formbuf.chemistry.donnan import Partition, Solute, partition
from formbuf.chemistry.speciation import water_ions
from formbuf.errors import ConvergenceError, InputError
from formbuf.product.composition import Mixture
from formbuf.product.recipe import Background, make

UNTESTED = (
    "no public numbers were found to test the pH offset of a retentate against; its "
    "direction and the closed-form limits are tested"
)
SALTS = {
    ("sodium", "chloride"): "sodium_chloride",
    ("potassium", "chloride"): "potassium_chloride",
}
#: Molality below which an ion or solute is not worth a line, mol/kg.
TRACE_MOL_KG = 1e-7
Direction = Literal["forward", "backward"]


@dataclass(frozen=True, slots=True)
class Side:
    """What one component comes to on either side.

    Attributes
    ----------
    component : str
    buffer_mmol_l, retentate_mmol_l : float
        Per litre of diafiltration buffer and of retentate.
    buffer_mmol_kg, retentate_mmol_kg : float
        Per kg of water.
    """

    component: str
    buffer_mmol_l: float
    retentate_mmol_l: float
    buffer_mmol_kg: float
    retentate_mmol_kg: float


@dataclass(frozen=True, slots=True)
class Retentate:
    """Result of ``retentate`` and ``diafiltration_buffer``.

    Attributes
    ----------
    bench : Bench
    protein : Protein
    direction : {"forward", "backward"}
    temperature_c : float
    buffer_ph, retentate_ph : float
    protein_charge : float
        Charges per molecule in the retentate.
    potential_mv : float
        Of the retentate against the buffer.
    water_buffer_kg_l, water_retentate_kg_l : float
    sides : tuple of Side
    buffer_materials_mmol_l : dict of str to float
        What the diafiltration buffer is made of [mmol/L]; empty where it cannot be
        given as the system with a salt.
    notes : tuple of str
        The first says that nothing public tests the offset.
    """

    bench: Bench
    protein: Protein
    direction: Direction
    temperature_c: float
    buffer_ph: float
    retentate_ph: float
    protein_charge: float
    potential_mv: float
    water_buffer_kg_l: float
    water_retentate_kg_l: float
    sides: tuple[Side, ...]
    buffer_materials_mmol_l: dict[str, float]
    notes: tuple[str, ...]

    @property
    def ph_offset(self) -> float:
        """Excess of the retentate's pH over that of the buffer."""
        return self.retentate_ph - self.buffer_ph


def retentate(
    bench: Bench,
    protein: Protein,
    *,
    temperature_c: float | None = None,
    model: ActivityModel = "guggenheim",
) -> Retentate:
    """Predict the retentate of a buffer that is known.

    Parameters
    ----------
    bench : Bench
        Its system, strength and pH are those of the diafiltration buffer; its drug is
        left out of the buffer.
    protein : Protein
        In the retentate.
    temperature_c : float, optional
        Temperature of the process [C]; that of measurement if absent.
    model : {"guggenheim", "ideal"}

    Returns
    -------
    Retentate

    Raises
    ------
    InputError
        When the buffer cannot be made, or the protein leaves no room for water.
    ConvergenceError
        When no equilibrium is found.
    """
    t = bench.measure_temperature_c if temperature_c is None else temperature_c
    plain = replace(bench, background=replace(bench.background, extras=()))
    made = make_product(plain)
    solution = made.mixture.solve(t, model=model)
    water_buffer = float(made.mixture.water_kg_l)
    room = 1.0 - protein.mg_ml * protein.volume_ml_g / 1000.0
    if room < 0.4:
        msg = f"the protein takes up {100.0 * (1.0 - room):.0f} % of the volume, allowed 60"
        raise InputError(msg)
    water = water_buffer * room
    solutes = _solutes(made.mixture, t, model)
    found = partition(
        solutes,
        float(solution.ph),
        t,
        protein=protein.ladder,
        protein_mol_kg=protein.mmol_l / 1000.0 / water,
        model=model,
    )
    return Retentate(
        bench,
        protein,
        "forward",
        t,
        float(solution.ph),
        found.ph,
        found.protein_charge,
        found.potential_mv,
        water_buffer,
        water,
        _sides(solutes, solutes_after(solutes, found), water_buffer, water),
        dict(made.materials_mmol_l),
        (UNTESTED, *made.mixture.notes),
    )


def diafiltration_buffer(
    bench: Bench,
    *,
    temperature_c: float | None = None,
    model: ActivityModel = "guggenheim",
) -> Retentate:
    """Find the buffer to diafilter against for a wanted retentate.

    Parameters
    ----------
    bench : Bench
        The retentate wanted: the product with its protein, at its pH.
    temperature_c : float, optional
        Temperature of the process [C]; that of measurement if absent.
    model : {"guggenheim", "ideal"}

    Returns
    -------
    Retentate

    Raises
    ------
    InputError
        When the product cannot be made, or holds no protein of known charge.
    ConvergenceError
        When no equilibrium is found.
    """
    protein = protein_of(bench)
    t = bench.measure_temperature_c if temperature_c is None else temperature_c
    made = make_product(bench)
    mixed = made.mixture
    solution = mixed.solve(t, model=model)
    solutes = _solutes(mixed, t, model)
    found = partition(solutes, float(solution.ph), t, model=model)
    water = float(mixed.water_kg_l)
    room = 1.0 - protein.mg_ml * protein.volume_ml_g / 1000.0
    water_buffer = water / room
    outside = solutes_after(solutes, found)
    sides = _sides(outside, solutes, water_buffer, water)
    materials = _buffer_materials(bench, sides, found, t)
    notes = [UNTESTED, *bench.notes, *mixed.notes]
    if not materials:
        notes.append(
            "the buffer is given by its components: it is not the system with one salt"
        )
    j = mixed.index(protein.ladder.name)
    charge = float(solution.charge_mol_kg[..., j] / mixed.totals_mol_kg[..., j])
    return Retentate(
        bench,
        protein,
        "backward",
        t,
        found.ph,
        float(solution.ph),
        charge,
        -found.potential_mv,
        water_buffer,
        water,
        sides,
        materials,
        tuple(dict.fromkeys(notes)),
    )


def solutes_after(solutes: list[Solute], found: Partition) -> list[Solute]:
    """Return the solutes with their molality on the other side."""
    return [
        replace(s, molality_mol_kg=m)
        for s, m in zip(solutes, found.molality_mol_kg, strict=True)
    ]


def _solutes(mixed: Mixture, t: float, model: ActivityModel) -> list[Solute]:
    """Every small particle of a mixture, the macro-ion left out."""
    macro = {ladder.name for ladder in mixed.ladders if ladder.is_macro_ion}
    solution = mixed.solve(t, model=model)
    found = [
        Solute(p.component.partition("/")[0], p.charge, float(p.molality_mol_kg))
        for p in (*mixed.dissolved(t, solution), *water_ions(solution))
        if p.component not in macro
    ]
    return found + [Solute(n, 0, float(m)) for n, m in mixed.neutrals_mol_kg.items()]


def _sides(
    buffer: list[Solute], inside: list[Solute], water_buffer: float, water: float
) -> tuple[Side, ...]:
    """Sum the particles of each component on either side."""
    outer: dict[str, float] = {}
    inner: dict[str, float] = {}
    for table, solutes in ((outer, buffer), (inner, inside)):
        for s in solutes:
            table[s.name] = table.get(s.name, 0.0) + s.molality_mol_kg
    return tuple(
        Side(
            name,
            1000.0 * outer[name] * water_buffer,
            1000.0 * inner[name] * water,
            1000.0 * outer[name],
            1000.0 * inner[name],
        )
        for name in outer
        if name not in ("hydrogen", "hydroxide")
        and max(outer[name], inner[name]) > TRACE_MOL_KG
    )


def _buffer_materials(
    bench: Bench, sides: tuple[Side, ...], found: Partition, t: float
) -> dict[str, float]:
    """Return the buffer as system, salt and excipients, or nothing where it is not.

    The salt carries the ion that the system itself does not bring; what the system
    brings then has to agree with what the equilibrium asks for.
    """
    library = bench.library
    wanted = {s.component: s.buffer_mmol_l for s in sides}
    total = sum(wanted.get(name, 0.0) for name in bench.system.species)
    others = _neutral_materials(bench, wanted)
    if total <= 0.0 or others is None:
        return {}
    for pair, salt in (*SALTS.items(), (("", ""), "")):
        amount = (
            min(wanted.get(pair[0], 0.0), wanted.get(pair[1], 0.0)) if salt else 0.0
        )
        if salt and amount <= 1e-6:
            continue
        try:
            recipe = make(
                library,
                bench.system,
                total,
                found.ph,
                t,
                Background({**others, **({salt: amount} if salt else {})}),
                bench.law,
            )
        except (InputError, ConvergenceError):
            continue
        mixed = recipe.mixture
        litre = 1000.0 * float(mixed.water_kg_l)
        brought = {n: float(m) * litre for n, m in mixed.ions_mol_kg.items()}
        ions = {n for n in (*wanted, *brought) if n in library.ions}
        if all(
            abs(brought.get(n, 0.0) - wanted.get(n, 0.0)) < 0.02 * total + 0.01
            for n in ions
        ):
            buffer = {k: float(v) for k, v in recipe.buffer_mmol_l.items() if v > 0.0}
            return {**buffer, **others, **({salt: amount} if salt else {})}
    return {}


def _neutral_materials(
    bench: Bench, wanted: dict[str, float]
) -> dict[str, float] | None:
    """Materials that bring the uncharged solutes; None where one is not found."""
    library = bench.library
    background, given = bench.background, bench.given_mmol_l or {}
    offered = [*background.materials_mmol_l, background.agent, *given]
    found: dict[str, float] = {}
    for name, amount in wanted.items():
        if name in library.species or name in library.ions:
            continue
        material = next(
            (
                key
                for key in offered
                if key is not None
                and set(library.find_material(key).contents) == {name}
            ),
            None,
        )
        if material is None:
            return None
        found[material] = amount
    return found
