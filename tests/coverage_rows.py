"""The published pH values of the modern scale that the error model is held against.

Standards were measured without a glass electrode, so that only the composition and
the model are uncertain; recipes of handbooks and pharmacopoeias were weighed and read
with a meter. ``pooled`` lists the rows in the order of their tables; the error of the
activity model is fitted to every second one (``is_fitted``) and tested on the rest.
"""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache

import numpy as np
from reference_tables import (
    Check,
    checks,
    composition,
    library,
    mixture_of,
    select,
    temperature_c,
)

from formbuf.advice.draw_inputs import Amount, Builder, Input
from formbuf.advice.draw_mixture import Drawn, drawn
from formbuf.advice.error_model import ErrorModel, error_model
from formbuf.advice.sampling import Sampler
from formbuf.chemistry import equilibrium

#: What published standards differ by between careful cells, one standard deviation.
STANDARD_PH = 0.003
FITTED_KEYS = ("activity_floor_ph", "activity_slope_kg_mol", "extrapolation_per_k")
HANDBOOKS = {
    "handbook_buffers.csv": ("system", "table"),
    "pharmacopoeia_buffers.csv": ("body", "buffer"),
}
DRAWS, SEED = 1000, 7


@dataclass(frozen=True)
class Row:
    """One published pH.

    Attributes
    ----------
    table : str
        Name under which it is reported.
    solution : str
        What is left out together when a solution is left out of the fit.
    was_read : bool
        Whether it was read with a meter.
    """

    table: str
    solution: str
    check: Check
    published: float
    rounding: float
    was_read: bool
    is_fitted: bool


@cache
def pooled() -> tuple[Row, ...]:
    """Rows marked ``test`` on the modern scale whose composition is known."""
    found = [
        (
            f"{row['group']} ({row['sources'].split()[0]})",
            row["group"],
            row,
            "value",
            float(row["decimals"]),
            False,
        )
        for row in select("ph_standards.csv", use="test", quantity="ph")
    ]
    for name, columns in HANDBOOKS.items():
        found += [
            (
                " ".join(row[c] for c in columns),
                row[columns[0]] if name.startswith("hand") else row[columns[1]],
                row,
                "target_ph",
                2.0,
                True,
            )
            for row in checks(name)
            if row["use"] == "test" and row["scale"] == "modern" and row["composition"]
        ]
    return tuple(
        Row(
            table,
            solution,
            check,
            float(check[column]),
            0.5 * 10.0**-decimals / math.sqrt(3.0),
            read,
            index % 2 == 0,
        )
        for index, (table, solution, check, column, decimals, read) in enumerate(found)
    )


def model_with(figures: Mapping[str, float]) -> ErrorModel:
    """The error model with some figures replaced."""
    base = error_model(library())
    changed = {
        key: dataclasses.replace(base.figures[key], value=value)
        for key, value in figures.items()
    }
    return dataclasses.replace(base, figures={**base.figures, **changed})


def drawn_row(row: Row, model: ErrorModel) -> Drawn:
    """The solution of a row under the error model."""
    amounts = []
    if row.was_read:
        for key, mmol_l in composition(row.check).items():
            contents = library().find_material(key).contents
            entry = Input(
                f"weighing:{key}", key, "", model.number("weighing_relative"), "1"
            )
            brought = {c: count * mmol_l for c, count in contents.items()}
            amounts.append(Amount(entry, brought))
    at = temperature_c(row.check)
    sampler = Sampler(DRAWS, SEED)
    return drawn(library(), model, sampler, mixture_of(row.check), amounts, at)


def ph_draws(row: Row, model: ErrorModel) -> np.ndarray:
    """PH of a row in every draw, as whoever published it would have found it."""
    at = temperature_c(row.check)
    made = drawn_row(row, model)
    ph = made.ph(at)
    builder = Builder(model, made.sampler)
    if row.was_read:
        slope = float(np.mean(made.ph(at + 0.5) - ph)) / 0.5
        ph = ph + builder.figure("meter_ph")
        ph = ph + slope * builder.figure("reading_temperature_k")
    published = math.hypot(row.rounding, 0.0 if row.was_read else STANDARD_PH)
    return ph + published * made.sampler.normal("published value")


@dataclass(frozen=True)
class Parts:
    """The miss of a row, and its variance by parts that add up (first order)."""

    miss: float
    other: float
    per_floor2: float
    per_slope2: float
    per_extrapolation2: float

    def variance(self, floor: float, slope: float, extrapolation: float) -> float:
        """Variance of the row for given figures of the error model."""
        return (
            self.other
            + self.per_floor2 * floor**2
            + self.per_slope2 * slope**2
            + self.per_extrapolation2 * extrapolation**2
        )


@cache
def parts() -> tuple[Parts, ...]:
    """Parts of every pooled row; ``other`` holds all that is not fitted."""
    silent = model_with(dict.fromkeys(FITTED_KEYS, 0.0))
    found = []
    for row in pooled():
        draws = ph_draws(row, silent)
        floor2, slope2, extrapolation2 = _sensitivities(row, silent)
        nominal = float(mixture_of(row.check).solve(temperature_c(row.check)).ph)
        found.append(
            Parts(
                nominal - row.published,
                float(np.var(draws)),
                floor2,
                slope2,
                extrapolation2,
            )
        )
    return tuple(found)


def _sensitivities(row: Row, model: ErrorModel) -> tuple[float, float, float]:
    """Squared slopes of pH by the three fitted figures, from differences of pK."""
    at, step = temperature_c(row.check), 1e-3
    mixed = mixture_of(row.check)
    solution = mixed.solve(at)
    start, ionic = float(solution.ph), float(solution.ionic_strength_mol_kg)
    free = float(solution.hydrogen_mol_kg + solution.hydroxide_mol_kg)
    water = free / (free + float(np.sum(solution.variance_mol_kg)))
    pairs = [(1, water)]
    far = [0.0]
    for ladder in mixed.ladders:
        for k, charge in enumerate(ladder.charges[:-1]):
            shift = np.zeros(len(ladder.pka))
            shift[k] = step
            moved = equilibrium.solve(
                mixed.ladders,
                mixed.totals_mol_kg,
                mixed.strong_charge_mol_kg,
                mixed.strong_charge2_mol_kg,
                at,
                pk_shift={ladder.name: shift},
            )
            slope = (float(moved.ph) - start) / step
            pairs.append((charge, slope))
            far.append(slope)
    unit = model_with({**dict.fromkeys(FITTED_KEYS, 0.0), "extrapolation_per_k": 1.0})
    beyond = unit.extrapolation(at)
    floor2 = sum(slope**2 for _, slope in pairs)
    slope2 = sum(((2 * z - 1) * ionic * slope) ** 2 for z, slope in pairs)
    return floor2, slope2, beyond**2 * sum(slope**2 for slope in far)
