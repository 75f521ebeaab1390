"""Benches and products that the tests of the bench share."""

from __future__ import annotations

from functools import cache

from formbuf.bench.setup import Bench, bench_from_brief, bench_from_options
from formbuf.library import Library, load_library
from formbuf.product.brief import brief_from_text, complete
from formbuf.product.pairs import system_named

#: Groups of an antibody of 148 kDa, an invention in the usual range of such molecules.
ANTIBODY = {
    "aspartate": 52.0,
    "glutamate": 60.0,
    "histidine": 26.0,
    "lysine": 86.0,
    "arginine": 36.0,
    "tyrosine": 58.0,
    "n_terminus": 4.0,
    "c_terminus": 4.0,
}
ANTIBODY_MASS_G_MOL = 148_000.0


@cache
def library() -> Library:
    """The knowledge of the checkout."""
    return load_library()


def quick(system: str, concentration: float, ph: float, **options: object) -> Bench:
    """A bench of the quick form."""
    return bench_from_options(
        library(),
        system_named(library(), system),
        concentration_mmol_l=concentration,
        ph=ph,
        **options,  # type: ignore[arg-type]
    )


def briefed(
    drug: str, system: str = "histidine_hydrochloride", extra: str = ""
) -> Bench:
    """A bench of a brief for a product of pH 6 with the given [drug], nothing filled."""
    text = (
        '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n'
        f"[tonicity]\nfill = false\n[drug]\n{drug}\n{extra}"
    )
    completed = complete(brief_from_text(text), library())
    return bench_from_brief(completed, system_named(completed.library, system), 10.0)
