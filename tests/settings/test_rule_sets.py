"""The shipped rule sets: all readable, each limit with its source, the arithmetic of the sources right."""

import math
from pathlib import Path

import pytest

from pairrules.checks.rule import all_rules
from pairrules.result import SEVERITIES
from pairrules.settings.limit import Limit
from pairrules.settings.read_settings import read_settings
from pairrules.shipped import rules_folder

FORMS = {name: rule.form for name, rule in all_rules().items()}
SETS = sorted(file.stem for file in rules_folder().glob("*.yaml") if file.stem != "base")


def class_limits(name: str) -> dict[str, Limit]:
    settings = read_settings(Path("demo.yaml"), forms=FORMS, text=f"extends: [base, {name}]")
    (klass,) = settings.classes
    assert klass.name == name
    return dict(klass.limits)


def test_base_judges_every_pair_and_names_its_sources() -> None:
    settings = read_settings(None, forms=FORMS)
    assert settings.classes == ()
    assert {"half-pair", "leg-length", "partial-route"} <= settings.limits.keys()
    for limit in settings.limits.values():
        assert limit.source
        assert limit.severity in SEVERITIES


@pytest.mark.parametrize("name", SETS)
def test_a_set_brings_one_template_of_its_own_name_with_a_source_at_each_limit(name: str) -> None:
    settings = read_settings(Path("demo.yaml"), forms=FORMS, text=f"extends: [{name}]")
    assert settings.files == ("base.yaml", f"{name}.yaml", "demo.yaml")
    (klass,) = settings.classes
    assert (klass.name, klass.match) == (name, ())
    assert settings.class_of(name, (name,)) is None
    assert klass.limits
    for limit in klass.limits.values():
        assert limit.source, limit.place
        assert limit.severity in SEVERITIES


@pytest.mark.parametrize("name", SETS)
def test_a_project_takes_a_set_over_by_like(name: str) -> None:
    text = f"extends: [{name}]\nclasses: {{buoy: {{like: {name}, match: [BUOY]}}}}"
    settings = read_settings(Path("demo.yaml"), forms=FORMS, text=text)
    found, template = settings.class_of("BUOY", ()), settings.class_of("", (), declared=name)
    assert found is not None
    assert template is not None
    assert found.limits == template.limits
    assert (found.source, found.load) == (template.source, template.load)


def test_every_rule_has_a_shipped_limit_but_those_whose_amount_only_a_project_knows() -> None:
    every = read_settings(Path("demo.yaml"), forms=FORMS, text=f"extends: [base, {', '.join(SETS)}]")
    limits = [*every.limits.values(), *(limit for klass in every.classes for limit in klass.limits.values())]
    # What a single cause or a neighbour may convert follows from the whole link and the board, not from an interface.
    own = {"source-balance", "trace-balance", "cable-balance", "load-balance", "pickup-electric"}
    assert {limit.rule for limit in limits} == set(all_rules()) - own
    for limit in limits:
        # A standard or a book is named, or it is said that there is none.
        assert limit.place and any(mark in limit.source for mark in NAMED), (limit.rule, limit.place, limit.source)


NAMED = ("no source", "IEEE 802.3", "IEC ", "TIA-", "ISO 11898", "USB 2.0", "PCI Express", "Ott,")


def test_all_sets_together_have_no_fault() -> None:
    settings = read_settings(Path("demo.yaml"), forms=FORMS, text=f"extends: [{', '.join(SETS)}]")
    assert sorted(one.name for one in settings.classes) == SETS


PS_PER_MM = 6.671
"""Travel time at a permittivity of 4: √4 / c."""


def induced_uv(area_mm2: float) -> float:
    """Voltage [µV] in a loop square to 3 A/m at 50 Hz: 2π f µ0 H A."""
    return 2 * math.pi * 50 * 4e-7 * math.pi * 3 * area_mm2 * 1e-6 * 1e6


def test_the_loop_areas_induce_what_their_sources_say() -> None:
    area = {
        name: class_limits(name)["loop-area"].quantities["most"] for name in SETS if "loop-area" in class_limits(name)
    }
    assert induced_uv(area["bridge-sensor"]) == pytest.approx(0.118, abs=0.001)
    assert induced_uv(area["bridge-sensor"]) / 20e3 == pytest.approx(6e-6, rel=0.02)
    assert induced_uv(area["thermocouple"]) / 41 == pytest.approx(3e-3, rel=0.05)
    # Thermal noise √(4kTRB) of 150 ohm in 20 kHz at 293 K.
    assert induced_uv(area["audio-line"]) < math.sqrt(4 * 1.380649e-23 * 293 * 150 * 20e3) * 1e6
    assert induced_uv(area["converter-input"]) == pytest.approx(2.5 / 2**22 * 1e6 / 10, rel=0.02)


def test_the_lengths_take_the_time_their_sources_say() -> None:
    def ps(name: str) -> float:
        return class_limits(name)["leg-length"].quantities["most"] * PS_PER_MM

    base = read_settings(None, forms=FORMS).limits["leg-length"].quantities["most"]
    assert base * PS_PER_MM == pytest.approx(0.1 * 200, rel=0.01)
    assert ps("rs485") == ps("can") == pytest.approx(0.1 * 1000, rel=0.01)
    # Conversion of a skew, sin(π f Δτ): 2.5 mm at 62.5 MHz, and the skew that alone converts at −43 dB at 20 MHz.
    for name in ("ethernet-100base-tx", "ethernet-1000base-t"):
        assert 20 * math.log10(math.sin(math.pi * 62.5e6 * ps(name) * 1e-12)) == pytest.approx(-50, abs=0.5)
    assert 34 - 19.2 * math.log10(62.5 / 50) == pytest.approx(32, abs=0.2)
    whole = math.asin(10 ** (-43 / 20)) / (math.pi * 20e6) * 1e12
    assert whole == pytest.approx(113, abs=0.5)
    assert 0.8 * whole / 10 < ps("single-pair-ethernet") < whole / 10
