"""Quantities written are read as what they were."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairrules.board.units import DIMENSIONS, example, quantity
from pairrules.settings.written import written


@pytest.mark.parametrize(
    ("value", "dimension", "text"),
    [
        (62.5e6, "frequency", "62.5 MHz"),
        (0.02, "share", "2 %"),
        (2e-5, "share", "20 ppm"),
        (6e-11, "capacitance per length", "60 pF/m"),
        (350.0, "resistance", "350 ohm"),
        (0.09, "resistance per length", "90 mohm/m"),
        (25000.0, "time", "25 ns"),
        (0.0, "capacitance", "0 F"),
        (-30.0, "ratio", "-30 dB"),
        (100.0, "area", "100 mm2"),
        (999.5, "length", "999.5 mm"),
        (3000.0, "length", "3 m"),
        (2.0, "count", "2"),
        (0.999999, "resistance", "999.999 mohm"),
    ],
)
def test_as_a_user_writes_it(value: float, dimension: str, text: str) -> None:
    assert written(value, dimension) == text


@given(st.sampled_from(sorted(DIMENSIONS)), st.floats(1e-13, 1e13), st.booleans())
def test_reading_gives_it_back_to_six_digits(dimension: str, value: float, negative: bool) -> None:
    value = -value if negative else value
    assert quantity(written(value, dimension), dimension) == pytest.approx(value, rel=1e-5)


@pytest.mark.parametrize("dimension", sorted(DIMENSIONS))
def test_every_dimension_has_an_example_that_can_be_read(dimension: str) -> None:
    assert quantity(example(dimension), dimension) > 0
