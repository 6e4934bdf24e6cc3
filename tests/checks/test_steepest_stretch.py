"""The shortest stretch on which a running difference grows by so much, against trying every stretch."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from pairrules.checks.steepest_stretch import steepest_stretch


@given(
    steps=st.lists(st.tuples(st.integers(0, 5), st.integers(-4, 4)), min_size=1, max_size=20), least=st.integers(1, 12)
)
def test_no_shorter_stretch_grows_by_as_much(steps: list[tuple[int, int]], least: int) -> None:
    along = np.concatenate([[0.0], np.cumsum([float(length) for length, _ in steps])])
    running = np.concatenate([[0.0], np.cumsum([float(growth) for _, growth in steps])])
    every = [
        along[last] - along[first]
        for first in range(len(along))
        for last in range(first + 1, len(along))
        if running[last] - running[first] >= least
    ]
    found = steepest_stretch(along, running, float(least))
    if found is None:
        assert not every
        return
    first, last = found
    assert first < last and running[last] - running[first] >= least
    assert along[last] - along[first] == min(every)


def test_a_single_point_has_no_stretch() -> None:
    assert steepest_stretch(np.zeros(1), np.zeros(1), 1.0) is None
