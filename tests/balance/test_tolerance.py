"""Tolerances: worst case against every corner and a closed form, the sampled bound against the distribution's own."""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np
import pytest

from pairrules.balance.conversion import solve
from pairrules.balance.networks import Element, Series, Shunt
from pairrules.balance.tolerance import Spread, spreads_of, tolerated
from tests.balance.small_links import load, source


def two_dividers() -> list[Element]:
    return [source(), Shunt(cause="load", resistance=(1e6, 1e6))]


def test_the_worst_case_is_the_worst_corner() -> None:
    link = two_dividers()
    spreads = (*spreads_of(link, 0.01, cause="source"), *spreads_of(link, 0.05, cause="load"))
    corners = []
    for a, b, c, d in itertools.product((-1, 1), repeat=4):
        plus = replace(link[0], resistance=(1000 * (1 + 0.01 * a), 1000 * (1 + 0.01 * b)))  # type: ignore[type-var]
        minus = replace(link[1], resistance=(1e6 * (1 + 0.05 * c), 1e6 * (1 + 0.05 * d)))  # type: ignore[type-var]
        corners.append(abs(solve([plus, minus], 50.0).conversion[0]))
    found = tolerated(link, spreads, 50.0)
    assert found.worst[0] == pytest.approx(max(corners), rel=1e-12)
    assert found.nominal[0] == 0.0


def test_many_values_add_their_magnitudes() -> None:
    # Twelve resistors of 100 ohm ±1 % in series: to first order the same as two of 600 ohm.
    link: list[Element] = [Series(cause="source", resistance=(100.0, 100.0)) for _ in range(6)]
    link.append(Shunt(cause="load", resistance=(1e6, 1e6)))
    many = tolerated(link, spreads_of(link, 0.01, cause="source"), 50.0)
    few_link: list[Element] = [source(600.0, 600.0), link[-1]]
    few = tolerated(few_link, spreads_of(few_link, 0.01, cause="source"), 50.0)
    assert many.worst[0] == pytest.approx(few.worst[0], rel=1e-4)
    assert many.bound_95[0] < few.bound_95[0]


def test_the_bound_of_two_even_spreads() -> None:
    # ΔR = 10(u − v) with u, v even on (−1, 1): |u − v| has the triangular density, 95 % below 2 − √0.2 = 1.553.
    link = two_dividers()
    found = tolerated(link, spreads_of(link, 0.01, cause="source"), 50.0)
    assert found.bound_95[0] == pytest.approx(10 * (2 - np.sqrt(0.2)) * 1e6 / 1.001e6**2, rel=0.015)


def test_the_same_seed_gives_the_same_bound() -> None:
    link: list[Element] = [source(1000.0, 1003.0), load()]
    spreads = spreads_of(link, 0.02, cause="load")
    first, again, other = (tolerated(link, spreads, [50.0, 1e5], seed=seed).bound_95 for seed in (1, 1, 2))
    np.testing.assert_array_equal(first, again)
    assert (first != other).any()


def test_bounds_lie_between_nothing_and_the_worst() -> None:
    link: list[Element] = [source(1000.0, 1003.0), load()]
    found = tolerated(link, spreads_of(link, 0.02, cause="load"), [50.0, 1e5])
    assert (found.bound_95 <= found.worst).all()
    assert (found.nominal <= found.worst).all()


def test_only_what_is_there_is_spread() -> None:
    link: list[Element] = [source(), Shunt(cause="load", capacitance=(1e-11, 0.0), across_resistance=100.0)]
    assert spreads_of(link, 0.1, cause="load") == (
        Spread(element=1, field="capacitance", at=(0,), share=0.1),
        Spread(element=1, field="across_resistance", at=(), share=0.1),
    )
    assert spreads_of(link, 0.1, cause="cable") == ()


def test_without_spreads_all_three_are_the_nominal() -> None:
    link: list[Element] = [source(1000.0, 1010.0), load()]
    found = tolerated(link, (), 50.0)
    assert found.nominal[0] == found.worst[0] == found.bound_95[0] > 0
