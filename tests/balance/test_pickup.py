"""Pickup: laws of direction and sign, and the limits of the closed forms."""

from __future__ import annotations

import numpy as np
import pytest

from pairrules.balance.pickup import MU_0, edge_pickup, electric_pickup, flux_density, magnetic_pickup


def test_flux_of_one_ampere_a_metre() -> None:
    assert flux_density(1.0) == MU_0 == pytest.approx(4e-7 * np.pi, rel=1e-9)


def test_a_field_in_the_plane_of_the_loop_gives_nothing() -> None:
    area = (0.0, 0.0, 1e-4)
    assert magnetic_pickup(1e-6, area, 50.0, direction=(1.0, 0.0, 0.0))[0] == 0.0
    along = magnetic_pickup(1e-6, area, 50.0, direction=(0.0, 0.0, -3.0))
    np.testing.assert_allclose(along, magnetic_pickup(1e-6, area, 50.0))
    tilted = magnetic_pickup(1e-6, area, 50.0, direction=(0.0, 1.0, 1.0))
    np.testing.assert_allclose(tilted, along / np.sqrt(2))


def test_the_worst_direction_is_no_less_than_any() -> None:
    area = (1e-5, -2e-5, 3e-5)
    worst = magnetic_pickup(1e-6, area, 50.0)[0]
    turned = np.random.default_rng(1).normal(size=(200, 3))
    found = [magnetic_pickup(1e-6, area, 50.0, direction=tuple(one))[0] for one in turned]
    assert worst * 0.95 < max(found) <= worst


def test_a_direction_needs_a_length() -> None:
    with pytest.raises(ValueError, match=r"^a field's direction has a length$"):
        magnetic_pickup(1e-6, (0.0, 0.0, 1e-4), 50.0, direction=(0.0, 0.0, 0.0))


def test_swing_through_equal_capacitances_cancels_exactly() -> None:
    assert electric_pickup(3.3, (1e-13, 1e-13), (50.0, 50.0), [1e6])[0] == 0
    assert edge_pickup(3.3, 1e-9, (1e-13, 1e-13), (50.0, 50.0)) == 0


def test_at_low_frequency_the_dividers_are_their_slopes() -> None:
    found = electric_pickup(3.3, (1e-13, 5e-14), (50.0, 60.0), [1e6])[0]
    assert found == pytest.approx(1j * 2 * np.pi * 1e6 * 3.3 * (5e-12 - 3e-12), rel=1e-4)


def test_at_high_frequency_both_legs_follow_the_neighbour() -> None:
    assert abs(electric_pickup(1.0, (1e-9, 2e-9), (1e6, 1e6), [1e9])[0]) < 1e-6


def test_an_edge_on_one_leg_alone() -> None:
    # R C dV/dt (1 − e^(−t_r/RC)), RC as long as the edge.
    assert edge_pickup(1.0, 1e-9, (1e-12, 0.0), (1e3, 1e3)) == pytest.approx(1 - np.exp(-1), rel=1e-12)


@pytest.mark.parametrize("rise", [2e-10, 2e-9, 2e-8])
def test_the_greatest_difference_comes_after_the_edge(rise: float) -> None:
    # Brute force over time: the ramp's answer, less the same a rise time later.
    t = np.linspace(0, rise + 2e-8, 200_001)
    legs = []
    for tau in (1e-9, 3e-9):
        ramp = tau * -np.expm1(-t / tau)
        later = tau * -np.expm1(-np.maximum(t - rise, 0) / tau)
        legs.append((ramp - later) / rise)
    found = edge_pickup(1.0, rise, (3e-12, 1e-12), (1e3, 1e3))
    assert found == pytest.approx(np.abs(legs[0] - legs[1]).max(), rel=1e-6)
