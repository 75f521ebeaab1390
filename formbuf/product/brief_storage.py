"""Complete the temperatures of a brief: storage, use and body.

A stated temperature keeps its state open where none is given: the first ice decides.
Only a dried product is stored dried unless said otherwise.
"""

from __future__ import annotations

from formbuf.product.brief_filler import Filler
from formbuf.product.product_parts import StorageInfo

#: At or below this a solution of up to 2.6 osmol/kg holds ice, C.
SURELY_FROZEN_C = -5.0


def is_surely_frozen(entry: StorageInfo) -> bool:
    """Whether an entry is frozen whatever the osmolality turns out to be."""
    if entry.state is not None:
        return entry.state == "frozen"
    return entry.temperature_c <= SURELY_FROZEN_C


def complete_storage(filler: Filler) -> tuple[StorageInfo, ...]:
    """Return the stated temperatures, then those that had to be assumed."""
    entries = _stated(filler)
    form = filler.form
    stored = [entry for entry in entries if entry.kind == "storage"]
    fits_form = form == "liquid" or any(entry.state_at() == form for entry in stored)
    if not stored or not fits_form:
        at = float(filler.take("storage.temperature_c"))
        entries.append(StorageInfo("storage", at, form))
    if not any(entry.state_at() == "liquid" for entry in entries):
        at = float(filler.take("storage.use_temperature_c"))
        entries.append(StorageInfo("use", at, "liquid"))
    if not any(entry.kind == "body" for entry in entries):
        at = float(filler.take("storage.body_temperature_c"))
        entries.append(StorageInfo("body", at, "liquid"))
    return tuple(entries)


def _stated(filler: Filler) -> list[StorageInfo]:
    """Return the stated entries; those of a dried product become dried."""
    entries: list[StorageInfo] = []
    was_open = False
    for row in filler.brief.storage:
        state = row.state
        kept = row.kind in {"storage", "accelerated"}
        if state is None and filler.form == "dried" and kept:
            state, was_open = "dried", True
        entries.append(StorageInfo(row.kind, row.temperature_c, state, row.hours))
    if was_open:
        reason = "a dried product is stored dried"
        filler.assume("storage.state", "dried", "", "practice", reason)
    return entries
