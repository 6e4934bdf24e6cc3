"""H. W. Ott, "Electromagnetic Compatibility Engineering", Wiley 2009: balancing (chapter 4) and pickup (chapter 2).

From memory; the book prints 60 dB for the first row of the table, all other figures are recomputed from its formulas.
"""

from __future__ import annotations

import numpy as np
import pytest

from pairrules.balance.conversion import decibel, solve
from pairrules.balance.networks import Element, Series, Shunt
from pairrules.balance.pickup import edge_pickup, flux_density, magnetic_pickup

SOURCE_IMBALANCE_CH_4 = [
    # Z_c per leg, Z_s per leg, ΔR_s, rejection [dB]
    (10e3, 0.0, 10.0, 60.01),
    (10e3, 600.0, 10.0, 61.02),
    (20e3, 0.0, 10.0, 66.02),
    (10e6, 0.0, 10.0, 120.0),
    (50e6, 0.0, 10.0, 133.98),
]


@pytest.mark.parametrize(("z_c", "z_s", "difference", "rejection"), SOURCE_IMBALANCE_CH_4)
def test_source_imbalance(z_c: float, z_s: float, difference: float, rejection: float) -> None:
    link: list[Element] = [
        Series(cause="source", resistance=(z_s + difference, z_s)),
        Shunt(cause="load", resistance=(z_c, z_c)),
    ]
    assert -decibel(solve(link, 50.0).conversion)[0] == pytest.approx(rejection, abs=0.006)


@pytest.mark.parametrize(
    ("resistance", "difference", "frequency", "expected"),
    [
        (75.0, 10e-12, 10e3, -86.5),
        (300.0, 50e-12, 20e3, -54.5),
        (1e3, 10e-12, 60.0, -108.5),
        (10e3, 5e-12, 60.0, -94.5),
    ],
)
def test_unequal_capacitance_to_reference(
    resistance: float, difference: float, frequency: float, expected: float
) -> None:
    # |V_d/V_c| ≈ 2πf R |C_1 − C_2|, a winding's or an input's alike.
    link: list[Element] = [
        Series(cause="source", resistance=(resistance, resistance)),
        Shunt(cause="load", capacitance=(20e-12 + difference, 20e-12)),
    ]
    assert decibel(solve(link, frequency).conversion)[0] == pytest.approx(expected, abs=0.06)


def test_uneven_phantom_feeds() -> None:
    # Z_s/Z_c · ΔZ_c/Z_c: 100 ohm, 6.81 kohm, 0.4 %: 84.6 dB to first order; the divider itself takes 0.25 dB more.
    link: list[Element] = [
        Series(cause="source", resistance=(100.0, 100.0)),
        Shunt(cause="load", resistance=(6810.0 * 1.002, 6810.0 * 0.998)),
    ]
    assert -decibel(solve(link, 1e3).conversion)[0] == pytest.approx(84.6, abs=0.3)


def test_unlike_coupling_capacitors() -> None:
    # (f_c/f)(ΔC/C) with 1 µF ±10 % into 100 kohm per leg: −43.84 dB at 50 Hz, −69.86 dB at 1 kHz; exact network below.
    link: list[Element] = [
        Series(cause="source", resistance=(0.0, 0.0)),
        Series(cause="trace", capacitance=(1.1e-6, 0.9e-6)),
        Shunt(cause="load", resistance=(1e5, 1e5)),
    ]
    found = decibel(solve(link, [50.0, 1e3]).conversion)
    # 2·0.1/(1 − 0.01) rather than 0.2: 0.09 dB more than first order.
    np.testing.assert_allclose(found, [-43.84, -69.86], atol=0.1)


def test_magnetic_pickup_ch_2() -> None:
    # 1 cm² across 1, 3, 10, 30 A/m at 50 Hz: 0.0395, 0.118, 0.395, 1.184 µV.
    for field, expected in ((1, 0.0395e-6), (3, 0.118e-6), (10, 0.395e-6), (30, 1.184e-6)):
        found = magnetic_pickup(flux_density(field), (0.0, 0.0, 1e-4), 50.0)[0]
        assert found == pytest.approx(expected, rel=5e-3)


def test_electric_pickup_of_an_edge_ch_2() -> None:
    # ΔC · R · dV/dt: 0.05 pF, 50 ohm, 3.3 V in 1 ns: 8.25 mV.
    assert edge_pickup(3.3, 1e-9, (0.10e-12, 0.05e-12), (50.0, 50.0)) == pytest.approx(8.25e-3, rel=1e-6)
