"""The grade in hand: what a gram or a millilitre of what stands on the shelf holds."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Literal

from formbuf.errors import InputError, UnknownNameError
from formbuf.library import Library
from formbuf.library.records import BASES, Basis, Material
from formbuf.library.tables import Column, Schema

Form = Literal["solid", "liquid", "solution"]

GRADES = Schema(
    "grades.csv",
    (
        Column("id", "id", required=True),
        Column("material", "id", required=True, refers_to="materials.csv"),
        Column("name", required=True),
        Column("form", required=True, choices=("solid", "liquid", "solution")),
        Column("assay_percent_w_w", "number", low=0.1, high=100.0),
        Column("strength_mol_l", "number", low=1e-4, high=50.0),
        Column("density_kg_l", "number", low=0.5, high=3.0),
        Column("density_temperature_c", "number", low=0.0, high=50.0),
        Column("usual", "flag", required=True),
        Column("caution"),
        Column("source", "id", refers_to="sources.csv"),
        Column("basis", required=True, choices=BASES),
        Column("note"),
    ),
    ("id",),
)


@dataclass(frozen=True, slots=True)
class Grade:
    """A material as it stands on the shelf.

    Attributes
    ----------
    id, name : str
    material : str
        Id of the material whose moles it brings.
    form : {"solid", "liquid", "solution"}
        A liquid goes by its assay, a solution by its strength.
    assay_percent : float
        Material in what is left after drying [% w/w]; the crystal water of a hydrate
        belongs to the material.
    water_percent : float
        Water besides [% w/w of what is weighed].
    strength_mol_l : float or None
        Of a solution.
    density_kg_l : float or None
    caution, note : str
    basis : Basis
        Of the figures: the label wins.
    stated : tuple of str
        What the user has set.
    """

    id: str
    name: str
    material: str
    form: Form
    assay_percent: float = 100.0
    water_percent: float = 0.0
    strength_mol_l: float | None = None
    density_kg_l: float | None = None
    caution: str = ""
    note: str = ""
    basis: Basis = "judgement"
    stated: tuple[str, ...] = ()

    def grams(self, mmol: float, molar_mass_g_mol: float) -> float:
        """Return what to weigh for an amount of the material [g]."""
        if self.strength_mol_l is not None:
            return mmol / self.strength_mol_l * (self.density_kg_l or 1.0)
        share = self.assay_percent / 100.0 * (1.0 - self.water_percent / 100.0)
        return mmol * molar_mass_g_mol / 1000.0 / share

    def millilitres(self, mmol: float, molar_mass_g_mol: float) -> float | None:
        """Return what to measure out [mL]; None for a solid or an unknown density."""
        if self.strength_mol_l is not None:
            return mmol / self.strength_mol_l
        if self.form == "solid" or self.density_kg_l is None:
            return None
        return self.grams(mmol, molar_mass_g_mol) / self.density_kg_l


@dataclass(frozen=True, slots=True)
class InHand:
    """What the user says about the grades in hand, by material id.

    Attributes
    ----------
    grades : mapping of str to str
        Grade id of the tables.
    assay_percent, water_percent : mapping of str to float
    strength_mol_l, density_kg_l : mapping of str to float
    hydrates : tuple of str
        Materials in hand that take the place of another hydrate.
    """

    grades: Mapping[str, str] = field(default_factory=dict)
    assay_percent: Mapping[str, float] = field(default_factory=dict)
    water_percent: Mapping[str, float] = field(default_factory=dict)
    strength_mol_l: Mapping[str, float] = field(default_factory=dict)
    density_kg_l: Mapping[str, float] = field(default_factory=dict)
    hydrates: tuple[str, ...] = ()

    def checked(self, library: Library) -> InHand:
        """Return the same with material ids, every value checked.

        Raises
        ------
        InputError
            For an assay above 100 %, a strength of zero and the like, or two values
            for one material.
        UnknownNameError
            For a material or grade that is not known.
        """
        known = known_grades(library)
        chosen: dict[str, str] = {}
        for name, grade in self.grades.items():
            material = library.find_material(name, where="--grade").id
            if grade not in known:
                fitting = [g.id for g in known.values() if g.material == material]
                raise UnknownNameError(
                    "grade", grade, fitting or known, where="--grade"
                )
            if known[grade].material != material:
                msg = f"--grade: {grade} is a grade of {known[grade].material}, not of {material}"
                raise InputError(msg)
            chosen[material] = grade
        return InHand(
            chosen,
            _numbers(library, self.assay_percent, "--assay", 0.1, 100.0, "%"),
            _numbers(library, self.water_percent, "--moisture", 0.0, 95.0, "%"),
            _numbers(library, self.strength_mol_l, "--strength", 1e-4, 50.0, "mol/L"),
            _numbers(library, self.density_kg_l, "--density", 0.5, 3.0, "kg/L"),
            tuple(library.find_material(h, where="--use").id for h in self.hydrates),
        )


def known_grades(library: Library) -> dict[str, Grade]:
    """Return the grades of the tables by id."""
    return {
        row.text("id"): Grade(
            row.text("id"),
            row.text("name"),
            row.text("material"),
            row.text("form"),  # type: ignore[arg-type]  # a choice of the schema
            row.number("assay_percent_w_w") or 100.0,
            0.0,
            row.number("strength_mol_l"),
            row.number("density_kg_l"),
            row.text("caution"),
            row.text("note"),
            row.text("basis"),  # type: ignore[arg-type]
        )
        for row in library.read_table(GRADES)
    }


def grade_of(library: Library, material: Material, in_hand: InHand) -> Grade:
    """Return the grade of a material: as the user says, else the usual one.

    Parameters
    ----------
    library : Library
    material : Material
    in_hand : InHand
        Checked.
    """
    known = known_grades(library)
    usual = {
        row.text("material"): known[row.text("id")]
        for row in library.read_table(GRADES)
        if row.flag("usual")
    }
    grade = Grade(material.id, material.name, material.id, "solid")
    if material.id in in_hand.grades:
        grade = known[in_hand.grades[material.id]]
    elif material.id in usual:
        grade = usual[material.id]
    stated: list[str] = ["grade"] if material.id in in_hand.grades else []
    if material.id in in_hand.strength_mol_l:
        strength = in_hand.strength_mol_l[material.id]
        grade = replace(
            grade,
            id=material.id,
            name=f"{strength:g} mol/L {material.name.removesuffix(' (100 % basis)')}",
            form="solution",
            strength_mol_l=strength,
            density_kg_l=None,
        )
        stated.append("strength")
    assay = in_hand.assay_percent.get(material.id)
    water = in_hand.water_percent.get(material.id)
    if (assay, water) != (None, None) and grade.strength_mol_l is not None:
        grade = _by_assay(material, known, assay)
    if assay is not None:
        grade = replace(grade, assay_percent=assay)
        stated.append("assay")
    if water is not None:
        grade = replace(grade, water_percent=water)
        stated.append("water")
    if material.id in in_hand.density_kg_l:
        grade = replace(grade, density_kg_l=in_hand.density_kg_l[material.id])
        stated.append("density")
    return replace(grade, stated=tuple(stated))


def _by_assay(
    material: Material, known: Mapping[str, Grade], assay: float | None
) -> Grade:
    """Return the pure material, of which an assay is said; a strength gives way.

    Caution and note are those of the grade of that material with the nearest assay.
    """
    grade = Grade(material.id, material.name, material.id, "solid")
    alike = [
        g
        for g in known.values()
        if g.material == material.id and g.strength_mol_l is None
    ]
    if not alike:
        return grade
    wanted = 100.0 if assay is None else assay
    nearest = min(alike, key=lambda g: abs(g.assay_percent - wanted))
    return replace(grade, caution=nearest.caution, note=nearest.note)


def _numbers(
    library: Library,
    given: Mapping[str, float],
    option: str,
    low: float,
    high: float,
    unit: str,
) -> dict[str, float]:
    found: dict[str, float] = {}
    for name, value in given.items():
        material = library.find_material(name, where=option).id
        if not low <= value <= high:
            msg = (
                f"{option}: {material} of {value:g} {unit}, allowed {low:g} to {high:g}"
            )
            raise InputError(msg)
        found[material] = value
    return found


def same_but_water(library: Library, material: Material) -> list[Material]:
    """Return the other hydrates of a material, the driest first."""
    return sorted(
        (
            other
            for other in library.materials.values()
            if other.id != material.id
            and dict(other.contents) == dict(material.contents)
            and other.waters != material.waters
        ),
        key=lambda other: other.waters,
    )
