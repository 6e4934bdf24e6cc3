"""Negative sets, features and layers: what is left of the copper, by area."""

from __future__ import annotations

import math

import pytest
from shapely.geometry import Polygon

from pairrules.board import Board
from tests.readers.ipc2581.documents import LAYERS, box, document, feature, hole, line, pad, read

PLANE = LAYERS.replace('side="BOTTOM" polarity="POSITIVE"', 'side="BOTTOM" polarity="NEGATIVE"')
SQUARE = f"<Contour>{box(0, 0, 10, 10)}</Contour>"
WINDOW = f"<Contour>{box(4, 4, 6, 6)}</Contour>"


def area(board: Board, layer: int = 0) -> float:
    return sum(Polygon(a.outline, list(a.holes)).area for a in board.areas if a.layer == layer)


def test_a_negative_set_cuts_what_stands_before_it() -> None:
    sets = feature(SQUARE) + feature(WINDOW, attributes='polarity="NEGATIVE"')
    board = read(document(sets))
    assert area(board) == pytest.approx(96)
    assert [board.nets[a.net] for a in board.areas] == ["A"]


def test_a_negative_set_spares_what_stands_after_it() -> None:
    sets = feature(WINDOW, attributes='polarity="NEGATIVE"') + feature(SQUARE)
    assert area(read(document(sets))) == pytest.approx(100)


def test_copper_drawn_into_a_window_stays() -> None:
    inner = f"<Contour>{box(4.5, 4.5, 5.5, 5.5)}</Contour>"
    sets = feature(SQUARE) + feature(WINDOW, attributes='polarity="NEGATIVE"') + feature(inner, net="B")
    board = read(document(sets))
    assert area(board) == pytest.approx(97)
    assert sorted(board.nets[a.net] for a in board.areas) == ["A", "B"]


def test_a_negative_set_spares_other_layers() -> None:
    board = read(document(feature(WINDOW, attributes='polarity="NEGATIVE"'), bottom=feature(SQUARE)))
    assert area(board, 1) == pytest.approx(100)


def test_a_void_shape_and_an_erasing_line_cut_too() -> None:
    void = '<RectCenter width="2" height="2"><FillDesc fillProperty="VOID"/></RectCenter>'
    assert area(read(document(feature(SQUARE) + feature(void, before='<Location x="5" y="5"/>')))) == pytest.approx(96)
    erased = line((0, 5), (10, 5), width=1).replace("<LineDesc ", '<LineDesc lineProperty="ERASE" ')
    board = read(document(feature(SQUARE) + feature(erased)))
    assert area(board) == pytest.approx(90)
    assert len(board.areas) == 2
    assert len(board.tracks) == 0


def test_negative_pads_cut() -> None:
    clear = pad('<RectCenter width="2" height="2"/>', before='<Location x="5" y="5"/>').replace(
        "<Set ", '<Set polarity="NEGATIVE" '
    )
    board = read(document(feature(SQUARE) + clear))
    assert area(board) == pytest.approx(96)
    assert len(board.pads) == 0


def test_tracks_wholly_removed_go_and_those_cut_are_remarked_upon() -> None:
    sets = feature(line((4.5, 5), (5.5, 5))) + feature(line((0, 5), (10, 5))) + feature(line((0, 8), (10, 8)))
    board = read(document(sets + feature(WINDOW, attributes='polarity="NEGATIVE"')))
    assert board.tracks.start.tolist() == [[0, 5], [0, 8]]
    assert "1 track or pad on TOP is cut by negative features and is read whole" in board.missing
    assert "1 track or pad on TOP is wholly removed by negative features" in board.missing


def test_a_negative_layer_is_the_outline_less_what_is_drawn() -> None:
    clear = pad('<RectCenter width="2" height="2"/>', before='<Location x="5" y="5"/>')
    board = read(document(feature(line((0, 0), (1, 0))), bottom=clear, layers=PLANE))
    assert area(board, 1) == pytest.approx(200 - 4)
    assert len(board.pads) == 0
    assert "layer BOTTOM is negative: its copper is read as the outline less what is drawn on it" in board.missing


def test_a_negative_layer_takes_its_net_from_the_holes_that_end_in_its_copper() -> None:
    clear = pad('<Circle diameter="1"/>', before='<Location x="5" y="5"/>', net="SIG")
    drilled = hole(5, 5, net="SIG") + hole(12, 5, net="GND") + hole(15, 5, net="GND")
    board = read(document(feature(line((0, 0), (1, 0))), bottom=clear, layers=PLANE, drill=drilled))
    (plane,) = board.areas
    assert board.nets[plane.net] == "GND"
    assert Polygon(plane.outline, list(plane.holes)).area == pytest.approx(200 - math.pi / 4, abs=0.002)


def test_a_negative_layer_joined_to_two_nets_is_given_none() -> None:
    clear = pad('<Circle diameter="1"/>', before='<Location x="5" y="5"/>', net="SIG")
    drilled = hole(12, 5, net="GND") + hole(15, 5, net="VCC")
    board = read(document(feature(line((0, 0), (1, 0))), bottom=clear, layers=PLANE, drill=drilled))
    assert [a.net for a in board.areas] == [-1]
    assert "1 piece of negative layer BOTTOM is of no net that the file tells" in board.missing


def test_a_split_negative_plane_is_two_areas_with_their_nets() -> None:
    drilled = hole(3, 5, net="GND") + hole(15, 5, net="VCC")
    split = feature(line((10, -1), (10, 11), width=1), net="")
    board = read(document(feature(line((0, 0), (1, 0))), bottom=split, layers=PLANE, drill=drilled))
    assert sorted(board.nets[a.net] for a in board.areas) == ["GND", "VCC"]
    assert area(board, 1) == pytest.approx(190)


def test_what_a_negative_set_draws_on_a_negative_layer_is_copper_again() -> None:
    window = f"<Contour>{box(2, 2, 8, 8)}</Contour>"
    sets = feature(window) + feature(WINDOW, attributes='polarity="NEGATIVE"')
    board = read(document(feature(line((0, 0), (1, 0))), bottom=sets, layers=PLANE))
    assert area(board, 1) == pytest.approx(200 - 36 + 4)


def test_a_plane_of_clearances_alone_is_negative_whatever_its_flag() -> None:
    plane = LAYERS.replace('layerFunction="CONDUCTOR" side="BOTTOM"', 'layerFunction="PLANE" side="BOTTOM"')
    clear = pad('<RectCenter width="2" height="2"/>', before='<Location x="5" y="5"/>', usage="PLANE")
    board = read(document(feature(line((0, 0), (1, 0))), bottom=clear, layers=plane))
    assert area(board, 1) == pytest.approx(196)
    assert "plane BOTTOM holds only clearances: its copper is read as the outline less those" in board.missing


def test_a_positive_plane_with_pads_of_parts_stays_positive() -> None:
    plane = LAYERS.replace('layerFunction="CONDUCTOR" side="BOTTOM"', 'layerFunction="PLANE" side="BOTTOM"')
    board = read(
        document(feature(line((0, 0), (1, 0))), bottom=pad('<Circle diameter="1"/>', pin="U1.1"), layers=plane)
    )
    assert board.areas == ()
    assert len(board.pads) == 1


def test_a_negative_layer_without_an_outline_is_left_out_and_said() -> None:
    clear = pad('<Circle diameter="1"/>')
    board = read(document(feature(line((0, 0), (1, 0))), bottom=clear, layers=PLANE, profile=""))
    assert board.areas == ()
    assert "negative layer BOTTOM has no board outline to be cut from and is left out" in board.missing
