"""Whatever a settings file holds, it is read or its faults are told, one line each, the same every time."""

from pathlib import Path

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from pairrules.errors import SettingsError
from pairrules.settings import nodes
from pairrules.settings.faults import Faults
from pairrules.settings.limit import RuleForm
from pairrules.settings.read_settings import read_settings

FORMS = {"leg-length": RuleForm(quantities={"least": "length", "most": "length"}, required=("least", "most"))}

KEYS = (
    "extends",
    "classes",
    "limits",
    "leg-length",
    "most",
    "least",
    "source",
    "kind",
    "load",
    "like",
    "match",
    "pairs",
)
VALUES = ("bridge", "off", "0.5", "~", "*", "[x]", "plus", "minus", "copper", "name", "a\x1b[2J", "", "1 mm", "-5 mm")
WORDS = st.sampled_from((*KEYS, *VALUES))
DOCUMENTS = st.recursive(
    WORDS | st.none() | st.booleans() | st.floats(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(WORDS, inner, max_size=4),
    max_leaves=20,
)


def outcome(text: str) -> str:
    try:
        return repr(read_settings(Path("demo.yaml"), forms=FORMS, text=text))
    except SettingsError as error:
        faults = error.faults
    for line in faults:
        assert line.startswith("demo.yaml: ")
        assert line.isprintable()
        assert "; " in line, "a remedy is missing"
    return "\n".join(faults)


@settings(max_examples=150, deadline=None, derandomize=True)
@given(document=DOCUMENTS)
def test_any_document(document: object) -> None:
    body = document if isinstance(document, dict) else {"limits": document}
    text = yaml.safe_dump(body | {"extends": []})
    assert outcome(text) == outcome(text)


@settings(max_examples=150, deadline=None, derandomize=True)
@given(text=st.text(alphabet="extends: []{}\n\t-&*!|>'\"#%@`,?\\ab\x00\x85\u2028\ud800é", max_size=40))
def test_any_characters(text: str) -> None:
    assert outcome("extends: []\n" + text) == outcome("extends: []\n" + text)


def test_the_two_builds_of_the_yaml_parser_give_the_same_tree(monkeypatch: pytest.MonkeyPatch) -> None:
    text = "a: [1 mm, {b: 'é', c: &x ~}]\nd: >\n  two\n  lines\ne: *x\n"
    first = nodes.parse(text, Faults("demo.yaml"))
    assert first is not None
    monkeypatch.setattr(nodes, "_LOADER", yaml.SafeLoader)
    assert nodes.parse(text, Faults("demo.yaml")) == first
