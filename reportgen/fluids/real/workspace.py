"""Arrays for intermediate results, used again and again.

A large array that is allocated and freed for every chunk is given back to the system each time, and asking for its
pages anew costs more than the arithmetic done in it (measured: two to five times).
"""

from __future__ import annotations

import threading
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["Workspace"]

#: Arrays of fewer elements come cheaper from the memory allocator.
_SMALL = 4096


class Workspace(threading.local):
    """Uninitialised arrays by name; each thread has its own."""

    def __init__(self) -> None:
        self._buffers: dict[tuple[str, Any], NDArray[Any]] = {}

    def array(self, name: str, rows: int, size: int, dtype: Any) -> NDArray[Any]:
        """An array of shape (rows, size), valid until the thread asks for the same name again."""
        count = rows * size
        if count < _SMALL:
            return np.empty((rows, size), dtype=dtype)
        buffer = self._buffers.get((name, dtype))
        if buffer is None or buffer.size < count:
            buffer = self._buffers[name, dtype] = np.empty(count, dtype=dtype)
        return buffer[:count].reshape(rows, size)
