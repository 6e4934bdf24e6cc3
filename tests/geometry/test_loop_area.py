"""Loop area against areas known from elementary geometry, laws, and faces found by shapely on densified copies."""

from __future__ import annotations

import math

import numpy as np
import pytest
import shapely

from pairrules.board.columns import Floats
from pairrules.geometry.loop_area import LoopArea, loop_area, vector_area
from pairrules.geometry.pair_geometry import BARREL, JOIN, SERIES, TRACK, Pieces
from tests.geometry.drawn_legs import chords, cut, leg, turned

QUARTER = math.pi / 2


def both(area: LoopArea) -> tuple[float, float]:
    return area.total_mm2, area.net_mm2


def winding_area(corners: Floats) -> float:
    """∫|w| dA of a closed polygon: shapely's faces, each weighed by the angles seen from a point within."""
    ring = np.vstack([corners, corners[:1]])
    faces = shapely.get_parts(shapely.polygonize([shapely.union_all(shapely.linestrings(ring))]))
    total = 0.0
    for face in faces:
        inner = shapely.get_coordinates(shapely.point_on_surface(face))[0]
        seen = np.unwrap(np.arctan2(*(ring - inner).T[::-1]))
        total += abs(round((seen[-1] - seen[0]) / (2 * math.pi))) * face.area
    return total


def curved_pair(seed: int) -> tuple[Pieces, Pieces]:
    """Two wandering legs of lines and arcs that cross one another and themselves."""
    draw = np.random.default_rng(seed)
    legs = []
    for _ in range(2):
        points, arcs = [(0.0, float(draw.uniform(-1, 1)))], {}
        for piece in range(8):
            x, y = points[-1]
            if piece % 2:
                centre = (x + float(draw.uniform(-1, 1)), y + float(draw.uniform(-1, 1)))
                sweep = float(draw.uniform(-6, 6))
                arcs[piece] = (centre, sweep)
                dx, dy = x - centre[0], y - centre[1]
                cos, sin = math.cos(sweep), math.sin(sweep)
                points.append((centre[0] + dx * cos - dy * sin, centre[1] + dx * sin + dy * cos))
            else:
                points.append((x + float(draw.uniform(-1, 3)), y + float(draw.uniform(-2, 2))))
        legs.append(leg(*points, arcs=arcs))
    return legs[0], legs[1]


def test_parallel_legs_enclose_length_times_distance() -> None:
    area = loop_area(leg((0, 0), (10, 0)), leg((0, 0.35), (10, 0.35)))
    assert both(area) == pytest.approx((3.5, 3.5), rel=1e-14)


def test_rectangle_read_upright_has_the_same_area() -> None:
    area = loop_area(leg((0, 0), (0, 10)), leg((0.35, 0), (0.35, 10)))
    assert both(area) == pytest.approx((3.5, 3.5), rel=1e-14)


def test_two_crossings_make_three_triangular_and_trapezoid_lobes_without_sign() -> None:
    # Minus zigzags about plus (y = 0): triangles of area 1/2·2·1 up, 1/2·4·1 down, 1/2·2·1 up.
    minus = leg((0, 1), (2, 0), (4, -1), (6, 0), (8, 1))
    area = loop_area(leg((0, 0), (8, 0)), minus)
    assert both(area) == pytest.approx((1 + 2 + 1, 0), abs=1e-13)


def test_lobes_between_a_line_and_arcs_are_circular_segments() -> None:
    # Radius √2 with centre 1 mm off the line: the segment over a quarter turn, r²(θ − sin θ)/2 = π/2 − 1.
    plus = leg((0, 0), (6, 0))
    arcs = {0: ((1.0, -1.0), -QUARTER), 1: ((3.0, 1.0), QUARTER), 2: ((5.0, -1.0), -QUARTER)}
    minus = leg((0, 0), (2, 0), (4, 0), (6, 0), arcs=arcs)
    lobe = math.pi / 2 - 1
    assert both(loop_area(plus, minus)) == pytest.approx((3 * lobe, lobe), rel=1e-13)


def test_concentric_bends_enclose_a_quarter_ring() -> None:
    inner = leg((2, 0), (0, 2), arcs={0: ((0.0, 0.0), QUARTER)})
    outer = leg((3, 0), (0, 3), arcs={0: ((0.0, 0.0), QUARTER)})
    assert both(loop_area(inner, outer)) == pytest.approx((math.pi * 5 / 4,) * 2, rel=1e-14)


