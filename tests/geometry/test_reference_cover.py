"""Reference cover against lengths and distances known from elementary geometry, laws, and shapely on fine chords."""

from __future__ import annotations

import math

import numpy as np
import pytest
import shapely

from pairrules.board import Area, Board, PadShape
from pairrules.geometry.pair_geometry import BARREL, JOIN, TRACK, Pieces
from pairrules.geometry.reference_cover import NO_NET, UNKNOWN, ReferenceCopper, reference_cover
from tests.geometry.drawn_boards import GND, HEATER, PUMP, board, box, track
from tests.geometry.drawn_legs import chords, cut, leg

HALF = math.pi
SLOT = [(4.0, -1.0), (4.0, 1.0), (6.0, 1.0), (6.0, -1.0)]


def plane(*holes: list[tuple[float, float]], layer: int = 1, net: int = GND) -> Area:
    return box(net, layer, -5, -5, 15, 5, *holes)


def star(seed: int) -> Area:
    """A jagged outline about (5, 0) that a leg leaves and enters many times."""
    draw = np.random.default_rng(seed)
    angle = np.linspace(0, 2 * math.pi, 30, endpoint=False)
    radius = draw.uniform(1.0, 6.0, 30)
    return Area(
        net=GND, layer=1, outline=np.column_stack([5 + radius * np.cos(angle), radius * np.sin(angle)]), holes=()
    )


def winding_leg() -> Pieces:
    arcs = {1: ((4.0, 0.0), -HALF), 3: ((7.0, -1.0), 1.5 * HALF)}
    return leg((0, 0), (3, 0), (5, 0), (6, -1), (7, 0), (9, 3), arcs=arcs)


def test_leg_over_a_whole_plane_is_covered_and_knows_its_distance_to_the_edge() -> None:
    cover = reference_cover(leg((0, 0), (10, 3)), board(areas=[plane()]), (GND,))
    assert cover.uncovered_mm == 0.0
    assert cover.missing == ""
    assert (cover.above.tolist(), cover.below.tolist()) == ([NO_NET], [GND])
    assert cover.edge_below == pytest.approx([2.0], rel=1e-14)
    assert cover.edge_below_at[0] == pytest.approx([10, 3], rel=1e-14)
    assert np.isnan(cover.edge_above).all()


def test_slot_in_the_plane_uncovers_its_width_exactly() -> None:
    cover = reference_cover(leg((0, 0), (10, 0)), board(areas=[plane(SLOT)]), (GND,))
    assert cover.uncovered_mm == pytest.approx(2.0, rel=1e-14)
    assert cover.s_from == pytest.approx([0, 4, 6], rel=1e-14)
    assert cover.s_to == pytest.approx([4, 6, 10], rel=1e-14)
    assert cover.uncovered.tolist() == [False, True, False]
    assert cover.start[1] == pytest.approx([4, 0], abs=1e-14)
    assert cover.end[1] == pytest.approx([6, 0], abs=1e-14)
    assert cover.edge_below[[0, 2]] == pytest.approx([0, 0], abs=1e-12)
    assert cover.edge_below_at[2] == pytest.approx([6, 0], abs=1e-12)


def test_layer_above_covers_where_the_one_below_does_not() -> None:
    under = leg((0, 0), (10, 0), layers=[1])
    patch = box(GND, 0, 3, -1, 5.5, 1)
    cover = reference_cover(under, board(areas=[patch, plane(SLOT, layer=2)]), (GND,))
    assert cover.uncovered_mm == pytest.approx(0.5, rel=1e-13)
    assert cover.above.tolist() == [NO_NET, GND, GND, NO_NET, NO_NET]
    assert cover.below.tolist() == [GND, GND, NO_NET, NO_NET, GND]


def test_only_the_next_layer_counts_not_a_plane_further_down() -> None:
    cover = reference_cover(leg((0, 0), (10, 0)), board(areas=[plane(layer=2)]), (GND,))
    assert cover.uncovered_mm == pytest.approx(10, rel=1e-14)


def test_arc_leaves_and_enters_the_plane_at_the_true_angle() -> None:
    # A half circle of radius 2 about (5, 0) rises above y = 1 over the angles 30° to 150°: 2/3 of its length.
    arc = leg((7, 0), (3, 0), arcs={0: ((5.0, 0.0), HALF)})
    cover = reference_cover(arc, board(areas=[box(GND, 1, 0, -5, 10, 1)]), (GND,))
    assert cover.uncovered_mm == pytest.approx(2 * HALF * 2 / 3, rel=1e-13)
    assert cover.start[1] == pytest.approx([5 + math.sqrt(3), 1], rel=1e-13)


