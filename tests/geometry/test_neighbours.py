"""Neighbours against gaps known from elementary geometry, laws, and rays cast by shapely at many places."""

from __future__ import annotations

import math

import numpy as np
import pytest
import shapely

from pairrules.board import Area, Board, PadShape
from pairrules.geometry.copper_outlines import copper_outlines
from pairrules.geometry.neighbours import ForeignCopper, NeighbourProfile, neighbours
from pairrules.geometry.pair_geometry import BARREL, JOIN, TRACK, Pieces
from tests.geometry.drawn_boards import GAUGE_N, GAUGE_P, GND, HEATER, PUMP, board, box, track
from tests.geometry.drawn_legs import cut, leg

OWN = (GAUGE_N, GAUGE_P)
NONE = -1


def rows(profile: NeighbourProfile, side: str) -> list[tuple[float, float, float, int]]:
    columns = (profile.s_from, profile.s_to, getattr(profile, f"{side}_gap"), getattr(profile, f"{side}_net"))
    return [tuple(row) for row in zip(*(column.tolist() for column in columns), strict=True)]


def ray_gap(drawn: Board, at: np.ndarray, heading: float, side: int, reach: float) -> tuple[float, int]:
    """Distance from the centre line to the first foreign copper along the ray, and its net."""
    foreign = copper_outlines(drawn, 0)
    tip = at + reach * side * np.array([-math.sin(heading), math.cos(heading)])
    met = shapely.intersection(foreign.polygons, shapely.LineString([at, tip]))
    far = shapely.distance(met, shapely.Point(at))
    far = np.where(np.isin(foreign.net, OWN) | np.isnan(far), np.inf, far)
    best = int(np.argmin(far))
    return float(far[best]), int(foreign.net[best])


def crowded(seed: int) -> Board:
    """Tracks and areas thrown at random beside y = 0; outlines of different nets overlap."""
    draw = np.random.default_rng(seed)
    tracks = []
    for _ in range(25):
        x, y = draw.uniform(-1, 11), draw.choice([-1, 1]) * draw.uniform(1.2, 3)
        dx, dy = draw.uniform(-1, 1), draw.uniform(-0.5, 0.5)
        net = int(draw.choice([GND, HEATER, PUMP, GAUGE_N]))
        tracks.append(track(net, (x, y), (x + dx, y + dy), width=float(draw.uniform(0.1, 0.5))))
    return board(tracks=tracks, areas=[box(GND, 0, 2, 1.0, 3, 1.6), box(HEATER, 0, 6, -2.0, 8, -1.1)])


def winding_leg() -> Pieces:
    """A half circle rightward about (3, 0), a line, and a flat left turn of radius 5."""
    turn = 0.5
    end = (7 + 5 * math.sin(turn), 5 - 5 * math.cos(turn))
    return leg((0, 0), (2.5, 0), (3.5, 0), (7, 0), end, arcs={1: ((3.0, 0.0), -math.pi), 3: ((7.0, 5.0), turn)})


def test_parallel_track_is_a_neighbour_over_its_length_on_its_own_side() -> None:
    drawn = board(tracks=[track(HEATER, (2, 0.5), (6, 0.5), width=0.2)])
    profile = neighbours(leg((0, 0), (10, 0)), drawn, OWN, 1.0)
    # The stretch takes in the beginning of both round ends, where the gap has grown by less than 5 % of 0.3 mm:
    # 0.1 − √(0.1² − x²) = 0.015 mm at x = 0.0527 mm from the track's end.
    begin, end, gap, net = next(row for row in rows(profile, "left") if row[0] < 4 < row[1])
    assert gap == pytest.approx(0.3, rel=1e-12)
    assert net == HEATER
    assert 2 - 0.0527 < begin <= 2
    assert 6 <= end < 6 + 0.0527
    assert profile.s_to[profile.left_net == HEATER].max() == pytest.approx(6.1, rel=1e-9)
    assert np.isnan(profile.right_gap).all()
    assert (profile.right_net == NONE).all()


