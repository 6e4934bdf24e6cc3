"""The arithmetic behind the shipped limits on electrical figures."""

import math
from pathlib import Path

import pytest

from pairrules.balance.load_models import rejection_at
from pairrules.checks.rule import all_rules
from pairrules.settings.limit import RuleForm
from pairrules.settings.pair_class import PairClass
from pairrules.settings.read_settings import read_settings

FORMS = {name: RuleForm(quantities=rule.quantities, required=rule.required) for name, rule in all_rules().items()}
MU_0 = 4e-7 * math.pi
PS_PER_MM = 6.671
"""Travel time at a permittivity of 4: √4 / c."""


def template(name: str) -> PairClass:
    (klass,) = read_settings(Path("demo.yaml"), forms=FORMS, text=f"extends: [base, {name}]").classes
    return klass


def least(name: str, rule: str, key: str = "least") -> float:
    return template(name).limits[rule].quantities[key]


def skew_db(delay_ps: float, frequency: float) -> float:
    """Conversion of a skew [dB]: sin(π f Δτ)."""
    return 20 * math.log10(math.sin(math.pi * frequency * delay_ps * 1e-12))


@pytest.mark.parametrize("mhz", [1.0, 10.0, 50.0, 62.5, 100.0])
def test_1000base_t_mask_is_the_formula(mhz: float) -> None:
    """IEEE 802.3 40.8.3.2 (recalled, not re-read)."""
    (found,) = rejection_at(template("ethernet-1000base-t").mask, mhz * 1e6)
    assert found == pytest.approx(34 - 19.2 * math.log10(mhz / 50), abs=0.01)


@pytest.mark.parametrize("mhz", [0.3, 1.0, 20.0, 66.0, 100.0, 200.0])
def test_single_pair_mask_is_the_formula(mhz: float) -> None:
    """IEEE 802.3cg-2019, mixing segment of 10BASE-T1S."""
    (found,) = rejection_at(template("single-pair-ethernet").mask, mhz * 1e6)
    assert found == pytest.approx(43 if mhz <= 20 else 43 - 20 * math.log10(mhz / 20), abs=0.01)


@pytest.mark.parametrize("name", ["ethernet-1000base-t", "single-pair-ethernet"])
def test_masks_are_judged_at_frequencies_of_their_class_and_leave_room_for_the_skew_allowed(name: str) -> None:
    klass = template(name)
    inside = [f for f in klass.frequencies if klass.mask[0][0] <= f <= klass.mask[-1][0]]
    assert len(inside) >= 3
    for frequency in inside:
        assert (
            -skew_db(klass.limits["leg-delay"].quantities["most"], frequency) > rejection_at(klass.mask, frequency)[0]
        )


def test_delays_are_those_of_the_lengths_allowed() -> None:
    for name in ("lvds", "usb2-high-speed", "serial-lane", "single-pair-ethernet", "ethernet-100base-tx"):
        limits = template(name).limits
        length, delay = (limits[rule].quantities["most"] for rule in ("leg-length", "leg-delay"))
        assert delay == pytest.approx(length * PS_PER_MM, rel=0.06), name
    assert skew_db(17, 62.5e6) == pytest.approx(-50, abs=0.5)


def test_rejections_leave_what_their_sources_say() -> None:
    bridge = 5 * 10 ** (-least("bridge-sensor", "link-rejection") / 20)
    assert bridge == pytest.approx(50e-6)
    assert bridge / 20e-3 == pytest.approx(0.0025)
    thermocouple_uv = 1e6 * 10 ** (-least("thermocouple", "link-rejection") / 20)
    assert thermocouple_uv == pytest.approx(32, abs=0.5)
    assert thermocouple_uv / 41 == pytest.approx(0.8, abs=0.05)


def test_source_imbalances_ask_the_impedances_that_their_sources_say() -> None:
    for name, ohm in (("thermocouple", 640e3), ("audio-line", 10e3)):
        source = template(name).source
        assert source is not None
        apart = abs(source.values["plus"] - source.values["minus"])
        asked = apart * 10 ** (least(name, "load-impedance", "rejection") / 20)
        assert asked == pytest.approx(ohm, rel=0.02)


@pytest.mark.parametrize("name", ["bridge-sensor", "thermocouple", "audio-line", "converter-input"])
def test_the_field_of_the_class_induces_the_pickup_allowed_in_the_area_allowed(name: str) -> None:
    klass = template(name)
    pickup = klass.pickup
    assert pickup is not None
    assert pickup.flux_density_t == pytest.approx(3 * MU_0)
    assert pickup.frequency_hz == 50
    area = klass.limits["loop-area"].quantities["most"] * 1e-6
    induced = 2 * math.pi * 50 * 3 * MU_0 * area
    allowed = klass.limits["pickup-magnetic"].quantities["most"]
    assert induced <= allowed < 1.05 * induced


def test_impedance_bands_hold_what_their_sources_say() -> None:
    lane = template("serial-lane").limits["pair-impedance"].quantities
    assert lane["least"] == pytest.approx(85 * 0.9)
    assert lane["most"] == pytest.approx(100 * 1.1)
    usb = template("usb2-high-speed").limits["pair-impedance"].quantities
    assert usb["target"] * (1 - usb["tolerance"]) == pytest.approx(76.5)
    assert usb["target"] * (1 + usb["tolerance"]) == pytest.approx(103.5)
