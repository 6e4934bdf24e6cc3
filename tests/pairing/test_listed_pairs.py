import pytest

from pairrules.errors import SettingsError
from pairrules.pairing.find_links import PairRequest
from tests.pairing.boards import board, padded
from tests.pairing.told import one, pairing, told


def test_pattern_of_the_users_own() -> None:
    nets = ["BUS1_A", "BUS1_B", "BUS2_A", "BUS2_B", "BUS3_A"]
    made = board({"U1": padded(nets), "J1": padded(nets)})
    links = told(made, listed=[PairRequest(plus="*_A", minus="*_B")])
    assert [(link.name, link.nets) for link in links] == [
        ("BUS1", ("BUS1_A", "BUS1_B")),
        ("BUS2", ("BUS2_A", "BUS2_B")),
    ]
    assert {link.found_by for link in links} == {"listed in the settings"}
    assert told(made) == []


def test_names_filled_by_the_stars() -> None:
    made = board({"U1": padded(["BUS1_A", "BUS1_B"])})
    assert one(made, listed=[PairRequest(plus="BUS*_A", minus="BUS*_B", name="field bus *")]).name == "field bus 1"


def test_a_named_request_goes_before_a_pattern() -> None:
    made = board({"U1": padded(["X_A", "X_B", "Y_B"])})
    listed = [PairRequest(plus="*_A", minus="*_B"), PairRequest(plus="X_A", minus="Y_B", name="ODD")]
    assert [(link.name, link.nets) for link in told(made, listed=listed)] == [("ODD", ("X_A", "Y_B"))]


def test_rails_may_be_listed() -> None:
    made = board({"U1": padded(["VDD_P", "VDD_N"])})
    assert one(made, listed=[PairRequest(plus="VDD_P", minus="VDD_N", name="FEED")]).name == "FEED"


def test_what_is_not_there_is_said() -> None:
    made = board({"U1": padded(["X_A", "X_B", "Y_B"])})
    listed = [
        PairRequest(plus="X_A", minus="Q", place="rules.yaml line 3"),
        PairRequest(plus="*_H", minus="*_L"),
        PairRequest(plus="X_A", minus="X_B"),
        PairRequest(plus="X_A", minus="Y_B"),
    ]
    assert pairing(made, listed=listed).missing == (
        "rules.yaml line 3: the board has no net Q, named in the pair X_A / Q",
        "no two nets fit the pair *_H / *_L",
        "the pair X_A / Y_B is listed, but one of its nets is in a pair listed before it",
    )


def test_one_link_listed_twice() -> None:
    made = board({"J1": ["A", "B"], "R1": ["A", "C"], "R2": ["B", "D"], "U1": ["C", "D", "GND"]})
    listed = [PairRequest(plus="A", minus="B", name="NEAR"), PairRequest(plus="C", minus="D", name="FAR")]
    found = pairing(made, listed=listed)
    assert [link.name for link in found.links] == ["NEAR"]
    assert found.missing == ("the listed pair FAR is the same link as NEAR and is reported as one with it",)


@pytest.mark.parametrize(
    ("request_", "line"),
    [
        (
            PairRequest(plus="*_A*", minus="*_B", place="line 4"),
            "line 4: *_A* has 2 stars and *_B has 1; give both the same number of stars; they match the same text",
        ),
        (
            PairRequest(plus="A", minus="A", place="line 5"),
            "line 5: plus and minus are both A; name the two nets of the pair",
        ),
    ],
)
def test_contradictory_requests(request_: PairRequest, line: str) -> None:
    with pytest.raises(SettingsError) as raised:
        pairing(board({"U1": ["A"]}), listed=[request_])
    assert str(raised.value) == line
