"""Budgets: closed forms, and the law that a spent allowance leaves exactly the wanted rejection."""

from __future__ import annotations

import numpy as np
import pytest

from pairrules.balance.budget import Allowance, TraceLeg, Wanted, budget, rejection
from pairrules.balance.load_models import load_model
from pairrules.balance.networks import Element, Line, Series, Shunt
from pairrules.balance.source_models import source_elements

SOURCE = source_elements("impedance", {"plus": 1000.0})
LOAD = load_model("impedance", {f"{leg}.resistance": 1e6 for leg in ("plus", "minus")})
MIXED = load_model(
    "impedance",
    {"plus.resistance": 1e6, "minus.resistance": 1.01e6, "plus.capacitance": 1e-11, "minus.capacitance": 1.1e-11},
    ((0.0, 100.0),),
)
LEG = TraceLeg(impedance_ohm=55.0, permittivity=3.0)
WANTED = [Wanted(frequency_hz=50.0, rejection_db=80.0), Wanted(frequency_hz=1e4, rejection_db=70.0)]


def named(found: tuple[Allowance, ...], name: str) -> Allowance:
    return next(one for one in found if one.name == name)


def test_source_resistance_alone_is_that_of_the_divider() -> None:
    # V_d/V_c = Z_c ΔR/((Z_c + Z_s)(Z_c + Z_s + ΔR)); the gain from ±½ V is the mean of both dividers.
    (wanted,) = [Wanted(frequency_hz=50.0, rejection_db=80.0)]
    found = named(budget(SOURCE, (), LOAD, [wanted]), "source resistance")
    z_c, z_s = 1e6, 1e3
    x = found.alone
    assert x is not None
    one, other = z_c / (z_c + z_s + x), z_c / (z_c + z_s)
    assert abs(one - other) / ((one + other) / 2) == pytest.approx(1e-4, rel=1e-5)
    assert found.decided_by_hz == 50.0


def spent(name: str, amount: float, leg: int, source: tuple[Element, ...]) -> list[Element]:
    """The link with an amount of one imbalance on one leg."""
    on = amount * np.eye(2)[leg]
    if name == "source resistance":
        return [Series(cause="source", resistance=on), *source, *MIXED.elements]
    if name == "capacitance":
        return [*source, Shunt(cause="trace", capacitance=on), *MIXED.elements]
    L, C = np.eye(2) * 55.0 * LEG.delay, np.eye(2) / 55.0 * LEG.delay
    return [*source, Line(cause="trace", inductance=L, capacitance=C, lengths=on), *MIXED.elements]


@pytest.mark.parametrize("plus", [1000.0, 1003.0])
@pytest.mark.parametrize("name", ["source resistance", "capacitance", "leg length"])
def test_a_spent_allowance_leaves_just_what_is_wanted_on_the_worse_leg(plus: float, name: str) -> None:
    source = source_elements("impedance", {"plus": plus, "minus": 1000.0})
    remaining = named(budget(source, (), MIXED, WANTED, leg=LEG), name).remaining
    assert remaining is not None
    assert remaining > 0
    margins = [
        (rejection(spent(name, remaining, leg, source), MIXED, [50.0, 1e4]) - (80.0, 70.0)).min() for leg in (0, 1)
    ]
    assert min(margins) == pytest.approx(0.0, abs=1e-3)


def test_what_is_used_already_is_missing_from_what_remains() -> None:
    used = source_elements("impedance", {"plus": 1010.0, "minus": 1000.0})
    found = named(budget(used, (), LOAD, WANTED[:1]), "source resistance")
    assert found.alone is not None
    assert found.remaining is not None
    assert found.remaining == pytest.approx(found.alone - 10.0, rel=1e-2)


def test_a_link_that_fails_already_has_nothing_left() -> None:
    used = source_elements("impedance", {"plus": 2000.0, "minus": 1000.0})
    found = named(budget(used, (), LOAD, WANTED[:1]), "capacitance")
    assert found.remaining == 0.0
    assert found.alone is not None
    assert found.alone > 0


def test_resistor_tolerance_of_a_difference_amplifier() -> None:
    # 4ε/(1 + K) = 1/CMRR: K = 100 and 80 dB allow 0.2525 %, of which 0.1 % is used.
    load = load_model("difference-amplifier", {"r1": 1e3, "r2": 1e5, "tolerance": 0.001})
    found = named(budget(SOURCE[:0], (), load, WANTED[:1]), "resistor tolerance")
    assert found.alone == pytest.approx(0.002525, rel=1e-4)
    assert found.remaining == pytest.approx(0.001525, rel=1e-4)


def test_load_resistance_mismatch_matters_as_the_source_is_large() -> None:
    # (Z_s/Z_c) ΔZ_c/Z_c = 1e-4 with Z_s/Z_c = 1/1000: 10 %, to first order.
    assert named(budget(SOURCE, (), LOAD, WANTED[:1]), "load resistance").alone == pytest.approx(0.1, rel=0.02)


def test_what_never_matters_is_not_limited() -> None:
    # Without any source impedance no capacitance at the load can convert.
    source = source_elements("impedance", {"plus": 0.0})
    found = named(budget(source, (), LOAD, WANTED), "capacitance")
    assert found.alone is None
    assert found.remaining is None
    assert found.decided_by_hz is None


def test_length_is_judged_only_where_the_track_is_known() -> None:
    assert "leg length" not in {one.name for one in budget(SOURCE, (), LOAD, WANTED)}
    with_leg = named(budget(SOURCE, (), LOAD, WANTED, leg=LEG), "leg length")
    capacitance = named(budget(SOURCE, (), LOAD, WANTED, leg=LEG), "capacitance")
    assert with_leg.alone is not None
    assert capacitance.alone is not None
    # At these frequencies a length is its capacitance.
    assert with_leg.alone * LEG.delay / 55.0 == pytest.approx(capacitance.alone, rel=1e-3)


def test_something_must_be_wanted() -> None:
    with pytest.raises(ValueError, match=r"^a budget needs a wanted rejection$"):
        budget(SOURCE, (), LOAD, [])
