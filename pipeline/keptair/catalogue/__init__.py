"""Reading anyone's table."""

from __future__ import annotations

from keptair.catalogue.columns import ColumnMap
from keptair.catalogue.reading import Catalogue, open_catalogue

__all__ = ["Catalogue", "ColumnMap", "open_catalogue"]
