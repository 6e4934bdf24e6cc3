"""Routes by what touches: however the copper is cut, turned or joined, the leg is the same."""

from __future__ import annotations

import math
import random
from typing import Any

import numpy as np
import pytest

from pairrules.geometry.leg_route import Break, weighted_median
from pairrules.geometry.pair_geometry import BARREL, JOIN, TRACK
from tests.geometry.small_boards import board, pin, route, routed, track

ENDS = [pin("U1", "1", "A_P", 0, 0), pin("J1", "1", "A_P", 20, 5)]
BENT = [[0, 0], [8, 0], {"arc_to": [10, 2], "centre": [8, 2], "clockwise": False}, [10, 5], [20, 5]]
BENT_MM = 8 + math.pi + 3 + 10


def test_length_is_the_centre_line_with_exact_arcs() -> None:
    leg = route(board(tracks=[track("A_P", *BENT)], parts=ENDS))
    assert leg.length_mm == pytest.approx(BENT_MM, abs=1e-12)
    assert leg.stub_mm == 0 and leg.vias == () and leg.width_mm == 0.2
    assert leg.barrels_known


def pieces_of_bent() -> list[list[Any]]:
    return [
        [[0, 0], [5, 0]],
        [[8, 0], [3, 0]],  # backwards, lying over the one before
        [[10, 2], {"arc_to": [8, 0], "centre": [8, 2], "clockwise": True}],
        [[10, 2], [10, 5]],
        [[20, 5], [10, 5]],
        [[12, 5], [15, 5]],  # drawn again
    ]


@pytest.mark.parametrize("seed", range(6))
def test_cut_turned_overlapping_and_shuffled_pieces_give_the_same_leg(seed: int) -> None:
    cut = pieces_of_bent()
    random.Random(seed).shuffle(cut)
    leg = route(board(tracks=[track("A_P", *points) for points in cut], parts=ENDS))
    assert leg.length_mm == pytest.approx(BENT_MM, abs=1e-9)
    assert leg.stub_mm == pytest.approx(0, abs=1e-12)
    starts, ends = leg.pieces.start, leg.pieces.end
    assert abs(starts[1:] - ends[:-1]).max() < 1e-9
    assert starts[0].tolist() == [0, 0] and ends[-1].tolist() == [20, 5]


def test_a_tee_on_the_centre_line_is_no_detour_and_its_rest_is_a_stub() -> None:
    leg = route(board(tracks=[track("A_P", [0, 0], [14, 0]), track("A_P", [10, 0], [10, 5], [20, 5])], parts=ENDS))
    assert leg.length_mm == pytest.approx(25, abs=1e-12)
    assert leg.stub_mm == pytest.approx(4, abs=1e-12)
    (stub,) = leg.stubs
    assert (stub.x_mm, stub.y_mm, stub.layer) == (10, 0, 0)


def test_a_tee_beside_the_centre_line_is_joined_straight() -> None:
    leg = route(board(tracks=[track("A_P", [0, 0], [14, 0]), track("A_P", [10, 0.06], [10, 5], [20, 5])], parts=ENDS))
    assert leg.length_mm == pytest.approx(10 + 0.06 + 4.94 + 10, abs=1e-9)
    assert JOIN in leg.pieces.kind


def test_crossing_tracks_of_one_net_are_joined_where_they_cross() -> None:
    leg = route(board(tracks=[track("A_P", [0, 0], [14, 0]), track("A_P", [10, -1], [10, 5], [20, 5])], parts=ENDS))
    assert leg.length_mm == pytest.approx(25, abs=1e-9)
    assert leg.stub_mm == pytest.approx(4 + 1, abs=1e-9)


def test_tracks_that_do_not_touch_are_not_joined() -> None:
    broken = routed(board(tracks=[track("A_P", [0, 0], [9.7, 0]), track("A_P", [10, 0], [10, 5], [20, 5])], parts=ENDS))
    (gap,) = broken  # type: ignore[misc]
    assert gap == Break(0, 9.7, 0.0, "the copper ends")


def test_a_track_that_stops_in_the_pad_is_joined_to_its_centre() -> None:
    leg = route(board(tracks=[track("A_P", [0.3, 0.2], [10, 0.2], [10, 5], [20, 5])], parts=ENDS))
    assert leg.length_mm == pytest.approx(math.hypot(0.3, 0.2) + 9.7 + 4.8 + 10, abs=1e-9)
    assert leg.track_mm == pytest.approx(9.7 + 4.8 + 10, abs=1e-9)


def test_bends_shorter_than_the_width_are_not_cut_short() -> None:
    steps = [[0, 0]]
    for k in range(100):
        steps += [[steps[-1][0] + 0.05, 0.05 * ((k + 1) % 2)]]
    steps += [[steps[-1][0], 5], [20, 5]]
    leg = route(board(tracks=[track("A_P", *steps)], parts=ENDS))
    assert leg.length_mm == pytest.approx(100 * math.hypot(0.05, 0.05) + (5 - steps[-3][1]) + 15, abs=1e-9)


def test_copper_joined_only_through_an_area_is_bridged_straight() -> None:
    square = {"net": "A_P", "layer": "TOP", "outline": [[8, -1], [14, -1], [14, 6], [8, 6]]}
    leg = route(
        board(
            tracks=[track("A_P", [0, 0], [9, 0]), track("A_P", [12, 4], [12, 5], [20, 5])], parts=ENDS, areas=[square]
        )
    )
    assert leg.length_mm == pytest.approx(9 + 5 + 1 + 8, abs=1e-9)
    assert leg.track_mm == pytest.approx(18, abs=1e-9)


