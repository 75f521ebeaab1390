"""Take defaults for one brief, and remember each that was used."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, cast

from formbuf.errors import KnowledgeError
from formbuf.library import Library
from formbuf.library.records import Basis
from formbuf.product.brief_cases import FILE, Case, read_cases
from formbuf.product.brief_model import Brief
from formbuf.product.product_parts import Assumption
from formbuf.product.vocabulary import (
    ROUTE_GROUPS,
    DrugKind,
    Form,
    Population,
    populations_at,
)


class Filler:
    """Takes defaults for one brief and remembers each that was used."""

    def __init__(self, brief: Brief, library: Library) -> None:
        self.brief = brief
        self.library = library
        self.cases = read_cases(library)
        self.assumptions: list[Assumption] = []
        self.volume_ml = 0.0
        route = brief.product.route
        self.words: dict[str, str] = {
            "route": route,
            "route_group": ROUTE_GROUPS[route],
        }
        self.form = cast("Form", self.or_default(brief.product.form, "product.form"))
        self.kind = cast("DrugKind", self.or_default(brief.drug.kind, "drug.kind"))
        self.words |= {"form": self.form, "kind": self.kind}
        self.population = self._population()
        self.words["population"] = self.population

    def find(
        self, key: str, accept: Callable[[Case], bool] | None = None
    ) -> Case | None:
        """Return the first case that fits (and is accepted), or None."""
        for case in self.cases.get(key, ()):
            fits = case.fits(self.words, self.volume_ml)
            if fits and (accept is None or accept(case)):
                return case
        return None

    def case(self, key: str, accept: Callable[[Case], bool] | None = None) -> Case:
        """Return the first case that fits.

        Raises
        ------
        KnowledgeError
            No case fits: the table lacks a general one.
        """
        case = self.find(key, accept)
        if case is None:
            fault = f"{FILE}:{key}: no case fits this brief, allowed a general one"
            raise KnowledgeError([fault])
        return case

    def take(self, key: str, accept: Callable[[Case], bool] | None = None) -> Any:
        """Return the default of a key and note it as an assumption."""
        case = self.case(key, accept)
        self.assume(key, case.value, case.unit, case.basis, case.reason, case.source)
        return case.value

    def or_default(self, stated: object, key: str) -> Any:
        """Return the stated value, or the default of the key."""
        return self.take(key) if stated is None else stated

    def assume(
        self,
        key: str,
        value: bool | float | str,
        unit: str,
        basis: Basis,
        reason: str,
        source: str = "",
    ) -> None:
        """Note an assumption."""
        self.assumptions.append(Assumption(key, value, unit, basis, reason, source))

    def _population(self) -> Population:
        stated, age = self.brief.product.population, self.brief.dose.age_years
        if stated is None and age is not None:
            found = populations_at(age)[-1]
            reason = f"follows from the age of {age:g} years (ICH E11 and E7 bands)"
            self.assume("product.population", found, "", "judgement", reason)
            return found
        return cast("Population", self.or_default(stated, "product.population"))
