"""Every fault of a settings file, its whole line."""

from pathlib import Path

import pytest

from pairrules.errors import SettingsError
from pairrules.settings.limit import RuleForm
from pairrules.settings.read_settings import read_settings

FORMS = {
    "apart-run": RuleForm(quantities={"most": "length", "share": "share"}, required=("most", "share")),
    "gap-band": RuleForm(
        quantities={"spread": "share", "least": "length", "most": "length", "for": "length"},
        required=("spread", "least", "most"),
    ),
    "half-pair": RuleForm(quantities={}, required=()),
    "leg-length": RuleForm(quantities={"most": "length"}, required=("most",)),
    "via-match": RuleForm(quantities={"most": "count"}, required=("most",)),
}


def faults(text: str) -> tuple[str, ...]:
    with pytest.raises(SettingsError) as caught:
        read_settings(Path("demo.yaml"), forms=FORMS, text=text)
    assert caught.value.exit_status == 2
    return caught.value.faults


CASES = {
    # Reading as YAML.
    "extends: []\nextends: []\n": (
        "line 2, column 1: 'extends' stands here a second time; it is already in line 1; keep one"
    ),
    "extends: []\nclasses: !!python/name:os.system x\n": (
        "line 2, column 10: the tag 'tag:yaml.org,2002:python/name:os.system' is not understood; leave the tag out"
    ),
    "extends: []\n? [a]\n: b\n": "line 2, column 3: a key is a list or a table; write a word as key",
    "extends: []\n---\nextends: []\n": "line 2, column 1: a second document begins; keep one document a file",
    "extends: *gone\n": "line 1, column 10: the alias *gone names nothing complete before it; write the value out",
    "extends: &a [*a]\n": "line 1, column 14: the alias *a names nothing complete before it; write the value out",
    'extends: []\nwaivers: "a\\eb"\n': (
        "line 2, column 10: the text holds a character that cannot be printed; delete it"
    ),
    "extends: []\nwaivers: a\x1bb\n": "line 2, column 11: holds the control character U+001B; delete it",
    "waivers: " + "[" * 60: "line 1, column 59: is nested more than 50 deep; write it flatter",
    "waivers: '" + "x" * 1001 + "'\nextends: []": "line 1, column 10: a text of 1001 characters; keep it below 1000",
    "- extends\n": "line 1, column 1: the file is no table; write keys and values, such as key: value",
    # Keys and shapes.
    "extends: []\nclases: {}\n": "line 2, column 1: the top level knows no 'clases'; write 'classes'",
    "extends: []\nquux: 1\n": (
        "line 2, column 1: the top level knows no 'quux'; "
        "known are classes, extends, limits, pairs, part_values, pin_lengths, reference_nets, stackup, waivers"
    ),
    "extends: []\nclasses: {}\n": "line 2, column 10: classes is empty; fill it or leave it out",
    "extends: []\nclasses:\n": "line 2, column 9: classes is empty; write keys and values, such as key: value",
    "extends: []\nwaivers:\n": "line 2, column 9: waivers is empty; fill it or leave it out",
    "extends: []\nwaivers: ''\n": "line 2, column 10: waivers is an empty text; fill it or leave it out",
    "extends: []\nwaivers: [a]\n": "line 2, column 10: waivers is a list; write a text",
    "extends: []\nreference_nets: GND\n": (
        "line 2, column 17: reference_nets is no list; write a list, such as [first, second]"
    ),
    "extends: []\nreference_nets: []\n": "line 2, column 17: reference_nets has 0 entries; give at least 1",
    # Limits.
    "extends: []\nlimits: {leg-lenght: {most: 1 mm}}\n": (
        "line 2, column 10: limits knows no 'leg-lenght'; write 'leg-length'"
    ),
    "extends: []\nlimits: {leg-length: {most: 0.5}}\n": (
        "line 2, column 29: limits.leg-length.most: '0.5' has no unit; write 0.5 mm"
    ),
    "extends: []\nlimits: {leg-length: {most: 5 ohm}}\n": (
        "line 2, column 29: limits.leg-length.most: '5 ohm' is no length; write 0.5 mm"
    ),
    "extends: []\nlimits: {leg-length: {most: wide}}\n": (
        "line 2, column 29: limits.leg-length.most: 'wide' is no quantity; write a number and a unit, such as 0.5 mm"
    ),
    "extends: []\nlimits: {leg-length: {most: 1e999 mm}}\n": (
        "line 2, column 29: limits.leg-length.most: '1e999 mm' is not finite; write a finite number"
    ),
    "extends: []\nlimits: {leg-length: {most: -1 mm}}\n": (
        "line 2, column 29: limits.leg-length.most is '-1 mm'; write a value that is not negative"
    ),
    "extends: []\nlimits: {leg-length: {least: 1 mm, most: 1 mm}}\n": (
        "line 2, column 23: limits.leg-length knows no 'least'; known are most, severity, source"
    ),
    "extends: []\nlimits: {leg-length: {severity: note}}\n": (
        "line 2, column 22: limits.leg-length lacks 'most'; add it"
    ),
    "extends: []\nlimits: {gap-band: {for: 1 mm}}\n": (
        "line 2, column 20: limits.gap-band lacks 'spread' or 'least' or 'most'; add one of them"
    ),
    "extends: []\nlimits: {gap-band: {least: 2 mm, most: 1 mm}}\n": (
        "line 2, column 20: limits.gap-band: least is greater than most; exchange or mend them"
    ),
    "extends: []\nlimits: {half-pair: {severity: revue}}\n": (
        "line 2, column 32: limits.half-pair.severity is 'revue'; write 'review'"
    ),
    "extends: []\nlimits: {half-pair: none}\n": "line 2, column 21: limits.half-pair is 'none'; write 'off'",
    # Pairs, stackup.
    "extends: []\npairs:\n  - {plus: A}\n": "line 3, column 5: pairs[0] has 'plus' without 'minus'; add 'minus'",
    "extends: []\npairs:\n  - {name: A}\n": "line 3, column 5: pairs[0] lacks 'plus' or 'ignore'; add one of them",
    "extends: []\npairs:\n  - {name: A, ignore: [B]}\n": (
        "line 3, column 23: pairs[0] has both 'name' and 'ignore'; keep one of them"
    ),
    "extends: []\npairs:\n  - {plus: A, minus: A}\n": (
        "line 3, column 5: pairs[0] has 'A' as plus and as minus; name two nets"
    ),
    "extends: []\npairs:\n  - {plus: 'A*', minus: B}\n": (
        "line 3, column 5: pairs[0] has 1 stars in plus and 0 in minus; "
        "write as many in both, they stand for the same text"
    ),
    "extends: []\npairs:\n  - {plus: '*P', minus: '*N', name: X}\n": (
        "line 3, column 37: pairs[0] gives one name to all pairs of a pattern; leave the name out"
    ),
    "extends: []\nstackup:\n  - {name: A, kind: air}\n": (
        "line 3, column 21: stackup[0].kind is 'air'; write one of copper, dielectric"
    ),
    "extends: []\nstackup:\n  - {name: A, kind: dielectric}\n": (
        "line 3, column 3: stackup has no copper layer; list the copper layers too"
    ),
    "extends: []\nstackup:\n  - {name: A, kind: copper}\n  - {name: A, kind: copper}\n": (
        "line 4, column 12: stackup[1].name is 'A' a second time; name each layer once"
    ),
    "extends: []\nstackup:\n  - {name: A, kind: copper, thickness: 0 um}\n": (
        "line 3, column 40: stackup[0].thickness is '0 um'; write a value above zero"
    ),
    "extends: []\nstackup:\n  - {name: A, kind: copper, permittivity: 0.5}\n": (
        "line 3, column 43: stackup[0].permittivity is '0.5'; write a number of at least 1"
    ),
    "extends: []\nstackup:\n  - {name: A, kind: copper, permittivity: 4.2 mm}\n": (
        "line 3, column 43: stackup[0].permittivity is '4.2 mm'; write a plain number"
    ),
    # Networks.
    "extends: []\nclasses: {a: {source: {plus: 1 ohm}}}\n": (
        "line 2, column 23: classes.a.source lacks 'kind'; add kind: with one of "
        "impedance, bridge, line-driver, amplifier, microphone, transformer"
    ),
    "extends: []\nclasses: {a: {source: {kind: bride}}}\n": (
        "line 2, column 30: classes.a.source.kind is 'bride'; write 'bridge'"
    ),
    "extends: []\nclasses: {a: {source: {kind: bridge, resistance: 350}}}\n": (
        "line 2, column 50: classes.a.source.resistance: '350' has no unit; write 350 ohm"
    ),
    "extends: []\nclasses: {a: {source: {kind: impedance, plus: 1 ohm, minus: 2 ohm, mismatch: 1 %}}}\n": (
        "line 2, column 78: classes.a.source has both 'minus' and 'mismatch'; keep one of them"
    ),
    "extends: []\nclasses: {a: {load: {kind: difference-amplifier, r1: 1 kohm}}}\n": (
        "line 2, column 21: classes.a.load lacks 'r2'; add it"
    ),
    "extends: []\nclasses: {a: {cable: {length: 1 m, twisted: perhaps}}}\n": (
        "line 2, column 45: classes.a.cable.twisted is 'perhaps'; write true or false"
    ),
    "extends: []\nclasses: {a: {cable: {length: 1 m, capacitance_unbalance: 1 pF/m}}}\n": (
        "line 2, column 59: classes.a.cable.capacitance_unbalance is more than both legs' capacitance to reference; "
        "give the capacitance of a leg, or less unbalance"
    ),
    "extends: []\nclasses: {a: {load: {kind: adc, resistance: 0 ohm}}}\n": (
        "line 2, column 45: classes.a.load.resistance is '0 ohm'; write a value above zero"
    ),
    "extends: []\nclasses: {a: {source: {kind: bridge, resistance: 1 ohm, mismatch: -200 %}}}\n": (
        "line 2, column 67: classes.a.source.mismatch is '-200 %'; write less than 200 %"
    ),
    "extends: []\nclasses: {a: {mask: [{frequency: 1 Hz, value: 1 dB}, {frequency: 1 Hz, value: 2 dB}]}}\n": (
        "line 2, column 66: classes.a.mask[1] gives a frequency a second value; keep one of them"
    ),
    "extends: []\nclasses: {a: {pickup: {field: 3 A/m}}}\n": (
        "line 2, column 23: classes.a.pickup has 'field' without 'frequency'; add 'frequency'"
    ),
    "extends: []\nclasses: {a: {pickup: {field: 3 A/m, frequency: 50 Hz, direction: [0, 0]}}}\n": (
        "line 2, column 67: classes.a.pickup.direction has 2 entries; give exactly 3"
    ),
    "extends: []\nclasses: {a: {pickup: {field: 3 A/m, frequency: 50 Hz, direction: [0, 0, 0]}}}\n": (
        "line 2, column 67: classes.a.pickup.direction has no length; give the field's x, y and z"
    ),
    # Classes among each other.
    "extends: []\nclasses: {a: {match: ['BR*']}, b: {match: [BRIDGE, 'BR1*']}}\n": (
        "line 2, column 43: classes.b is never reached, class 'a' above it matches all that it would; "
        "move it up or narrow the other's patterns"
    ),
    "extends: []\nclasses: {a: {like: sensr}, sensor: {match: [X]}}\n": (
        "line 2, column 21: classes.a.like names the unknown class 'sensr'; "
        "write 'sensor', or extend the rule set that has it"
    ),
    "extends: []\nclasses: {a: {like: a}}\n": "line 2, column 21: classes.a is like itself; take one 'like' out",
    # The chain.
    "extends: [./absent.yaml]\n": (
        "line 1, column 11: extends absent.yaml, which does not exist; mend the path; it is relative to this file"
    ),
}


