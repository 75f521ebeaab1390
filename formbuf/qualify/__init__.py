"""Qualification: the published checks, computed on this installation and judged."""

from __future__ import annotations

from formbuf.qualify.records import Case, Group, Judged, Qualification
from formbuf.qualify.run import qualify

__all__ = ["Case", "Group", "Judged", "Qualification", "qualify"]
