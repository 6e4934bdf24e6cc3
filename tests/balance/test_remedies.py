"""What would mend a link: solved with the value that is named it meets the limit, with a twentieth more it does not."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairrules.balance.conversion import by_cause, solve
from pairrules.balance.levers import Lever, differences, sizes
from pairrules.balance.networks import DifferenceInput, Element, Floats, Line, Series, Shunt, via
from pairrules.balance.remedies import CONVERSION, LOSS, MOST_ELEMENTS, REJECTION, Mend, Remedies, remedies
from pairrules.balance.solved_link import SolvedLink
from tests.balance.small_links import cable, coupled_track, load, lone_legs, source

AT = np.array([50.0, 1e3, 1e6])


def solved(*elements: Element, at: Floats = AT, own: float | None = None) -> SolvedLink:
    rejection = None if own is None else np.full(len(at), own)
    return SolvedLink(elements=elements, frequencies_hz=at, own_rejection_db=rejection)


def figure(link: SolvedLink, name: str, cause: str = "") -> Floats:
    """The figure [dB] (F,) by the functions that the listing's figures come from."""
    if name == CONVERSION:
        return np.asarray(-20 * np.log10(np.abs(by_cause(link.elements, link.frequencies_hz)[cause])))
    answer = solve(link.elements, link.frequencies_hz)
    converted = np.abs(answer.conversion / answer.gain)
    if name == REJECTION and link.own_rejection_db is not None:
        converted = converted + 10 ** (-link.own_rejection_db / 20)
    return np.asarray(-20 * np.log10(converted))


def with_value(link: SolvedLink, mends: tuple[Mend, ...], times: float, signs: Sequence[float] = ()) -> SolvedLink:
    elements: list[Element] = list(link.elements)
    for mend, sign in zip(mends, signs or [1.0] * len(mends), strict=True):
        elements = mend.lever.moved(elements, np.array([sign * times * mend.position]))
    # Without the axis of samples, as any other link.
    return replace(link, elements=tuple(_bare(element) for element in elements))


def _bare(element: Any) -> Any:
    for name in ("resistance", "capacitance", "inductance", "conductance", "lengths"):
        value = getattr(element, name, None)
        axes = 2 if isinstance(element, Line) and name != "lengths" else 1
        if value is not None and np.ndim(value) == axes + 2:
            element = replace(element, **{name: np.asarray(value)[0, 0]})
    return element


def holds(mends: tuple[Mend, ...], link: SolvedLink, asked: float, name: str, cause: str = "") -> None:
    """The mends meet the limit on either leg; with a twentieth more on one of the legs it is missed."""
    assert mends
    either = [(1.0, -1.0) if one.lever.acts == "difference" else (1.0,) for one in mends]
    missed = False
    for signs in itertools.product(*either):
        for times in (1.0, 0.5):
            assert (figure(with_value(link, mends, times, signs), name, cause) >= asked - 1e-6).all()
        missed |= bool((figure(with_value(link, mends, 1.05, signs), name, cause) < asked).any())
    assert missed


UNEQUAL = {
    "source resistance": ("source", solved(source(1000, 990), coupled_track(), load())),
    "source windings": (
        "source",
        solved(source(50, 50), Shunt(cause="source", capacitance=(5.5e-11, 4.5e-11)), coupled_track(), load()),
    ),
    "load capacitance": ("load", solved(source(), coupled_track(), load(capacitance=(1e-11, 1.2e-11)))),
    "load resistance": ("load", solved(source(), coupled_track(), load(resistance=(1e6, 1.1e6)), at=AT[:2])),
    "cable": ("cable", solved(source(), cable(0.02), coupled_track(), load())),
    "cable capacitance": (
        "cable",
        solved(source(), replace(cable(), capacitance=[[1.05e-10, -4e-11], [-4e-11, 1e-10]]), load()),
    ),
    "leg lengths": ("trace", solved(source(50, 50), lone_legs(0.012, 0.010), load())),
    "tracks": (
        "trace",
        solved(source(), coupled_track(capacitance=[[1.1e-10, -1.1e-11], [-1.1e-11, 1.08e-10]]), load()),
    ),
    "coupling capacitors": (
        "trace",
        solved(source(), Series(cause="trace", capacitance=(1e-7, 1.2e-7)), load(resistance=(1e5, 1e5))),
    ),
    "vias": ("trace", solved(source(50, 50), *via((8e-10, 0.0), (0.0, 0.0)), load(), at=np.array([1e8]))),
    "a capacitor on one leg": (
        "trace",
        solved(source(), Shunt(cause="trace", capacitance=(2e-12, 0.0)), load()),
    ),
}


