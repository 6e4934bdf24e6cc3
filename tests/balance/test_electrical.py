"""The electrical stage on small boards: against sections and links solved without a board, and closed forms."""

from __future__ import annotations

import json
import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from pairrules.balance.link_json import answer, read_link
from pairrules.fields.section_json import answer as solve_section_json
from pairrules.fields.section_json import read_sections
from pairrules.pipeline import check
from pairrules.result import PairResult

STACK = [
    {"name": "TOP", "kind": "copper", "thickness": 0.035},
    {"name": "D1", "kind": "dielectric", "thickness": 0.2, "permittivity": 4.2, "loss_tangent": 0.0},
    {"name": "GND", "kind": "copper", "thickness": 0.035},
]
LENGTH = 40.0

CLASS = """
classes:
  bridge:
    match: ["IN"]
    source: {kind: impedance, plus: 350 ohm, minus: 351 ohm}
    load:
      kind: impedance
      plus: {resistance: 1 Mohm, capacitance: 10 pF}
      minus: {resistance: 1 Mohm, capacitance: 12 pF}
      across: {resistance: 10 kohm}
      rejection: 100 dB
    frequencies: [50 Hz, 1 kHz, 1 MHz]
"""


def pin(number: str, net: str, x: float, y: float, layer: str = "TOP") -> dict[str, Any]:
    return {"pin": number, "net": net, "at": [x, y], "layer": layer, "pad": {"shape": "rect", "size": [0.2, 0.2]}}


def straight(*, shift: float = 0.0, widths: tuple[float, float] = (0.25, 0.25)) -> dict[str, Any]:
    """Two straight legs 0.45 mm apart over a whole plane; minus ends `shift` mm later."""
    ends = LENGTH + shift
    return {
        "pairrules_board": 1,
        "name": "weather buoy",
        "units": "mm",
        "stackup": STACK,
        "parts": [
            {"ref": "J1", "pins": [pin("1", "IN_P", 0, 0), pin("2", "IN_N", 0, 0.45)]},
            {"ref": "U1", "pins": [pin("1", "IN_P", LENGTH, 0), pin("2", "IN_N", ends, 0.45)]},
        ],
        "tracks": [
            {"net": "IN_P", "layer": "TOP", "width": widths[0], "points": [[0, 0], [LENGTH, 0]]},
            {"net": "IN_N", "layer": "TOP", "width": widths[1], "points": [[0, 0.45], [ends, 0.45]]},
        ],
        "areas": [{"net": "GND", "layer": "GND", "outline": [[-20, -20], [80, -20], [80, 20], [-20, 20]]}],
    }


def run(tmp_path: Path, board: dict[str, Any], settings: str = CLASS) -> PairResult:
    (tmp_path / "board.json").write_text(json.dumps(board))
    (tmp_path / "pairrules.yaml").write_text(settings)
    (found,) = check(tmp_path / "board.json").pairs
    return found


def section(widths: tuple[float, float] = (0.25, 0.25)) -> dict[str, Any]:
    def box(centre: float, width: float) -> list[list[float]]:
        x0, x1 = centre - width / 2, centre + width / 2
        return [[x0, 0.2], [x1, 0.2], [x1, 0.235], [x0, 0.235]]

    text = {
        "pairrules_section": 1,
        "unit": "mm",
        "layers": [{"y0": 0.0, "y1": 0.2, "er": 4.2}],
        "planes": [{"y": 0.0, "x": None}],
        "conductors": [
            {"name": "plus", "role": "signal", "polygon": box(0, widths[0])},
            {"name": "minus", "role": "signal", "polygon": box(0.45, widths[1])},
        ],
    }
    (found,) = read_sections(json.dumps(text), "section.json")
    return solve_section_json(found)


def test_impedance_and_delay_are_those_of_the_section(tmp_path: Path) -> None:
    pair, alone = run(tmp_path, straight()), section()
    assert pair.measures.impedance_diff_ohm == pytest.approx(alone["impedance_diff_ohm"], rel=1e-6)
    assert pair.measures.impedance_common_ohm == pytest.approx(alone["impedance_common_ohm"], rel=1e-6)
    L, C = (np.array(alone["pair"][name]) for name in ("L_nH_per_m", "C_pF_per_m"))
    # The odd mode travels with √(Ldd Cdd), Ldd = L11 + L22 − 2 L12, Cdd = (C11 + C22 − 2 C12)/4.
    delay = math.sqrt((L[0, 0] + L[1, 1] - 2 * L[0, 1]) * (C[0, 0] + C[1, 1] - 2 * C[0, 1]) / 4 * 1e-21)
    assert pair.measures.delay_plus_ps == pytest.approx(delay * LENGTH * 1e-3 * 1e12, rel=1e-6)
    assert pair.measures.delay_mismatch_ps == pytest.approx(0, abs=1e-9)


