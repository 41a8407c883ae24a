"""Rows as CSV that a spreadsheet shows and never runs."""

from __future__ import annotations

import csv
from collections.abc import Iterable
from typing import IO

FORMULA_STARTS = tuple("=+-@＝＋－＠")  # what a spreadsheet takes for a formula, in full width too


class Sheet:
    """CSV on its way into a stream opened with newline=""."""

    def __init__(self, stream: IO[str]) -> None:
        self._usual = csv.writer(stream, lineterminator="\n")
        self._all_quoted = csv.writer(stream, lineterminator="\n", quoting=csv.QUOTE_ALL)

    def write(self, cells: Iterable[object]) -> None:
        """One row; a text that would be a formula gets a leading '."""
        row = ["'" + cell if isinstance(cell, str) and cell.startswith(FORMULA_STARTS) else cell for cell in cells]
        # a CR ends a row for those who read, but Python before 3.13 does not quote it
        broken = any(isinstance(cell, str) and "\r" in cell for cell in row)
        (self._all_quoted if broken else self._usual).writerow(row)
