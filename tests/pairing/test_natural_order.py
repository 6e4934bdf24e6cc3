import pytest

from pairrules.pairing.natural_order import natural_key


@pytest.mark.parametrize(
    ("earlier", "later"),
    [("U2", "U10"), ("LN1_TX", "LN10_TX"), ("A", "A1"), ("R02", "R2"), ("R2", "R03"), ("", "A"), ("1A", "A1")],
)
def test_order(earlier: str, later: str) -> None:
    assert natural_key(earlier) < natural_key(later)


def test_digits_without_limit() -> None:
    assert natural_key("N" + "9" * 6000) < natural_key("N1" + "0" * 6000)