def test_mismatches_of_unequal_widths(tmp_path: Path) -> None:
    widths = (0.3, 0.2)
    pair, alone = run(tmp_path, straight(widths=widths)), section(widths)
    L, C = (np.array(alone["pair"][name]) for name in ("L_nH_per_m", "C_pF_per_m"))
    metres = LENGTH * 1e-3
    assert pair.measures.capacitance_mismatch_pf == pytest.approx(
        (C.sum(axis=1)[0] - C.sum(axis=1)[1]) * metres, rel=1e-5
    )
    assert pair.measures.inductance_mismatch_nh == pytest.approx((L[0, 0] - L[1, 1]) * metres, rel=1e-5)
    ohm = [1.7241e-8 * metres / (w * 0.035e-6) for w in widths]
    assert pair.measures.resistance_mismatch_ohm == pytest.approx(ohm[0] - ohm[1], rel=1e-9)


def test_balance_is_that_of_the_same_link_without_a_board(tmp_path: Path) -> None:
    pair, alone = run(tmp_path, straight()), section()
    L, C = (np.array(alone["pair"][name]) for name in ("L_nH_per_m", "C_pF_per_m"))
    link = {
        "pairrules_link": 1,
        "source": {"R": [350, 351]},
        "sections": [
            {
                "L": (L * 1e-9).tolist(),
                "C": (C * 1e-12).tolist(),
                "R": [1.7241e-8 / (0.25 * 0.035e-6)] * 2,
                "length": LENGTH * 1e-3,
            }
        ],
        "load": {"R_ground": [1e6, 1e6], "C_ground": [10e-12, 12e-12], "R_across": 1e4},
        "frequencies": [50, 1000, 1e6],
    }
    other = answer(read_link(link, solved={}))
    for mine, theirs in zip(pair.balance, other["results"], strict=True):
        assert mine.frequency_hz == theirs["frequency_hz"]
        assert mine.total_db == pytest.approx(theirs["conversion_db"], abs=0.001)
        assert mine.source_db == pytest.approx(theirs["source_db"], abs=0.001)
        assert mine.load_db == pytest.approx(theirs["load_db"], abs=0.001)
        own = abs(10 ** (mine.total_db / 20)) / 10 ** (theirs["differential_gain_db"] / 20)
        assert mine.rejection_db == pytest.approx(-20 * math.log10(own + 10 ** (-100 / 20)), abs=0.001)


def test_low_frequency_closed_form(tmp_path: Path) -> None:
    """Source: nodal analysis of two legs with a resistor across (elementary), no line at all."""
    pair = run(tmp_path, straight())
    plus, minus = (1e-6 + 2j * math.pi * 50 * c for c in (10e-12, 12e-12))
    a = np.array([[1 / 350 + plus + 1e-4, -1e-4], [-1e-4, 1 / 351 + minus + 1e-4]])
    volts = np.linalg.solve(a, [1 / 350, 1 / 351])
    assert pair.balance[0].total_db == pytest.approx(20 * math.log10(abs(volts[0] - volts[1])), abs=0.005)


def test_pure_skew_converts_as_the_sine_of_half_its_phase(tmp_path: Path) -> None:
    """Legs far apart, matched at both ends: |V_d/V_c| = |sin(π f Δt)| of the common voltage that arrives (F12)."""
    board = straight(shift=5.0)
    for track in board["tracks"]:
        track["points"] = [[x, 12 * y / 0.45] for x, y in track["points"]]
    for part in board["parts"]:
        for own in part["pins"]:
            own["at"][1] *= 12 / 0.45
    delay = run(tmp_path, board).measures.delay_mismatch_ps
    assert delay is not None and delay < 0
    impedance = single_ohm()
    text = CLASS.replace("50 Hz, 1 kHz, 1 MHz", "300 MHz").replace(
        "plus: 350 ohm, minus: 351 ohm", f"plus: {impedance} ohm"
    )
    text = text.replace("plus: {resistance: 1 Mohm, capacitance: 10 pF}", f"plus: {{resistance: {impedance} ohm}}")
    text = text.replace("minus: {resistance: 1 Mohm, capacitance: 12 pF}", f"minus: {{resistance: {impedance} ohm}}")
    text = text.replace("      across: {resistance: 10 kohm}\n", "")
    found = run(tmp_path, board, text).balance[0]
    # Half the e.m.f. arrives on each matched leg, so V_d = |1 − e^(−jφ)|/2 = |sin(φ/2)| with φ = 2π f Δt.
    expected = abs(math.sin(math.pi * 300e6 * delay * 1e-12))
    assert found.total_db == pytest.approx(20 * math.log10(expected), abs=0.15)
    assert found.trace_db == pytest.approx(found.total_db, abs=1e-6)


