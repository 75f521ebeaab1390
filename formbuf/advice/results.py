"""What a shortlist consists of, as frozen records; no behaviour beyond lookups."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Literal

from formbuf.advice.criteria_table import Settings
from formbuf.advice.loads import LoadBudget
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.notebook import html_table, shown
from formbuf.product.composition import Mixture
from formbuf.product.product_brief import ProductBrief
from formbuf.product.product_parts import Assumption

if TYPE_CHECKING:
    import pandas as pd

    from formbuf.advice.confidence_records import CandidateConfidence, Confidence

Standing = Literal["lead", "back-up", "viable", "not evaluable", "screened out"]


@dataclass(frozen=True, slots=True)
class Weighed:
    """One material and its amount."""

    material: str
    mmol_l: float
    g_l: float


@dataclass(frozen=True, slots=True)
class LiquidState:
    """The product at one liquid temperature.

    Attributes
    ----------
    temperature_c : float
    kinds : tuple of str
        What the temperature stands for: measure, prepare, storage, use, body ...
    ph : float
    ph_slope_per_k : float
        dpH/dT at this temperature.
    capacity_mmol_l_ph : float
        Of everything that buffers.
    buffer_capacity_mmol_l_ph : float
        Of the buffer's own species.
    ionic_strength_mol_kg : float
    acid_to_low_mmol_l, base_to_high_mmol_l : float
        Strong acid and base that use up the room of the window at this temperature.
    is_extrapolated : bool
        Whether ionization data are used outside 0 to 77 C.
    """

    temperature_c: float
    kinds: tuple[str, ...]
    ph: float
    ph_slope_per_k: float
    capacity_mmol_l_ph: float
    buffer_capacity_mmol_l_ph: float
    ionic_strength_mol_kg: float
    acid_to_low_mmol_l: float
    base_to_high_mmol_l: float
    is_extrapolated: bool


@dataclass(frozen=True, slots=True)
class SpeciesState:
    """One protonation state at the measurement temperature."""

    component: str
    charge: int
    mmol_l: float


@dataclass(frozen=True, slots=True)
class Exposure:
    """What a dose and a day bring of one substance, against a limit where one exists."""

    substance: str
    mmol_dose: float
    mmol_day: float
    mg_dose: float | None
    mg_day: float | None
    limit: float | None = None
    limit_unit: str = ""
    limit_share: float | None = None
    limit_basis: str = ""
    limit_source: str = ""
    limit_use: str = ""


@dataclass(frozen=True, slots=True)
class CriterionResult:
    """One criterion of one candidate.

    Attributes
    ----------
    value : float or None
        The quantity judged, None where it is a class.
    unit : str
    desirability : float
        Between the floor and 1.
    text : str
        What was found, with its numbers.
    limiting : bool
        Whether this criterion pulls the candidate down most.
    sources : tuple of str
    deviation_ln : float
        One standard deviation of ln desirability, first order.
    """

    value: float | None
    unit: str
    desirability: float
    text: str
    limiting: bool = False
    sources: tuple[str, ...] = ()
    deviation_ln: float = 0.0


@dataclass(frozen=True, slots=True)
class Screen:
    """A reason to drop a candidate.

    Attributes
    ----------
    id : str
        Name of the screen or id of the rule.
    text : str
        What, with value and limit.
    basis : str
    source : str
    overridden_by : str
        Name, date and reason of a scientist who set it aside; empty otherwise.
    """

    id: str
    text: str
    basis: str
    source: str = ""
    overridden_by: str = ""


@dataclass(frozen=True)
class Candidate:
    """One candidate of a shortlist: what it is, what it does, where it stands."""

    key: str
    system: System
    name: str
    is_own_formula: bool
    is_mixture: bool
    variant_of: str | None
    required_mmol_l: float | None
    limiting_load: str
    carried_share: float | None
    concentration_mmol_l: float
    ceiling_mmol_l: float | None
    composition: tuple[Weighed, ...]
    tonicity_fill: Weighed | None
    states: tuple[LiquidState, ...]
    species_states: tuple[SpeciesState, ...]
    ph_drift: float | None
    osmolality_mosm_kg: float | None
    buffer_osmolality_mosm_kg: float | None
    titratable_acidity_mmol_l: float | None
    exposures: tuple[Exposure, ...]
    criteria: Mapping[str, CriterionResult]
    screens: tuple[Screen, ...]
    findings: tuple[Any, ...] = ()
    frozen: Any = None
    notes: tuple[str, ...] = ()
    desirability: float | None = None
    deviation_ln: float = 0.0
    rank: int | None = None
    standing: Standing = "viable"
    tied_with: tuple[str, ...] = ()
    mixture: Mixture | None = field(default=None, repr=False)
    finding_counts: Mapping[str, int] = field(default_factory=dict)
    confidence: CandidateConfidence | None = field(default=None, repr=False)

    @property
    def dropped_by(self) -> tuple[Screen, ...]:
        """Screens that nobody has set aside."""
        return tuple(s for s in self.screens if not s.overridden_by)

    @property
    def limiting(self) -> str:
        """Name of the criterion that pulls it down most; empty without criteria."""
        return next((n for n, c in self.criteria.items() if c.limiting), "")

    def state_at(self, kind: str) -> LiquidState | None:
        """First liquid state of a kind."""
        return next((s for s in self.states if kind in s.kinds), None)

    def __repr__(self) -> str:
        place = "" if self.rank is None else f", place {self.rank}"
        figure = f", desirability {shown(self.desirability)}" if self.criteria else ""
        return (
            f"<Candidate {self.key} {self.concentration_mmol_l:g} mmol/L: "
            f"{self.standing}{place}{figure}>"
        )


@dataclass(frozen=True)
class Shortlist:
    """The answer to a brief.

    Attributes
    ----------
    brief : ProductBrief
    assumptions : tuple of Assumption
    library : Library
    settings : Settings
    loads : LoadBudget
    candidates : tuple of Candidate
        Ranked first, by rank; then unranked; then screened out, by name.
    verdict : str
        One or two sentences.
    warnings : tuple of str
    product_findings : tuple of Finding
        Findings that hold for every candidate.
    missing_facts : tuple of MissingFact
        Unsaid facts that could change a standing, those that matter most first.
    confidence : Confidence or None
        What draws tell, where they were made (``advice.confidence``).
    """

    brief: ProductBrief
    assumptions: tuple[Assumption, ...]
    library: Library
    settings: Settings
    loads: LoadBudget
    candidates: tuple[Candidate, ...]
    verdict: str
    warnings: tuple[str, ...] = ()
    product_findings: tuple[Any, ...] = ()
    missing_facts: tuple[Any, ...] = ()
    confidence: Confidence | None = field(default=None, repr=False)

    @property
    def ranked(self) -> tuple[Candidate, ...]:
        """Candidates with a rank, best first; variants after their head."""
        return tuple(c for c in self.candidates if c.rank is not None)

    @property
    def heads(self) -> tuple[Candidate, ...]:
        """Ranked candidates, one per buffering species."""
        return tuple(c for c in self.ranked if c.variant_of is None)

    @property
    def dropped(self) -> tuple[Candidate, ...]:
        """Candidates that a screen dropped."""
        return tuple(c for c in self.candidates if c.standing == "screened out")

    @property
    def lead(self) -> Candidate | None:
        """The first candidate, if any is acceptable."""
        return next((c for c in self.ranked if c.standing == "lead"), None)

    @property
    def backup(self) -> Candidate | None:
        """The back-up, if there is one."""
        return next((c for c in self.ranked if c.standing == "back-up"), None)

    def candidate(self, key: str) -> Candidate | None:
        """Return the candidate of a key or system id."""
        return next(
            (c for c in self.candidates if key in (c.key, c.system.id)),
            None,
        )

    @property
    def table(self) -> pd.DataFrame:
        """One row per candidate as a pandas table, units in the column names."""
        import pandas as pd

        return pd.DataFrame(self._rows()).astype({"rank": "Int64"})

    def __repr__(self) -> str:
        return (
            f"<Shortlist: {self.verdict} {len(self.ranked)} ranked, "
            f"{len(self.dropped)} screened out>"
        )

    def _repr_html_(self) -> str:
        """Return the ranked candidates as a table for a notebook."""
        left_out = ("required_mmol_l", "buffer_osmolality_mosm_kg", "screened_out_by")
        rows = [
            {k: v for k, v in row.items() if k not in left_out}
            for row in self._rows()
            if row["rank"] is not None
        ]
        note = f"{len(self.dropped)} screened out; .table holds all as a pandas table."
        return html_table(self.verdict, rows, note)

    def _rows(self) -> list[dict[str, Any]]:
        rows = []
        for c in self.candidates:
            row: dict[str, Any] = {
                "rank": c.rank,
                "system": c.key,
                "standing": c.standing,
                "desirability": c.desirability,
                "required_mmol_l": c.required_mmol_l,
                "concentration_mmol_l": c.concentration_mmol_l,
                "ph_drift": c.ph_drift,
                "osmolality_mosm_kg": c.osmolality_mosm_kg,
                "buffer_osmolality_mosm_kg": c.buffer_osmolality_mosm_kg,
            }
            for name, criterion in c.criteria.items():
                row[f"{name}_desirability"] = criterion.desirability
            row["limiting"] = c.limiting
            row["screened_out_by"] = "; ".join(s.id for s in c.dropped_by)
            rows.append(row)
        return rows
