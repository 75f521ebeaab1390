"""What a batch sheet holds, as frozen records."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from formbuf.bench.grades import Grade
from formbuf.bench.setup import Bench
from formbuf.bench.ways import Way

Role = Literal["buffer", "titrant", "tonicity agent", "excipient", "drug"]


@dataclass(frozen=True, slots=True)
class Line:
    """One material to weigh or to measure out.

    Attributes
    ----------
    material, name, formula : str
    role : {"buffer", "titrant", "tonicity agent", "excipient", "drug"}
    grade : Grade
    mmol_l : float
        In the finished product.
    mmol : float
        In the batch.
    pure_g : float
        The material itself, crystal water of its hydrate included.
    weigh_g : float
        Of the grade in hand.
    measure_ml : float or None
        The same as volume, where the grade is a liquid of known density or strength.
    """

    material: str
    name: str
    formula: str
    role: Role
    grade: Grade
    mmol_l: float
    mmol: float
    pure_g: float
    weigh_g: float
    measure_ml: float | None


@dataclass(frozen=True, slots=True)
class Reading:
    """pH that the finished product shows at a temperature.

    Attributes
    ----------
    temperature_c : float
    kinds : tuple of str
    ph, slope_per_k : float
    """

    temperature_c: float
    kinds: tuple[str, ...]
    ph: float
    slope_per_k: float


@dataclass(frozen=True, slots=True)
class StorageReading:
    """What the meter should read so that the product is right where it is stored.

    Attributes
    ----------
    storage_c : float
    ph_at_storage : float
        The target.
    prepare_c, meter_at_prepare : float
    meter_at_25 : float
    """

    storage_c: float
    ph_at_storage: float
    prepare_c: float
    meter_at_prepare: float
    meter_at_25: float


@dataclass(frozen=True, slots=True)
class WeighingError:
    """Effect of weighing 1 % more of one material.

    Attributes
    ----------
    material : str
    d_ph : float
        At the temperature of measurement.
    d_osmolality_mosm_kg : float
    """

    material: str
    d_ph: float
    d_osmolality_mosm_kg: float


@dataclass(frozen=True, slots=True)
class WrongHydrate:
    """What the product becomes if another hydrate is weighed by mistake.

    Attributes
    ----------
    meant, weighed : str
    ph, d_ph : float
        At the temperature of measurement, by the amounts of the sheet.
    amount_share : float
        Moles brought over moles meant.
    d_osmolality_mosm_kg : float
    """

    meant: str
    weighed: str
    ph: float
    d_ph: float
    amount_share: float
    d_osmolality_mosm_kg: float


@dataclass(frozen=True, slots=True)
class Allowance:
    """Titrant that moves the batch by the release tolerance, at preparation.

    Attributes
    ----------
    tolerance_ph : float
    acid_grade, base_grade : Grade
    acid_ml, base_ml : float or None
        To lower and to raise the pH by the tolerance; None where the grade is a solid.
    acid_g, base_g : float
    make_up_first_percent : float
        Volume to make up to before the pH is set.
    """

    tolerance_ph: float
    acid_grade: Grade
    base_grade: Grade
    acid_ml: float | None
    base_ml: float | None
    acid_g: float
    base_g: float
    make_up_first_percent: float


@dataclass(frozen=True, slots=True)
class CheckSums:
    """Sums that must agree.

    Attributes
    ----------
    positive_meq_l, negative_meq_l : float
        Charges of cations and anions, protein, H+ and OH- included.
    weighed_g, water_g, batch_g : float
        Everything weighed, water to add, and their sum.
    density_kg_l : float
        Estimated from partial volumes.
    batch_l : float
    """

    positive_meq_l: float
    negative_meq_l: float
    weighed_g: float
    water_g: float
    batch_g: float
    density_kg_l: float
    batch_l: float


@dataclass(frozen=True, slots=True)
class WaySheet:
    """One way of making the batch.

    Attributes
    ----------
    way : Way
    lines : tuple of Line
        In the order of addition.
    steps : tuple of str
        Order of addition, in words (practice).
    readings : tuple of Reading
    storage_readings : tuple of StorageReading
    osmolality_mosm_kg, capacity_mmol_l_ph, ionic_strength_mol_kg : float
        At the temperature of measurement.
    weighing_errors : tuple of WeighingError
    warmer_solution_d_ph : float
        Error of the product's pH when the solution is 2 K warmer than taken.
    compensation_d_ph : float
        Error when the meter's compensation is set 2 K too high.
    wrong_hydrates : tuple of WrongHydrate
    allowance : Allowance
    sums : CheckSums
    cautions : tuple of str
    """

    way: Way
    lines: tuple[Line, ...]
    steps: tuple[str, ...]
    readings: tuple[Reading, ...]
    storage_readings: tuple[StorageReading, ...]
    osmolality_mosm_kg: float
    capacity_mmol_l_ph: float
    ionic_strength_mol_kg: float
    weighing_errors: tuple[WeighingError, ...]
    warmer_solution_d_ph: float
    compensation_d_ph: float
    wrong_hydrates: tuple[WrongHydrate, ...]
    allowance: Allowance
    sums: CheckSums
    cautions: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class BatchSheet:
    """A batch sheet.

    Attributes
    ----------
    bench : Bench
    batch_l : float
    batch_kg : float or None
        Where the batch was asked for by mass.
    target_temperature_c : float
        Temperature at which the target pH holds.
    ways : tuple of WaySheet
    mole_ratio : mapping of str to float
        Share of each species of a pair.
    notes : tuple of str
    """

    bench: Bench
    batch_l: float
    batch_kg: float | None
    target_temperature_c: float
    ways: tuple[WaySheet, ...]
    mole_ratio: Mapping[str, float]
    notes: tuple[str, ...]
