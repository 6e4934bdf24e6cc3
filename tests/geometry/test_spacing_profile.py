"""The spacing profile against closed forms, against dense sampling with shapely, and its laws."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
import shapely

from pairrules.geometry.curves import Curves, chords
from pairrules.geometry.gap_figures import gap_figures, usual_gap
from pairrules.geometry.pair_geometry import Pieces, SpacingProfile
from pairrules.geometry.spacing_profile import spacing_profiles
from tests.geometry.small_boards import board, pin, route, track


def both_profiles(plus: Pieces, minus: Pieces, reach_mm: float | None) -> tuple[SpacingProfile, SpacingProfile, float]:
    (found,) = spacing_profiles([(plus, minus)], [reach_mm])
    return found.plus, found.minus, found.reach_mm


def legs(plus: list[Any], minus: list[Any], *, widths: tuple[float, float] = (0.2, 0.2)) -> tuple[Pieces, Pieces]:
    def end(points: list[Any], which: int) -> list[float]:
        last = points[which]
        return last["arc_to"] if isinstance(last, dict) else last  # type: ignore[no-any-return]

    parts = []
    for net, points in (("A_P", plus), ("A_N", minus)):
        parts += [pin("U1", net, net, *end(points, 0)), pin("J1", net, net, *end(points, -1))]
    on = board(tracks=[track("A_P", *plus, width=widths[0]), track("A_N", *minus, width=widths[1])], parts=parts)
    return route(on, "A_P").pieces, route(on, "A_N").pieces


def test_parallel_legs() -> None:
    plus, minus = legs([[0, 0], [10, 0]], [[0, 0.5], [10, 0.5]], widths=(0.2, 0.3))
    profile, other, reach = both_profiles(plus, minus, None)
    figures = gap_figures(profile)
    assert figures.least == pytest.approx(0.25, abs=1e-9) and figures.greatest == pytest.approx(0.25, abs=1e-9)
    assert figures.median == pytest.approx(0.25, abs=1e-9)
    assert figures.coupled_mm == pytest.approx(10, abs=1e-9)
    assert reach == pytest.approx(1.0, abs=1e-3)
    assert len(profile) == 1 and len(other) == 1


def test_reach_is_never_less_than_three_tenths_and_a_given_one_holds() -> None:
    plus, minus = legs([[0, 0], [10, 0]], [[0, 0.25], [10, 0.25]])
    assert both_profiles(plus, minus, None)[2] == 0.3
    assert both_profiles(plus, minus, 0.02)[0].coupled.sum() == 0


def test_one_leg_leaves_and_returns_at_right_angles() -> None:
    # Minus steps 3 mm away over x = 4 … 6; plus stays straight.
    plus, minus = legs([[0, 0], [10, 0]], [[0, 0.4], [4, 0.4], [4, 3.4], [6, 3.4], [6, 0.4], [10, 0.4]])
    profile, other, reach = both_profiles(plus, minus, None)
    assert reach == pytest.approx(0.8, abs=2e-3)
    # At (4, 0.4) a piece that runs along plus ends: plus is beside it until its corner is out of reach (edge to edge).
    beyond = math.sqrt((reach + 0.2) ** 2 - 0.4**2)
    assert beyond < 1  # so that both corners' reaches do not meet
    assert gap_figures(profile).coupled_mm == pytest.approx(8 + 2 * beyond, abs=1e-6)
    # Of minus only its two straight ends lie beside plus.
    assert gap_figures(other).coupled_mm == pytest.approx(8, abs=1e-6)


def test_thirty_degrees_is_no_longer_beside() -> None:
    for degrees, coupled in ((29.9, True), (30.1, False)):
        far = [10, 0.4 + 10 * math.tan(math.radians(degrees))]
        plus, minus = legs([[0, 0], [10, 0]], [[0, 0.4], far])
        assert bool(both_profiles(plus, minus, 50.0)[0].coupled.any()) is coupled


def test_direction_of_drawing_does_not_matter() -> None:
    plus, minus = legs([[0, 0], [10, 0]], [[10, 0.4], [0, 0.4]])
    assert gap_figures(both_profiles(plus, minus, None)[0]).coupled_mm == pytest.approx(10)


def test_concentric_bends_keep_their_gap() -> None:
    def bend(radius: float) -> list[Any]:
        return [[0, -radius], {"arc_to": [radius, 0], "centre": [0, 0], "clockwise": False}]

    plus, minus = legs(bend(5.4), bend(5.0))
    profile, other, _ = both_profiles(plus, minus, None)
    for of, radius in ((profile, 5.4), (other, 5.0)):
        figures = gap_figures(of)
        assert figures.least == pytest.approx(0.2, abs=1e-9) and figures.greatest == pytest.approx(0.2, abs=1e-9)
        assert figures.coupled_mm == pytest.approx(math.pi / 2 * radius, abs=1e-9)


def test_eccentric_arcs_against_the_distance_of_circles() -> None:
    # Plus on a circle about (0, 0), radius 6; minus about (0.1, 0), radius 5.5: the distance along the ray is known.
    plus, minus = legs(
        [[0, -6], {"arc_to": [6, 0], "centre": [0, 0], "clockwise": False}],
        [[0.1, -5.5], {"arc_to": [5.6, 0], "centre": [0.1, 0], "clockwise": False}],
    )
    profile, _, _ = both_profiles(plus, minus, None)
    angle = profile.s_from / 6 - math.pi / 2
    at = 6 * np.column_stack([np.cos(angle), np.sin(angle)])
    expected = np.hypot(at[:, 0] - 0.1, at[:, 1]) - 5.5 - 0.2
    on_arc = (np.arctan2(at[:, 1], at[:, 0] - 0.1) > -math.pi / 2) & (profile.s_from < 6 * math.pi / 2)
    assert on_arc.sum() > 20
    assert profile.gap_from[on_arc] == pytest.approx(expected[on_arc], abs=1e-8)


def by_sampling(plus: Pieces, minus: Pieces, step: float) -> tuple[np.ndarray, np.ndarray]:
    """Track length and gap at many points, by shapely on finely chopped copies."""

    def line(pieces: Pieces) -> shapely.LineString:
        at, _ = chords(
            Curves(start=pieces.start, end=pieces.end, centre=pieces.centre, sweep=pieces.sweep), within=1e-7
        )
        return shapely.LineString(at)

    own, other = line(plus), line(minus)
    s = np.arange(step / 2, own.length, step)
    return s, shapely.distance(shapely.line_interpolate_point(own, s), other) - 0.2


def gap_at(profile: SpacingProfile, s: np.ndarray) -> np.ndarray:
    row = np.clip(np.searchsorted(profile.s_to, s), 0, len(profile) - 1)
    u = (s - profile.s_from[row]) / (profile.s_to - profile.s_from)[row]
    a, m, b = profile.gap_from[row], profile.gap_mid[row], profile.gap_to[row]
    return a + (4 * m - 3 * a - b) * u + (2 * a + 2 * b - 4 * m) * u * u


WANDERING = (
    [[0, 0], [5, 0], [7, 1.5], {"arc_to": [9, 1.5], "centre": [8, 1.5], "clockwise": True}, [9, 0], [16, 0.3], [20, 4]],
    [
        [0, 0.5],
        [4.8, 0.5],
        [6.5, 2.2],
        {"arc_to": [9.7, 2.2], "centre": [8.1, 1.9], "clockwise": True},
        [9.7, 0.6],
        [15, 1.1],
        [19, 5],
    ],
)


def test_against_dense_sampling_by_shapely() -> None:
    """Source of the comparison: shapely's point-to-line distance (GEOS), arcs chopped to 0.1 nm sagitta."""
    plus, minus = legs(*WANDERING)
    profile, _, _ = both_profiles(plus, minus, None)
    s, gap = by_sampling(plus, minus, 0.0037)
    assert profile.s_to[-1] == pytest.approx(s[-1], abs=0.01)
    assert gap_at(profile, s) == pytest.approx(gap, abs=5e-7)
    every = both_profiles(plus, minus, 100.0)[0]
    steady = every.angle < math.radians(30)
    assert gap_figures(every).coupled_mm == pytest.approx(float((every.s_to - every.s_from)[steady].sum()))
    assert float(min(every.gap_from.min(), every.gap_to.min())) == pytest.approx(gap.min(), abs=1e-4)