@pytest.mark.parametrize("text", CASES)
def test_a_fault_is_told_in_one_line(text: str) -> None:
    assert faults(text) == (f"demo.yaml: {CASES[text]}",)


def test_broken_yaml_names_the_place_and_the_remedy() -> None:
    (line,) = faults("extends: []\nwaivers: a: b\n")
    assert line.startswith("demo.yaml: line 2, column 11: cannot be read as YAML: ")
    assert line.endswith("; mend the indentation, brackets or quotes there")


def test_an_unknown_rule_set_names_the_nearest() -> None:
    (line,) = faults("extends: [bass]\n")
    assert line == (
        "demo.yaml: line 1, column 11: extends the unknown rule set 'bass'; write 'base', or a path such as ./bass.yaml"
    )


def test_likeness_in_a_circle_is_told_once_a_class() -> None:
    assert faults("extends: []\nclasses: {a: {like: b}, b: {like: a}, c: {like: a}}\n") == (
        "demo.yaml: line 2, column 21: classes.a is like itself by way of b; take one 'like' out",
        "demo.yaml: line 2, column 35: classes.b is like itself by way of a; take one 'like' out",
    )


def test_all_faults_are_told_at_once_in_the_files_order() -> None:
    assert faults("extends: []\nlimits: {leg-length: {most: 5}, half-pair: {severity: bad}}\nclases: {}\n") == (
        "demo.yaml: line 2, column 29: limits.leg-length.most: '5' has no unit; write 0.5 mm",
        "demo.yaml: line 2, column 55: limits.half-pair.severity is 'bad'; write one of blocker, review, note",
        "demo.yaml: line 3, column 1: the top level knows no 'clases'; write 'classes'",
    )


