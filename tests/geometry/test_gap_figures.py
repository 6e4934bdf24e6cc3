"""The usual gap of a profile is the same whether wide runs are spelled out bin by bin or reckoned by their ends."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairrules.geometry import gap_figures
from pairrules.geometry.gap_figures import usual_gap
from pairrules.geometry.pair_geometry import SpacingProfile

GAP = st.floats(0.001, 0.3)
RUN = st.tuples(GAP, GAP, st.floats(0.1, 3.0))


def profile(runs: list[tuple[float, float, float]]) -> SpacingProfile:
    """Stretches from one gap to another over a length, all of them beside one piece."""
    rows = len(runs)
    start, end, length = np.array(runs).T
    along = np.concatenate([[0.0], np.cumsum(length)])
    nothing = np.zeros(rows, dtype=np.int64)
    return SpacingProfile(
        s_from=along[:-1],
        s_to=along[1:],
        piece=nothing,
        other=nothing,
        gap_from=start,
        gap_mid=(start + end) / 2,
        gap_to=end,
        angle=np.zeros(rows),
        coupled=np.ones(rows, dtype=np.bool_),
        start=np.zeros((rows, 2)),
        end=np.zeros((rows, 2)),
        layer=nothing,
    )


@settings(max_examples=200, deadline=None, derandomize=True)
@given(runs=st.lists(RUN, min_size=1, max_size=6))
def test_wide_runs_are_reckoned_as_if_spelled_out(runs: list[tuple[float, float, float]]) -> None:
    with pytest.MonkeyPatch.context() as patch:
        spelled = usual_gap(profile(runs))
        patch.setattr(gap_figures, "_MOST_BINS", 5)
        assert usual_gap(profile(runs)) == pytest.approx(spelled, abs=2e-6)


def test_a_leg_that_leaves_for_metres_does_not_hide_the_steady_gap() -> None:
    assert usual_gap(profile([(0.2, 0.2, 10.0), (0.2, 9000.0, 9000.0)])) == pytest.approx(0.2, abs=1e-6)
