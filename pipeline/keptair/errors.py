"""Every failure a user can meet, each with its exit code."""

from __future__ import annotations

import unicodedata

HIDDEN = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}  # control, format and bidirectional marks, line separators
LONGEST_MESSAGE = 4000  # characters, about; nobody reads on
LONGEST_LINE = 2000


def counted(number: int, thing: str) -> str:
    """3 problems, 1 problem."""
    return f"{number} {thing}" if number == 1 else f"{number} {thing}s"


def visible(text: str) -> str:
    """The text with hidden characters written out: what a stranger named cannot move the cursor."""
    return "".join(_written_out(letter) if unicodedata.category(letter) in HIDDEN else letter for letter in text)


def _written_out(letter: str) -> str:
    return letter.encode("unicode_escape").decode("ascii")


class KeptairError(Exception):
    """An expected failure: one sentence saying what is wrong, and what to try.

    `problems` lists every single thing found wrong, one line each; `hint` says what to do next.
    """

    exit_code = 1

    def __init__(self, summary: str, problems: list[str] | None = None, hint: str = "") -> None:
        self.summary = summary
        self.problems = problems or []
        self.hint = hint
        super().__init__(self.message())

    def message(self) -> str:
        lines = [_line(self.summary)]
        for number, problem in enumerate(self.problems):
            lines.append("  " + _line(problem))
            if sum(map(len, lines)) > LONGEST_MESSAGE and number + 1 < len(self.problems):
                lines.append(f"  and {len(self.problems) - number - 1} more")
                break
        if self.hint:
            lines.append(f"Try: {_line(self.hint)}")
        return "\n".join(lines)


class UsageError(KeptairError):
    """The command line asks for something that cannot be."""

    exit_code = 2


class SettingsError(UsageError):
    """A settings file or value is wrong."""


class NotThereError(UsageError):
    """A planet, a run or a table that does not exist."""


class CatalogueError(KeptairError):
    """The catalogue cannot be read."""

    exit_code = 3


class ColumnMapError(CatalogueError):
    """The column map does not fit the catalogue."""


class TooManyRejectsError(KeptairError):
    """The run is kept, but more rows were set aside than allowed: `latest` stays where it was."""

    exit_code = 4


class OutputError(KeptairError):
    """The output folder cannot be written."""

    exit_code = 6


class StoppedError(KeptairError):
    """A signal ended the run; nothing was published."""

    def __init__(self, signal_number: int) -> None:
        self.exit_code = 128 + signal_number
        super().__init__("stopped; nothing was published")


def _line(text: str) -> str:
    half = (LONGEST_LINE - 1) // 2
    return visible(text if len(text) <= LONGEST_LINE else f"{text[:half]}…{text[-half:]}")
