"""Arcs measured on the arc: against shapely on ever finer chopped copies; the error falls with the step squared."""

from __future__ import annotations

import math

import numpy as np
import pytest
import shapely

from pairrules.board.columns import Floats
from pairrules.geometry.curves import Curves, chords, directions, lengths, nearest, parts, points


def arc(start: float, sweep: float, radius: float = 3.0, centre: tuple[float, float] = (1.0, -2.0)) -> Curves:
    ends = [(centre[0] + radius * math.cos(a), centre[1] + radius * math.sin(a)) for a in (start, start + sweep)]
    return Curves(
        start=np.array([ends[0]]), end=np.array([ends[1]]), centre=np.array([centre]), sweep=np.array([sweep])
    )


def line(a: tuple[float, float], b: tuple[float, float]) -> Curves:
    return Curves(start=np.array([a]), end=np.array([b]), centre=np.full((1, 2), np.nan), sweep=np.zeros(1))


def chopped(curve: Curves, steps: int) -> shapely.LineString:
    t = np.linspace(0, 1, steps + 1)
    rows = np.zeros(len(t), dtype=np.int64)
    return shapely.LineString(points(curve.take(rows), t))


@pytest.mark.parametrize("sweep", [0.3, -1.2, 2.5, -5.9])
def test_length_is_the_limit_of_chopped_copies(sweep: float) -> None:
    """Source: shapely's length of a line string (GEOS). A chord of angle θ is short by θ³/24, the sum by its square."""
    exact = float(lengths(arc(0.4, sweep))[0])
    assert exact == pytest.approx(3 * abs(sweep), rel=1e-14)
    errors = [exact - chopped(arc(0.4, sweep), n).length for n in (20, 40, 80)]
    assert errors[0] > errors[1] > errors[2] > 0
    assert errors[0] / errors[1] == pytest.approx(4, rel=0.02)
    assert errors[1] / errors[2] == pytest.approx(4, rel=0.02)


@pytest.mark.parametrize("sweep", [0.3, -1.2, 2.5, -5.9])
@pytest.mark.parametrize("at", [(1.5, 1.7), (4.4, -2.1), (0.9, -1.8), (-3.0, -4.0)])
def test_distance_is_the_limit_of_chopped_copies(sweep: float, at: tuple[float, float]) -> None:
    """Source: shapely's distance of a point to a line string (GEOS)."""
    t, away = nearest(arc(0.4, sweep), np.array([at]))
    fine = shapely.distance(shapely.Point(at), chopped(arc(0.4, sweep), 20000))
    assert float(away[0]) == pytest.approx(float(fine), abs=1e-7)
    assert np.hypot(*(points(arc(0.4, sweep), t)[0] - at)) == pytest.approx(float(away[0]), abs=1e-12)


def test_distance_to_a_line() -> None:
    t, away = nearest(line((0, 0), (4, 0)), np.array([(1.0, 2.0)]))
    assert (t[0], away[0]) == (0.25, 2.0)
    t, away = nearest(line((0, 0), (4, 0)), np.array([(-3.0, 4.0)]))
    assert (t[0], away[0]) == (0.0, 5.0)


def test_ends_are_kept_to_the_last_bit_and_parts_join() -> None:
    curve = arc(0.1, 2.0)
    assert (points(curve, np.zeros(1)) == curve.start).all() and (points(curve, np.ones(1)) == curve.end).all()
    cut = np.array([0.0, 0.3, 0.7])
    three = parts(curve, np.zeros(3, dtype=np.int64), cut, np.array([0.3, 0.7, 1.0]))
    assert lengths(three).sum() == pytest.approx(6.0, rel=1e-14)
    assert three.start[1:] == pytest.approx(three.end[:-1], abs=1e-15)
    assert (three.start[0] == curve.start[0]).all() and (three.end[2] == curve.end[0]).all()


@pytest.mark.parametrize("curve", [arc(0.4, 1.3), arc(0.4, -2.3), line((0, 0), (3, 4))])
def test_direction_is_the_slope_of_the_points(curve: Curves) -> None:
    step = 1e-6
    for t in (0.2, 0.5, 0.9):
        before, after = (points(curve, np.array([t + s]))[0] for s in (-step, step))
        slope = math.atan2(*(after - before)[::-1])
        found = float(directions(curve, np.array([t]))[0])
        assert math.cos(slope - found) == pytest.approx(1, abs=1e-9)


def test_chords_keep_their_distance_and_owner() -> None:
    both = Curves(
        **{
            name: np.concatenate([getattr(arc(0.0, 3.0), name), getattr(line((0, 0), (1, 1)), name)])
            for name in ("start", "end", "centre", "sweep")
        }
    )
    at, row = chords(both, within=1e-3)
    on_arc: Floats = at[row == 0]
    middles = (on_arc[1:] + on_arc[:-1]) / 2
    assert 0 < 3 - np.hypot(*(middles - (1.0, -2.0)).T).min() <= 1e-3
    assert (row == 1).sum() == 2


def test_none_at_all() -> None:
    empty = arc(0, 1).take(np.zeros(0, dtype=np.int64))
    assert lengths(empty).shape == (0,) and points(empty, np.zeros(0)).shape == (0, 2)
