"""What was found when this version was made: ``record.json`` beside this module.

A release writes it (`as_text`); a qualification compares with it. It holds no
published value: those stand in the tables.
"""

from __future__ import annotations

import functools
import json
from collections.abc import Iterable, Mapping
from importlib.resources import files
from typing import Any

from formbuf.errors import KnowledgeError
from formbuf.library import Library
from formbuf.qualify.installed import BRIEFS, chosen, digests
from formbuf.qualify.records import Group, Statistics

NAME = "record.json"
#: Significant digits of a recorded residual.
DIGITS = 8


@functools.cache
def load_record() -> Mapping[str, Any]:
    """Return the record of this version.

    Raises
    ------
    KnowledgeError
        If the file is missing or broken.
    """
    place = files("formbuf").joinpath("qualify", NAME)
    try:
        record = json.loads(place.read_text(encoding="utf-8"))
    except (OSError, ValueError) as error:
        fault = f"qualify/{NAME}:1:file: cannot be read ({error})"
        raise KnowledgeError([fault], hint="Install formbuf again.") from error
    if not isinstance(record, dict):
        raise KnowledgeError([f"qualify/{NAME}:1:file: holds no record"])
    return record


def recorded_statistics(record: Mapping[str, Any], group: str) -> Statistics | None:
    """Return the residuals recorded for a group; None where there are none."""
    kept = record.get("groups", {}).get(group)
    if kept is None:
        return None
    count, mean, rms, largest = kept
    return Statistics(int(count), float(mean), float(rms), float(largest))


def as_text(library: Library, groups: Iterable[Group]) -> str:
    """Return the record of what is found now, as JSON text.

    Parameters
    ----------
    library : Library
        Without an overlay.
    groups : iterable of Group
        All groups; those that compare with the record itself are recorded as met.
    """
    kept = {}
    for group in groups:
        s = group.statistics
        numbers = (s.mean, s.rms, s.largest)
        if group.id.startswith(("shortlist ", "tables ")):
            numbers = (0.0, 0.0, 0.0)
        kept[group.id] = [s.count, *(float(f"{x:.{DIGITS}g}") for x in numbers)]
    record = {
        "knowledge": library.version,
        "groups": kept,
        "tables": digests(library),
        "choices": {
            title: {
                label: round(value, DIGITS)
                for label, value in chosen(library, options).items()
            }
            for title, options in BRIEFS.items()
        },
    }
    return json.dumps(record, indent=1, ensure_ascii=True) + "\n"
