"""Panels and files of several boards: which step is read."""

from __future__ import annotations

import pytest

from pairrules.errors import BoardError
from tests.readers.ipc2581.documents import PROFILE, document, feature, line, read

TRACK = feature(line((0, 0), (1, 0)))
REPEAT = '<StepRepeat stepRef="board" x="0" y="0" nx="2" ny="1" dx="25" dy="0" angle="0" mirror="false"/>'


def step(name: str, drawn: str = "", repeat: str = "") -> str:
    features = f'<LayerFeature layerRef="TOP">{drawn}</LayerFeature>' if drawn else ""
    return f'<Step name="{name}">{PROFILE}{repeat}{features}</Step>'


def test_of_a_panel_the_repeated_board_is_read() -> None:
    board = read(document(TRACK, more_steps=step("panel", repeat=REPEAT)))
    assert (board.name, len(board.tracks)) == ("board", 1)


def test_a_panel_s_own_copper_does_not_matter() -> None:
    board = read(document(TRACK, more_steps=step("panel", TRACK + TRACK, repeat=REPEAT)))
    assert (board.name, len(board.tracks)) == ("board", 1)


def test_a_step_without_copper_does_not_matter() -> None:
    assert read(document(TRACK, more_steps=step("frame"))).name == "board"


def test_of_several_boards_one_must_be_named() -> None:
    with pytest.raises(BoardError) as caught:
        read(document(TRACK, more_steps=step("second", TRACK)))
    assert str(caught.value) == ("board.xml: the file holds 2 boards: board, second; say which one with --step NAME")


def test_the_named_board_is_read_and_nothing_of_the_other() -> None:
    other = feature(line((0, 0), (1, 0), (2, 0)) + "<Xyz/>", net="B")
    data = document(TRACK, more_steps=step("second", other))
    assert (len(read(data, "board").tracks), read(data, "board").nets) == (1, ("A",))
    second = read(data, "second")
    assert (second.name, len(second.tracks), second.nets) == ("second", 2, ("B",))
    said = "1 element Xyz in layer features was not understood and is left out"
    assert said in second.missing
    assert said not in read(data, "board").missing


def test_a_name_that_is_no_board_is_refused_with_the_choices() -> None:
    data = document(TRACK, more_steps=step("second", TRACK) + step("frame"))
    with pytest.raises(BoardError) as caught:
        read(data, "third")
    assert str(caught.value) == 'board.xml: the file has no step "third"; choose one of: board, second'
    with pytest.raises(BoardError) as caught:
        read(data, "frame")
    assert str(caught.value) == 'board.xml: step "frame" holds no board copper; choose one of: board, second'
