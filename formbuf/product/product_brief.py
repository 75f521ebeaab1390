"""The completed brief: every value resolved, for all upper layers.

Attribute names are the keys of the brief file. Concentrations in mmol/L of solution,
temperatures in degrees C, osmolalities in mosmol/kg of water, pressures in Pa.
"""

from __future__ import annotations

import dataclasses
import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from formbuf.product.product_parts import (
    ISOTONIC_FIRST_ICE_C,
    CandidateInfo,
    CarbonDioxideInfo,
    ContainerInfo,
    DoseInfo,
    DrugInfo,
    ExcipientInfo,
    LoadsInfo,
    OverrideInfo,
    PhInfo,
    ProductInfo,
    RankingInfo,
    StorageInfo,
    TonicityInfo,
)
from formbuf.product.uncertainty_parts import UncertaintyInfo
from formbuf.product.vocabulary import Role, RouteGroup, State, StorageKind

#: From this dose volume on an intravenous product counts as large volume, mL.
LARGE_VOLUME_ML = 100.0


@dataclass(frozen=True, slots=True)
class ProductBrief:
    """A brief with every value resolved; what the upper layers work with."""

    title: str
    product: ProductInfo
    ph: PhInfo
    storage: tuple[StorageInfo, ...]
    dose: DoseInfo
    loads: LoadsInfo
    container: ContainerInfo
    carbon_dioxide: CarbonDioxideInfo
    tonicity: TonicityInfo
    drug: DrugInfo
    excipient: tuple[ExcipientInfo, ...]
    exclude: tuple[str, ...]
    require: tuple[str, ...]
    consider_roles: tuple[Role, ...]
    candidate: tuple[CandidateInfo, ...]
    ranking: RankingInfo
    override: tuple[OverrideInfo, ...]
    facts: Mapping[str, Any]
    uncertainty: UncertaintyInfo = field(default_factory=UncertaintyInfo)

    @property
    def route_group(self) -> RouteGroup:
        """Group of the route."""
        return self.product.route_group

    @property
    def is_parenteral(self) -> bool:
        """Whether the product is injected, infused or used to irrigate."""
        return self.route_group == "parenteral"

    @property
    def is_large_volume_intravenous(self) -> bool:
        """Whether 100 mL or more is given into a vein."""
        large = self.dose.volume_ml >= LARGE_VOLUME_ML
        return self.product.route == "intravenous" and large

    @property
    def is_dried(self) -> bool:
        """Whether the product is dried at any time."""
        return self.product.form == "dried" or "dried" in self._states()

    @property
    def is_frozen(self) -> bool:
        """Whether it is kept or handled frozen, bulk included, drying apart."""
        return self.product.form == "frozen" or "frozen" in self._states()

    @property
    def liquid_storage_temperatures_c(self) -> tuple[float, ...]:
        """Temperatures at which it is stored as a liquid, ascending."""
        return self.temperatures_c("liquid", "storage")

    @property
    def frozen_storage_temperatures_c(self) -> tuple[float, ...]:
        """Temperatures at which it is stored frozen, ascending."""
        return self.temperatures_c("frozen", "storage")

    @property
    def dried_storage_temperatures_c(self) -> tuple[float, ...]:
        """Temperatures at which it is stored dried, ascending."""
        return self.temperatures_c("dried", "storage")

    def temperatures_c(
        self,
        state: State | None = None,
        kind: StorageKind | None = None,
        first_ice_c: float = ISOTONIC_FIRST_ICE_C,
    ) -> tuple[float, ...]:
        """Return the temperatures of a state and kind (None: any), ascending, C."""
        found = {
            entry.temperature_c
            for entry in self.storage
            if kind in {None, entry.kind}
            and state in {None, entry.state_at(first_ice_c)}
        }
        return tuple(sorted(found))

    def with_first_ice(self, first_ice_c: float) -> ProductBrief:
        """Return the brief with every open state decided by the first ice, C."""
        decided = tuple(
            dataclasses.replace(entry, state=entry.state_at(first_ice_c))
            for entry in self.storage
        )
        return dataclasses.replace(self, storage=decided)

    def to_dict(self) -> dict[str, Any]:
        """Return every value as plain types for JSON; None where there is none."""
        values: dict[str, Any] = plain(self)
        return values

    def _states(self) -> set[State]:
        return {entry.state_at() for entry in self.storage}


def plain(value: Any) -> Any:
    """Return a record as dictionaries, lists and scalars."""
    if dataclasses.is_dataclass(value):
        fields = dataclasses.fields(value)
        return {field.name: plain(getattr(value, field.name)) for field in fields}
    if isinstance(value, Mapping):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, tuple | list):
        return [plain(item) for item in value]
    if isinstance(value, dt.date):
        return value.isoformat()
    return value