@pytest.mark.parametrize("name", UNEQUAL)
@pytest.mark.parametrize("more_db", [1.0, 20.0])
def test_the_named_difference_just_meets_a_limit_on_its_cause(name: str, more_db: float) -> None:
    cause, link = UNEQUAL[name]
    asked = float(figure(link, CONVERSION, cause).min()) + more_db
    found = remedies(link, np.full(len(link.frequencies_hz), asked), figure=CONVERSION, cause=cause)
    holds(found.balance, link, asked, CONVERSION, cause)
    assert len(found.balance) == 1
    for size in found.sizes:
        holds((size,), link, asked, CONVERSION, cause)


def test_a_source_resistance_in_closed_form() -> None:
    """Source: two dividers of Z into R, |V_d| = ΔZ R/(R + Z)², elementary; Ott's ΔZs/Zc for R ≫ Z."""
    link = solved(source(350, 353.5), Shunt(cause="load", resistance=(1e6, 1e6)), at=AT[:1])
    (mend,) = remedies(link, [120.0], figure=CONVERSION, cause="source").balance
    mean = 351.75
    assert mend.given[0].value == pytest.approx(-3.5)
    assert (mend.given[0].unit, mend.lever.what) == ("ohm", "resistance")
    assert abs(mend.allowed[0].value) == pytest.approx(1e-6 * (1e6 + mean) ** 2 / 1e6, rel=1e-4)


def test_a_higher_load_resistance_in_closed_form() -> None:
    link = solved(source(350, 353.5), Shunt(cause="load", resistance=(1e6, 1e6)), at=AT[:1])
    found = remedies(link, [120.0], figure=CONVERSION, cause="source")
    (size,) = found.sizes
    # ΔZ R/(R + Z)² = 10⁻⁶ solved for R: R² + (2Z − ΔZ 10⁶) R + Z² = 0.
    half = (3.5e6 - 2 * 351.75) / 2
    assert size.allowed[0].value == pytest.approx(half + np.sqrt(half**2 - 351.75**2), rel=1e-4)
    holds(found.sizes, link, 120.0, CONVERSION, "source")


def test_a_cable_may_also_be_shorter() -> None:
    link = UNEQUAL["cable capacitance"][1]
    asked = float(figure(link, CONVERSION, "cable").min()) + 10
    (size,) = (
        one for one in remedies(link, [asked] * 3, figure=CONVERSION, cause="cable").sizes if one.lever.what == "length"
    )
    assert size.given[0].value == 3.0 and 0.1 < size.allowed[0].value < 1.5


def two_causes(own: float | None = None) -> SolvedLink:
    return solved(source(1000, 990), coupled_track(), load(capacitance=(1e-11, 1.2e-11)), own=own, at=AT[1:])


@pytest.mark.parametrize("name", [LOSS, REJECTION])
def test_one_cause_is_named_where_it_suffices(name: str) -> None:
    link = two_causes(own=120.0)
    asked = float(figure(link, name).min()) + 1
    found = remedies(link, [asked] * 2, figure=name)
    assert [one.lever.cause for one in found.balance] == ["load"]
    holds(found.balance, link, asked, name)


@pytest.mark.parametrize("name", [LOSS, REJECTION])
def test_a_second_cause_is_named_where_one_alone_does_not_suffice(name: str) -> None:
    link = two_causes(own=120.0)
    asked = float(figure(link, name).min()) + 30
    found = remedies(link, [asked] * 2, figure=name)
    assert [one.lever.cause for one in found.balance] == ["load", "source"]
    alone = with_value(link, found.balance[:1], 0.0)
    assert (figure(alone, name) < asked).any()
    holds(found.balance, link, asked, name)


def test_balance_cannot_help_where_the_receiver_itself_rejects_less() -> None:
    found = remedies(two_causes(own=60.0), [70.0] * 2, figure=REJECTION)
    assert found.receiver_short and found.balance == () and found.sizes == ()


def test_the_receiver_that_would_do_with_the_link_as_it_is() -> None:
    link = two_causes(own=20.0)
    before = float(figure(link, LOSS).min())
    found = remedies(link, [before - 6] * 2, figure=REJECTION)
    assert found.receiver_short and found.receiver_db is not None
    just = replace(link, own_rejection_db=np.full(2, found.receiver_db))
    assert figure(just, REJECTION).min() == pytest.approx(before - 6, abs=1e-9)
    assert remedies(link, [before + 6] * 2, figure=REJECTION).receiver_db is None


