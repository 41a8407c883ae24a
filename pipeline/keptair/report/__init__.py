"""The report page of a run, and the list of targets."""

from __future__ import annotations

from keptair.report.page import write

__all__ = ["write"]
