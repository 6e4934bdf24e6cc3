"""Source, load and cable models: each kind reduced to the network its description says."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from pairrules.balance.cable import cable_elements
from pairrules.balance.conversion import by_cause, decibel, solve
from pairrules.balance.load_models import LoadModel, load_model, rejection_at
from pairrules.balance.networks import Line, Series, Shunt
from pairrules.balance.source_models import source_elements


def near(found: Any, expected: Any, *, rtol: float = 1e-7, atol: float = 0.0) -> None:
    """Fields of elements are typed as anything like an array; here they are arrays."""
    np.testing.assert_allclose(np.asarray(found), np.asarray(expected), rtol=rtol, atol=atol)


def test_an_impedance_source_is_as_given_or_apart_by_its_mismatch() -> None:
    (given,) = source_elements("impedance", {"plus": 350.0, "minus": 351.0})
    (apart,) = source_elements("impedance", {"plus": 100.0, "mismatch": -0.02})
    assert isinstance(given, Series)
    assert isinstance(apart, Series)
    near(given.resistance, (350.0, 351.0))
    near(apart.resistance, (99.0, 101.0))


def test_each_output_of_a_bridge_is_two_arms_in_parallel() -> None:
    # The two arms of a leg end at the supply's two sides, both at the common e.m.f.: 350 ohm arms give 175 ohm.
    (bridge,) = source_elements("bridge", {"resistance": 350.0, "mismatch": 0.01})
    assert isinstance(bridge, Series)
    near(bridge.resistance, (175.0 * 1.005, 175.0 * 0.995))


@pytest.mark.parametrize("kind", ["line-driver", "amplifier", "microphone", "transformer"])
def test_other_sources_give_the_resistance_of_one_leg(kind: str) -> None:
    (element,) = source_elements(kind, {"resistance": 50.0, "mismatch": 0.02})
    assert isinstance(element, Series)
    near(element.resistance, (50.5, 49.5))


def test_a_source_transformer_has_its_windings_to_reference() -> None:
    values = {"resistance": 300.0, "winding_capacitance": 100e-12, "winding_capacitance_mismatch": 0.5}
    link = [*source_elements("transformer", values), Shunt(cause="load", resistance=(1e9, 1e9))]
    # 2πf R_leg |C_1 − C_2| with 50 pF between the windings: −54.5 dB at 20 kHz.
    assert decibel(by_cause(link, 20e3)["source"])[0] == pytest.approx(-54.5, abs=0.06)


def test_an_impedance_load_is_as_given() -> None:
    values = {
        "plus.resistance": 1e6,
        "plus.capacitance": 10e-12,
        "minus.resistance": 1.1e6,
        "minus.capacitance": 12e-12,
        "across.resistance": 1e4,
        "across.capacitance": 1e-9,
    }
    (element,) = load_model("impedance", values).elements
    assert isinstance(element, Shunt)
    near(element.resistance, (1e6, 1.1e6))
    near(element.capacitance, (10e-12, 12e-12))
    assert float(element.across_resistance) == 1e4  # type: ignore[arg-type]
    assert float(element.across_capacitance) == 1e-9  # type: ignore[arg-type]


def test_what_an_impedance_load_does_not_name_is_not_there() -> None:
    (element,) = load_model("impedance", {"across.resistance": 120.0}).elements
    assert isinstance(element, Shunt)
    assert np.isinf(element.resistance).all()
    near(element.capacitance, (0.0, 0.0))


def test_an_instrumentation_amplifier_has_a_mismatch_for_each_of_its_values() -> None:
    values = {"resistance": 1e9, "capacitance": 5e-12, "resistance_mismatch": 0.1, "capacitance_mismatch": -0.2}
    (element,) = load_model("instrumentation-amplifier", values).elements
    assert isinstance(element, Shunt)
    near(element.resistance, (1.05e9, 0.95e9))
    near(element.capacitance, (4.5e-12, 5.5e-12))


def test_a_receiver_and_a_converter_have_one_mismatch() -> None:
    (receiver,) = load_model("line-receiver", {"resistance": 30e3, "mismatch": 0.03, "across": 120.0}).elements
    (adc,) = load_model("adc", {"resistance": 1e6, "capacitance": 8e-12, "mismatch": 0.02}).elements
    assert isinstance(receiver, Shunt)
    assert isinstance(adc, Shunt)
    near(receiver.resistance, (30e3 * 1.015, 30e3 * 0.985))
    assert float(receiver.across_resistance) == 120.0  # type: ignore[arg-type]
    near(adc.resistance, (1.01e6, 0.99e6))
    near(adc.capacitance, (8.08e-12, 7.92e-12))


def test_a_bus_node_of_uneven_resistance() -> None:
    # 30 kohm per leg with 3 % mismatch behind 30 ohm per leg: (Z_s/Z_c) ΔZ_c/Z_c, 90.5 dB.
    link = [*source_elements("line-driver", {"resistance": 30.0})]
    link += load_model("line-receiver", {"resistance": 30e3, "mismatch": 0.03}).elements
    assert -decibel(solve(link, 1e3).conversion)[0] == pytest.approx(90.5, abs=0.05)


def test_a_load_transformer_is_across_with_windings_to_reference() -> None:
    values = {"resistance": 600.0, "winding_capacitance": 40e-12, "winding_capacitance_mismatch": 0.25}
    (element,) = load_model("transformer", values).elements
    assert isinstance(element, Shunt)
    near(element.capacitance, (45e-12, 35e-12))
    assert float(element.across_resistance) == 600.0  # type: ignore[arg-type]


def test_equal_sources_convert_nothing_at_a_difference_amplifier_and_unequal_ones_do() -> None:
    (even,), (uneven,) = (source_elements("impedance", {"plus": 100.0, "minus": m}) for m in (100.0, 110.0))
    inputs = load_model("difference-amplifier", {"r1": 1e4, "r2": 1e5}).elements
    assert decibel(solve([even, *inputs], 50.0).conversion)[0] < -300
    # Common-mode current V/(R1 + R2) through 10 ohm more in minus raises plus over minus by 10 ohm/(R1 + R2); minus
    # alone then carries that difference through R1, which divides it by (1 + 110 ohm/R1) or so.
    found = solve([uneven, *inputs], 50.0).conversion[0].real
    assert found == pytest.approx(10.0 / 110e3, rel=0.02)


def test_own_rejection_adds_resistors_and_amplifier_at_worst() -> None:
    load = load_model("difference-amplifier", {"r1": 1e3, "r2": 1e3, "tolerance": 0.001}, ((0.0, 54.0),))
    found = load.own_rejection([50.0, 1e3])
    assert found is not None
    expected = -20 * np.log10(4 * 0.001 / 2 + 10 ** (-54.0 / 20))
    near(found, [expected, expected])


def test_own_rejection_is_not_known_where_nothing_is_said() -> None:
    assert LoadModel(elements=()).own_rejection([50.0]) is None
    assert load_model("difference-amplifier", {"r1": 1e3, "r2": 1e3}).own_rejection([50.0]) is None


def test_a_rejection_curve_is_straight_over_log_frequency_and_held_beyond() -> None:
    curve = ((50.0, 110.0), (5e3, 70.0))
    near(rejection_at(curve, [0.0, 10.0, 50.0, 500.0, 5e3, 1e6]), [110, 110, 110, 90, 70, 70])
    near(rejection_at(((0.0, 100.0),), [0.0, 1e6]), [100, 100])


def test_a_cable_divides_its_unbalances_between_the_legs() -> None:
    (cable,) = cable_elements(
        {
            "length": 3.0,
            "resistance": 0.09,
            "capacitance": 60e-12,
            "capacitance_between": 40e-12,
            "inductance": 0.6e-6,
            "resistance_unbalance": 0.02,
            "capacitance_unbalance": 1.6e-12,
        }
    )
    assert isinstance(cable, Line)
    near(cable.resistance, np.diag([0.09 * 1.01, 0.09 * 0.99]))
    near(cable.capacitance, [[100.8e-12, -40e-12], [-40e-12, 99.2e-12]])
    near(cable.inductance, np.diag([0.6e-6, 0.6e-6]))
    near(cable.lengths, (3.0, 3.0))


def test_an_uneven_cable_converts_through_the_source_resistance() -> None:
    # 2πf R ΔC: 1 kohm, 3 m of 1.6 pF/m, 1 kHz.
    link = [*source_elements("line-driver", {"resistance": 1e3})]
    link += cable_elements({"length": 3.0, "capacitance": 60e-12, "capacitance_unbalance": 1.6e-12})
    link += load_model("impedance", {"across.resistance": 1e9}).elements
    found = abs(by_cause(link, 1e3)["cable"][0])
    assert found == pytest.approx(2 * np.pi * 1e3 * 1e3 * 4.8e-12, rel=1e-3)


def test_what_a_model_cannot_do_without() -> None:
    with pytest.raises(ValueError, match=r"^'battery' is no kind of source; known are amplifier, bridge, "):
        source_elements("battery", {})
    with pytest.raises(ValueError, match=r"^'lamp' is no kind of load; known are adc, difference-amplifier, "):
        load_model("lamp", {})
    with pytest.raises(ValueError, match=r"^a bridge needs resistance$"):
        source_elements("bridge", {"mismatch": 0.1})
    with pytest.raises(ValueError, match=r"^a cable needs length$"):
        cable_elements({"capacitance": 1e-10})
    with pytest.raises(ValueError, match=r"^a cable's unbalance is more than its legs have$"):
        cable_elements({"length": 1.0, "capacitance": 1e-12, "capacitance_unbalance": 3e-12})
