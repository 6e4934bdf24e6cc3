"""A leg as a line: places along it found again, arcs kept round, layers kept apart."""

from __future__ import annotations

import math

import numpy as np
import pytest

from pairrules.checks.leg_line import leg_line
from pairrules.geometry.pair_geometry import BARREL, SERIES
from tests.geometry.drawn_legs import leg

# A quarter turn about (10, 2) from (10, 0) to (12, 2), then up; a part in series, and a via down to layer 1.
ROUND = leg((0.0, 0.0), (10.0, 0.0), (12.0, 2.0), (12.0, 8.0), arcs={1: ((10.0, 2.0), math.pi / 2)})
STEPS = leg(
    (0.0, 0.0), (5.0, 0.0), (6.0, 0.0), (9.0, 0.0), (9.0, 0.0), (14.0, 0.0),
    kinds=[0, SERIES, 0, BARREL, 0],
    layers=[0, 0, 0, 1, 1],
)  # fmt: skip


def test_the_place_nearest_to_a_place_of_the_leg_is_that_place() -> None:
    line = leg_line(ROUND)
    assert line is not None
    s = np.linspace(0.0, 16 + math.pi, 57)
    at, along, layer = line.at(s)
    assert line.facing(at, layer) == pytest.approx(s, abs=1e-9)
    assert np.hypot(*along.T) == pytest.approx(1.0)
    on_arc = (s > 10) & (s < 10 + math.pi)
    assert np.hypot(*(at[on_arc] - [10.0, 2.0]).T) == pytest.approx(2.0)


def test_the_middle_of_the_turn_goes_up_at_45_degrees() -> None:
    line = leg_line(ROUND)
    assert line is not None
    (at,), (along,), _ = line.at(np.array([10 + math.pi / 2]))
    assert at == pytest.approx([10 + math.sqrt(2), 2 - math.sqrt(2)])
    assert along == pytest.approx([math.sqrt(0.5), math.sqrt(0.5)])


def test_parts_in_series_and_barrels_take_no_track_length() -> None:
    line = leg_line(STEPS)
    assert line is not None
    at, _, layer = line.at(np.array([4.0, 5.5, 7.5, 10.0]))
    assert at[:, 0] == pytest.approx([4.0, 6.5, 8.5, 11.0])
    assert layer.tolist() == [0, 0, 0, 1]


def test_only_track_on_the_same_layer_faces_a_point() -> None:
    line = leg_line(STEPS)
    assert line is not None
    above = np.array([[12.0, 1.0]] * 3)
    assert line.facing(above, np.array([0, 1, 2])) == pytest.approx([8.0, 11.0, math.nan], nan_ok=True)


def test_a_leg_without_track_has_no_line() -> None:
    assert leg_line(leg((0.0, 0.0), (5.0, 0.0), kinds=[SERIES])) is None
