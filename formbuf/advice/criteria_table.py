"""Weights, anchors and other settings of the ranking, with a brief's changes."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal

from formbuf.errors import InputError, UnknownNameError
from formbuf.library import Library
from formbuf.product.product_brief import ProductBrief

#: Order in which criteria are shown.
CRITERIA = (
    "capacity",
    "temperature_drift",
    "tonicity_share",
    "frozen_drift",
    "compatibility",
    "precedent",
    "dose_burden",
)


#: Settings among the classes that are no desirability.
NO_DESIRABILITY = ("eased_at_or_below_mmol_l", "above_usual_exponent")


@dataclass(frozen=True, slots=True)
class Anchors:
    """Ends of a desirability.

    Attributes
    ----------
    full, floor : float or None
        Quantity at which it is 1, and at which it reaches the floor; ``floor`` is
        None where the route sets it.
    scale : {"linear", "log"}
    unit : str
    """

    full: float
    floor: float | None
    scale: Literal["linear", "log"]
    unit: str


@dataclass(frozen=True)
class Settings:
    """Everything the ranking is set by.

    Attributes
    ----------
    weights : mapping of criterion to float
    anchors : mapping of criterion to Anchors
    floor_value : float
        Desirability at the floor.
    source, basis : str
    table : mapping
        The remaining sections as written in ``knowledge/criteria.toml``.
    """

    weights: Mapping[str, float]
    anchors: Mapping[str, Anchors]
    floor_value: float
    source: str
    basis: str
    table: Mapping[str, Mapping[str, Any]]

    def number(self, section: str, key: str) -> float:
        """Return one number of a section."""
        return float(self.table[section][key])


def settings_for(library: Library, brief: ProductBrief) -> Settings:
    """Read the settings and lay a brief's weights and anchors over them.

    Raises
    ------
    UnknownNameError
        For a weight or anchor of a criterion that does not exist.
    InputError
        If all weights are zero, or an anchor cannot serve its scale.
    """
    table = library.store.toml("criteria.toml")
    weights = {name: float(table["weights"][name]) for name in CRITERIA}
    for name, weight in brief.ranking.weights.items():
        _known(name, "ranking.weights")
        weights[name] = float(weight)
    if not any(weights.values()):
        msg = "ranking.weights: every weight is zero, allowed at least one above zero"
        raise InputError(msg)
    _check_desirabilities(table)
    anchors = {}
    for name, entry in table["anchors"].items():
        chosen = entry
        vehicle = entry.get("vehicle", {})
        if brief.route_group in vehicle.get("route_groups", ()):
            chosen = {**entry, **vehicle}
        floor = chosen.get("floor")
        anchors[name] = Anchors(
            float(chosen["full"]),
            None if floor is None else float(floor),
            entry["scale"],
            entry["unit"],
        )
    for name, given in brief.ranking.anchors.items():
        _known(name, "ranking.anchors")
        if name not in anchors:
            msg = f"ranking.anchors.{name}: this criterion has classes, not anchors"
            raise InputError(msg, hint=f"Anchors exist for {', '.join(anchors)}.")
        anchors[name] = _changed(name, anchors[name], given.full, given.floor)
    return Settings(
        weights,
        anchors,
        float(table["floor_value"]),
        str(table["source"]),
        str(table["basis"]),
        table,
    )


def _check_desirabilities(table: Mapping[str, Any]) -> None:
    """Refuse desirabilities outside 0 to 1 and anchors that do not rise.

    Ours are sound; a user's own table may not be.
    """
    where = "criteria.toml"
    if not 0.0 < float(table["floor_value"]) < 1.0:
        msg = f"{where}: floor_value {table['floor_value']:g}, allowed above 0, below 1"
        raise InputError(msg)
    for section in ("frozen_drift", "compatibility", "precedent"):
        for key, value in table[section].items():
            if key in NO_DESIRABILITY or not isinstance(value, int | float):
                continue
            if not 0.0 < value <= 1.0:
                msg = f"{where}: {section}.{key} {value:g}, allowed above 0, up to 1"
                raise InputError(msg)
    for name, entry in table["anchors"].items():
        for chosen in (entry, {**entry, **entry.get("vehicle", {})}):
            if entry["scale"] not in ("linear", "log"):
                msg = f"{where}: anchors.{name}.scale {entry['scale']!r}, allowed linear, log"
                raise InputError(msg)
            if "floor" in chosen and not chosen["full"] < chosen["floor"]:
                msg = (
                    f"{where}: anchors.{name}: floor {chosen['floor']:g} must lie above "
                    f"full {chosen['full']:g}, since less of it is better"
                )
                raise InputError(msg)


def _known(name: str, where: str) -> None:
    if name not in CRITERIA:
        raise UnknownNameError("criterion", name, CRITERIA, where=where)


def _changed(
    name: str, anchors: Anchors, full: float | None, floor: float | None
) -> Anchors:
    new = Anchors(
        anchors.full if full is None else full,
        anchors.floor if floor is None else floor,
        anchors.scale,
        anchors.unit,
    )
    if new.scale == "log" and (new.full <= 0 or (new.floor or 1.0) <= 0):
        msg = f"ranking.anchors.{name}: a logarithmic scale needs anchors above 0"
        raise InputError(msg)
    if new.floor is not None and new.floor <= new.full:
        msg = (
            f"ranking.anchors.{name}: floor {new.floor:g} must lie above full "
            f"{new.full:g}, since less of it is better"
        )
        raise InputError(msg)
    return new
