"""Elements of a link: what they refuse, and what symmetrising leaves."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from pairrules.balance.networks import DifferenceInput, Line, Series, Shunt, via
from pairrules.fields import chain_matrix
from tests.balance.small_links import coupled_track, lone_legs

OMEGA = 2 * np.pi * np.array([1e3, 1e6])


def near(found: Any, expected: Any, *, rtol: float = 1e-7, atol: float = 0.0) -> None:
    """Fields of elements are typed as anything like an array; here they are arrays."""
    np.testing.assert_allclose(np.asarray(found), np.asarray(expected), rtol=rtol, atol=atol)


def test_symmetrising_replaces_each_pair_by_its_mean() -> None:
    series = Series(
        cause="trace", resistance=(1.0, 3.0), inductance=(2e-9, 4e-9), capacitance=(1e-6, 2e-6)
    ).symmetrised()
    near(series.resistance, (2.0, 2.0))
    near(series.inductance, (3e-9, 3e-9))
    near(series.capacitance, (1.5e-6, 1.5e-6))
    line = coupled_track(inductance=[[3e-7, 1e-8], [1e-8, 5e-7]]).symmetrised()
    near(line.inductance, [[4e-7, 1e-8], [1e-8, 4e-7]])
    near(lone_legs(0.1, 0.3).symmetrised().lengths, (0.2, 0.2))


def test_where_one_of_two_is_absent_the_mean_is_of_what_it_adds() -> None:
    # 1 Mohm on one leg alone conducts what 2 Mohm on each leg do together.
    near(Shunt(cause="load", resistance=(1e6, np.inf)).symmetrised().resistance, (2e6, 2e6))
    near(Series(cause="trace", capacitance=(np.inf, 1e-6)).symmetrised().capacitance, (2e-6, 2e-6))
    assert np.isinf(Shunt(cause="load").symmetrised().resistance).all()


def test_a_leg_without_length_lets_the_other_be_a_line_alone() -> None:
    F = chain_matrix.to_legs(lone_legs(0.4, 0.0).chain(OMEGA))
    gamma_l = 1j * OMEGA * 6.5e-9 * 0.4
    near(F[:, 0, 0], np.cosh(gamma_l), rtol=1e-12)
    near(F[:, 0, 2], 50.0 * np.sinh(gamma_l), rtol=1e-12)
    near(F[:, 1], np.broadcast_to([0, 1, 0, 0], (2, 4)), atol=1e-15)


def test_a_via_is_its_inductance_between_two_halves_of_its_capacitance() -> None:
    F = chain_matrix.cascade(*(step.chain(OMEGA) for step in via((1.2e-9, 0.0), (5e-13, 0.0))))
    legs = chain_matrix.to_legs(F)
    z, y = 1j * OMEGA * 1.2e-9, 1j * OMEGA * 2.5e-13
    near(legs[:, 0, 0], 1 + z * y, rtol=1e-12)
    near(legs[:, 0, 2], z, rtol=1e-12)
    near(legs[:, 2, 0], y * (2 + z * y), rtol=1e-12)


def test_a_choke_stands_in_the_way_of_common_current_alone() -> None:
    Z = Series(cause="trace", inductance=(1e-3, 1e-3), mutual=1e-3).chain(OMEGA)[:, :2, 2:]
    near(Z[:, 0, 0], 0)
    near(Z[:, 1, 1], 1j * OMEGA * 1e-3)


def test_difference_inputs_load_the_legs_as_nodal_analysis_says() -> None:
    # Minus driven alone sees R1; plus driven alone sees R1 + R2; together each carries V/(R1 + R2).
    Y = chain_matrix.to_legs(DifferenceInput(cause="load", r1=2e3, r2=2e5).chain(OMEGA))[0, 2:, :2]
    near(Y @ (0, 1), (0, 1 / 2e3), atol=1e-18)
    near((Y @ (1, 0))[0], 1 / 202e3, rtol=1e-12)
    near(Y @ (1, 1), (1 / 202e3, 1 / 202e3), rtol=1e-11)


def test_values_are_copied_and_cannot_be_changed() -> None:
    given = np.array([1.0, 2.0])
    element = Series(cause="source", resistance=given)
    given[0] = 5.0
    near(element.resistance, (1.0, 2.0))
    with pytest.raises(ValueError, match="read-only"):
        element.resistance[0] = 3.0  # type: ignore[index]


def test_what_has_no_meaning_is_refused() -> None:
    with pytest.raises(ValueError, match=r"^cause is one of source, cable, trace, load$"):
        Series(cause="sauce")
    with pytest.raises(ValueError, match=r"^Series.resistance has shape \(3,\); it must end in \(2,\)$"):
        Series(cause="source", resistance=(1.0, 2.0, 3.0))
    with pytest.raises(ValueError, match=r"^Shunt.capacitance is not a number$"):
        Shunt(cause="load", capacitance=(np.nan, 0.0))
    with pytest.raises(ValueError, match=r"^legs that are coupled have one length$"):
        coupled_track(lengths=(0.1, 0.2))
    with pytest.raises(ValueError, match=r"^Line.inductance has shape \(2,\); it must end in \(2, 2\)$"):
        Line(cause="trace", inductance=(1.0, 2.0), capacitance=np.eye(2), lengths=(1.0, 1.0))
