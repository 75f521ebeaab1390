"""The published checks as tests: what a qualification computes, judged and printed.

The cases, tolerances and known misses stand once, in ``formbuf.qualify``. The names of
the groups come from its record, so that collecting tests computes nothing.
"""

from __future__ import annotations

from functools import cache

import pytest
from reference_tables import library

from formbuf.qualify.record import load_record
from formbuf.qualify.records import Group
from formbuf.qualify.run import PARTS


def names(*beginnings: str) -> list[str]:
    """Groups of the record whose names begin so."""
    found = [name for name in load_record()["groups"] if name.startswith(beginnings)]
    assert found, beginnings
    return found


@cache
def computed(part: str) -> dict[str, Group]:
    """The groups of one part of the qualification, by name."""
    return {group.id: group for group in PARTS[part](library(), load_record())}


def is_met(part: str, name: str) -> None:
    """Print the cases of a group and compare; a known miss must still be one."""
    group = computed(part)[name]
    show(group)
    if group.known_miss:
        assert not group.is_within, "a known miss is gone: take its reason away"
        pytest.xfail(group.known_miss)
    assert group.is_within, [c.label for c in group.outside] or group.statistics.mean


def show(group: Group) -> None:
    """Print each case of a group, and their statistics."""
    print(f"\n{group.kind}: {group.title} [{group.unit}]")
    digits = group.digits
    for c in group.cases:
        print(
            f"  {c.label:<50}  published {c.published:>10.{digits}f}  found "
            f"{c.found:>10.{digits}f}  miss {c.miss:+.{digits}f}  [{c.basis}] {c.source}"
        )
    s = group.statistics
    print(
        f"  {s.count} values, mean {s.mean:+.{digits}f}, rms {s.rms:.{digits}f}, "
        f"largest {s.largest:+.{digits}f} ({group.worst.label})"
    )
