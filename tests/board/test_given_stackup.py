"""A stackup given by the project stands where the file has none; what the file says stays."""

from __future__ import annotations

from dataclasses import replace

import pytest

from pairrules.board import Board, Layer, Stackup
from pairrules.board.given_stackup import with_stackup
from tests.geometry.small_boards import board, track

COPPER = [{"name": "TOP", "kind": "copper"}, {"name": "BOT", "kind": "copper"}]
GIVEN = (
    Layer(name="TOP", kind="copper", thickness_mm=0.035),
    Layer(name="D1", kind="dielectric", thickness_mm=0.2, permittivity=4.2),
    Layer(name="IN1", kind="copper", thickness_mm=0.018),
    Layer(name="D2", kind="dielectric", thickness_mm=1.0, permittivity=4.2),
    Layer(name="BOT", kind="copper", thickness_mm=0.035),
)


def bare() -> Board:
    return board(
        stackup=COPPER,
        tracks=[track("A", [0, 0], [1, 0]), track("A", [0, 0], [1, 0], layer="BOT")],
        vias=[{"net": "A", "at": [0, 0], "from": "TOP", "to": "BOT", "drill": 0.3, "pad": 0.6}],
        areas=[{"net": "A", "layer": "BOT", "outline": [[0, 0], [1, 0], [1, 1]]}],
        parts=[{"ref": "J1", "pins": [{"pin": "1", "net": "A", "at": [0, 0], "layer": "all", "drill": 0.5}]}],
    )


def test_layers_the_file_lacks_come_between() -> None:
    got = with_stackup(bare(), GIVEN)
    assert got.copper == ("TOP", "IN1", "BOT")
    assert got.tracks.layer.tolist() == [0, 2]
    assert (got.vias.first.tolist(), got.vias.last.tolist()) == ([0], [2])
    assert got.areas[0].layer == 2 and got.pads.layer.tolist() == [-1]
    assert got.stackup.barrel_mm(0, 2) == pytest.approx(0.2 + 0.018 + 1.0 + 0.035)


def test_what_the_file_says_stays() -> None:
    own = Stackup(
        layers=(
            Layer(name="TOP", kind="copper", thickness_mm=0.07),
            Layer(name="D1", kind="dielectric", thickness_mm=0.5),
            Layer(name="BOT", kind="copper"),
        )
    )
    got = with_stackup(replace(bare(), stackup=own), GIVEN).stackup.layers
    assert [layer.thickness_mm for layer in got] == [0.07, 0.5, 0.035]
    assert got[1].permittivity == 4.2


def test_a_copper_thickness_of_the_file_stays_where_it_has_no_dielectric() -> None:
    own = Stackup(layers=(Layer(name="TOP", kind="copper", thickness_mm=0.07), Layer(name="BOT", kind="copper")))
    assert with_stackup(replace(bare(), stackup=own), GIVEN).stackup.layers[0].thickness_mm == 0.07


def test_other_copper_layers_are_refused() -> None:
    with pytest.raises(ValueError, match=r"^the stackup has no copper layer 'BOT', which the board has$"):
        with_stackup(bare(), GIVEN[:3])
    with pytest.raises(ValueError, match=r"^the stackup has the copper layers in another order than the board"):
        with_stackup(bare(), tuple(reversed(GIVEN)))