@pytest.mark.parametrize("up", [1.0, -1.0])
def test_arc_is_nearest_to_an_edge_at_its_crown(up: float) -> None:
    # Neither end of the arc nor of the edge is nearest: the crown (5, ±2) is, 1.5 mm from the edge y = ±3.5.
    arc = leg((7, 0), (3, 0), arcs={0: ((5.0, 0.0), up * HALF)})
    low, high = sorted((-20 * up, 3.5 * up))
    cover = reference_cover(arc, board(areas=[box(GND, 1, -20, low, 30, high)]), (GND,))
    assert cover.edge_below == pytest.approx([1.5], rel=1e-13)
    assert cover.edge_below_at[0] == pytest.approx([5, 2 * up], rel=1e-13)


def test_arc_is_nearest_to_the_edge_of_a_hole_at_its_crown() -> None:
    arc = leg((7, 0), (3, 0), arcs={0: ((5.0, 0.0), HALF)})
    hole = [(-10.0, 3.5), (20.0, 3.5), (20.0, 6.0), (-10.0, 6.0)]
    cover = reference_cover(arc, board(areas=[box(GND, 1, -20, -20, 30, 30, hole)]), (GND,))
    assert cover.edge_below == pytest.approx([1.5], rel=1e-13)
    assert cover.edge_below_at[0] == pytest.approx([5, 2], rel=1e-13)


def test_copper_of_other_nets_covers_nothing_and_the_net_that_covers_is_told() -> None:
    halves = [box(GND, 1, -1, -1, 4, 1), box(HEATER, 1, 4.5, -1, 7, 1), box(PUMP, 1, 7.25, -1, 11, 1)]
    cover = reference_cover(leg((0, 0), (10, 0)), board(areas=halves), (PUMP, GND))
    assert cover.uncovered_mm == pytest.approx(3.25, rel=1e-13)
    assert cover.below.tolist() == [GND, NO_NET, PUMP]


def test_tracks_pads_and_vias_of_a_reference_net_cover_too() -> None:
    drawn = board(
        tracks=[track(GND, (2, -3), (2, 3), layer=1, width=1.0), track(GND, (3.5, 0), (3.5, 0), layer=1, width=0.5)],
        pads=[
            (GND, 1, (5, 0), PadShape(kind="rect", size=(0.8, 2.0))),
            (GND, -1, (6.5, 0), PadShape(kind="circle", size=(1.0, 1.0))),
            (GND, 1, (9, 0), None),
        ],
        vias=[(GND, (8, 0), 0, 2, 0.6), (GND, (8.8, 0), 0, 2, math.nan), (GND, (9.5, 0), 2, 2, 0.6)],
    )
    cover = reference_cover(leg((0, 0), (10, 0)), drawn, (GND,))
    assert cover.uncovered_mm == pytest.approx(10 - 1.0 - 0.5 - 0.8 - 1.0 - 0.6, rel=1e-12)


def test_overlapping_areas_make_no_edge_where_they_join() -> None:
    pair = [box(GND, 1, -1, -2, 5, 2), box(GND, 1, 4, -2, 11, 2)]
    cover = reference_cover(leg((0, 0), (10, 0)), board(areas=pair), (GND,))
    assert len(cover) == 1
    assert cover.edge_below == pytest.approx([1.0], rel=1e-14)


def test_only_drawn_track_counts_and_s_runs_over_it_alone() -> None:
    route = leg(
        (0, 0), (1, 0), (3, 0), (3, 0), (7, 0), kinds=[JOIN, TRACK, BARREL, TRACK], layers=[0, 0, 2, 2]
    )  # fmt: skip
    cover = reference_cover(route, board(areas=[box(GND, 1, 0, -1, 5, 1)]), (GND,))
    assert cover.s_from == pytest.approx([0, 2, 4], rel=1e-14)
    assert cover.piece.tolist() == [1, 3, 3]
    assert cover.layer.tolist() == [0, 2, 2]
    assert cover.uncovered_mm == pytest.approx(2.0, rel=1e-14)


def test_leg_along_the_edge_of_the_copper_counts_as_covered() -> None:
    cover = reference_cover(leg((0, 0), (10, 0)), board(areas=[box(GND, 1, 2, 0, 6, 5)]), (GND,))
    assert cover.uncovered_mm == pytest.approx(6.0, rel=1e-13)
    assert cover.edge_below[1] == 0.0


