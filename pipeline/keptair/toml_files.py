"""A TOML file of the user's: what it says, or in one sentence why it cannot be read."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

from keptair.errors import KeptairError

LONGEST = 4 << 20  # bytes; a file nobody wrote by hand, or a device that never ends


def read(path: Path, error: type[KeptairError], what: str = "") -> tuple[dict[str, Any], str]:
    """The values and the text; what : "the column map", say, for the message."""
    subject = f"{path}: {what} ".rstrip()
    try:
        with path.open("rb") as file:
            content = file.read(LONGEST + 1)
        if len(content) > LONGEST:
            raise error(f"{subject} is longer than {LONGEST >> 20} MB")
        text = content.decode("utf-8")
        values = tomllib.loads(text)
        if _has_endless_integer(values):
            raise error(f"{subject} has a whole number of more than 64 bits, which TOML does not know")
        return values, text
    except OSError as problem:
        raise error(f"{subject} cannot be read ({problem.strerror or problem})") from None
    except UnicodeDecodeError:
        raise error(f"{subject} is not UTF-8 text") from None
    except RecursionError:
        raise error(f"{subject} is nested too deeply") from None
    except ValueError as problem:  # tomllib's own error is one, and that about a number of 5 000 digits
        raise error(f"{subject} is not TOML ({problem})") from None


def _has_endless_integer(value: Any) -> bool:
    if isinstance(value, dict | list):
        return any(map(_has_endless_integer, value.values() if isinstance(value, dict) else value))
    return isinstance(value, int) and value.bit_length() > 63
