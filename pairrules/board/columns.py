"""Columns of a record: copied, read-only and of one length, so that nobody can change a board under another."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]
Bools = npt.NDArray[np.bool_]


def freeze(record: Any, columns: dict[str, tuple[type, tuple[int, ...]]]) -> None:
    """Replace each named field of a frozen record by a read-only array of the given type and trailing shape.

    Raises: ValueError where a column has another shape or length than the first.
    """
    rows: int | None = None
    for name, (kind, trailing) in columns.items():
        array: np.ndarray[Any, Any] = np.array(getattr(record, name), dtype=kind)
        if array.size == 0:
            array = array.reshape((0, *trailing))
        if array.shape[1:] != trailing:
            raise ValueError(f"{type(record).__name__}.{name} has shape {array.shape}, rows of {trailing} are needed")
        if rows is None:
            rows = len(array)
        elif len(array) != rows:
            raise ValueError(f"{type(record).__name__}.{name} has {len(array)} rows, {rows} are needed")
        array.flags.writeable = False
        object.__setattr__(record, name, array)
