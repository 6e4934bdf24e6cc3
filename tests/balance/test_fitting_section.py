"""The width or gap that is named gives the impedance that is wanted when the board is drawn with it."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any, cast

import pytest

from pairrules.balance.drawn_section import Drawing, Leg
from pairrules.balance.fitting_section import STEP_MM, fitting_gap, fitting_width, impedance
from pairrules.balance.stack_heights import Heights, heights_of
from pairrules.pipeline import check
from pairrules.readers.plain_json import READER
from tests.balance.test_electrical import straight


def heights() -> Heights:
    return heights_of(READER.read(json.dumps(straight()).encode(), "board.json", "").stackup)


def drawing(width: float = 0.25, gap: float = 0.2, beside: tuple[tuple[float, float], ...] = ()) -> Drawing:
    legs = tuple(
        Leg(name=name, centre=side * (gap + width) / 2, width=width) for name, side in (("plus", -1), ("minus", 1))
    )
    return Drawing(
        heights=heights(), layer=0, legs=legs, beside=beside, planes=((1, ((-float("inf"), float("inf")),)),)
    )


@pytest.mark.parametrize("aim", [85.0, 100.0, 115.0])
def test_the_named_values_come_nearest_to_what_is_wanted(aim: float) -> None:
    given = drawing()
    band = (0.9 * aim, 1.1 * aim)
    for fitting, name in ((fitting_width, "width"), (fitting_gap, "gap")):
        found = fitting(given, aim, band)
        if found is None:
            # A gap alone moves the impedance little where the plane is near.
            assert fitting is fitting_gap and not (impedance(drawing(gap=0.05)) or 0) < aim < (
                impedance(drawing(gap=1.0)) or 0
            )
            continue
        exact = impedance(drawing(**cast("Any", {name: found.value_mm})))
        assert exact is not None and exact == pytest.approx(found.impedance_ohm, abs=1e-6)
        around = [impedance(drawing(**cast("Any", {name: found.value_mm + sign * STEP_MM}))) for sign in (-1, 1)]
        assert all(other is not None and abs(exact - aim) <= abs(other - aim) for other in around)


def test_nothing_is_named_that_leaves_the_band_or_has_no_room() -> None:
    assert fitting_width(drawing(), 100.0, (100.0001, 100.0002)) is None
    assert fitting_width(drawing(), 80.0, (79.0, 81.0)) is not None
    walled = drawing(beside=((-2.0, -0.41), (0.41, 2.0)))
    assert fitting_width(walled, 80.0, (79.0, 81.0)) is None
    assert fitting_gap(drawing(), 300.0, (290.0, 310.0)) is None


SETTINGS = """
extends: []
reference_nets: [GND]
classes: {lane: {match: ["IN"], limits: {pair-impedance: {target: 100 ohm, tolerance: 5 %}}}}
"""


def flagged(folder: Path, board: dict[str, Any]) -> str:
    (folder / "board.json").write_text(json.dumps(board))
    (folder / "pairrules.yaml").write_text(SETTINGS)
    (pair,) = check(folder / "board.json").pairs
    return "".join(finding.advice for finding in pair.findings)


@pytest.mark.parametrize("width", [0.15, 0.4])
def test_a_board_drawn_with_the_advised_width_or_gap_passes(tmp_path: Path, width: float) -> None:
    def drawn(width: float, gap: float) -> dict[str, Any]:
        board = straight(widths=(width, width))
        for at in (*board["tracks"][1]["points"], *(part["pins"][1]["at"] for part in board["parts"])):
            at[1] = width + gap
        return board

    advice = flagged(tmp_path, drawn(width, 0.2))
    found = dict(re.findall(r"a (width|gap) of ([\d.]+) mm would have", advice))
    assert "width" in found, advice
    assert flagged(tmp_path, drawn(float(found["width"]), 0.2)) == ""
    if "gap" in found:
        assert flagged(tmp_path, drawn(width, float(found["gap"]))) == ""
