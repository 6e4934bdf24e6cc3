"""Places written in the units of the file."""

from __future__ import annotations

import pytest

from pairrules.board.coordinates import coordinates, unit_name


@pytest.mark.parametrize(
    ("units", "expected"),
    [
        ("mm", "(12.7, 0.0) mm"),
        ("MILLIMETER", "(12.7, 0.0) mm"),
        ("INCH", "(0.5000, 0.0000) in"),
        ("in", "(0.5000, 0.0000) in"),
        ("mil", "(500.0, 0.0) mil"),
        ("um", "(12700, 0) um"),
        ("MICRON", "(12700, 0) um"),
    ],
)
def test_each_unit(units: str, expected: str) -> None:
    assert coordinates(12.7, -1e-9, units) == expected


def test_units_we_do_not_know_give_millimetres() -> None:
    assert unit_name("FURLONG") == "mm" and coordinates(1.2345678, -2.0, "") == "(1.235, -2.0) mm"