def test_two_circles_that_cross_count_their_lens_twice_when_both_wind_the_same_way() -> None:
    # Each leg is a whole turn about its own centre, both counter-clockwise as the closed path runs: w = 2 in the lens.
    plus = leg((1, 0), (1, 0), arcs={0: ((0.0, 0.0), 2 * math.pi)})
    same = leg((2, 0), (2, 0), arcs={0: ((1.0, 0.0), -2 * math.pi)})
    other = leg((2, 0), (2, 0), arcs={0: ((1.0, 0.0), 2 * math.pi)})
    lens = 2 * math.pi / 3 - math.sqrt(3) / 2
    assert both(loop_area(plus, same)) == pytest.approx((2 * math.pi, 2 * math.pi), rel=1e-13)
    assert both(loop_area(plus, other)) == pytest.approx((2 * (math.pi - lens), 0), abs=1e-12)


def test_pair_that_passes_over_itself_counts_gap_times_length_not_its_ring() -> None:
    plus = leg((0, 0), (10, 0), (10, 5), (5, 5), (5, -3), layers=[0, 0, 0, 1])
    minus = leg((0, 0.2), (9.8, 0.2), (9.8, 4.8), (5.2, 4.8), (5.2, -3), layers=[0, 0, 0, 1])
    ring = 0.2 * (9.8 + 5 + 4.8 + 7.8)
    assert loop_area(plus, minus).net_mm2 == pytest.approx(ring, rel=1e-12)
    assert loop_area(plus, minus).total_mm2 == pytest.approx(ring, rel=1e-12)


def test_series_parts_and_joins_are_straight_and_barrels_a_point() -> None:
    kinds = [TRACK, JOIN, SERIES, BARREL, TRACK]
    plus = leg((0, 0), (4, 0), (4, 1), (6, 1), (6, 1), (10, 1), kinds=kinds, layers=[0, 0, 0, 1, 1])
    minus = leg((0, 3), (10, 3))
    assert both(loop_area(plus, minus)) == pytest.approx((4 * 3 + 6 * 2,) * 2, rel=1e-14)


def test_same_way_there_and_back_encloses_nothing() -> None:
    plus = leg((0, 0), (3, 1), (-1, 5), arcs={1: ((3.0, 5.0), 3.0 * math.pi / 2)})
    assert both(loop_area(plus, plus)) == pytest.approx((0, 0), abs=1e-13)


def test_retraced_stretch_and_shared_pad_add_nothing() -> None:
    plus = leg((0, 0), (7, 0), (7, 0), (5, 0), (10, 0))
    minus = leg((0, 0), (0, 1), (10, 1))
    assert both(loop_area(plus, minus)) == pytest.approx((10, 10), rel=1e-14)


def test_vertices_that_touch_the_other_leg_do_not_cross_it() -> None:
    minus = leg((0, 1), (2, 0), (4, 1), (5, 0), (7, 0), (8, 1))
    # By trapezoids 1 + 1 + 1/2 + 0 + 1/2.
    assert both(loop_area(leg((0, 0), (8, 0)), minus)) == pytest.approx((3, 3), rel=1e-13)


@pytest.mark.parametrize("seed", range(6))
def test_move_turn_mirror_swap_reverse_and_cut_change_nothing(seed: int) -> None:
    plus, minus = curved_pair(seed)
    area = both(loop_area(plus, minus))
    assert area[0] > 1.0
    assert both(loop_area(minus, plus)) == pytest.approx(area, rel=1e-12)
    assert both(loop_area(cut(plus, 3), cut(minus, 4))) == pytest.approx(area, rel=1e-11)
    for angle, shift, mirror in ((0.7, (300.0, -200.0), False), (QUARTER, (0.0, 0.0), True), (2.9, (5.0, 1.0), True)):
        moved = [turned(one, angle, shift, mirror=mirror) for one in (plus, minus)]
        assert both(loop_area(moved[0], moved[1])) == pytest.approx(area, rel=1e-10)


@pytest.mark.parametrize("seed", range(6))
def test_densified_copies_approach_with_the_square_of_the_step(seed: int) -> None:
    plus, minus = curved_pair(seed)
    exact = loop_area(plus, minus)
    errors = []
    for parts in (40, 80, 160):
        corners = np.vstack([chords(plus, parts), chords(minus, parts)[::-1]])
        assert exact.net_mm2 == pytest.approx(_shoelace(corners), abs=600 / parts**2)
        errors.append(winding_area(corners) - exact.total_mm2)
    assert abs(errors[2]) < 0.02
    assert errors[0] / errors[1] == pytest.approx(4, rel=0.1)
    assert errors[1] / errors[2] == pytest.approx(4, rel=0.1)


