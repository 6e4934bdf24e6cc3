"""The JSON Schema accepts what the reader accepts, and refuses what it refuses wherever a schema can tell."""

from pathlib import Path
from typing import Any

import jsonschema
import pytest
import yaml

from fixtures.write_settings_schema import text
from pairrules.checks.rule import all_rules
from pairrules.errors import SettingsError
from pairrules.schemas import schema_text
from pairrules.settings.read_settings import read_settings
from pairrules.settings.schema import settings_schema
from pairrules.shipped import rules_folder

FORMS = {name: rule.form for name, rule in all_rules().items()}
SCHEMA = settings_schema(FORMS)

GOOD = """
extends: [base]
stackup:
  - {name: TOP, kind: copper, thickness: 35 um}
  - {name: D1, kind: dielectric, thickness: 0.2 mm, permittivity: 4.2, loss_tangent: 0.02}
reference_nets: [GND, "AGND*", 5]
pairs:
  - {name: TIDE, plus: T_P, minus: T_N}
  - {ignore: ["RESET_N"]}
limits: {half-pair: off, via-match: {most: 0}}
classes:
  tide:
    match: ["TIDE"]
    source: {kind: impedance, plus: 350 ohm, mismatch: -1 %}
    cable: {length: 3 m, twisted: true}
    load: {kind: impedance, across: {resistance: 10 kohm}, rejection: [{frequency: 50 Hz, value: 110 dB}]}
    frequencies: [50 Hz]
    pickup: {field: 3 A/m, frequency: 50 Hz, direction: [0, 0, 1]}
    limits: {leg-length: {most: .5 mm, severity: note, source: a book}}
waivers: buoy-waivers.yaml
"""

BAD = [
    "clases: {}",
    "limits: {leg-length: {most: 5}}",
    "limits: {leg-length: {most: -5 mm}}",
    "limits: {leg-length: {}}",
    "limits: {half-pair: none}",
    "pairs: [{plus: A}]",
    "pairs: [{plus: A, minus: B, ignore: [C]}]",
    "classes: {a: {source: {kind: bride, resistance: 1 ohm}}}",
    "classes: {a: {source: {kind: bridge}}}",
    "classes: {a: {source: {kind: impedance, plus: 1 ohm, minus: 2 ohm, mismatch: 1 %}}}",
    "classes: {a: {cable: {length: 1 m, twisted: maybe}}}",
    "classes: {a: {pickup: {field: 3 A/m}}}",
    "stackup: [{name: A, kind: copper, permittivity: 0.5}]",
    "reference_nets: []",
]


def valid(text: str) -> bool:
    document: Any = yaml.safe_load(text)
    return jsonschema.Draft202012Validator(SCHEMA).is_valid(document)


def test_the_schema_is_a_schema() -> None:
    jsonschema.Draft202012Validator.check_schema(SCHEMA)


def test_reader_and_schema_accept_a_full_file() -> None:
    read_settings(Path("demo.yaml"), forms=FORMS, text=GOOD)
    jsonschema.validate(yaml.safe_load(GOOD), SCHEMA, cls=jsonschema.Draft202012Validator)


@pytest.mark.parametrize("text", BAD)
def test_reader_and_schema_refuse_the_same(text: str) -> None:
    assert not valid(text)
    with pytest.raises(SettingsError):
        read_settings(Path("demo.yaml"), forms=FORMS, text=text)


@pytest.mark.parametrize("file", sorted(rules_folder().glob("*.yaml")), ids=lambda file: file.stem)
def test_every_shipped_set_follows_the_schema(file: Path) -> None:
    assert valid(file.read_text(encoding="utf-8"))


def test_the_shipped_file_is_the_schema_of_this_form() -> None:
    assert schema_text("settings") == text(), "run python fixtures/write_settings_schema.py"