def single_ohm() -> float:
    text = {
        "pairrules_section": 1,
        "unit": "mm",
        "layers": [{"y0": 0.0, "y1": 0.2, "er": 4.2}],
        "planes": [{"y": 0.0, "x": None}],
        "conductors": [
            {"name": "plus", "role": "signal", "polygon": [[0, 0.2], [0.25, 0.2], [0.25, 0.235], [0, 0.235]]}
        ],
    }
    (found,) = read_sections(json.dumps(text), "section.json")
    solved = solve_section_json(found)
    c, air = solved["C_pF_per_m"][0][0] * 1e-12, solved["Cair_pF_per_m"][0][0] * 1e-12
    return 1 / (299792458.0 * math.sqrt(c * air))


def test_swapping_the_legs_changes_no_magnitude(tmp_path: Path) -> None:
    board = straight(shift=2.0, widths=(0.3, 0.2))
    swapped = json.loads(json.dumps(board).replace("IN_P", "IN_X").replace("IN_N", "IN_P").replace("IN_X", "IN_N"))
    first = run(tmp_path, board, CLASS.replace("minus: 351", "minus: 350").replace("12 pF", "10 pF"))
    second = run(tmp_path, swapped, CLASS.replace("minus: 351", "minus: 350").replace("12 pF", "10 pF"))
    for a, b in zip(first.balance, second.balance, strict=True):
        assert a.total_db == pytest.approx(b.total_db, abs=0.02)
    assert first.measures.delay_mismatch_ps == pytest.approx(-(second.measures.delay_mismatch_ps or 0), rel=1e-3)


def test_a_symmetric_link_converts_nothing(tmp_path: Path) -> None:
    pair = run(tmp_path, straight(), CLASS.replace("minus: 351", "minus: 350").replace("12 pF", "10 pF"))
    assert all(point.total_db is not None and point.total_db < -200 for point in pair.balance)


def test_without_a_stackup_electrical_figures_are_unknown_and_said_to_be(tmp_path: Path) -> None:
    board = straight()
    board["stackup"] = [{"name": "TOP", "kind": "copper"}, {"name": "GND", "kind": "copper"}]
    pair = run(tmp_path, board)
    assert pair.measures.impedance_diff_ohm is None and pair.measures.delay_plus_ps is None
    assert pair.balance == ()
    assert any("stackup" in sentence and "settings" in sentence for sentence in pair.missing)


def test_settings_give_the_stackup_that_the_file_lacks(tmp_path: Path) -> None:
    board = straight()
    board["stackup"] = [{"name": "TOP", "kind": "copper"}, {"name": "GND", "kind": "copper"}]
    stack = """stackup:
  - {name: TOP, kind: copper, thickness: 35 um}
  - {name: D1, kind: dielectric, thickness: 0.2 mm, permittivity: 4.2, loss_tangent: 0}
  - {name: GND, kind: copper, thickness: 35 um}
"""
    given = run(tmp_path, board, stack + CLASS)
    known = run(tmp_path, straight())
    assert given.measures == known.measures
    assert given.balance == known.balance


def test_series_capacitors_and_bias_resistors_of_the_board_count(tmp_path: Path) -> None:
    """Unlike coupling capacitors into 100 kohm: |V_d/V_c| of two RC high-passes (F21's exact form)."""
    parts = [
        {"ref": "J1", "pins": [pin("1", "IN_P", 0, 0), pin("2", "IN_N", 0, 0.45)]},
        {"ref": "C1", "value": "1uF", "pins": [pin("1", "IN_P", 10, 0), pin("2", "INC_P", 11, 0)]},
        {"ref": "C2", "value": "1.2uF", "pins": [pin("1", "IN_N", 10, 0.45), pin("2", "INC_N", 11, 0.45)]},
        {"ref": "R1", "value": "100k", "pins": [pin("1", "INC_P", 20, 0), pin("2", "GND", 20, -1)]},
        {"ref": "R2", "value": "100k", "pins": [pin("1", "INC_N", 20, 0.45), pin("2", "GND", 20, 2)]},
        {"ref": "U1", "pins": [pin("1", "INC_P", LENGTH, 0), pin("2", "INC_N", LENGTH, 0.45)]},
    ]
    board = straight()
    board["parts"] = parts
    board["tracks"] = [
        {"net": net, "layer": "TOP", "width": 0.25, "points": [[a, y], [b, y]]}
        for net, a, b, y in (
            ("IN_P", 0, 10, 0),
            ("IN_N", 0, 10, 0.45),
            ("INC_P", 11, LENGTH, 0),
            ("INC_N", 11, LENGTH, 0.45),
        )
    ]
    text = CLASS.replace("kind: impedance, plus: 350 ohm, minus: 351 ohm", "kind: impedance, plus: 1 mohm")
    start = text.index("    load:")
    text = text[:start] + "    load: {kind: instrumentation-amplifier, resistance: 1 Tohm}\n    frequencies: [50 Hz]\n"
    found = run(tmp_path, board, text)
    assert [part.ref for part in found.series] == ["C1", "C2"]
    s = 2j * math.pi * 50 * 1e5
    volts = [s * c / (1 + s * c) for c in (1e-6, 1.2e-6)]
    assert found.balance[0].total_db == pytest.approx(20 * math.log10(abs(volts[0] - volts[1])), abs=0.01)
    assert found.balance[0].trace_db == pytest.approx(found.balance[0].total_db or 0, abs=0.01)


