"""Limits said as a time, or as a share of the class's rise time or unit interval."""

from pathlib import Path

import jsonschema
import pytest
import yaml

from pairrules.errors import SettingsError
from pairrules.settings.limit import Limit, RuleForm, Timed
from pairrules.settings.read_settings import read_settings
from pairrules.settings.schema import settings_schema

FORMS = {
    "leg-length": RuleForm(quantities={"most": "length"}, required=("most",), timed=("most",)),
    "leg-delay": RuleForm(quantities={"most": "time"}, required=("most",), timed=("most",)),
    "layer-match": RuleForm(quantities={"most": "length"}, required=("most",)),
}


def limit(rule: str, most: str) -> Limit:
    text = f"extends: []\nlimits: {{{rule}: {{most: {most}}}}}"
    return read_settings(Path("buoy.yaml"), forms=FORMS, text=text).limits[rule]


@pytest.mark.parametrize(
    ("rule", "written", "quantities", "timed"),
    [
        ("leg-length", "0.5 mm", {"most": 0.5}, {}),
        ("leg-length", "20 ps", {}, {"most": Timed(amount=20.0)}),
        ("leg-length", "0.1 ns", {}, {"most": Timed(amount=100.0)}),
        ("leg-length", "5 % of rise_time", {}, {"most": Timed(amount=0.05, of="rise_time")}),
        ("leg-length", "5% of  unit_interval", {}, {"most": Timed(amount=0.05, of="unit_interval")}),
        ("leg-delay", "20 ps", {"most": 20.0}, {}),
        ("leg-delay", "1000 ppm of rise_time", {}, {"most": Timed(amount=0.001, of="rise_time")}),
    ],
)
def test_what_a_limit_may_say(rule: str, written: str, quantities: dict[str, float], timed: dict[str, Timed]) -> None:
    found = limit(rule, written)
    assert found.quantities == pytest.approx(quantities)
    assert found.timed.keys() == timed.keys()
    for key, expected in timed.items():
        assert (found.timed[key].amount, found.timed[key].of) == (pytest.approx(expected.amount), expected.of)


@pytest.mark.parametrize(
    ("rule", "written", "fault"),
    [
        (
            "leg-length",
            "5 % of rise time",
            "limits.leg-length.most is a share of 'rise time'; write 'rise_time'",
        ),
        ("leg-length", "5 mm of rise_time", "limits.leg-length.most: '5 mm' is no share; write 2 %"),
        ("leg-length", "-5 % of rise_time", "limits.leg-length.most is '-5 %'; write a value that is not negative"),
        ("leg-length", "5 %", "limits.leg-length.most: '5 %' is no length; write 0.5 mm"),
        ("layer-match", "20 ps", "limits.layer-match.most: '20 ps' is no length; write 0.5 mm"),
        (
            "layer-match",
            "5 % of rise_time",
            "limits.layer-match.most: '5 % of rise_time' is no length; write 0.5 mm",
        ),
    ],
)
def test_faults(rule: str, written: str, fault: str) -> None:
    with pytest.raises(SettingsError) as caught:
        limit(rule, written)
    assert caught.value.faults == (f"buoy.yaml: line 2, column {19 + len(rule)}: {fault}",)


def test_the_schema_takes_them_and_says_so() -> None:
    schema = settings_schema(FORMS)
    for written in ("20 ps", "5 % of rise_time"):
        document = yaml.safe_load(f"limits: {{leg-length: {{most: {written}}}}}")
        jsonschema.validate(document, schema, cls=jsonschema.Draft202012Validator)
    described = str(schema["properties"]["limits"]["properties"]["leg-length"])
    assert "or a time, such as 20 ps; or a share, such as 5 % of rise_time or unit_interval" in described
