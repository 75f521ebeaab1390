"""Where each value of the completed brief comes from."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Collection
from typing import Any

from formbuf.product.brief_origin import key_path
from formbuf.report.reading import Cursor
from formbuf.report.story import Story

#: Keys that steer the program and say nothing of the product.
INTERNAL = (
    "loads.acid_is_default",
    "loads.base_is_default",
    "tonicity.agent_is_default",
    "tonicity.amorphous_sugar_is_assumed",
)
#: Keys that follow from others where the brief does not state them.
COMPUTED = re.compile(
    r"product\.precedent_route|tonicity\.amorphous_sugar_percent_w_v"
    r"|drug\.(concentration_m\w+|molar_mass_g_mol|residues\.\w+|titration_mmol_g\S*)"
    r"|excipient\[\d+\]\.(mmol_l|g_l)|candidate\[\d+\]\.name"
)
#: Keys that hold what an excipient is stated as.
AS_STATED = re.compile(r"excipient\[\d+\]\.(stated|stated_unit)")


def stated_keys(text: str) -> tuple[str, ...]:
    r"""Return every key that a brief states, as the record of the input names them.

    Parameters
    ----------
    text : str
        Text of the brief file.

    Returns
    -------
    tuple of str
        For example ``storage[1].temperature_c``; empty where the text is no brief.

    Examples
    --------
    >>> stated_keys("title = 'A'\n[[storage]]\ntemperature_c = 5")
    ('title', 'storage[1].temperature_c')
    """
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        return ()
    return tuple(_keys(data, ()))


def _keys(value: Any, at: tuple[str | int, ...]) -> list[str]:
    if isinstance(value, dict):
        return [key for name in value for key in _keys(value[name], (*at, name))]
    if isinstance(value, list) and any(isinstance(x, dict) for x in value):
        return [key for i, x in enumerate(value) for key in _keys(x, (*at, i))]
    return [key_path(at)]


def assumed_keys(story: Story) -> set[str]:
    """Return the keys of the completed brief that were assumed.

    An entry of the storage that was added is named by its place in the list.
    """
    found = {a.text("key") for a in story.root.each("assumptions")}
    for a in story.root.each("assumptions"):
        kind = {
            "storage.temperature_c": "storage",
            "storage.use_temperature_c": "use",
            "storage.body_temperature_c": "body",
        }.get(a.text("key"))
        places = [
            position
            for position, entry in enumerate(story.brief.each("storage"), start=1)
            if entry.get("kind") == kind
            and entry.number("temperature_c") == a.number("value")
        ]
        if places:
            entry = f"storage[{places[-1]}]"
            found |= {f"{entry}.{name}" for name in ("kind", "temperature_c", "state")}
    if "storage.state" in found:
        stated = set(story.more.get("origin", "stated") or ())
        for position, place in enumerate(story.brief.each("storage"), start=1):
            key = f"storage[{position}].state"
            if place.get("state") == "dried" and key not in stated:
                found.add(key)
    return found


def origin(
    key: str, leaf: Cursor, assumed: Collection[str], stated: Collection[str]
) -> str:
    """Say where the value of a key comes from.

    Parameters
    ----------
    key : str
    leaf : Cursor
        The value.
    assumed : collection of str
        As `assumed_keys` returns them.
    stated : collection of str
        As `stated_keys` returns them; empty where no file is known, then what is
        neither assumed nor always computed counts as stated.

    Returns
    -------
    str
        ``stated``, ``assumed``, ``computed``, ``preset`` (the program's own value) or
        ``not stated`` where there is none.
    """
    if leaf.data is None or leaf.data in ("", [], {}):
        return "not stated"
    if key in assumed:
        return "assumed"
    if key in stated or AS_STATED.fullmatch(key):
        return "stated"
    if COMPUTED.fullmatch(key) and (stated or key == "product.precedent_route"):
        return "computed"
    return "preset" if stated else "stated"