@pytest.mark.parametrize("turn", [0.0, 0.3, 2.0])
def test_turned_mirrored_and_moved_boards_have_the_same_figures(turn: float) -> None:
    def moved(points: list[Any], flip: float) -> list[Any]:
        def at(p: list[float]) -> list[float]:
            x, y = flip * p[0], p[1]
            return [x * math.cos(turn) - y * math.sin(turn) + 31, x * math.sin(turn) + y * math.cos(turn) - 7]

        return [
            {"arc_to": at(p["arc_to"]), "centre": at(p["centre"]), "clockwise": p["clockwise"] == (flip > 0)}
            if isinstance(p, dict)
            else at(p)
            for p in points
        ]

    plain = [gap_figures(p) for p in both_profiles(*legs(*WANDERING), None)[:2]]
    for flip in (1.0, -1.0):
        other = [
            gap_figures(p) for p in both_profiles(*legs(moved(WANDERING[0], flip), moved(WANDERING[1], flip)), None)[:2]
        ]
        for a, b in zip(plain, other, strict=True):
            for name in ("least", "median", "greatest", "coupled_mm"):
                assert getattr(b, name) == pytest.approx(getattr(a, name), abs=1e-7), name


def test_no_track_on_the_other_legs_layer_is_apart() -> None:
    parts = [pin("U1", "1", "A_P", 0, 0), pin("J1", "1", "A_P", 10, 0)]
    parts += [pin("U1", "2", "A_N", 0, 0.4, layer="BOT"), pin("J1", "2", "A_N", 10, 0.4, layer="BOT")]
    on = board(tracks=[track("A_P", [0, 0], [10, 0]), track("A_N", [0, 0.4], [10, 0.4], layer="BOT")], parts=parts)
    profile, _, reach = both_profiles(route(on, "A_P").pieces, route(on, "A_N").pieces, None)
    assert (profile.other == -1).all() and np.isnan(profile.gap_mid).all() and not profile.coupled.any()
    assert usual_gap(profile) is None and reach == 0.3
    assert gap_figures(profile).least is None and gap_figures(profile).coupled_mm == 0


def test_the_usual_gap_is_the_one_that_lasts_longest() -> None:
    plus, minus = legs([[0, 0], [20, 0]], [[0, 0.9], [8, 0.9], [9, 0.5], [20, 0.5]])
    assert usual_gap(both_profiles(plus, minus, None)[0]) == pytest.approx(0.3, abs=1e-3)


def test_median_of_a_gap_that_opens_steadily() -> None:
    # From 0.2 to 0.4 mm edge to edge (perpendicular to minus's own slope) over 10 mm: half lies below the middle.
    plus, minus = legs([[0, 0], [10, 0]], [[0, 0.4], [10, 0.6]])
    figures = gap_figures(both_profiles(plus, minus, None)[0])
    cosine = 10 / math.hypot(10, 0.2)
    # Plus's last stretch faces minus's end; that touches the greatest gap, not the median.
    assert figures.median == pytest.approx(0.5 * cosine - 0.2, abs=1e-6)
    # At the very start minus's end point is nearer than its line, which only begins beside plus's 0.008 mm.
    assert figures.least == pytest.approx(0.2, abs=1e-9)