def test_nothing_is_asked_at_a_frequency_without_a_limit() -> None:
    link = replace(two_causes(), frequencies_hz=AT[[0, 2]])
    asked = float(figure(link, LOSS)[0]) + 3
    (mend,) = remedies(link, [asked, -np.inf], figure=LOSS).balance
    assert mend.lever.cause == "source"


def test_inputs_of_a_difference_amplifier_are_mended_without_a_number() -> None:
    link = solved(source(1000, 1000.0), DifferenceInput(cause="load", r1=1e4, r2=1e5))
    link = replace(link, elements=(source(1000, 990), *link.elements[1:]))
    found = remedies(link, [65.0] * 3, figure=LOSS)
    assert all(one.given == one.allowed == () for one in found.balance if one.lever.what == "inputs")
    with_source = remedies(link, [80.0] * 3, figure=LOSS)
    assert {one.lever.cause for one in (*found.balance, *with_source.balance)} >= {"source"}


def everything() -> list[Element]:
    return [
        source(1000, 990),
        Shunt(cause="source", capacitance=(5e-11, 4e-11)),
        replace(cable(0.1), capacitance=[[1.1e-10, -4e-11], [-4e-11, 1e-10]]),
        coupled_track(inductance=[[3.2e-7, 6.6e-8], [6.6e-8, 3.1e-7]]),
        lone_legs(0.012, 0.0),
        *via((8e-10, 0.0), (0.0, 0.0)),
        Series(cause="trace", capacitance=(1e-7, np.inf)),
        Series(cause="trace", resistance=(50.0, 47.0)),
        Shunt(cause="trace", capacitance=(2e-12, 0.0)),
        Shunt(cause="load", resistance=(1e6, np.inf)),
        load((1e6, 9e5), (1e-11, 1.2e-11)),
        DifferenceInput(cause="load", r1=1e4, r2=1e5),
    ]


def test_the_levers_leave_no_difference_out_and_touch_no_other_cause() -> None:
    link = everything()
    for cause in ("", "source", "cable", "trace", "load"):
        moved = link
        for lever in differences(link, cause):
            moved = lever.moved(moved, np.zeros(1))
        omega = 2 * np.pi * AT
        for element, before in zip(moved, link, strict=True):
            alike = before.symmetrised() if cause in {"", before.cause} else before
            assert np.allclose(element.chain(omega), alike.chain(omega), rtol=1e-12)


@pytest.mark.parametrize(
    "lever", [*differences(everything()), *sizes(everything())], ids=lambda one: f"{one.cause} {one.what}"
)
def test_a_lever_as_given_changes_nothing(lever: Lever) -> None:
    link = everything()
    if lever.acts == "equal":
        return
    omega = 2 * np.pi * AT
    for element, before in zip(lever.moved(link, np.ones(1)), link, strict=True):
        assert np.allclose(element.chain(omega), before.chain(omega), rtol=1e-12)


def test_each_series_part_is_a_lever_of_its_own() -> None:
    link = [
        source(),
        Series(cause="trace", resistance=(50, 50)),
        *via((1e-9, 0), (0, 0)),
        Series(cause="trace", resistance=(9, 10)),
    ]
    parts = [lever for lever in differences(link) if lever.what == "part"]
    assert [(lever.step, lever.amounts(link)[0].value) for lever in parts] == [(1, pytest.approx(-1 / 9.5))]


@settings(max_examples=25, deadline=None)
@given(
    resistance=st.floats(-0.2, 0.2).filter(lambda m: abs(m) > 1e-3),
    capacitance=st.floats(-0.5, 0.5).filter(lambda m: abs(m) > 1e-2),
    more_db=st.floats(0.5, 40.0),
)
def test_whatever_the_link_what_is_named_meets_the_limit(resistance: float, capacitance: float, more_db: float) -> None:
    """Causes may cancel one another in part; what is named has to hold all the same, on either leg."""
    link = solved(
        source(1000 * (1 + resistance), 1000),
        coupled_track(),
        load(capacitance=(1e-11 * (1 + capacitance), 1e-11)),
    )
    asked = float(figure(link, LOSS).min()) + more_db
    found = remedies(link, [asked] * 3, figure=LOSS)
    holds(found.balance, link, asked, LOSS)


def test_a_link_of_very_many_elements_goes_without() -> None:
    # A pair along circles in circles was cut into hundreds of sections; its advice took a minute.
    few = solved(source(1000, 990), *[coupled_track()] * 20, load())
    many = solved(source(1000, 990), *[coupled_track()] * MOST_ELEMENTS, load())
    assert remedies(few, [120.0] * 3, figure=CONVERSION).balance
    assert remedies(many, [120.0] * 3, figure=CONVERSION) == Remedies(balance=(), sizes=())