@pytest.mark.parametrize("seed", range(5))
def test_jagged_edges_agree_with_fine_chords(seed: int) -> None:
    area = star(seed)
    cover = reference_cover(winding_leg(), board(areas=[area]), (GND,))
    outline = shapely.Polygon(area.outline)
    # A chord of a 2000th of the greatest arc leaves it by less than 1e-6 mm.
    line = shapely.LineString(chords(winding_leg(), 2000))
    assert cover.uncovered_mm == pytest.approx(line.difference(outline).length, abs=1e-5)
    assert len(cover) > 3
    for row in np.flatnonzero(cover.below == GND):
        place = shapely.Point(cover.edge_below_at[row])
        assert place.distance(outline.exterior) == pytest.approx(cover.edge_below[row], abs=1e-12)


@pytest.mark.parametrize("seed", range(3))
def test_edge_distance_is_the_least_along_each_stretch(seed: int) -> None:
    area = star(seed)
    fine = cut(winding_leg(), 50)
    cover = reference_cover(fine, board(areas=[area]), (GND,))
    exterior = shapely.Polygon(area.outline).exterior
    whole = cover.edge_below[(cover.below == GND)]
    covered = np.flatnonzero(cover.below == GND)
    sampled = shapely.distance(shapely.points((cover.start + cover.end)[covered] / 2), exterior)
    size = (cover.s_to - cover.s_from)[covered]
    assert (whole <= sampled + 1e-4).all()
    assert (whole >= sampled - size / 2 - 1e-4).all()


def test_cutting_the_leg_changes_no_length() -> None:
    drawn = board(areas=[star(2)])
    copper = ReferenceCopper(drawn, (GND,))
    whole = reference_cover(winding_leg(), drawn, copper)
    fine = reference_cover(cut(winding_leg(), 7), drawn, copper)
    assert fine.uncovered_mm == pytest.approx(whole.uncovered_mm, rel=1e-12)
    assert (np.diff(fine.s_from) > 0).all()
    assert fine.s_to[:-1] == pytest.approx(fine.s_from[1:], rel=1e-12)
    assert fine.edge_below[fine.below == GND].min() == pytest.approx(
        whole.edge_below[whole.below == GND].min(), abs=1e-12
    )


def unlisted() -> Board:
    drawn = [track(HEATER, (0, 3), (1, 3), layer=0), track(HEATER, (0, 3), (1, 3), layer=1)]
    return board(copper=("TOP", "BOTTOM"), areas=[plane()], tracks=drawn, complete=False)


def test_cover_is_unknown_where_the_file_lacks_the_next_layer() -> None:
    drawn = board(areas=[plane(layer=0)], complete=False)
    cover = reference_cover(leg((0, 0), (10, 0)), drawn, (GND,))
    assert cover.uncovered_mm is None
    assert cover.missing == "the copper layer next to TOP is not in the file, so the reference copper there is unknown"
    assert cover.below.tolist() == [UNKNOWN]
    assert not cover.uncovered.any()


def test_cover_is_unknown_where_missing_layers_may_lie_between_any_two() -> None:
    cover = reference_cover(leg((0, 0), (5, 0), (10, 0), layers=[0, 1]), unlisted(), (GND,))
    assert cover.uncovered_mm is None
    assert cover.missing == (
        "the copper layer next to TOP and BOTTOM is not in the file, so the reference copper there is unknown"
    )


def test_what_a_known_layer_covers_needs_no_other() -> None:
    drawn = board(areas=[plane(layer=0)], tracks=[track(HEATER, (0, 3), (1, 3), layer=1)], complete=False)
    cover = reference_cover(leg((0, 0), (10, 0), layers=[1]), drawn, (GND,))
    assert (cover.above.tolist(), cover.below.tolist()) == ([GND], [UNKNOWN])
    assert cover.uncovered_mm == 0.0


def test_empty_layer_of_a_complete_board_is_known_to_be_bare() -> None:
    cover = reference_cover(leg((0, 0), (10, 0)), board(), (GND,))
    assert cover.uncovered_mm == pytest.approx(10, rel=1e-14)
    assert cover.missing == ""


def test_without_a_reference_net_nothing_is_known() -> None:
    cover = reference_cover(leg((0, 0), (10, 0)), board(areas=[plane()]), ())
    assert cover.uncovered_mm is None
    assert cover.missing == "no reference net is known; name them under `reference_nets` in the settings"


def test_leg_without_track_has_no_stretch() -> None:
    cover = reference_cover(leg((0, 0), (10, 0), kinds=[JOIN]), board(areas=[plane()]), (GND,))
    assert len(cover) == 0
    assert cover.uncovered_mm == 0.0
