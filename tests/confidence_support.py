"""Products and error models that the tests of confidence share."""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping
from functools import cache
from typing import Any

from formbuf.advice.draw_inputs import Amount, Input
from formbuf.advice.draw_mixture import Drawn, drawn
from formbuf.advice.error_model import ErrorModel, error_model
from formbuf.advice.results import Shortlist
from formbuf.advice.sampling import Sampler
from formbuf.advice.shortlist import shortlist
from formbuf.library import Library, load_library
from formbuf.product.brief import Brief, brief_from_mapping
from formbuf.product.composition import Mixture, mixture

ANTIBODY: Mapping[str, Any] = {
    "product": {"route": "subcutaneous"},
    "ph": {"target": 6.0},
    "storage": [{"temperature_c": 5.0}],
    "tonicity": {"agent": "sucrose"},
    "drug": {"kind": "antibody", "concentration_mg_ml": 50.0},
}


@cache
def library() -> Library:
    """The knowledge of the checkout."""
    return load_library()


def brief(**tables: Any) -> Brief:
    """A subcutaneous antibody of pH 6.0 kept at 5 C, with some tables replaced."""
    return brief_from_mapping({**ANTIBODY, **tables})


@cache
def result() -> Shortlist:
    """The shortlist of that product."""
    return shortlist(brief(), library())


def model_of(**figures: float) -> ErrorModel:
    """The error model in which only the named figures differ from zero.

    The constants of ionization keep their own uncertainties: see ``silent``.
    """
    base = error_model(library())
    kept = {
        key: dataclasses.replace(entry, value=figures.get(key, 0.0))
        for key, entry in base.figures.items()
    }
    return dataclasses.replace(base, figures=kept)


def silent(*species: str, **figures: float) -> ErrorModel:
    """The error model without errors, but for the named figures.

    Species that are named have constants without uncertainty.
    """
    base = model_of(**figures)
    none = dict.fromkeys(species, 0.0)
    stated = dataclasses.replace(
        base.stated, pka=none, dh_kj_mol=none, dcp_j_mol_k=none
    )
    return dataclasses.replace(base, stated=stated)


def with_pka(model: ErrorModel, **pka: float) -> ErrorModel:
    """The error model with the pKa of some species given an error."""
    stated = dataclasses.replace(model.stated, pka={**model.stated.pka, **pka})
    return dataclasses.replace(model, stated=stated)


def mixed(**materials: float) -> Mixture:
    """A mixture of materials, mmol per kg of water."""
    return mixture(library(), materials, basis="water")


def weighed(model: ErrorModel, **materials: float) -> list[Amount]:
    """The materials with the error of their weighing."""
    found = []
    for key, mmol in materials.items():
        contents = library().materials[key].contents
        source = Input(
            f"weighing:{key}", key, "", model.number("weighing_relative"), "1"
        )
        found.append(Amount(source, {c: n * mmol for c, n in contents.items()}))
    return found


def drawn_mixture(
    model: ErrorModel,
    sampler: Sampler | None = None,
    at_c: float = 25.0,
    **materials: float,
) -> Drawn:
    """A mixture of materials under an error model."""
    amounts = weighed(model, **materials)
    chosen = sampler or Sampler(2500, 1)
    return drawn(library(), model, chosen, mixed(**materials), amounts, at_c)
