"""What is drawn of a pair, held against what was measured of it and against elementary geometry."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest
import shapely

from fixtures import boards
from pairrules.drawing import DrawnShape, PairDrawing, Point
from pairrules.pipeline import check
from pairrules.result import PairResult, Result

SETTINGS = """
extends: []
classes:
  sensor:
    match: [IN]
    source: {kind: impedance, plus: 100 ohm, minus: 110 ohm}
    load:
      kind: impedance
      plus: {resistance: 1 Mohm, capacitance: 10 pF}
      minus: {resistance: 1 Mohm, capacitance: 12 pF}
    frequencies: [1 kHz, 1 MHz]
    mask: [{frequency: 1 kHz, value: 60 dB}, {frequency: 1 MHz, value: 20 dB}]
    limits:
      leg-length: {most: 0.5 mm, severity: review}
      gap-band: {spread: 10 %, most: 0.21 mm, severity: note}
      pair-impedance: {target: 100 ohm, tolerance: 10 %, severity: note}
      trace-balance: {least: 40 dB, severity: note}
      link-rejection: {least: 50 dB, severity: note}
      mode-conversion: {severity: note}
"""


def drawn(folder: Path, tree: dict[str, Any], settings: str = SETTINGS) -> tuple[Result, PairResult, PairDrawing]:
    path = folder / "board.json"
    path.write_text(json.dumps(tree), encoding="utf-8")
    (folder / "pairrules.yaml").write_text(settings, encoding="utf-8")
    whole = check(path, drawing=True)
    (one,) = whole.pairs
    assert one.drawing is not None
    return whole, one, one.drawing


Drawn = tuple[Result, PairResult, PairDrawing]


@pytest.fixture(scope="module")
def through_vias(tmp_path_factory: pytest.TempPathFactory) -> Drawn:
    """A pair that changes layers, drawn once: it has the most sections to solve."""
    return drawn(tmp_path_factory.mktemp("vias"), boards.via_pair().board)


def area(shapes: tuple[DrawnShape, ...]) -> float:
    return math.fsum(shapely.Polygon(shape.outline, shape.holes).area for shape in shapes)


def window_area(drawing: PairDrawing) -> float:
    x0, y0, x1, y1 = drawing.window
    return (x1 - x0) * (y1 - y0)


def test_a_check_draws_nothing_unless_asked(tmp_path: Path) -> None:
    path = tmp_path / "board.json"
    path.write_text(json.dumps(boards.straight_pair().board), encoding="utf-8")
    (tmp_path / "pairrules.yaml").write_text(SETTINGS, encoding="utf-8")
    plain = check(path)
    whole = check(path, drawing=True)
    assert plain.drawing is None and plain.pairs[0].drawing is None
    assert replace(whole, drawing=None, pairs=(replace(whole.pairs[0], drawing=None),)) == plain


@pytest.mark.parametrize("make", [boards.concentric_bend, boards.series_capacitors, boards.area_joined])
def test_pieces_add_up_to_the_measured_lengths_and_follow_one_another(tmp_path: Path, make: Any) -> None:
    _, one, drawing = drawn(tmp_path, make().board)
    held_together(one, drawing)


def test_so_do_pieces_and_barrels(through_vias: Drawn) -> None:
    _, one, drawing = through_vias
    held_together(one, drawing)
    assert [piece.kind for piece in drawing.plus].count("barrel") == one.measures.vias_plus == 1


def held_together(one: PairResult, drawing: PairDrawing) -> None:
    for pieces, length in ((drawing.plus, one.measures.length_plus_mm), (drawing.minus, one.measures.length_minus_mm)):
        assert math.fsum(piece.length_mm or 0.0 for piece in pieces) == pytest.approx(length, abs=1e-9)
        for before, after in pairwise(pieces):
            assert after.start == before.end
            assert after.along_mm == pytest.approx(before.along_mm + (before.length_mm or 0.0), abs=1e-9)
        for piece in pieces:
            if piece.kind == "track":
                straight = math.dist(piece.start, piece.end)
                long = straight if piece.centre is None else abs(piece.sweep_rad) * math.dist(piece.start, piece.centre)
                assert piece.length_mm == pytest.approx(long, abs=1e-3) and piece.width_mm == pytest.approx(0.2)


def test_a_bend_is_an_arc_that_turns_as_it_does_on_the_board(tmp_path: Path) -> None:
    _, _, drawing = drawn(tmp_path, boards.concentric_bend().board)
    for pieces in (drawing.plus, drawing.minus):
        (arc,) = [piece for piece in pieces if piece.centre is not None]
        assert arc.centre == (10.0, 5.0)
        # From U1 the legs run to the right and then upward: a left turn.
        assert abs(arc.sweep_rad) == pytest.approx(math.pi / 2)
        assert (arc.sweep_rad > 0) == (arc.start[1] < arc.end[1])


def test_the_window_holds_both_legs_with_room_around(tmp_path: Path) -> None:
    _, _, drawing = drawn(tmp_path, boards.straight_pair().board)
    x0, y0, x1, y1 = drawing.window
    assert x0 <= -1.5 and x1 >= 21.5 and y0 <= -1.7 and y1 >= 1.7
    for copper in drawing.copper:
        for shape in copper.shapes:
            for x, y in shape.outline:
                assert x0 <= x <= x1 and y0 <= y <= y1


def test_copper_by_role_and_openings_fill_up_what_the_plane_leaves(tmp_path: Path) -> None:
    _, _, drawing = drawn(tmp_path, boards.plane_slot().board)
    roles = {(one.layer, one.role, one.net) for one in drawing.copper}
    assert {(0, "plus", "IN_P"), (0, "minus", "IN_N"), (1, "reference", "GND")} <= roles
    (opening,) = drawing.openings
    (plane,) = (one for one in drawing.copper if one.layer == 1 and one.role == "reference")
    assert (opening.layer, opening.of) == (1, (0,))
    assert area(opening.shapes) + area(plane.shapes) == pytest.approx(window_area(drawing), rel=1e-3)
    assert area(opening.shapes) > 0 and drawing.unknown_layers == ()


def test_a_track_s_copper_is_its_length_by_its_width(tmp_path: Path) -> None:
    tree = boards.straight_pair().board
    alone = {"net": "X", "layer": "TOP", "width": 0.3, "points": [[2, 1], [12, 1]]}
    far = {"net": "FAR", "layer": "TOP", "width": 0.3, "points": [[0, 40], [20, 40]]}
    _, _, drawing = drawn(tmp_path, {**tree, "tracks": [*tree["tracks"], alone, far]})
    neighbours = {one.net: area(one.shapes) for one in drawing.copper if one.role == "neighbour"}
    assert neighbours == {"X": pytest.approx(10 * 0.3 + math.pi * 0.15**2, rel=0.01)}


def test_outlines_run_counter_clockwise_and_holes_clockwise(through_vias: Drawn) -> None:
    _, _, drawing = through_vias
    shapes = [shape for copper in drawing.copper for shape in copper.shapes]
    shapes += [shape for opening in drawing.openings for shape in opening.shapes]
    assert any(shape.holes for shape in shapes)
    for shape in shapes:
        assert shapely.LinearRing(shape.outline).is_ccw
        assert not any(shapely.LinearRing(hole).is_ccw for hole in shape.holes)
        assert shape.outline[0] != shape.outline[-1]


def test_the_vias_that_a_leg_passes_are_used(through_vias: Drawn) -> None:
    _, one, drawing = through_vias
    used = [via for via in drawing.vias if via.used]
    count = {leg: sum(via.role == leg for via in used) for leg in ("plus", "minus")}
    assert count == {"plus": one.measures.vias_plus, "minus": one.measures.vias_minus} and count["plus"]


def test_parts_of_the_pair_with_their_pads(tmp_path: Path) -> None:
    _, one, drawing = drawn(tmp_path, boards.series_capacitors().board)
    assert [(part.ref, part.role) for part in drawing.parts] == [
        (one.source, "source"),
        (one.load, "load"),
        *((part.ref, "series") for part in one.series),
    ]
    for part in drawing.parts:
        legs = {pad.leg for pad in part.pads}
        assert legs >= ({"plus", "minus"} if part.role in {"source", "load"} else set()) and legs - {""}
        hull = shapely.Polygon(part.outline)
        assert all(shapely.covers(hull.buffer(1e-3), shapely.Point(pad.at)) for pad in part.pads)


def test_the_gap_along_a_leg_covers_its_track_and_agrees_with_the_measures(tmp_path: Path) -> None:
    _, one, drawing = drawn(tmp_path, boards.wide_gap_stretch().board)
    for stretches, track in ((drawing.spacing_plus, drawing.plus), (drawing.spacing_minus, drawing.minus)):
        assert stretches[0].from_mm == pytest.approx(0.0, abs=1e-9)
        for before, after in pairwise(stretches):
            assert after.from_mm == pytest.approx(before.to_mm, abs=1e-9)
        total = math.fsum(piece.length_mm or 0.0 for piece in track if piece.kind == "track")
        assert stretches[-1].to_mm == pytest.approx(total, abs=1e-9)
    coupled = [stretch for stretch in drawing.spacing_plus if stretch.coupled]
    assert math.fsum(one.to_mm - one.from_mm for one in coupled) == pytest.approx(one.measures.coupled_mm, abs=1e-9)
    gaps = [gap for s in coupled for gap in (s.gap_from_mm, s.gap_mid_mm, s.gap_to_mm) if gap is not None]
    assert (min(gaps), max(gaps)) == pytest.approx((one.measures.gap_min_mm, one.measures.gap_max_mm))


def test_the_difference_runs_from_nothing_to_the_measured_one(tmp_path: Path) -> None:
    _, one, drawing = drawn(tmp_path, boards.serpentine_leg().board)
    first, *_, last = drawing.difference
    assert (first.along_mm, first.difference_mm) == (0.0, 0.0)
    assert last.difference_mm == pytest.approx(one.measures.length_mismatch_mm) == pytest.approx(4.0)
    # Between the bumps, from x = 6 to 12, plus is ahead by one bump's two millimetres.
    between = [row.difference_mm for row in drawing.difference if 6.5 < row.at[0] < 11.5]
    between += [row.difference_mm for row in drawing.difference if row.at == (12.0, 0.2) and row.along_mm < 14.5]
    assert between and between == pytest.approx([2.0] * len(between), abs=1e-6)


def test_impedance_along_the_pair_weighs_up_to_the_pair_s_own(tmp_path: Path) -> None:
    _, one, drawing = drawn(tmp_path, boards.plane_slot().board)
    both = [section for section in drawing.impedance if section.leg == "both"]
    lengths = [section.plus_to_mm - section.plus_from_mm for section in both]
    mean = math.fsum((s.diff_ohm or 0.0) * long for s, long in zip(both, lengths, strict=True)) / math.fsum(lengths)
    assert len({round(section.diff_ohm or 0.0, 3) for section in both}) > 1
    assert mean == pytest.approx(one.measures.impedance_diff_ohm, rel=1e-9)


def test_curves_pass_through_the_balance_at_the_class_s_own_frequencies(tmp_path: Path) -> None:
    _, one, drawing = drawn(tmp_path, boards.serpentine_leg().board)
    assert drawing.conversion is not None
    frequencies = drawing.conversion.frequency_hz
    assert list(frequencies) == sorted(set(frequencies)) and frequencies[0] < 1e3 and frequencies[-1] > 1e6
    curves = {curve.figure: curve.values for curve in drawing.conversion.curves}
    assert set(curves) == {"source_db", "trace_db", "load_db", "total_db", "rejection_db", "conversion_loss_db"}
    assert one.balance
    for point in one.balance:
        at = frequencies.index(point.frequency_hz)
        for figure in ("source_db", "trace_db", "load_db", "total_db", "rejection_db"):
            assert curves[figure][at] == pytest.approx(getattr(point, figure), abs=1e-6), figure


def test_limits_as_bounds_of_the_drawn_figures(tmp_path: Path) -> None:
    _, one, drawing = drawn(tmp_path, boards.straight_pair().board)
    found = {(limit.rule, limit.figure): (limit.least, limit.most) for limit in drawing.limits if not limit.over}
    assert one.measures.gap_median_mm == pytest.approx(0.2)
    assert found == {
        ("leg-length", "length_mismatch_mm"): (-0.5, 0.5),
        ("gap-band", "gap_mm"): (pytest.approx(0.18), 0.21),
        ("pair-impedance", "impedance_diff_ohm"): (pytest.approx(90.0), pytest.approx(110.0)),
        ("trace-balance", "trace_db"): (None, -40.0),
        ("link-rejection", "rejection_db"): (50.0, None),
    }
    (mask,) = (limit for limit in drawing.limits if limit.over)
    assert (mask.figure, mask.side, mask.over) == ("conversion_loss_db", "least", ((1e3, 60.0), (1e6, 20.0)))


def test_places_are_numbered_as_the_findings(tmp_path: Path) -> None:
    _, one, drawing = drawn(tmp_path, boards.serpentine_leg().board)
    expected = [
        (number, at.layer, round(at.x_mm, 4), round(at.y_mm, 4))
        for number, finding in enumerate(one.findings, start=1)
        for at in finding.at
    ]
    assert expected != []
    assert [(place.number, ("TOP",)[place.layer], *place.at) for place in drawing.places] == expected


def test_a_broken_pair_shows_its_copper_and_no_route_of_the_broken_leg(tmp_path: Path) -> None:
    _, one, drawing = drawn(tmp_path, boards.broken_leg().board)
    assert one.routed == "partial" and drawing.conversion is None
    assert () in (drawing.plus, drawing.minus)
    assert {copper.role for copper in drawing.copper} >= {"plus", "minus"}
    assert drawing.spacing_plus == () and drawing.difference == () and drawing.impedance == ()
    assert drawing.missing[0] == "a leg is not routed from end to end"


def test_without_a_class_the_missing_balance_is_told(tmp_path: Path) -> None:
    _, _, drawing = drawn(tmp_path, boards.straight_pair().board, "extends: []\n")
    assert drawing.conversion is None
    assert drawing.missing == ("the pair has no class with source, load and frequencies in the settings",)


def test_moving_the_board_moves_the_drawing(tmp_path: Path) -> None:
    def moved(value: Any, key: str = "") -> Any:
        if isinstance(value, dict):
            return {name: moved(one, name) for name, one in value.items() if name != "stackup"} | (
                {"stackup": value["stackup"]} if "stackup" in value else {}
            )
        if isinstance(value, list):
            if key != "size" and len(value) == 2 and all(isinstance(one, (int, float)) for one in value):
                return [value[0] + 30, value[1] - 7]
            return [moved(one, key) for one in value]
        return value

    tree = boards.plane_slot().board
    _, _, here = drawn(tmp_path, tree)
    _, _, there = drawn(tmp_path, moved(tree))

    def shift(at: Point) -> Point:
        return (at[0] + 30, at[1] - 7)

    assert there.window == pytest.approx((*shift(here.window[:2]), *shift(here.window[2:])), abs=2e-4)
    assert [area(one.shapes) for one in there.openings] == pytest.approx([area(one.shapes) for one in here.openings])
    for one, other in zip(here.plus, there.plus, strict=True):
        assert other.start == pytest.approx(shift(one.start), abs=2e-4)


def test_the_board_s_own_drawing(tmp_path: Path) -> None:
    tree = boards.straight_pair().board | {"outline": [[-5, -5], [25, -5], [25, 5], [-5, 5]]}
    whole, _, _ = drawn(tmp_path, tree)
    assert whole.drawing is not None
    assert whole.drawing.outline == ((-5.0, -5.0), (25.0, -5.0), (25.0, 5.0), (-5.0, 5.0))
    x0, y0, x1, y1 = whole.drawing.extent or (0.0, 0.0, 0.0, 0.0)
    assert x0 <= -5.0 and y0 <= -5.0 and x1 >= 25.0 and y1 >= 5.0
    assert whole.drawing.layers[0] == "TOP" and whole.drawing.units == "mm"
