"""Round wires: capacitance by the method of images, and skin resistance by Wheeler's incremental inductance.

Capacitance of a wire of radius a at height h over a plane 2πε/acosh(h/a), of two wires at distance D πε/acosh(D/2a):
W. R. Smythe, Static and Dynamic Electricity, chapter 4 (from memory). Resistance: H. A. Wheeler, Formulas for the skin
effect, Proceedings of the IRE 30 (1942) 412–424 (from memory): R = (Rs/µ0) ∂L/∂n with n into the metal, applied to
L = (µ0/2π) acosh(h/a): the wire's share Rs/(2πa) (h/a)/√((h/a)² − 1), the plane's Rs/(2πa)/√((h/a)² − 1).
Tolerance: the circle is a polygon of 96 sides and equal area.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from pairrules.fields.cross_section import Conductor, CrossSection, Plane, Role
from pairrules.fields.loss import resistance, skin_integrals
from pairrules.fields.solve import EPSILON_0, solve_section
from tests.fields.closeness import near
from tests.fields.sections import INF

SIDES = 96


def wire(name: str, x: float, y: float, radius: float, role: Role = "signal") -> Conductor:
    corner = radius * math.sqrt(2 * math.pi / SIDES / math.sin(2 * math.pi / SIDES))
    turns = 2 * math.pi * (np.arange(SIDES) + 0.5) / SIDES
    points = tuple((x + corner * math.cos(turn), y + corner * math.sin(turn)) for turn in turns)
    return Conductor(name=name, role=role, polygon=points)


@pytest.mark.parametrize("ratio", [1.2, 2.5, 10.0])
def test_wire_over_a_plane(ratio: float) -> None:
    section = CrossSection(conductors=(wire("a", 0.0, ratio, 1.0),), planes=(Plane(y=0.0),))
    exact = 2 * math.pi * EPSILON_0 / math.acosh(ratio)
    assert solve_section(section).C[0, 0] == near(exact, 2e-4)


def test_wire_over_a_plane_of_cells() -> None:
    """The same where the plane is cut, so that it is covered with cells instead of mirrored."""
    section = CrossSection(
        conductors=(wire("a", 0.0, 2.5, 1.0),), planes=(Plane(y=0.0, intervals=((-INF, 0.3), (0.3, INF))),)
    )
    assert solve_section(section).C[0, 0] == near(2 * math.pi * EPSILON_0 / math.acosh(2.5), 5e-4)


@pytest.mark.parametrize("distance", [2.4, 5.0])
def test_two_wires(distance: float) -> None:
    """274.9 ohm in air for a distance of five radii times two: 119.92 acosh(D/d)."""
    section = CrossSection(conductors=(wire("a", 0.0, 0.0, 1.0), wire("b", distance, 0.0, 1.0)))
    pair = solve_section(section).pair
    assert pair is not None
    exact = math.pi * EPSILON_0 / math.acosh(distance / 2)
    assert pair.C[0, 0] == near(exact, 2e-4)
    assert pair.impedance_diff_ohm == pytest.approx(119.9169832 * math.acosh(distance / 2), rel=2e-4)


def test_two_wires_of_distance_five_diameters() -> None:
    section = CrossSection(conductors=(wire("a", 0.0, 0.0, 1.0), wire("b", 10.0, 0.0, 1.0)))
    pair = solve_section(section).pair
    assert pair is not None
    assert pair.impedance_diff_ohm == pytest.approx(274.9, abs=0.06)


@pytest.mark.parametrize("ratio", [1.5, 2.5, 8.0])
def test_skin_resistance_over_a_plane(ratio: float) -> None:
    """Two wires so far apart that each is alone with the plane."""
    radius = 1e-3
    section = CrossSection(
        conductors=(wire("a", -300.0, ratio, 1.0), wire("b", 300.0, ratio, 1.0)), planes=(Plane(y=0.0),)
    )
    integrals = skin_integrals(solve_section(section))
    root = math.sqrt(ratio**2 - 1)
    assert integrals.legs[0, 0] * 2 * math.pi * radius == near(ratio / root, 2e-3)
    assert integrals.grounded[0, 0] * 2 * math.pi * radius == near(1 / root, 2e-3)
    hertz = 1e9
    surface = math.sqrt(math.pi * hertz * 4e-7 * math.pi * 17.241e-9)
    expected = surface / (2 * math.pi * radius) * (ratio + 1) / root
    assert resistance(integrals, [hertz], with_return=True)[0, 0, 0] == near(expected, 2e-3)


def test_skin_resistance_of_a_plane_of_cells_is_that_of_an_infinite_one() -> None:
    wires = (wire("a", -2.0, 2.5, 1.0), wire("b", 2.0, 2.5, 1.0))
    whole = skin_integrals(solve_section(CrossSection(conductors=wires, planes=(Plane(y=0.0),))))
    cut = Plane(y=0.0, intervals=((-INF, 0.3), (0.3, INF)))
    cells = skin_integrals(solve_section(CrossSection(conductors=wires, planes=(cut,)), refine=3.0))
    assert cells.grounded == near(whole.grounded, 0.01)
