"""Arrays kept from call to call: fresh memory costs more than what is computed in it."""

from __future__ import annotations

from math import prod

import numpy as np
from numpy.typing import NDArray


class Workspace:
    """Named arrays that grow as needed. Not for two threads."""

    def __init__(self) -> None:
        self._kept: dict[str, NDArray[np.float64]] = {}

    def array(self, name: str, *shape: int) -> NDArray[np.float64]:
        """An array that holds anything; that of the same name is void from now on."""
        size = prod(shape)
        if name not in self._kept or self._kept[name].size < size:
            self._kept[name] = np.empty(size)
        return self._kept[name][:size].reshape(shape)

    def complex_array(self, name: str, *shape: int) -> NDArray[np.complex128]:
        """The same, complex."""
        return self.array(name, *shape[:-1], 2 * shape[-1]).view(complex)
