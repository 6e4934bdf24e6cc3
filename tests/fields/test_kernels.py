"""Means over pairs of cells against numerical integration of the plain kernel, image by image."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
import pytest

from pairrules.fields.kernels import Surroundings, interaction

Complexes = npt.NDArray[np.complex128]
Floats = npt.NDArray[np.float64]

STARTS = np.array([-1.6 + 0.5j, 0.3 + 0.4j, 0.4 + 0.4j, 0.9 + 0.3j, 1.2 + 0.75j, -0.5 + 0.1j, 0.1 + 0.9j])
ENDS = np.array([-0.6 + 0.5j, 0.4 + 0.4j, 0.6 + 0.4j, 0.9 + 0.5j, 1.0 + 0.70j, 0.2 + 0.1j, 0.1 + 0.95j])
PLANES = [
    pytest.param(Surroundings(grounded=False), id="open"),
    pytest.param(Surroundings(grounded=True), id="one plane"),
    pytest.param(Surroundings(grounded=True, height=1.0), id="two planes"),
]


def charges(around: Surroundings) -> list[tuple[float, bool, float]]:
    """Sign, whether mirrored, and height by which each image is shifted."""
    if not around.grounded:
        return [(1.0, False, 0.0)]
    if around.height is None:
        return [(1.0, False, 0.0), (-1.0, True, 0.0)]
    shifts = [2.0 * around.height * n for n in range(-8, 9)]
    return [(1.0, False, s) for s in shifts] + [(-1.0, True, s) for s in shifts]


def by_quadrature(i: int, j: int, around: Surroundings) -> tuple[float, float]:
    """Potential and flux of cell j at cell i; the inner integral is analytic, the outer one Gauss's, 400 points.

    Of two planes' images those beyond the eighth are taken at the middle of the cells, as far as the twenty thousandth.
    """
    nodes, weights = np.polynomial.legendre.leggauss(400)
    share = (nodes + 1) / 2
    at = STARTS[i] + (ENDS[i] - STARTS[i]) * share
    potential = np.zeros(len(at))
    field = np.zeros(len(at), dtype=np.complex128)
    for sign, mirrored, shift in charges(around):
        a, b = (STARTS[j], ENDS[j]) if not mirrored else (STARTS[j].conj(), ENDS[j].conj())
        a, b = a + 1j * shift, b + 1j * shift
        unit = (b - a) / abs(b - a)
        local = (at - a) / unit
        length = abs(b - a)

        def primitive(x: float, local: Complexes = local) -> Floats:
            z = local - x
            return np.asarray(-(z * np.log(np.where(z == 0, 1, z)) - z).real)

        potential -= sign * (primitive(length) - primitive(0.0)) / length
        field += sign * np.log((at - a) / (at - b)) / (b - a)
    if around.height is not None:
        far = 2j * around.height * np.concatenate((np.arange(-20000, -8), np.arange(9, 20001)))
        here, there = (STARTS[i] + ENDS[i]) / 2, (STARTS[j] + ENDS[j]) / 2
        potential -= np.log(abs((here - there - far) / (here - there.conj() - far))).sum()
        field += (1 / (here - there - far) - 1 / (here - there.conj() - far)).sum()
    way = ENDS[i] - STARTS[i]
    return float(weights @ potential / 2), float(-(way * (weights @ field) / 2).imag)


@pytest.mark.parametrize("around", PLANES)
def test_means_are_those_of_numerical_integration(around: Surroundings) -> None:
    centre, way = (STARTS + ENDS) / 2, ENDS - STARTS
    every = np.arange(len(STARTS))
    (potential,), (flux,) = interaction(centre, way, len(STARTS), every, around)
    for i in range(len(STARTS)):
        for j in range(len(STARTS)):
            expected_potential, expected_flux = by_quadrature(i, j, around)
            assert potential[i, j] == pytest.approx(expected_potential, abs=4e-4), (i, j)
            if i != j:
                assert flux[i, j] == pytest.approx(expected_flux, abs=2e-3 * abs(way[i])), (i, j)


def test_two_pieces_of_a_cell_add_up_to_the_whole() -> None:
    """Charge spread over a cell is the charge spread over its halves; so is the flux through it."""
    centre = np.array([0.2 + 0.3j, 0.15 + 0.3j, 0.25 + 0.3j, 0.45 + 0.2j])
    way = np.array([0.2, 0.1, 0.1, 0.1j], dtype=np.complex128)
    for around in (Surroundings(grounded=False), Surroundings(grounded=True), Surroundings(grounded=True, height=0.5)):
        (potential,), (flux,) = interaction(centre, way, 4, np.arange(4), around)
        assert potential[3, 0] == pytest.approx((potential[3, 1] + potential[3, 2]) / 2, abs=1e-3)
        assert potential[0, 0] == pytest.approx(potential[1:3, 1:3].sum() / 4, abs=2e-4)
        assert flux[0, 3] == pytest.approx(flux[1, 3] + flux[2, 3], abs=1e-3)


@pytest.mark.parametrize("around", PLANES)
def test_flux_out_of_a_closed_box_is_the_charge_inside(around: Surroundings) -> None:
    corners = np.array([0.2 + 0.2j, 0.6 + 0.2j, 0.6 + 0.7j, 0.2 + 0.7j])
    cuts = np.linspace(0, 1, 9)[:-1]
    starts = np.concatenate([a + (b - a) * cuts for a, b in zip(corners, np.roll(corners, -1), strict=True)])
    ends = np.roll(starts, -1)
    inside, outside = np.array([0.35 + 0.4j]), np.array([0.9 + 0.4j])
    centre = np.concatenate(((starts + ends) / 2, inside, outside))
    way = np.concatenate((ends - starts, np.array([0.05, 0.05j])))
    _, (flux,) = interaction(centre, way, 0, np.arange(len(starts)), around)
    out = -flux.sum(axis=0)  # the box is walked counter-clockwise, so its inside lies left
    assert out[-2] == pytest.approx(2 * math.pi, rel=1e-4)
    assert out[-1] == pytest.approx(0.0, abs=2e-4)


def test_the_potential_vanishes_on_planes() -> None:
    centre = np.array([0.3 + 0.4j, 0.5 + 1e-9j, 0.5 + (1 - 1e-9) * 1j])
    way = np.array([0.1, 0.1, 0.1], dtype=np.complex128)
    (potential,), _ = interaction(centre, way, 3, np.arange(0), Surroundings(grounded=True, height=1.0))
    assert potential[0, 1] == pytest.approx(0.0, abs=1e-7)
    assert potential[0, 2] == pytest.approx(0.0, abs=1e-7)


def test_potentials_are_symmetric() -> None:
    rng = np.random.default_rng(5)
    centre: Complexes = (rng.uniform(0, 1, 300) + 1j * rng.uniform(0.05, 0.95, 300)).astype(np.complex128)
    way = (rng.uniform(0.001, 0.05, 300) * np.exp(1j * rng.choice([0.0, np.pi / 2, 0.3], 300))).astype(np.complex128)
    for around in (Surroundings(grounded=False), Surroundings(grounded=True), Surroundings(grounded=True, height=1.0)):
        (potential,), _ = interaction(centre, way, 300, np.arange(0), around)
        assert np.max(np.abs(potential - potential.T)) < 1e-9


@pytest.mark.parametrize("around", PLANES)
def test_images_in_an_axis_bring_what_such_cells_would(around: Surroundings) -> None:
    axis, count = 1.2, len(STARTS)
    centre, way = (STARTS + ENDS) / 2, ENDS - STARTS
    both = np.concatenate((centre, 2 * axis - centre.conj()))
    ways = np.concatenate((way, -way.conj()))
    (_, potential), (_, flux) = interaction(centre, way, count, np.arange(count), around, axis=axis)
    (of_all,), (flux_of_all,) = interaction(both, ways, 2 * count, np.arange(count), around)
    assert np.allclose(potential, of_all[:count, count:], rtol=0.0, atol=1e-12)
    assert np.allclose(flux, flux_of_all[:, count:], rtol=0.0, atol=1e-12)


def test_cells_a_thousand_heights_apart_do_not_overflow() -> None:
    centre = np.array([0.0 + 0.05j, 5000.0 + 0.05j])
    way = np.array([0.01, 0.01], dtype=np.complex128)
    (potential,), (flux,) = interaction(centre, way, 2, np.arange(2), Surroundings(grounded=True, height=0.1))
    assert np.all(np.isfinite(potential))
    assert np.all(np.isfinite(flux))
    assert potential[0, 1] == pytest.approx(0.0, abs=1e-12)
