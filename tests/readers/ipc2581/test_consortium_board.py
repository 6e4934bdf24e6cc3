"""Test case 10 of the IPC-2581 consortium. Counts were taken from the file's text with a plain text search."""

from __future__ import annotations

import re

import numpy as np
import pytest

from pairrules.board import Board
from pairrules.errors import BoardError
from tests.readers.ipc2581.documents import CONSORTIUM, read

ASSEMBLY = CONSORTIUM / "case-10-assembly.xml"
BILL = CONSORTIUM / "case-10-bom.xml"

pytestmark = pytest.mark.skipif(not ASSEMBLY.exists(), reason="the consortium's files are not beside the checkout")


@pytest.fixture(scope="module")
def text() -> str:
    return ASSEMBLY.read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def board() -> Board:
    return read(ASSEMBLY.read_bytes())


def test_header(board: Board) -> None:
    assert (board.name, board.format, board.revision, board.units) == ("testcase10-RevC", "IPC-2581", "C", "INCH")
    assert board.copper == ("TOP", "BOTTOM")


def test_counts_are_those_of_the_text(board: Board, text: str) -> None:
    copper = text[text.index('<LayerFeature layerRef="TOP">') : text.index('<LayerFeature layerRef="DRILL_1-18">')]
    assert len(board.tracks) == copper.count("<PolyStepSegment ") == 3135
    assert len(board.vias) == text.count('platingStatus="VIA"') == 1759
    plated = text.count('platingStatus="PLATED"')
    assert (board.pads.layer == -1).sum() == plated == 100
    pins = set(re.findall(r'<PinRef pin="([^"]+)" componentRef="([^"]+)"', copper))
    locating = {("MECH1", "J1"), ("MECH2", "J1")}  # two pads name no pin; the package has one at each place
    assert len(board.pads) == len(pins) + len(locating) == 1748
    assert len(board.parts) == text.count("<Component ") == 56
    nets = set(re.findall(r' net="([^"]*)"', text))
    assert len(board.nets) == len(nets) == 514


def test_a_pair_is_where_the_text_says(board: Board) -> None:
    net = board.nets.index("REFCLK_P")
    first = np.flatnonzero(board.tracks.net == net)[0]
    assert board.tracks.start[first] == pytest.approx((10.807065 * 25.4, 13.799185 * 25.4), abs=1e-9)
    assert board.tracks.width[first] == pytest.approx(0.0055 * 25.4, abs=1e-12)
    assert board.tracks.layer[first] == 0


def test_a_net_stands_on_the_line_the_text_gives(board: Board, text: str) -> None:
    number = board.net_lines[board.nets.index("REFCLK_P")]
    lines = text.split("\n")
    assert any('net="REFCLK_P"' in near for near in lines[number - 3 : number + 1])


def test_parts_pins_and_values(board: Board) -> None:
    parts = {part.ref: (i, part) for i, part in enumerate(board.parts)}
    assert parts["C52"][1].value == "10NF"
    assert parts["C52"][1].side == "bottom"
    assert (board.pads.part == parts["U1"][0]).sum() == 576
    pin = next(i for i in range(len(board.pads)) if board.pads.part[i] == parts["C52"][0] and board.pads.pin[i] == "2")
    assert board.pads.at[pin] == pytest.approx((10.005045 * 25.4, 12.015265 * 25.4), abs=1e-9)
    assert board.pads.layer[pin] == 1
    assert board.nets[board.pads.net[pin]] == "GND"


def test_vias_have_their_pads_and_span(board: Board) -> None:
    assert set(np.unique(np.round(board.vias.drill / 25.4, 6))) == {0.010, 0.012}
    assert set(np.unique(np.round(board.vias.pad / 25.4, 6))) == {0.019, 0.026}
    assert (board.vias.first == 0).all()
    assert (board.vias.last == 1).all()
    assert np.isnan(board.vias.antipad).all()


def test_what_is_missing_is_said(board: Board) -> None:
    assert not board.complete
    assert board.missing == (
        "the file has no stackup: barrel lengths and impedances are unknown",
        "no copper layer between TOP and BOTTOM is in the file, yet 18 copper layers are drilled through",
        "the file was written for assembly, which may leave inner copper layers out",
    )


def test_a_bill_of_materials_is_no_board() -> None:
    with pytest.raises(BoardError) as caught:
        read(BILL.read_bytes())
    assert str(caught.value) == (
        "board.xml: the file holds no board copper (it was written for BOM); export the board with its copper layers"
    )
