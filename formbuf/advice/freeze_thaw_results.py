"""What a comparison on freezing and thawing consists of, as frozen records."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from formbuf.advice.freeze_thaw_evidence import PublishedChange, RankedObservation
from formbuf.advice.frozen import Frozen
from formbuf.advice.results import Weighed
from formbuf.constants import EXTRAPOLATION_LIMIT_C
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.notebook import html_table
from formbuf.product.product_brief import ProductBrief
from formbuf.product.product_parts import Assumption

if TYPE_CHECKING:
    import pandas as pd

#: Where a product that is kept liquid is taken to, if it froze by accident [C].
ACCIDENT_C = EXTRAPOLATION_LIMIT_C


@dataclass(frozen=True, slots=True)
class LiquidPoint:
    """PH of the product as a liquid; ``kinds`` say what the temperature stands for."""

    temperature_c: float
    kinds: tuple[str, ...]
    ph: float


@dataclass(frozen=True)
class FreezeThawSystem:
    """What freezing and thawing do to one system as made.

    Attributes
    ----------
    key : str
        Key of the candidate, or id of the system.
    name : str
    system : System
    concentration_mmol_l : float
        Of the buffer.
    ph_before : float
        As a liquid at the measurement temperature.
    composition : tuple of Weighed
    tonicity_fill : Weighed or None
    standing : str
        In the shortlist; empty in the quick form.
    rank : int or None
    variant_of : str or None
    liquid : tuple of LiquidPoint
        In falling temperature.
    frozen : Frozen
        Class, paths and what the ranking counts.
    observations : tuple of RankedObservation
        Nearest first.
    published : PublishedChange or None
        Range of the observed changes of pH that bear a number.
    where, where_sources : str, tuple of str
        Where real samples fall, a rule (judgement).
    thaw : str
    verdict : str
    volatile_share : float
        Largest share of a volatile species of the buffer in its neutral form.
    notes : tuple of str
    trace : callable
        Follows the same composition over other temperatures.
    """

    key: str
    name: str
    system: System
    concentration_mmol_l: float
    ph_before: float
    composition: tuple[Weighed, ...]
    tonicity_fill: Weighed | None
    standing: str
    rank: int | None
    variant_of: str | None
    liquid: tuple[LiquidPoint, ...]
    frozen: Frozen
    observations: tuple[RankedObservation, ...]
    published: PublishedChange | None
    where: str
    where_sources: tuple[str, ...]
    thaw: str
    verdict: str
    volatile_share: float
    notes: tuple[str, ...]
    trace: Callable[[tuple[float, ...]], Frozen] = field(repr=False, compare=False)


@dataclass(frozen=True)
class FreezeThaw:
    """The answer to a brief, or to the quick form.

    Attributes
    ----------
    library : Library
    brief : ProductBrief
    assumptions : tuple of Assumption
        Empty in the quick form.
    is_quick : bool
    is_frozen : bool
        Whether the product is frozen or dried at all.
    lowest_c : float
        Coldest temperature of the product [C].
    temperatures_c : tuple of float
        Of the paths, falling.
    shown_c : tuple of float
        Those of them that a table of several systems shows.
    systems : tuple of FreezeThawSystem
        In the order of the shortlist.
    left_out : tuple of str
        What was not assessed, and why.
    warnings : tuple of str
    """

    library: Library
    brief: ProductBrief
    assumptions: tuple[Assumption, ...]
    is_quick: bool
    is_frozen: bool
    lowest_c: float
    temperatures_c: tuple[float, ...]
    shown_c: tuple[float, ...]
    systems: tuple[FreezeThawSystem, ...]
    left_out: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()

    @property
    def table(self) -> pd.DataFrame:
        """One row per point of each path as a pandas table, units in the names."""
        import pandas as pd

        rows = [
            {
                "system": s.key,
                "assumption": path.assumption,
                "temperature_c": point.temperature_c,
                "ph": point.ph,
                "ice_fraction": point.ice_fraction,
                "unfrozen_water_g_kg": point.unfrozen_water_g_kg,
                "state": point.state,
            }
            for s in self.systems
            for path in s.frozen.assessment.paths
            for point in path.points
        ]
        return pd.DataFrame(rows)

    def __repr__(self) -> str:
        return (
            f"<FreezeThaw down to {self.lowest_c:g} C: "
            f"{', '.join(s.key for s in self.systems)}>"
        )

    def _repr_html_(self) -> str:
        """Return what freezing does to each system as a table for a notebook."""
        rows = [
            {
                "system": s.key,
                "concentration_mmol_l": s.concentration_mmol_l,
                "ph_before": s.ph_before,
                "verdict": s.verdict,
            }
            for s in self.systems
        ]
        title = f"On freezing, down to {self.lowest_c:g} C"
        return html_table(title, rows, ".table holds the paths as a pandas table.")


@dataclass(frozen=True, slots=True)
class QuickQuestion:
    """One composition to freeze; amounts are those of the solution at 25 C.

    Attributes
    ----------
    system : str
        Id of a buffer system.
    concentration_mmol_l : float
        Of the buffer, above 0.
    ph : float
        As set at 25 C.
    to_c : float
        Coldest temperature [C], -30 to 0.
    added : mapping of str to (material, unit, amount)
        Further solutes by the option that gives them.
    """

    system: str
    concentration_mmol_l: float
    ph: float
    to_c: float = ACCIDENT_C
    added: Mapping[str, tuple[str, str, float]] = field(default_factory=dict)
