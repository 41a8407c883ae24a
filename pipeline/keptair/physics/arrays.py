"""The type every formula takes and gives: arrays that broadcast; plain numbers serve as arrays of no dimension."""

from typing import Any, TypeAlias

from numpy.typing import NDArray

Numbers: TypeAlias = NDArray[Any]
