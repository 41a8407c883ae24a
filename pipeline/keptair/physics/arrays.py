"""The type every formula takes and gives: arrays that broadcast; at run time plain numbers serve as well."""

from typing import Any, TypeAlias

from numpy.typing import NDArray

Numbers: TypeAlias = NDArray[Any]
