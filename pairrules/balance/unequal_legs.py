"""Two legs that should be alike: a mean and how far they are apart."""

from __future__ import annotations

from collections.abc import Mapping


def apart(mean: float, mismatch: float) -> tuple[float, float]:
    """(plus, minus) = mean (1 ± mismatch/2), plus the greater where the mismatch is positive."""
    return (mean * (1 + mismatch / 2), mean * (1 - mismatch / 2))


def need(values: Mapping[str, float], key: str, what: str) -> float:
    """The value of a key. Raises: ValueError where it is not given."""
    if key not in values:
        raise ValueError(f"{what} needs {key}")
    return values[key]
