"""The balance of a whole link: one record a frequency."""

from __future__ import annotations

import numpy as np
import pytest

from pairrules.balance.conversion import by_cause, decibel, solve
from pairrules.balance.link_balance import balance_points
from pairrules.balance.networks import Element, Series
from tests.balance.small_links import cable, coupled_track, load, source

LINK: list[Element] = [source(1000.0, 1010.0), cable(0.02), coupled_track(), load((1e6, 1.02e6))]


def test_figures_are_those_of_the_solution() -> None:
    points = balance_points(LINK, [50.0, 1e6])
    response, causes = solve(LINK, [50.0, 1e6]), by_cause(LINK, [50.0, 1e6])
    assert [point.frequency_hz for point in points] == [50.0, 1e6]
    for i, point in enumerate(points):
        assert point.total_db == decibel(response.conversion)[i]
        assert point.source_db == decibel(causes["source"])[i]
        assert point.cable_db == decibel(causes["cable"])[i]
        assert point.load_db == decibel(causes["load"])[i]
        assert point.trace_db == -400.0
        assert point.contributions == {cause: one[i] for cause, one in causes.items()}


def test_rejection_is_referred_to_the_signal_and_adds_the_receivers_own() -> None:
    alone, receiver = (balance_points(LINK, [50.0], own)[0] for own in (None, 100.0))
    assert alone.total_db is not None
    assert alone.rejection_db == pytest.approx(decibel(alone.gain) - alone.total_db)
    ratio = abs(alone.conversion) / abs(alone.gain) + 1e-5
    assert receiver.rejection_db == pytest.approx(-20 * np.log10(ratio))
    assert receiver.total_db == alone.total_db


def test_a_receiver_may_reject_less_at_one_frequency_than_at_another() -> None:
    low, high = balance_points(LINK, [50.0, 1e3], [200.0, 60.0])
    assert low.rejection_db is not None
    assert high.rejection_db is not None
    assert low.rejection_db > 90
    assert high.rejection_db < 60


def test_a_cause_without_elements_and_an_answer_without_a_number_are_unknown() -> None:
    bare: list[Element] = [source(), load()]
    (point,) = balance_points(bare, [50.0])
    assert point.cable_db is None
    assert point.trace_db is None
    blocked: list[Element] = [source(), Series(cause="trace", capacitance=(1e-6, 1e-6)), load()]
    (broken,) = balance_points(blocked, [0.0])
    assert broken.total_db is None
    assert broken.rejection_db is None


def test_no_frequency_no_point() -> None:
    assert balance_points(LINK, []) == ()
