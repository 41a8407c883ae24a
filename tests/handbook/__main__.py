"""The handbook as a table: PYTHONPATH=tests python -m handbook"""

from __future__ import annotations

import sys

from rich.console import Console
from rich.markup import escape
from rich.table import Table

from handbook.subjects import SUBJECTS

WIDTH = 100


def main() -> int:
    """Print every check and count those that fail."""
    console = Console(width=WIDTH, highlight=False)
    number = failures = 0
    for subject, checks in SUBJECTS.items():
        table = Table(title=subject, title_justify="left", width=WIDTH, box=None, pad_edge=False)
        table.add_column("Check", ratio=30)
        table.add_column("Source", ratio=32, style="dim", overflow="fold")
        for heading in ("Expected", "Obtained", "Tolerance"):
            table.add_column(heading, ratio=13)
        for check in checks:
            wanted, obtained = check.wanted(), check.obtained()
            number += 1
            if not check.holds(wanted, obtained):
                failures += 1
                name, style = f"FAILS: {check.name}", "bold red"
            else:
                name, style = check.name, ""
            numbers = (check.written(wanted), check.written(obtained), check.tolerance())
            table.add_row(*(escape(text) for text in (name, check.source, *numbers)), style=style)
        console.print(table)
        console.print()
    console.print(f"{number} checks, {failures} fail")
    return 1 if failures else 0


if __name__ == "__main__":
    sys.exit(main())