def test_an_area_over_connected_tracks_is_no_short_cut() -> None:
    square = {"net": "A_P", "layer": "TOP", "outline": [[-1, -1], [21, -1], [21, 6], [-1, 6]]}
    leg = route(board(tracks=[track("A_P", *BENT)], parts=ENDS, areas=[square]))
    assert leg.length_mm == pytest.approx(BENT_MM, abs=1e-9)


def test_a_stray_end_of_a_hundredth_is_a_stub() -> None:
    leg = route(board(tracks=[track("A_P", *BENT), track("A_P", [8, 0], [8, 0.01])], parts=ENDS))
    assert leg.length_mm == pytest.approx(BENT_MM, abs=1e-12)
    assert leg.stub_mm == pytest.approx(0.01, abs=1e-12)


def test_of_two_ways_the_shorter_is_the_route() -> None:
    leg = route(board(tracks=[track("A_P", *BENT), track("A_P", [8, 0], [8, 5], [10, 5])], parts=ENDS))
    assert leg.length_mm == pytest.approx(min(BENT_MM, 8 + 5 + 2 + 10), abs=1e-9)
    assert leg.stub_mm == pytest.approx(7, abs=1e-9)


VIA = {"net": "A_P", "at": [10, 0], "from": "TOP", "to": "BOT", "drill": 0.3, "pad": 0.6}


def test_a_via_adds_the_barrel_between_the_layers_used() -> None:
    ends = [pin("U1", "1", "A_P", 0, 0), pin("J1", "1", "A_P", 20, 0, layer="IN2")]
    leg = route(
        board(
            tracks=[track("A_P", [0, 0], [10, 0]), track("A_P", [10, 0], [20, 0], layer="IN2")], parts=ends, vias=[VIA]
        )
    )
    # From TOP's centre through D1, IN1 and D2 to IN2's centre; the rest of the barrel is unused.
    assert leg.length_mm == pytest.approx(20 + 0.0175 + 0.2 + 0.018 + 1.0 + 0.009, abs=1e-12)
    (via,) = leg.vias
    assert (via.enter, via.leave, via.via) == (0, 2, 0)
    assert (leg.pieces.kind == BARREL).sum() == 1
    assert leg.layers == ((0, 10.0), (2, 10.0))


def test_a_pin_in_a_plated_hole_is_no_via_of_the_route() -> None:
    ends = [pin("U1", "1", "A_P", 0, 0), pin("J1", "1", "A_P", 20, 0, layer="all", drill=0.9)]
    leg = route(
        board(
            tracks=[track("A_P", [0, 0], [10, 0]), track("A_P", [10, 0], [20, 0], layer="BOT")], parts=ends, vias=[VIA]
        )
    )
    assert len(leg.vias) == 1
    assert leg.length_mm == pytest.approx(20 + 0.0175 + 0.2 + 0.018 + 1.0 + 0.018 + 0.2 + 0.0175, abs=1e-12)


def test_without_thicknesses_barrels_are_left_out_and_said_to_be() -> None:
    ends = [pin("U1", "1", "A_P", 0, 0), pin("J1", "1", "A_P", 20, 0, layer="BOT")]
    bare = [{"name": "TOP", "kind": "copper"}, {"name": "BOT", "kind": "copper"}]
    leg = route(
        board(
            tracks=[track("A_P", [0, 0], [10, 0]), track("A_P", [10, 0], [20, 0], layer="BOT")],
            parts=ends,
            vias=[VIA],
            stackup=bare,
        )
    )
    assert leg.length_mm == 20 and not leg.barrels_known


def test_a_stub_behind_a_via_is_found() -> None:
    leg = route(
        board(
            tracks=[track("A_P", [0, 0], [10, 0], [10, 5], [20, 5]), track("A_P", [10, 0], [13, 0], layer="BOT")],
            parts=ENDS,
            vias=[VIA],
        )
    )
    assert leg.vias == () and leg.stub_mm == pytest.approx(3, abs=1e-12)


def test_pieces_far_away_are_no_stubs() -> None:
    leg = route(board(tracks=[track("A_P", *BENT), track("A_P", [0, 30], [5, 30])], parts=ENDS))
    assert leg.stub_mm == 0


def test_median_width_weighs_by_length() -> None:
    leg = route(
        board(
            tracks=[track("A_P", [0, 0], [4, 0], width=0.15), track("A_P", [4, 0], [10, 0], [10, 5], [20, 5])],
            parts=ENDS,
        )
    )
    assert leg.width_mm == 0.2
    assert leg.widths == ((0.15, pytest.approx(4)), (0.2, pytest.approx(21)))
    assert (leg.pieces.kind == TRACK).all()


def test_weighted_median_of_one_many_and_none() -> None:
    assert weighted_median(np.array([3.0]), np.array([2.0])) == 3
    assert weighted_median(np.array([1.0, 2.0, 9.0]), np.array([1.0, 1.0, 1.5])) == 2
    assert weighted_median(np.array([1.0, 2.0]), np.array([1.0, 1.0])) == 1.5
    assert weighted_median(np.array([]), np.array([])) is None