@pytest.mark.parametrize("seed", range(4))
def test_straight_legs_agree_with_faces_exactly(seed: int) -> None:
    draw = np.random.default_rng(100 + seed)
    plus, minus = (leg(*map(tuple, draw.uniform(0, 10, (14, 2)).tolist())) for _ in range(2))
    corners = np.vstack([chords(plus, 1), chords(minus, 1)[::-1]])
    assert loop_area(plus, minus).total_mm2 == pytest.approx(winding_area(corners), rel=1e-9)


def test_long_serpentine_is_split_into_batches_without_a_seam(monkeypatch: pytest.MonkeyPatch) -> None:
    plus, minus = (cut(one, 20) for one in curved_pair(3))
    whole = loop_area(plus, minus).total_mm2
    monkeypatch.setattr("pairrules.geometry.loop_area._AT_ONCE", 50)
    assert loop_area(plus, minus).total_mm2 == pytest.approx(whole, rel=1e-12)


def test_arc_whose_ends_lie_at_two_radii_reads_the_same_backwards() -> None:
    rounded = leg((2.0001, 0), (0, 2), arcs={0: ((0.0, 0.0), QUARTER)})
    other = leg((3, 0), (0, 3))
    assert both(loop_area(rounded, other)) == pytest.approx(both(loop_area(other, rounded)), rel=1e-14)


def test_net_never_exceeds_total() -> None:
    for seed in range(6):
        area = loop_area(*curved_pair(seed))
        assert area.net_mm2 <= area.total_mm2 + 1e-12


def test_leg_without_pieces_is_refused() -> None:
    none = Pieces(start=[], end=[], centre=[], sweep=[], width=[], layer=[], kind=[], length=[])  # type: ignore[arg-type]
    with pytest.raises(ValueError, match=r"^a leg without pieces encloses no area$"):
        loop_area(leg((0, 0), (1, 0)), none)


def test_vector_area_of_a_flat_loop_points_up_and_matches_its_sign() -> None:
    heights = np.array([0.0, -1.5])
    flat = vector_area(leg((0, 0), (10, 0)), leg((0, 2), (10, 2)), heights)
    assert flat == pytest.approx([0, 0, 20], abs=1e-12)
    assert vector_area(leg((0, 2), (10, 2)), leg((0, 0), (10, 0)), heights) == pytest.approx([0, 0, -20], abs=1e-12)


def test_vector_area_of_legs_one_above_the_other_is_the_upright_rectangle() -> None:
    # Plus along x on top, minus beneath it: out along x, then down: x × (−z) = +y.
    area = vector_area(leg((0, 0), (10, 0)), leg((0, 0), (10, 0), layers=[1]), np.array([0.0, -1.5]))
    assert area == pytest.approx([0, 15, 0], abs=1e-12)


def test_vector_area_of_a_tilted_rectangle_has_its_true_size() -> None:
    area = vector_area(leg((0, 0), (10, 0)), leg((0, 3), (10, 3), layers=[1]), np.array([0.0, -4.0]))
    assert np.linalg.norm(area) == pytest.approx(10 * 5, rel=1e-14)
    assert area == pytest.approx([0, 40, 30], abs=1e-12)


def test_vector_area_counts_the_barrels_of_a_leg_that_dives() -> None:
    # Plus dives for 4 of its 10 mm, minus is the straight line above: an upright rectangle of 4 mm by 1.5 mm.
    plus = leg(
        (0, 0), (3, 0), (3, 0), (7, 0), (7, 0), (10, 0),
        kinds=[TRACK, BARREL, TRACK, BARREL, TRACK], layers=[0, 1, 1, 0, 0],
    )  # fmt: skip
    area = vector_area(plus, leg((0, 0), (10, 0)), np.array([0.0, -1.5]))
    assert area == pytest.approx([0, -4 * 1.5, 0], abs=1e-12)


def test_vector_area_with_arcs_keeps_the_plane_part_and_turns_with_the_board() -> None:
    plus, minus = curved_pair(1)
    heights = np.array([0.3])
    area = vector_area(plus, minus, heights)
    assert abs(area[2]) == pytest.approx(loop_area(plus, minus).net_mm2, rel=1e-12)
    moved = vector_area(turned(plus, 0.7, (90.0, 5.0)), turned(minus, 0.7, (90.0, 5.0)), heights)
    assert moved == pytest.approx(area, abs=1e-10)


def test_vector_area_with_an_unknown_height_keeps_only_what_needs_none() -> None:
    area = vector_area(leg((0, 0), (10, 0)), leg((0, 3), (10, 3), layers=[1]), np.array([0.0, np.nan]))
    assert np.isnan(area[:2]).all()
    assert area[2] == pytest.approx(30, rel=1e-14)


def _shoelace(corners: Floats) -> float:
    x, y = corners.T
    return abs(float(x @ np.roll(y, -1) - y @ np.roll(x, -1))) / 2