def test_values_that_the_settings_give_win_and_protection_capacitance_counts(tmp_path: Path) -> None:
    """1 nF on plus alone behind 1 kohm: |V_d/V_c| = |1 - 1/(1 + jωRC)| with nothing else on the pair."""
    board = straight()
    board["parts"].append({"ref": "D1", "value": "5V0", "pins": [pin("1", "IN_P", 20, 0), pin("2", "GND", 20, -3)]})
    text = CLASS.replace("plus: 350 ohm, minus: 351 ohm", "plus: 1 kohm")
    start = text.index("    load:")
    text = text[:start] + "    load: {kind: instrumentation-amplifier, resistance: 1 Tohm}\n    frequencies: [1 kHz]\n"
    assert run(tmp_path, board, text).balance[0].total_db == pytest.approx(-400, abs=250)
    found = run(tmp_path, board, "part_values: {D1: 1 nF}\n" + text)
    expected = abs(1 - 1 / (1 + 2j * math.pi * 1e3 * 1e3 * 1e-9))
    assert found.balance[0].total_db == pytest.approx(20 * math.log10(expected), abs=0.05)


def test_tolerances_are_told_at_worst_and_as_a_bound(tmp_path: Path) -> None:
    """Source legs of 350 ohm ± 1 % are at worst 7 ohm apart; nodal analysis of just that (elementary)."""
    text = CLASS.replace("plus: 350 ohm, minus: 351 ohm", "plus: 350 ohm, tolerance: 1 %").replace("12 pF", "10 pF")
    (first, *_) = run(tmp_path, straight(), text).balance
    a = np.array([[1 / 353.5 + 1e-6 + 1e-4, -1e-4], [-1e-4, 1 / 346.5 + 1e-6 + 1e-4]])
    volts = np.linalg.solve(a, [1 / 353.5, 1 / 346.5])
    assert first.worst_db == pytest.approx(20 * math.log10(abs(volts[0] - volts[1])), abs=0.02)
    assert first.bound_95_db is not None and first.total_db is not None and first.worst_db is not None
    assert first.total_db < first.bound_95_db < first.worst_db
    assert all(point.worst_db is None for point in run(tmp_path, straight()).balance)


def test_a_swinging_neighbour_finds_source_and_load_in_parallel(tmp_path: Path) -> None:
    """ΔC R dV/dt (F11): with a load like the source the voltage is half of that into a high input."""
    board = straight()
    for part in board["parts"]:
        x = part["pins"][0]["at"][0]
        part["pins"].append(pin("9", "SPI_CK", x, -0.5))
    board["tracks"].append({"net": "SPI_CK", "layer": "TOP", "width": 0.25, "points": [[0, -0.5], [LENGTH, -0.5]]})
    text = CLASS[: CLASS.index("    load:")].replace("plus: 350 ohm, minus: 351 ohm", "plus: 50 ohm")
    text += "    pickup: {aggressors: [{net: SPI_CK, swing: 3.3 V, rise_time: 50 ns}]}\n    frequencies: [1 kHz]\n"
    text += "    limits: {pickup-electric: {most: 1 nV}}\n"
    volts = []
    for ohm in ("1 Gohm", "50 ohm"):
        pair = run(tmp_path, board, text + f"    load: {{kind: instrumentation-amplifier, resistance: {ohm}}}\n")
        (found,) = (one for one in pair.findings if one.rule == "pickup-electric")
        assert found.measured is not None
        volts.append(found.measured)
    assert volts[0] == pytest.approx(2 * volts[1], rel=1e-3)