def test_reversed_leg_sees_it_on_the_other_side() -> None:
    drawn = board(areas=[box(HEATER, 0, 2, 0.4, 6, 1)])
    there = neighbours(leg((0, 0), (10, 0)), drawn, OWN, 1.0)
    back = neighbours(leg((10, 0), (0, 0)), drawn, OWN, 1.0)
    assert rows(there, "left")[1] == pytest.approx((2, 6, 0.3, HEATER), rel=1e-12)
    assert rows(back, "right")[1] == pytest.approx((4, 8, 0.3, HEATER), rel=1e-12)
    assert np.isnan(back.left_gap).all()


def test_partner_is_not_foreign_and_hides_nothing() -> None:
    drawn = board(tracks=[track(GAUGE_N, (0, 0.4), (10, 0.4))], areas=[box(GND, 0, 0, 1, 10, 2)])
    profile = neighbours(leg((0, 0), (10, 0)), drawn, OWN, 2.0)
    assert rows(profile, "left") == [pytest.approx((0, 10, 0.9, GND), rel=1e-12)]


def test_reach_is_a_gap_from_edge_to_edge() -> None:
    drawn = board(areas=[box(HEATER, 0, 0, 0.6, 10, 1)])
    assert rows(neighbours(leg((0, 0), (10, 0)), drawn, OWN, 0.51), "left")[0][2] == pytest.approx(0.5)
    assert np.isnan(neighbours(leg((0, 0), (10, 0)), drawn, OWN, 0.49).left_gap).all()


def test_other_layers_do_not_count() -> None:
    drawn = board(areas=[box(HEATER, 1, 0, 0.6, 10, 1)])
    assert np.isnan(neighbours(leg((0, 0), (10, 0)), drawn, OWN, 1.0).left_gap).all()


def test_nearer_neighbour_takes_over_where_it_begins() -> None:
    drawn = board(areas=[box(GND, 0, -1, -2, 11, -0.9), box(PUMP, 0, 4, -0.5, 5, -0.3)])
    profile = neighbours(leg((0, 0), (10, 0)), drawn, OWN, 2.0)
    assert rows(profile, "right") == [
        pytest.approx((0, 4, 0.8, GND), rel=1e-12),
        pytest.approx((4, 5, 0.2, PUMP), rel=1e-12),
        pytest.approx((5, 10, 0.8, GND), rel=1e-12),
    ]


def test_change_on_one_side_cuts_the_stretches_of_both() -> None:
    drawn = board(areas=[box(GND, 0, -1, -2, 11, -0.9), box(PUMP, 0, 4, 0.3, 5, 0.5)])
    profile = neighbours(leg((0, 0), (10, 0)), drawn, OWN, 2.0)
    assert profile.s_from == pytest.approx([0, 4, 5], rel=1e-12)
    assert profile.right_gap == pytest.approx([0.8] * 3, rel=1e-12)
    assert profile.start[1] == pytest.approx([4, 0], abs=1e-12)


def test_slanting_neighbour_is_cut_in_steps_of_five_per_cent() -> None:
    slanting = np.array([(0, 0.3), (10, 1.1), (10, 3), (0, 3)], dtype=np.float64)
    drawn = board(areas=[Area(net=GND, layer=0, outline=slanting)])
    profile = neighbours(leg((0, 0), (10, 0)), drawn, OWN, 5.0)
    steps = math.ceil(math.log(1.0 / 0.2) / math.log(1.05))
    assert len(profile) == steps
    assert profile.left_gap == pytest.approx(0.2 + 0.08 * profile.s_from, rel=1e-9)
    assert ((0.2 + 0.08 * profile.s_to) / profile.left_gap < 1.0501).all()


def test_slanting_neighbour_ends_where_it_leaves_reach() -> None:
    outline = np.array([(0, 0.3), (10, 1.3), (10, 3), (0, 3)], dtype=np.float64)
    drawn = board(areas=[Area(net=GND, layer=0, outline=outline)])
    profile = neighbours(leg((0, 0), (10, 0)), drawn, OWN, 0.7)
    assert profile.s_to[profile.left_net == GND].max() == pytest.approx(5.0, rel=1e-12)


def test_neighbour_outside_a_bend_is_seen_along_the_radius() -> None:
    # A ring segment drawn as an arc track of radius 3 about the bend's own centre: gap 3 − 2 − 0.1 − 0.1.
    bend = leg((2, 0), (0, 2), arcs={0: ((0.0, 0.0), math.pi / 2)})
    ring = track(HEATER, (3, 0), (0, 3), centre=(0.0, 0.0), sweep=math.pi / 2)
    profile = neighbours(bend, board(tracks=[ring]), OWN, 2.0)
    assert (profile.right_net == HEATER).all()
    assert profile.right_gap == pytest.approx(np.full(len(profile), 0.8), abs=0.0011)
    assert np.isnan(profile.left_gap).all()


