import numpy as np
import pytest

from pairrules.board import Area, Board
from pairrules.pairing.reference_nets import reference_nets
from tests.pairing.boards import board


def names(made: Board, globs: tuple[str, ...] | None = None) -> list[str]:
    return [made.nets[net] for net in reference_nets(made, globs)]


def test_globs_decide_alone() -> None:
    made = board({"U1": ["GND", "AGND", "AGND2", "VCC"]}, areas={"VCC": 9}, kinds={"GND": "ground"})
    assert names(made, ("AGND*", "VCC")) == ["AGND", "AGND2", "VCC"]
    assert names(made, ("X*",)) == []
    assert names(made, ()) == []


def test_kind_goes_before_name() -> None:
    made = board({"U1": ["GND", "RETURN"]}, kinds={"RETURN": "ground"}, areas={"GND": 9})
    assert names(made) == ["RETURN"]


def test_named_grounds_with_areas() -> None:
    made = board({"U1": ["GND", "AGND", "CHASSIS", "VCC", "GND_SENSE"]}, areas={"GND": 9, "AGND": 2, "VCC": 30})
    assert names(made) == ["AGND", "GND"]
    assert names(board({"U1": ["GND", "CHASSIS"]}, areas={"VCC": 30})) == ["CHASSIS", "GND"]


def test_a_net_the_file_calls_a_signal_is_no_ground() -> None:
    assert names(board({"U1": ["SHIELD", "GND"]}, kinds={"SHIELD": "signal"})) == ["GND"]


def test_most_copper_where_nothing_is_called_ground() -> None:
    made = board({"U1": ["A", "B"]}, areas={"A": 2, "B": 3})
    assert names(made) == ["B"]
    assert names(board({"U1": ["A", "B"]})) == []
    assert names(board({})) == []


@pytest.mark.parametrize(("hole", "winner"), [(1.0, "B"), (2.9, "A")])
def test_holes_are_taken_off(hole: float, winner: str) -> None:
    plain = board({"U1": ["A", "B"]}, areas={"A": 2, "B": 3})
    ring = np.array([[0, 0], [0, hole], [hole, hole], [hole, 0]], dtype=float)
    areas = tuple(
        Area(net=area.net, layer=0, outline=area.outline, holes=(ring,) if area.net == 1 else ())
        for area in plain.areas
    )
    made = Board(
        **{name: getattr(plain, name) for name in Board.__dataclass_fields__ if name not in {"copper", "areas"}},
        areas=areas,
    )
    assert names(made) == [winner]
