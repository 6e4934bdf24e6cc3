"""Sections too flat, and lines too long, end in a sentence instead of filling the memory."""

from __future__ import annotations

import numpy as np
import pytest

from pairrules.balance.section_store import solved
from pairrules.fields import solve
from pairrules.fields.chain_matrix import RangeError, line
from pairrules.fields.cross_section import Conductor, CrossSection, Layer, Plane


def wide(width: float) -> CrossSection:
    """Two strips over a plane 0.2 mm below."""
    strips = ((-width - 0.1, -0.1, 0.2), (0.1, width + 0.1, 0.2))
    return CrossSection(
        conductors=tuple(
            Conductor(name=name, role="signal", strip=strip)
            for name, strip in zip(("plus", "minus"), strips, strict=True)
        ),
        layers=(Layer(y0=0.0, y1=0.2, er=4.2),),
        planes=(Plane(y=0.0),),
    )


def test_a_section_much_wider_than_high_is_not_solved() -> None:
    said = solved(wide(2000.0), {})
    assert said == "its copper is 20001 times as wide as high above its reference, beyond the 400 solved"
    assert not isinstance(solved(wide(2.0), {}), str)


def test_a_section_of_too_many_cells_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(solve, "MOST_CELLS", 10)
    with pytest.raises(ValueError, match="cells, more than 10: its copper is wide for its height"):
        solve.solve_section(wide(2.0))


@pytest.mark.parametrize("length", [1e20, 1e200])
def test_a_line_beyond_the_range_of_numbers_says_so(length: float) -> None:
    one = np.eye(2)
    with pytest.raises(RangeError):
        line(1j * 300.0 * length * one, 1j * 0.1 * length * one)
