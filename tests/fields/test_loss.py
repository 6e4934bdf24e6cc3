"""Resistance and conductance: limits at low and high frequency, and laws. Published values:
tests/published/test_textbook_wires.py.
"""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest

from pairrules.fields.cross_section import CrossSection, Plane
from pairrules.fields.loss import conductance, resistance, skin_integrals
from pairrules.fields.solve import solve_section
from tests.fields.closeness import near
from tests.fields.sections import all_sections, bar, microstrip

SECTIONS = all_sections()
RHO = 17.241e-9


def test_direct_current_fills_the_copper() -> None:
    """0.2463 ohm for 100 mm of 0.2 mm × 35 µm: ρl/(wt) with IEC 60028's resistivity."""
    integrals = skin_integrals(solve_section(SECTIONS["bars"]))
    found = resistance(integrals, [0.0])
    assert found[0, 0, 0] * 0.1 == pytest.approx(0.2463, abs=5e-5)
    assert found[0] == near(np.diag([RHO / (0.2e-3 * 35e-6), RHO / (0.25e-3 * 35e-6)]), 1e-9)


def test_at_high_frequency_resistance_grows_with_the_root() -> None:
    integrals = skin_integrals(solve_section(SECTIONS["bars"]))
    low, high = resistance(integrals, [1e10, 4e10], with_return=True)
    assert high == near(2 * low, 1e-2)


def test_current_crowds_so_resistance_exceeds_that_of_an_even_skin() -> None:
    integrals = skin_integrals(solve_section(SECTIONS["bars"]))
    around = 2 * (0.2e-3 + 35e-6)
    assert 1.0 < integrals.legs[0, 0] * around < 2.0


def test_wide_leg_close_over_a_plane_is_a_parallel_plate_line() -> None:
    """One plate of width w carries 1/w on its inner face, and so does the plane; current spreads a little at edges."""
    wide = CrossSection(
        conductors=(bar("plus", -80, -20, 0.05, 0.3), bar("minus", 20, 80, 0.05, 0.3)), planes=(Plane(y=0.0),)
    )
    integrals = skin_integrals(solve_section(wide))
    assert integrals.legs[0, 0] == near(1 / 60e-3, 0.02)
    assert integrals.grounded[0, 0] == near(1 / 60e-3, 0.02)


def test_between_two_planes_the_return_is_shared() -> None:
    wide = CrossSection(
        conductors=(bar("plus", -80, -20, 0.05, 0.35), bar("minus", 20, 80, 0.05, 0.35)),
        planes=(Plane(y=0.0), Plane(y=0.4)),
    )
    integrals = skin_integrals(solve_section(wide))
    assert integrals.grounded[0, 0] == near(2 * 0.5**2 / 60e-3, 0.02)


def test_a_leg_without_thickness_has_no_known_resistance() -> None:
    integrals = skin_integrals(solve_section(SECTIONS["contract"]))
    assert integrals.why_nan == ("minus has no thickness, so its copper is unknown",)
    found = resistance(integrals, [0.0, 1e9])
    assert np.all(np.isfinite(found[:, 0, 0]))
    assert np.all(np.isnan(found[:, 1, 1]))
    assert np.all(np.isnan(found[:, 0, 1]))


def test_size_scales_resistance() -> None:
    one = skin_integrals(solve_section(SECTIONS["pour one side"]))
    a = SECTIONS["pour one side"]
    twice = dataclasses.replace(
        a,
        layers=tuple(dataclasses.replace(layer, y1=2 * layer.y1) for layer in a.layers),
        conductors=tuple(
            dataclasses.replace(c, polygon=tuple((2 * x, 2 * y) for x, y in c.polygon or ())) for c in a.conductors
        ),
    )
    other = skin_integrals(solve_section(twice))
    assert other.legs == near(one.legs / 2, 1e-4)
    assert other.grounded == near(one.grounded / 2, 1e-4)


def test_swapped_legs_swap_resistance() -> None:
    a = SECTIONS["pour one side"]
    swapped = dataclasses.replace(a, conductors=(a.conductors[1], a.conductors[0], a.conductors[2]))
    one, other = skin_integrals(solve_section(a)), skin_integrals(solve_section(swapped))
    assert other.legs == near(one.legs[::-1, ::-1], 1e-9)
    assert one.grounded[0, 1] == near(one.grounded[1, 0], 1e-9)


def test_no_return_no_resistance() -> None:
    with pytest.raises(ValueError, match=r"^resistance needs two legs and copper at 0 V$"):
        skin_integrals(solve_section(SECTIONS["no return"]))
    single = dataclasses.replace(SECTIONS["bars"], conductors=SECTIONS["bars"].conductors[:1])
    with pytest.raises(ValueError, match=r"^conductance of a pair needs two legs$"):
        conductance(solve_section(single), [1e6])


def test_conductance_grows_with_frequency_and_loss_tangent() -> None:
    section = microstrip(w=(0.2, 0.25), s=0.2, h=0.2, er=4.2, t=0.035)
    solved = solve_section(section)
    found = conductance(solved, [1e6, 1e9])
    assert found[1] == near(1000 * found[0], 1e-12)
    assert found[1] == near(2 * math.pi * 1e9 * solved.G_per_omega, 1e-12)
    lossless = dataclasses.replace(section, layers=(dataclasses.replace(section.layers[0], loss_tangent=0.0),))
    assert np.all(conductance(solve_section(lossless), [1e9]) == 0.0)


def test_a_floating_neighbour_is_eliminated_from_conductance_too() -> None:
    """As for capacitance; held against the elimination in the complex matrix."""
    section = SECTIONS["floating neighbour"]
    solved = solve_section(section)
    y = solved.G_per_omega + 1j * solved.C
    reduced = y[:2, :2] - np.outer(y[:2, 2], y[2, :2]) / y[2, 2]
    found = conductance(solved, [1.0 / (2 * math.pi)])[0]
    assert found == near(reduced.real, 1e-3)
    own = solved.G_per_omega[:2, :2]
    assert found[1, 1] - own[1, 1] == near(reduced.real[1, 1] - own[1, 1], 1e-2)