def test_straight_neighbour_beside_a_bend_is_nearest_where_they_run_alike() -> None:
    bend = leg((2, 0), (-2, 0), arcs={0: ((0.0, 0.0), math.pi)})
    profile = neighbours(bend, board(areas=[box(GND, 0, -5, 2.5, 5, 4)]), OWN, 1.0)
    assert np.nanmin(profile.right_gap) == pytest.approx(0.4, rel=1e-12)
    # Within reach while 2.5/cos φ − 2.1 ≤ 1, φ from the crown.
    half = math.acos(2.5 / 3.1)
    met = profile.right_net == GND
    assert profile.s_from[met].min() == pytest.approx(2 * (math.pi / 2 - half), rel=1e-9)
    assert profile.s_to[met].max() == pytest.approx(2 * (math.pi / 2 + half), rel=1e-9)


def test_neighbours_that_overlap_change_where_their_edges_cross() -> None:
    rising = np.array([(0, 0.3), (10, 1.3), (10, 3), (0, 3)], dtype=np.float64)
    falling = np.array([(0, 1.3), (10, 0.3), (10, 3), (0, 3)], dtype=np.float64)
    areas = [Area(net=GND, layer=0, outline=rising), Area(net=PUMP, layer=0, outline=falling)]
    profile = neighbours(leg((0, 0), (10, 0)), board(areas=areas), OWN, 5.0)
    assert profile.s_to[profile.left_net == GND].max() == pytest.approx(5.0, rel=1e-9)
    assert profile.s_from[profile.left_net == PUMP].min() == pytest.approx(5.0, rel=1e-9)
    assert (profile.left_gap <= 0.7).all()


def test_neighbour_at_the_seam_of_a_whole_turn_is_seen_at_both_ends() -> None:
    turn = leg((2, 0), (2, 0), arcs={0: ((0.0, 0.0), 2 * math.pi)})
    profile = neighbours(turn, board(areas=[box(GND, 0, 2.5, -0.5, 4, 0.5)]), OWN, 2.0)
    met = profile.right_net == GND
    half = 2 * math.atan2(0.5, 2.5)
    assert profile.s_to[met].min() > 0
    assert (profile.s_to - profile.s_from)[met & (profile.s_to < 5)].sum() == pytest.approx(half, rel=1e-9)
    assert (profile.s_to - profile.s_from)[met & (profile.s_from > 5)].sum() == pytest.approx(half, rel=1e-9)


def test_leg_in_the_clearance_of_a_pour_sees_both_sides() -> None:
    pour = box(GND, 0, -2, -3, 12, 3, [(-1, -0.4), (-1, 0.5), (11, 0.5), (11, -0.4)])
    profile = neighbours(leg((0, 0), (10, 0)), board(areas=[pour]), OWN, 1.0)
    assert rows(profile, "left") == [pytest.approx((0, 10, 0.4, GND), rel=1e-12)]
    assert rows(profile, "right") == [pytest.approx((0, 10, 0.3, GND), rel=1e-12)]


def test_leg_lying_in_foreign_copper_has_no_gap() -> None:
    profile = neighbours(leg((0, 0), (10, 0)), board(areas=[box(PUMP, 0, 3, -0.5, 5, 0.5)]), OWN, 1.0)
    assert rows(profile, "left")[1] == pytest.approx((3, 5, 0.0, PUMP), abs=1e-9)
    assert rows(profile, "right")[1] == pytest.approx((3, 5, 0.0, PUMP), abs=1e-9)


def test_pads_vias_and_copper_of_no_net_are_neighbours() -> None:
    drawn = board(
        areas=[box(-1, 0, 7, 0.5, 8, 1)],
        pads=[(HEATER, 0, (2, 0.8), PadShape(kind="rect", size=(1.0, 0.6)))],
        vias=[(PUMP, (5, -0.7), 0, 2, 0.8)],
    )
    profile = neighbours(leg((0, 0), (10, 0)), drawn, OWN, 1.0)
    assert (1.5, 2.5, 0.4, HEATER) in [pytest.approx(row, rel=1e-9) for row in rows(profile, "left")]
    assert (7.0, 8.0, 0.4, -1) in [pytest.approx(row, rel=1e-9) for row in rows(profile, "left")]
    assert profile.right_gap[profile.right_net == PUMP].min() == pytest.approx(0.2, rel=1e-12)


