"""Chain matrices: against the matrix exponential, and the laws that any passive reciprocal network obeys."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.linalg  # type: ignore[import-untyped]
from hypothesis import given, settings
from hypothesis import strategies as st

from pairrules.fields import chain_matrix
from pairrules.fields.chain_matrix import Complexes

L = np.array([[3.18e-7, 6.6e-8], [6.6e-8, 3.3e-7]])
C = np.array([[1.08e-10, -1.1e-11], [-1.1e-11, 1.0e-10]])


def modes(
    R: np.ndarray, G: np.ndarray, length: float, omega: np.ndarray, L: np.ndarray = L, C: np.ndarray = C
) -> tuple[Complexes, Complexes]:
    """Z and Y of a length in modes, from the matrices of the legs."""
    Z = (R + 1j * omega[:, None, None] * L) * length
    Y = (G + 1j * omega[:, None, None] * C) * length
    Y_modes = chain_matrix.shunt_modes(Y[:, 0, 0] + Y[:, 0, 1], Y[:, 1, 1] + Y[:, 0, 1], -Y[:, 0, 1])
    return chain_matrix.series_modes(Z[:, 0, 0], Z[:, 1, 1], Z[:, 0, 1]), Y_modes


def chain(length: float, omega: np.ndarray, R: np.ndarray | None = None, **matrices: np.ndarray) -> Complexes:
    R = np.diag([2.2, 1.8]) if R is None else R
    return chain_matrix.line(*modes(R, np.zeros((2, 2)), length, omega, **matrices))


def admittance(F: Complexes) -> Complexes:
    """Admittance matrix of the four ports from a chain matrix in legs, all currents into the network."""
    A, B, Cc, D = F[:2, :2], F[:2, 2:], F[2:, :2], F[2:, 2:]
    inverse = np.linalg.inv(B)
    return np.block([[D @ inverse, Cc - D @ inverse @ A], [-inverse, inverse @ A]])


positive = st.floats(0.1, 10.0)
share = st.floats(-0.9, 0.9)


@settings(max_examples=60, deadline=None)
@given(positive, positive, share, positive, positive, st.floats(0, 5), st.floats(0, 5), st.floats(-4, 0.5))
def test_a_line_is_the_matrix_exponential_of_its_length(
    l1: float, l2: float, k: float, c1: float, c2: float, r1: float, r2: float, decade: float
) -> None:
    # Telegrapher's equations d(V, I)/dx = −((0, Z), (Y, 0))(V, I); scipy sums the 4 × 4 exponential its own way.
    omega = np.array([10.0**decade])
    mutual, between = k * np.sqrt(l1 * l2), 0.5 * min(c1, c2)
    Lm, Cm = np.array([[l1, mutual], [mutual, l2]]), np.array([[c1 + between, -between], [-between, c2 + between]])
    R = np.diag([r1, r2])
    F = chain_matrix.to_legs(chain(1.0, omega, R, L=Lm, C=Cm))[0]
    exact = scipy.linalg.expm(
        np.block([[np.zeros((2, 2)), R + 1j * omega[0] * Lm], [1j * omega[0] * Cm, np.zeros((2, 2))]])
    )
    assert np.abs(F - exact).max() < 1e-11 * np.abs(exact).max()


def test_modes_of_the_same_speed_or_nearly_so_are_nothing_special() -> None:
    omega = 2 * np.pi * np.array([1e9])
    same_speed = np.linalg.inv(C) * 4e-17
    exactly = chain(1.0, omega, np.zeros((2, 2)), L=same_speed)
    for off in (1e-15, 1e-12, 1e-9):
        nearly = chain(1.0, omega, np.zeros((2, 2)), L=same_speed * (1 + np.array([[off, 0], [0, -off]])))
        assert np.abs(nearly - exactly).max() < 100 * (off + 1e-14) * np.abs(exactly).max()


def test_a_short_line_is_its_lumped_impedance_and_admittance() -> None:
    omega = 2 * np.pi * np.array([50.0, 1e3])
    Z, Y = modes(np.diag([2.2, 1.8]), np.zeros((2, 2)), 0.01, omega)
    F = chain_matrix.line(Z, Y)
    np.testing.assert_allclose(F[:, :2, 2:], Z, rtol=1e-9)
    np.testing.assert_allclose(F[:, 2:, :2], Y, rtol=1e-9)


def test_at_zero_frequency_only_resistance_is_left() -> None:
    F = chain_matrix.to_legs(chain(2.0, np.array([0.0])))[0]
    np.testing.assert_allclose(F, np.eye(4) + 2.0 * np.diag([2.2, 1.8], 2), rtol=1e-15)


def test_two_lengths_in_a_row_are_their_sum() -> None:
    omega = 2 * np.pi * np.geomspace(1e2, 3e9, 9)
    parts = chain_matrix.cascade(chain(0.3, omega), chain(0.5, omega), chain(0.2, omega))
    whole = chain(1.0, omega)
    assert np.abs(parts - whole).max() < 1e-12 * np.abs(whole).max()


def test_a_cascade_may_be_bracketed_at_will() -> None:
    omega = 2 * np.pi * np.array([1e8])
    a, b, c = (
        chain(0.3, omega),
        chain_matrix.series(chain_matrix.series_modes(3.0, 4.0j)),
        chain(0.7, omega, L=L[::-1, ::-1]),
    )
    left = chain_matrix.cascade(chain_matrix.cascade(a, b), c)
    right = chain_matrix.cascade(a, chain_matrix.cascade(b, c))
    np.testing.assert_allclose(left, right, rtol=1e-11)


@pytest.mark.parametrize("frequency", [50.0, 1e6, 1e9])
def test_reciprocity_and_passivity(frequency: float) -> None:
    # Reciprocal: the admittance matrix is symmetric. Passive: its hermitian part is positive semidefinite.
    omega = 2 * np.pi * np.array([frequency])
    F = chain_matrix.to_legs(
        chain_matrix.cascade(
            chain(0.3, omega),
            chain_matrix.shunt(chain_matrix.shunt_modes(1e-3, 2e-3 + 1e-4j, 5e-3)),
            chain_matrix.series(chain_matrix.series_modes(1.0 + 2j, 3.0 + 1j, 1j)),
        )
    )[0]
    Y = admittance(F)
    assert np.abs(Y - Y.T).max() < 1e-9 * np.abs(Y).max()
    assert np.linalg.eigvalsh((Y + Y.conj().T) / 2).min() > -1e-9 * np.abs(Y).max()


@settings(max_examples=40, deadline=None)
@given(positive, share, positive, st.floats(0, 5), st.floats(-4, 3))
def test_a_symmetric_line_never_mixes_the_modes(l1: float, k: float, c1: float, r1: float, decade: float) -> None:
    Lm, Cm = l1 * np.array([[1, k], [k, 1]]), c1 * np.array([[2.0, -1.0], [-1.0, 2.0]])
    F = chain(1.0, np.array([10.0**decade]), np.diag([r1, r1]), L=Lm, C=Cm)
    assert not F[0, [0, 0, 1, 1, 2, 2, 3, 3], [1, 3, 0, 2, 1, 3, 0, 2]].any()


def test_the_coupling_across_does_not_drown_the_leakage_to_reference() -> None:
    # 1 ohm across beside 1e12 and 1.01e12 ohm to reference: their difference keeps all its digits.
    Y = chain_matrix.shunt_modes(1e-12, 1 / 1.01e12, 1.0)
    np.testing.assert_allclose(Y[0, 1], (1e-12 - 1 / 1.01e12) / 2, rtol=1e-15)
    np.testing.assert_allclose(Y[1, 1], 1e-12 + 1 / 1.01e12, rtol=1e-15)


def test_a_kilometre_with_loss_keeps_its_attenuation() -> None:
    # Symmetric line: per mode cosh γl, with γ of each mode in closed form.
    omega = 2 * np.pi * np.array([1e7])
    Lm, Cm = np.array([[4e-7, 1e-7], [1e-7, 4e-7]]), np.array([[9e-11, -2e-11], [-2e-11, 9e-11]])
    F = chain(1000.0, omega, np.diag([0.5, 0.5]), L=Lm, C=Cm)[0]
    for place, inductance, capacitance in ((0, 3e-7, 11e-11), (1, 5e-7, 7e-11)):
        gamma = np.sqrt((0.5 + 1j * omega[0] * inductance) * (1j * omega[0] * capacitance))
        np.testing.assert_allclose(F[place, place], np.cosh(1000.0 * gamma), rtol=1e-9)


def test_no_frequency_gives_no_matrix() -> None:
    assert chain(1.0, np.zeros(0)).shape == (0, 4, 4)


def test_what_cannot_be_computed_is_refused() -> None:
    with pytest.raises(ValueError, match=r"^a line is longer than 2\^40 radians, too long to compute$"):
        chain(1e15, np.array([1e12]))
    with pytest.raises(ValueError, match=r"^a line's impedance times admittance is not finite$"):
        chain(1.0, np.array([np.nan]))
