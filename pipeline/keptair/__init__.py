"""Which catalogued planets still hold an atmosphere against thermal escape."""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from keptair import errors
    from keptair.runs.loading import load
    from keptair.runs.running import run
    from keptair.settings import Settings
    from keptair.worksheet import trace

__version__ = "0.1.0"
__all__ = ["Settings", "__version__", "errors", "load", "run", "trace"]

# Found on first use: importing keptair costs nothing, as the command line's help must not.
_HOMES = {
    "Settings": "keptair.settings",
    "load": "keptair.runs.loading",
    "run": "keptair.runs.running",
    "trace": "keptair.worksheet",
}


def __getattr__(name: str) -> Any:
    if name in _HOMES:
        return getattr(import_module(_HOMES[name]), name)
    if name == "errors":
        return import_module("keptair.errors")
    raise AttributeError(f"module 'keptair' has no attribute {name!r}")


def __dir__() -> list[str]:
    return __all__
