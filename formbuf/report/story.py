"""What every section needs: the result, its candidates by name, and short wordings."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from formbuf.report.content import Column, OpenPoint, Quote, Span, Spans, Table, Text
from formbuf.report.reading import Cursor, cite, joined, spans
from formbuf.report.words import ROUTES, word

#: Degrees Celsius.
C = "°C"


@dataclass
class Story:
    """The result, read section by section; open points gather on the way.

    Parameters
    ----------
    data : mapping
        As `formbuf.report.data.rationale_dict` returns it.
    """

    data: Mapping[str, Any]
    points: list[OpenPoint] = field(default_factory=list)

    @property
    def root(self) -> Cursor:
        """The whole result."""
        return Cursor(self.data)

    @property
    def brief(self) -> Cursor:
        """The completed brief."""
        return self.root.at("brief")

    @property
    def more(self) -> Cursor:
        """What stands behind the result."""
        return self.root.at("rationale")

    @property
    def candidates(self) -> list[Cursor]:
        """Every candidate, best first."""
        return self.root.each("candidates")

    @property
    def heads(self) -> list[Cursor]:
        """Ranked candidates, one per buffering species."""
        return [
            c
            for c in self.candidates
            if c.get("rank") is not None and c.get("variant_of") is None
        ]

    @property
    def dropped(self) -> list[Cursor]:
        """Candidates that a screen dropped."""
        return [c for c in self.candidates if c.get("standing") == "screened out"]

    @property
    def lead(self) -> Cursor | None:
        """The lead, if there is one."""
        return self.of(self.root.text("lead"))

    @property
    def backup(self) -> Cursor | None:
        """The back-up, if there is one."""
        return self.of(self.root.text("backup"))

    @property
    def finalists(self) -> list[Cursor]:
        """Candidates shown side by side."""
        found = [self.of(key) for key in self.more.get("finalists")]
        return [c for c in found if c is not None]

    @property
    def first_two(self) -> list[Cursor]:
        """Lead and back-up, as far as they exist."""
        return [c for c in (self.lead, self.backup) if c is not None]

    @property
    def measure_c(self) -> Span:
        """Temperature at which pH is measured."""
        return self.brief.plain("ph", "measure_temperature_c", unit=C)

    @property
    def route(self) -> str:
        """The route in words."""
        return word(ROUTES, self.brief.text("product", "route"))

    @property
    def is_cold(self) -> bool:
        """Whether a finalist was assessed on freezing."""
        return any(c.get("frozen") is not None for c in self.candidates)

    def of(self, key: str) -> Cursor | None:
        """Return the candidate of a key."""
        return next((c for c in self.candidates if c.get("system") == key), None)

    def name_of(self, key: str) -> Spans:
        """Return the name of the candidate of a key."""
        found = self.of(key)
        return (Text(key),) if found is None else (named(found),)

    def names_of(self, keys: Sequence[str]) -> Spans:
        """Return the names of candidates as in a sentence."""
        return joined([self.name_of(key) for key in keys])

    def material(self, key: str) -> Span:
        """Return the name of a material."""
        place = self.more.at("names", "materials", key, "name")
        return place.quote() if place.data else Text(key)

    def solid(self, key: str) -> Span:
        """Return the formula of a solid."""
        place = self.more.at("names", "solids", key)
        return place.quote() if place.data else Text(key.replace("_", " "))

    def component(self, key: str) -> Span:
        """Return the name of something dissolved."""
        place = self.more.at("names", "components", key)
        return place.quote() if place.data else Text(key.replace("_", " "))

    def add(self, point: OpenPoint) -> None:
        """Keep an open point, once."""
        if all(point.id != known.id for known in self.points):
            self.points.append(point)


def named(candidate: Cursor) -> Span:
    """Return the name of a candidate; the product without buffer by plain words."""
    if candidate.get("base_system") == "none":
        return Text("no added buffer")
    return candidate.quote("name")


def label_of(candidate: Cursor) -> str:
    """Return the name of a candidate as plain text, for figures."""
    span = named(candidate)
    return span.text if isinstance(span, Text | Quote) else ""


def is_none(candidate: Cursor) -> bool:
    """Whether a candidate is the product without buffer."""
    return bool(candidate.get("base_system") == "none")


def dosed(candidate: Cursor) -> Spans:
    """Return a candidate with its concentration: ``5 mmol/L histidine hydrochloride``.

    A formula of the brief bears its own name and is followed by its concentration.
    """
    if is_none(candidate):
        return spans(named(candidate))
    amount = candidate.value("concentration_mmol_l", unit="mmol/L", trim=True)
    if candidate.get("is_own_formula"):
        name = spans("“", named(candidate), "”")
        told = "mmol/L" in candidate.text("name")
        return name if told else spans(name, " (", amount, ")")
    return spans(amount, " ", named(candidate))


def state_of(candidate: Cursor, kind: str) -> Cursor | None:
    """Return the first liquid state of a kind."""
    for state in candidate.each("states"):
        if kind in (state.get("kinds") or ()):
            return state
    return None


def frozen_of(candidate: Cursor) -> Cursor | None:
    """Return the assessment on freezing, however the result nests it."""
    place = candidate.at("frozen")
    if place.data is None:
        return None
    return place.at("assessment") if "assessment" in place.data else place


def counted_class(candidate: Cursor) -> str:
    """Return the class on freezing that the ranking uses."""
    counted = candidate.text("frozen", "counted_class")
    found = frozen_of(candidate)
    return counted or ("" if found is None else found.text("freezing_class"))


def source_cell(sources: Any, basis: str = "") -> Spans:
    """Return basis and citation for the last cell of a row."""
    mark = cite(sources, spaced=bool(basis))
    return spans(basis, mark) or (Text("-"),)


def sources_in(text: str) -> tuple[str, ...]:
    """Return the parts of a source text; those that are no id are never numbered."""
    return tuple(part.strip() for part in text.split(";") if part.strip())


def table(
    id_: str,
    caption: Spans,
    columns: Sequence[Column],
    rows: Sequence[Sequence[Spans]],
    notes: Sequence[Spans] = (),
) -> Table:
    """Return a table; see `Table`."""
    return Table(
        id_, caption, tuple(columns), tuple(tuple(row) for row in rows), tuple(notes)
    )


def number(header: str, width: float = 1.0) -> Column:
    """Return a column of numbers."""
    return Column(header, "right", width)
