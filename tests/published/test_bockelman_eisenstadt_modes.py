"""Mixed-mode scattering parameters, D. E. Bockelman and W. R. Eisenstadt, "Combined differential and common-mode
scattering parameters: theory and simulation", IEEE Trans. Microwave Theory Tech. 43 (1995) 1530 (from memory), as the
scikit-rf library computes them from the single-ended parameters of two lines.

Between 50 ohm on every leg the voltage between the load's nodes for 1 V of common e.m.f. is S_dc21, and for 1 V of
differential e.m.f. S_dd21/2: the modes' reference impedances are 100 and 25 ohm.
"""

from __future__ import annotations

import numpy as np
import pytest

from pairrules.balance.conversion import decibel, solve
from pairrules.balance.networks import Element, Line, Series, Shunt

skrf = pytest.importorskip("skrf")

FREQUENCIES = np.array([1e6, 1e8, 1e9, 2.5e9])


def mixed_mode(plus_m: float, minus_m: float, z_plus: float, z_minus: float, delay: float) -> np.ndarray:
    frequency = skrf.Frequency.from_f(FREQUENCIES, unit="Hz")
    legs = []
    for length, z in ((plus_m, z_plus), (minus_m, z_minus)):
        gamma = 1j * 2 * np.pi * FREQUENCIES * delay
        medium = skrf.media.DefinedGammaZ0(frequency, gamma=gamma, z0=z, z0_port=50.0)
        legs.append(medium.line(length, "m"))
    s = np.zeros((len(FREQUENCIES), 4, 4), dtype=complex)  # ports: plus in, minus in, plus out, minus out
    for i, leg in enumerate(legs):
        s[:, i::2, i::2] = leg.s
    pair = skrf.Network(frequency=frequency, s=s, z0=50.0)
    pair.se2gmm(p=2)  # ports: differential in, differential out, common in, common out
    return np.asarray(pair.s)


@pytest.mark.parametrize(("z_plus", "z_minus", "minus_m"), [(50.0, 50.0, 0.103), (45.0, 55.0, 0.1), (48.0, 60.0, 0.11)])
def test_lines_of_two_lengths_and_impedances(z_plus: float, z_minus: float, minus_m: float) -> None:
    delay = 6.671e-9
    S = mixed_mode(0.1, minus_m, z_plus, z_minus, delay)
    link: list[Element] = [
        Series(cause="source", resistance=(50.0, 50.0)),
        Line(
            cause="trace",
            inductance=np.diag([z_plus, z_minus]) * delay,
            capacitance=np.diag([1 / z_plus, 1 / z_minus]) * delay,
            lengths=(0.1, minus_m),
        ),
        Shunt(cause="load", resistance=(50.0, 50.0)),
    ]
    found = solve(link, FREQUENCIES)
    np.testing.assert_allclose(found.conversion, S[:, 1, 2], rtol=1e-6, atol=1e-12)
    np.testing.assert_allclose(found.gain, S[:, 1, 0] / 2, rtol=1e-6)


@pytest.mark.parametrize(
    ("skew_ps", "frequency", "printed_db"),
    [(10, 1e9, -30.05), (100, 240e6, -22.44), (5, 2.5e9, -28.11), (7.5, 240e6, -44.95)],
)
def test_skew_of_matched_legs(skew_ps: float, frequency: float, printed_db: float) -> None:
    # From the same definitions: |S_cd21| = sin(πfΔτ), |S_cd21/S_dd21| = tan(πfΔτ) for matched legs without loss.
    delay, z = 6.671e-9, 50.0
    legs = Line(
        cause="trace",
        inductance=np.diag([z, z]) * delay,
        capacitance=np.diag([1 / z, 1 / z]) * delay,
        lengths=(0.05 + skew_ps * 1e-12 / delay, 0.05),
    )
    link: list[Element] = [Series(cause="source", resistance=(z, z)), legs, Shunt(cause="load", resistance=(z, z))]
    found = solve(link, frequency)
    angle = np.pi * frequency * skew_ps * 1e-12
    np.testing.assert_allclose(np.abs(found.conversion), np.sin(angle), rtol=1e-9)
    ratio = decibel(found.conversion / (2 * found.gain))
    np.testing.assert_allclose(ratio, printed_db, atol=0.006)
