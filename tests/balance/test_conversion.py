"""Conversion of links: laws, closed forms at low frequency, and causes."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairrules.balance.conversion import FLOOR_DB, by_cause, decibel, solve
from pairrules.balance.networks import Element, Line, Series, Shunt, via
from tests.balance.small_links import cable, coupled_track, load, lone_legs, source

FREQUENCIES = np.array([50.0, 1e3, 1e6, 1e8, 1e9])


def uneven() -> list[Element]:
    """Something wrong with every element."""
    return [
        source(1000.0, 1010.0),
        cable(0.02),
        Series(
            cause="trace",
            resistance=(10.0, 10.1),
            inductance=(1e-3, 1.001e-3),
            mutual=9.9e-4,
            capacitance=(1e-6, 1.05e-6),
        ),
        coupled_track(
            inductance=[[3.2e-7, 6.6e-8], [6.6e-8, 3.1e-7]], capacitance=[[1.1e-10, -1.1e-11], [-1.1e-11, 1.0e-10]]
        ),
        *via((1.2e-9, 0.0), (5e-13, 0.0)),
        lone_legs(0.1, 0.103),
        load((1e6, 1.02e6), (1e-11, 1.1e-11)),
    ]


def swapped(element: Any) -> Element:
    """The same with the legs' names exchanged."""
    square = ("inductance", "capacitance", "resistance", "conductance") if isinstance(element, Line) else ()
    single = {
        Line: ("lengths",),
        Series: ("resistance", "inductance", "capacitance"),
        Shunt: ("resistance", "capacitance"),
    }
    turned = {name: np.asarray(getattr(element, name))[::-1, ::-1] for name in square}
    turned |= {name: np.asarray(getattr(element, name))[::-1] for name in single[type(element)]}
    found: Element = replace(element, **turned)
    return found


def test_equal_legs_convert_nothing() -> None:
    link = [element.symmetrised() for element in uneven()]
    assert (decibel(solve(link, FREQUENCIES).conversion) <= -300).all()


def test_exchanging_the_legs_changes_the_sign_alone() -> None:
    response = solve(uneven(), FREQUENCIES)
    other = solve([swapped(element) for element in uneven()], FREQUENCIES)
    np.testing.assert_array_equal(np.abs(other.conversion), np.abs(response.conversion))
    np.testing.assert_array_equal(other.gain, response.gain)


def test_causes_add_up_with_phase_to_the_whole() -> None:
    link = uneven()
    whole = solve(link, FREQUENCIES[:3]).conversion
    causes = by_cause(link, FREQUENCIES[:3])
    assert set(causes) == {"source", "cable", "trace", "load"}
    assert (np.abs(sum(causes.values()) - whole) < 0.01 * np.abs(whole)).all()


def test_a_cause_is_the_link_with_all_others_even() -> None:
    link = uneven()
    for cause, found in by_cause(link, FREQUENCIES).items():
        alone = [element if element.cause == cause else element.symmetrised() for element in link]
        np.testing.assert_array_equal(found, solve(alone, FREQUENCIES).conversion)
    assert set(by_cause([source(), load()], FREQUENCIES)) == {"source", "load"}


@settings(max_examples=50, deadline=None)
@given(st.floats(1, 1e4), st.floats(-0.5, 0.5), st.floats(1e3, 1e8))
def test_unequal_sources_convert_as_two_dividers(z_s: float, m: float, z_c: float) -> None:
    # V_d/V_c = Z_c/(Z_c + Z_s1) − Z_c/(Z_c + Z_s2): Ott, EMC Engineering, ch. 4 (from memory), exact for resistances.
    plus, minus = z_s * (1 + m), z_s
    found = solve([source(plus, minus), Shunt(cause="load", resistance=(z_c, z_c))], 1.0).conversion[0]
    exact = z_c * (minus - plus) / ((z_c + plus) * (z_c + minus))
    assert found == pytest.approx(exact, rel=1e-9, abs=1e-300)


def test_source_and_load_mismatch_cancel_where_their_ratios_agree() -> None:
    # (Z_s/Z_c)(ΔZ_s/Z_s − ΔZ_c/Z_c) vanishes for equal shares, whatever they are.
    link: list[Element] = [source(1010.0, 1000.0), Shunt(cause="load", resistance=(1.01e6, 1e6))]
    assert decibel(solve(link, 50.0).conversion)[0] < -300
    assert {cause: round(float(decibel(one)[0]), 1) for cause, one in by_cause(link, 50.0).items()} == {
        "source": -100.1,
        "load": -100.1,
    }


def test_a_link_far_below_double_precision_of_its_signals_keeps_its_digits() -> None:
    # 1 µohm of difference against 1 Mohm is −240 dB; a difference of two voltages near 1 V would end at −313 dB ± 40.
    link: list[Element] = [source(100.0 + 1e-6, 100.0), Shunt(cause="load", resistance=(1e6, 1e6))]
    found = solve(link, 50.0).conversion[0]
    exact = -((100.0 + 1e-6) - 100.0) * 1e6 / (1e6 + 100.0) ** 2
    assert found == pytest.approx(exact, rel=1e-8)


def test_the_differential_gain_is_that_of_half_a_volt_on_each_leg() -> None:
    # Two 1 kohm legs into 20 kohm across and 1 Mohm each to reference.
    link: list[Element] = [source(), Shunt(cause="load", resistance=(1e6, 1e6), across_resistance=2e4)]
    across = 1 / (1 / 2e4 + 1 / 2e6)
    assert solve(link, 50.0).gain[0] == pytest.approx(across / (across + 2000.0), rel=1e-12)


def test_resistance_in_series_with_the_load_lies_before_its_nodes() -> None:
    link: list[Element] = [
        Series(cause="source", resistance=(0.0, 0.0)),
        Series(cause="load", resistance=(1e6, 0.0)),
        Shunt(cause="load", resistance=(1e6, 1e6)),
    ]
    assert solve(link, 50.0).conversion[0] == pytest.approx(-0.5, rel=1e-12)


def test_shapes_one_many_none_and_samples() -> None:
    assert solve(uneven(), 50.0).conversion.shape == (1,)
    assert solve(uneven(), []).conversion.shape == (0,)
    samples = Series(cause="source", resistance=np.full((7, 1, 2), (1000.0, 1010.0)))
    found = solve([samples, *uneven()[1:]], FREQUENCIES).conversion
    assert found.shape == (7, 5)
    np.testing.assert_allclose(found[3], solve(uneven(), FREQUENCIES).conversion, rtol=1e-12)
    by_frequency = coupled_track(resistance=np.array([np.diag([r, r]) for r in (1.0, 1.0, 2.0, 5.0, 9.0)]))
    assert solve([source(), by_frequency, load()], FREQUENCIES).gain.shape == (5,)


def test_a_capacitor_in_series_has_no_answer_at_zero_frequency() -> None:
    link: list[Element] = [source(), Series(cause="trace", capacitance=(1e-6, 1e-6)), load()]
    found = solve(link, [0.0, 50.0]).conversion
    assert np.isnan(found[0])
    assert np.isfinite(found[1])


def test_an_exact_zero_is_the_floor() -> None:
    assert decibel(0.0) == FLOOR_DB == -400.0
    assert decibel(-0.1j) == pytest.approx(-20.0)
