import pytest

from pairrules.pairing.net_patterns import filled, matches, starred


@pytest.mark.parametrize(
    ("name", "pattern", "fits"),
    [
        ("RESET_N", "RESET_N", True),
        ("CS0_N", "CS*_N", True),
        ("CS0_P", "CS*_N", False),
        ("cs0_N", "CS*_N", False),
        ("D[0]", "D[0]", True),
        ("D[0]", "D[*]", True),
        ("D0", "D[0]", False),
        ("WR*", "WR*", True),
        ("A1", "A?", True),
        ("A12", "A?", False),
        ("A.B", "A?B", True),
        ("AxB", "A.B", False),
    ],
)
def test_matches(name: str, pattern: str, fits: bool) -> None:
    assert matches(name, pattern) is fits


def test_stars_take_the_rightmost_place() -> None:
    assert starred("A_P_P", "*_P*") == ("A_P", "")
    assert starred("A_N", "*_P") is None


def test_filled_is_the_inverse_of_starred() -> None:
    texts = starred("BUS3_A_F", "BUS*_A*")
    assert texts is not None
    assert filled("BUS*_A*", texts) == "BUS3_A_F"
    assert filled("BUS*_B*", texts) == "BUS3_B_F"
    with pytest.raises(ValueError, match="has 1 stars, 2 texts are given"):
        filled("*_B", texts)
