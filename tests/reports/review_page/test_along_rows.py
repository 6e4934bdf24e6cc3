"""Profiles as short rows: fewer, and the same to what a page shows."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairrules.drawing import Point, RunningDifference, SpacingStretch
from pairrules.reports.review_page.along_rows import SAME_MM, difference_rows, short, spacing_rows


def stretch(
    s_from: float, s_to: float, gaps: tuple[float | None, float | None, float | None], *, y: float = 0.0, **more: object
) -> SpacingStretch:
    plain: dict[str, object] = {"coupled": True, "layer": 0, "start": (s_from, y), "end": (s_to, y)}
    return SpacingStretch(
        from_mm=s_from,
        to_mm=s_to,
        gap_from_mm=gaps[0],
        gap_mid_mm=gaps[1],
        gap_to_mm=gaps[2],
        **(plain | more),  # type: ignore[arg-type]
    )


def test_stretches_of_one_gap_are_one_row() -> None:
    rows = spacing_rows([stretch(i, i + 1, (0.15, 0.15, 0.15)) for i in range(5)])
    assert rows == [[0, 5, 0.15, 0.15, 0.15, 1, 0, 5000, 0, 0, 0]]


@pytest.mark.parametrize(
    "second",
    [
        stretch(1, 2, (0.15, 0.15, 0.15), coupled=False),
        stretch(1, 2, (0.15, 0.15, 0.15), layer=1),
        stretch(1, 2, (0.15, 0.15, 0.2)),
        stretch(1, 2, (0.15, 0.16, 0.15)),
        stretch(1, 2, (0.15, 0.15, 0.15), end=(1.0, 1.0)),
        stretch(1, 2, (0.15, 0.15, 0.15), start=(3.0, 0.0), end=(4.0, 0.0)),
        stretch(1, 2, (None, None, None), coupled=False),
    ],
    ids=["alone", "layer", "gap", "middle", "bend", "break", "unknown"],
)
def test_what_changes_begins_a_row(second: SpacingStretch) -> None:
    assert len(spacing_rows([stretch(0, 1, (0.15, 0.15, 0.15)), second])) == 2


def test_the_start_stands_only_where_it_is_not_the_end_before() -> None:
    far = stretch(2, 3, (0.3, 0.3, 0.3), start=(9.0, 0.0), end=(10.0, 0.0))
    rows = spacing_rows([stretch(0, 1, (0.1, 0.1, 0.1)), stretch(1, 2, (0.2, 0.2, 0.2)), far])
    assert [row[7:] for row in rows] == [[1000, 0, 0, 0], [2000, 0], [10000, 0, 9000, 0]]


def test_the_profile_read_from_the_rows_is_the_profile() -> None:
    # A gap that grows as the square of the length, finely cut.
    cuts = np.linspace(0.0, 3.0, 301)

    def gap(s: float) -> float:
        return 0.15 + 0.05 * s**2

    rows = spacing_rows([stretch(a, b, (gap(a), gap((a + b) / 2), gap(b))) for a, b in pairwise(cuts)])
    assert len(rows) < 60
    known_s = [s for row in rows for s in (row[0], (row[0] + row[1]) / 2, row[1])]
    known_gap = [value for row in rows for value in row[2:5]]
    read = np.interp(cuts, known_s, known_gap)
    # Twice half a micrometre by joining; rounding of the length to 1 µm on a slope of at most 0.3 adds 0.15 µm.
    assert np.abs(read - [gap(s) for s in cuts]).max() < 2 * SAME_MM + 0.0002


def running(along: float, difference: float, at: Point | None = None, layer: int = 0) -> RunningDifference:
    return RunningDifference(along_mm=along, difference_mm=difference, layer=layer, at=at or (along, 0.0))


def test_only_the_bends_of_the_running_difference_are_kept() -> None:
    points = [running(s, 0.0) for s in range(5)] + [running(5 + s, 0.1 * s) for s in range(4)]
    assert [row[:2] for row in difference_rows(points)] == [[0, 0], [5, 0], [8, 0.3]]


def test_bends_on_the_board_and_changes_of_layer_are_kept() -> None:
    corner = [running(0, 0), running(1, 0), running(2, 0, (1.0, 1.0))]
    assert len(difference_rows(corner)) == 3
    assert len(difference_rows([running(0, 0), running(1, 0, layer=1), running(2, 0, layer=1)])) == 3
    assert difference_rows([]) == [] and len(difference_rows([running(0, 0)])) == 1


@given(st.lists(st.floats(-3, 3), min_size=2, max_size=40))
def test_the_running_difference_read_from_the_rows_is_the_difference(values: list[float]) -> None:
    points = [running(float(i), value) for i, value in enumerate(values)]
    rows = difference_rows(points)
    read = np.interp(range(len(values)), [row[0] for row in rows], [row[1] for row in rows])
    assert np.abs(read - values).max() < SAME_MM * (1 + len(values) / 4)


@pytest.mark.parametrize(("number", "found"), [(None, None), (-0.00001, 0), (2.0, 2), (1.23456, 1.235)])
def test_numbers_as_short_as_they_go(number: float | None, found: float | None) -> None:
    assert short(number, 3) == found and str(short(number, 3)) == str(found)
