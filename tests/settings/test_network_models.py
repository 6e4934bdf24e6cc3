"""Networks as settings give them, in SI units."""

from pathlib import Path

import pytest

from pairrules.board.units import DIMENSIONS
from pairrules.settings.network_models import (
    LOAD_FORMS,
    SOURCE_FORMS,
    Aggressor,
    CableSpec,
    LoadSpec,
    PickupSpec,
    SourceSpec,
)
from pairrules.settings.pair_class import PairClass
from pairrules.settings.read_settings import read_settings
from pairrules.settings.shapes import Quantity


def read_class(text: str) -> PairClass:
    """The one class of a file, its keys given as one line of YAML."""
    (found,) = read_settings(Path("demo.yaml"), forms={}, text=f"extends: []\nclasses: {{one: {text}}}\n").classes
    return found


def test_a_class_without_models_has_none() -> None:
    found = read_class("{match: [A]}")
    assert (found.source, found.cable, found.load, found.pickup, found.mask) == (None, None, None, None, ())


def test_source_cable_and_load_come_in_si_units() -> None:
    found = read_class(
        "{source: {kind: transformer, resistance: 75 ohm, winding_capacitance: 10 pF,"
        " winding_capacitance_mismatch: -50 %},"
        " cable: {length: 3 m, resistance: 90 ohm/km, capacitance: 60 pF/m, inductance: 0.6 uH/m,"
        " capacitance_unbalance: 1600 pF/km, resistance_unbalance: 2 %, twisted: true},"
        " load: {kind: impedance, plus: {resistance: 1 Mohm, capacitance: 10 pF}, minus: {resistance: 1 Mohm},"
        " across: {resistance: 10 kohm}, rejection: 100 dB}}"
    )
    assert found.source is not None
    assert found.source.kind == "transformer"
    assert found.source.values == pytest.approx(
        {"resistance": 75.0, "winding_capacitance": 1e-11, "winding_capacitance_mismatch": -0.5}
    )
    assert found.cable is not None
    assert found.cable.values == pytest.approx(
        {
            "length": 3.0,
            "resistance": 0.09,
            "capacitance": 6e-11,
            "inductance": 6e-7,
            "capacitance_unbalance": 1.6e-12,
            "resistance_unbalance": 0.02,
        }
    )
    assert (found.cable.twisted, found.cable.screened) == (True, None)
    assert found.load is not None
    assert found.load.values == pytest.approx(
        {"plus.resistance": 1e6, "plus.capacitance": 1e-11, "minus.resistance": 1e6, "across.resistance": 1e4}
    )
    assert found.load.rejection == ((0.0, 100.0),)


def test_a_rejection_curve_rises_in_frequency() -> None:
    found = read_class(
        "{load: {kind: adc, resistance: 1 kohm,"
        " rejection: [{frequency: 1 MHz, value: 60 dB}, {frequency: 50 Hz, value: 110 dB}]}}"
    )
    assert found.load == LoadSpec(kind="adc", values={"resistance": 1000.0}, rejection=((50.0, 110.0), (1e6, 60.0)))


def test_a_field_is_a_flux_density_and_a_direction_has_length_one() -> None:
    # 1 A/m is 1.257 µT (μ0 = 4π·10⁻⁷ H/m).
    found = read_class("{pickup: {field: 1 A/m, frequency: 50 Hz, direction: [0, 3, -4]}}").pickup
    assert found is not None
    assert found.flux_density_t == pytest.approx(1.2566e-6, rel=1e-4)
    assert found.frequency_hz == 50.0
    assert found.direction == pytest.approx((0.0, 0.6, -0.8))
    given = read_class("{pickup: {flux: 10 uT, frequency: 50 Hz}}").pickup
    assert given is not None
    assert given.flux_density_t == pytest.approx(1e-5)
    assert given.direction is None


def test_aggressors_and_times() -> None:
    found = read_class(
        "{pickup: {aggressors: [{net: 'CLK*', swing: 3.3 V, rise_time: 1 s}]}, rise_time: 200 ps,"
        " unit_interval: 2 ns, reach: 40 mil, mask: [{frequency: 20 MHz, value: 43 dB}]}"
    )
    assert found.pickup == PickupSpec(aggressors=(Aggressor(net="CLK*", swing_v=3.3, rise_time_s=1.0),))
    assert (found.rise_time_ps, found.unit_interval_ps) == pytest.approx((200.0, 2000.0))
    assert found.reach_mm == pytest.approx(1.016)
    assert found.mask == ((2e7, 43.0),)


def test_models_given_by_kind_are_told_apart() -> None:
    found = read_class("{source: {kind: bridge, resistance: 350 ohm}, cable: {length: 4 m}}")
    assert found.source == SourceSpec(kind="bridge", values={"resistance": 350.0})
    assert found.cable == CableSpec(values={"length": 4.0})


@pytest.mark.parametrize("kind", [*SOURCE_FORMS, *LOAD_FORMS])
def test_every_quantity_of_a_model_comes_in_its_si_unit(kind: str) -> None:
    for form in (forms[kind] for forms in (SOURCE_FORMS, LOAD_FORMS) if kind in forms):
        for shape in form.keys.values():
            if isinstance(shape, Quantity):
                assert DIMENSIONS[shape.dimension] in {"ohm", "F", "1", "dB"}