def test_only_drawn_track_counts_and_s_runs_over_it_alone() -> None:
    route = leg((0, 0), (1, 0), (3, 0), (3, 0), (7, 0), kinds=[JOIN, TRACK, BARREL, TRACK], layers=[0, 0, 2, 2])
    profile = neighbours(route, board(areas=[box(GND, 2, 0, 0.4, 5, 1)]), OWN, 1.0)
    assert profile.piece.tolist() == [1, 3, 3]
    assert profile.s_from == pytest.approx([0, 2, 4], rel=1e-12)
    assert profile.left_net.tolist() == [NONE, GND, NONE]


@pytest.mark.parametrize("seed", range(6))
def test_rays_cast_at_many_places_agree(seed: int) -> None:
    drawn, route = crowded(seed), winding_leg()
    profile = neighbours(route, drawn, OWN, 3.0)
    assert len(profile) > 20
    draw = np.random.default_rng(seed)
    ends = np.cumsum(route.length)
    for s in draw.uniform(0.001, ends[-1] - 0.001, 150):
        row = int(np.searchsorted(profile.s_to, s))
        piece = profile.piece[row]
        assert ends[piece] - route.length[piece] <= s <= ends[piece]
        part = (s - (ends[piece] - route.length[piece])) / route.length[piece]
        at, heading = _along(route, int(piece), part)
        for side, gap, net in (
            (1, profile.left_gap[row], profile.left_net[row]),
            (-1, profile.right_gap[row], profile.right_net[row]),
        ):
            far, who = ray_gap(drawn, at, heading, side, 3.1)
            # A ray of a bend ends at its centre.
            if route.sweep[piece] * side > 0 and far > math.dist(at, route.centre[piece]):
                far = math.inf
            if math.isinf(far):
                assert math.isnan(gap)
                continue
            assert net == who
            assert gap <= max(far - 0.1, 0) + 1e-6
            assert max(far - 0.1, 0) <= max(gap * 1.0501, gap + 0.0011)


def test_cutting_the_leg_and_sharing_the_copper_change_nothing() -> None:
    drawn, route = crowded(1), winding_leg()
    copper = ForeignCopper(drawn)
    whole = neighbours(route, drawn, OWN, 3.0, copper=copper)
    fine = neighbours(cut(route, 5), drawn, OWN, 3.0, copper=copper)
    for side in ("left", "right"):
        for net in (GND, HEATER, PUMP):
            held = [((p.s_to - p.s_from)[getattr(p, f"{side}_net") == net].sum(), p) for p in (whole, fine)]
            assert held[0][0] == pytest.approx(held[1][0], abs=1e-6)
            least = [getattr(p, f"{side}_gap")[getattr(p, f"{side}_net") == net].min(initial=9.0) for _, p in held]
            assert least[0] == pytest.approx(least[1], rel=1e-9)


def test_leg_without_track_and_board_without_copper() -> None:
    assert len(neighbours(leg((0, 0), (10, 0), kinds=[JOIN]), crowded(0), OWN, 1.0)) == 0
    bare = neighbours(leg((0, 0), (10, 0)), board(), OWN, 1.0)
    assert rows(bare, "left") == [pytest.approx((0, 10, math.nan, NONE), nan_ok=True)]
    assert bare.piece.tolist() == [TRACK]


def _along(route: Pieces, piece: int, part: float) -> tuple[np.ndarray, float]:
    if route.sweep[piece] == 0:
        chord = route.end[piece] - route.start[piece]
        return route.start[piece] + part * chord, math.atan2(chord[1], chord[0])
    spoke = route.start[piece] - route.centre[piece]
    angle = math.atan2(spoke[1], spoke[0]) + route.sweep[piece] * part
    radius = math.hypot(spoke[0], spoke[1])
    at = route.centre[piece] + radius * np.array([math.cos(angle), math.sin(angle)])
    return at, angle + math.copysign(math.pi / 2, route.sweep[piece])
