"""A. S. Sedra and K. C. Smith, "Microelectronic Circuits": difference amplifier, exercise 2.15 and problem 2.67.

Numbering of those editions, formula from memory. The worst case is found anew from the nodal formula of the circuit.
"""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from pairrules.balance.load_models import load_model, resistor_conversion


def exact_worst_db(K: float, tolerance: float) -> float:
    """Least CMRR [dB] of v_o = v_2 (R4/(R3+R4))(1 + R2/R1) − v_1 R2/R1 over all 16 combinations of signs."""
    worst = 0.0
    for a, b, c, d in itertools.product((-1, 1), repeat=4):
        r1, r2, r3, r4 = 1 + a * tolerance, K * (1 + b * tolerance), 1 + c * tolerance, K * (1 + d * tolerance)
        plus, minus = r4 / (r3 + r4) * (1 + r2 / r1), r2 / r1
        worst = max(worst, abs((plus - minus) / ((plus + minus) / 2)))
    return float(-20 * np.log10(worst))


@pytest.mark.parametrize("K", [1.0, 10.0, 100.0])
@pytest.mark.parametrize("tolerance", [0.01, 0.001, 0.0001])
def test_four_resistors_at_their_worst(K: float, tolerance: float) -> None:
    found = -20 * np.log10(resistor_conversion(1.0, K, tolerance))
    assert found == pytest.approx(exact_worst_db(K, tolerance), abs=0.02)


def test_problem_2_67() -> None:
    load = load_model("difference-amplifier", {"r1": 1e3, "r2": 1e5, "tolerance": 0.01})
    found = load.own_rejection(50.0)
    assert found is not None
    assert found[0] == pytest.approx(68.05, abs=0.01)
    closer = load_model("difference-amplifier", {"r1": 1e3, "r2": 1e5, "tolerance": 0.002525}).own_rejection(50.0)
    assert closer is not None
    assert closer[0] == pytest.approx(80.0, abs=0.01)


def test_exercise_2_15() -> None:
    # R1 = R3 = 2 kohm, R2 = R4 = 200 kohm, 1 %: CMRR 68 dB.
    found = load_model("difference-amplifier", {"r1": 2e3, "r2": 2e5, "tolerance": 0.01}).own_rejection(1e3)
    assert found is not None
    assert found[0] == pytest.approx(68.0, abs=0.1)