def test_aliases_of_aliases_are_refused_before_they_are_spelled_out() -> None:
    rows = ["a0: &a0 [x, x, x, x, x, x, x, x, x, x]"]
    rows += [f"a{n}: &a{n} [{', '.join([f'*a{n - 1}'] * 10)}]" for n in range(1, 30)]
    assert faults("\n".join(rows)) == (
        "demo.yaml: line 5, column 5: spells out to more than 100000 values; use fewer aliases",
    )


def test_an_alias_stands_for_its_value() -> None:
    settings = read_settings(
        Path("demo.yaml"),
        forms=FORMS,
        text="extends: []\nlimits: {leg-length: &short {most: 1 mm}, apart-run: *short}\n",
    )
    assert settings.limits["apart-run"].quantities == {"most": 1.0}


def test_a_file_too_large_or_in_another_encoding_is_refused(tmp_path: Path) -> None:
    large = tmp_path / "large.yaml"
    large.write_bytes(b"#" * 4_000_001)
    with pytest.raises(SettingsError) as caught:
        read_settings(large, forms=FORMS)
    assert caught.value.faults == (f"{large}: holds more than 4000000 bytes; split it with extends",)
    other = tmp_path / "other.yaml"
    other.write_bytes(b"extends: []\nwaivers: \xff\n")
    with pytest.raises(SettingsError) as caught:
        read_settings(other, forms=FORMS)
    assert caught.value.faults == (f"{other}: line 2 is not UTF-8; save the file as UTF-8",)


def test_a_file_that_is_not_there_is_told(tmp_path: Path) -> None:
    absent = tmp_path / "absent.yaml"
    with pytest.raises(SettingsError) as caught:
        read_settings(absent, forms=FORMS)
    assert caught.value.faults == (f"{absent}: does not exist; give the path of a settings file",)
