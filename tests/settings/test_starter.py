"""The first settings file is read without fault, puts every pair where it says, whatever the names are."""

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import settings as effort
from hypothesis import strategies as st

from pairrules.checks.rule import all_rules
from pairrules.settings.likely_set import DraftPair
from pairrules.settings.read_settings import read_settings
from pairrules.settings.settings import Settings
from pairrules.settings.starter import Draft, pattern_for, starter

FORMS = {name: rule.form for name, rule in all_rules().items()}


def pair(name: str, *, declared: str = "") -> DraftPair:
    return DraftPair(name=name, nets=(f"{name}_P", f"{name}_N"), declared=declared)


def read(*pairs: DraftPair, **more: object) -> tuple[str, Settings]:
    text = starter(Draft(file="buoy.json", pairs=pairs, **more), FORMS)  # type: ignore[arg-type]
    return text, read_settings(Path("buoy.yaml"), forms=FORMS, text=text)


def class_of(settings: Settings, one: DraftPair) -> str:
    found = settings.class_of(one.name, one.nets, one.declared)
    return "" if found is None else found.name


def test_pairs_stand_in_classes_that_take_over_the_fitting_set() -> None:
    pairs = pair("CAN"), pair("USB"), pair("BUOY"), pair("USB2")
    text, settings = read(*pairs)
    assert [class_of(settings, one) for one in pairs] == [
        "can-pairs", "usb2-high-speed-pairs", "other-pairs", "usb2-high-speed-pairs",
    ]  # fmt: skip
    can = settings.class_of("CAN", ())
    assert can is not None and can.like == "can" and can.load is not None
    assert "extends: [base, can, usb2-high-speed]\n" in text


def test_only_what_the_set_leaves_open_is_to_be_filled_in() -> None:
    text, _ = read(pair("CAN"), pair("USB"))
    can, usb = text.split('"can-pairs"')[1].split('"usb2-high-speed-pairs"')
    assert "    # source: {kind: line-driver, resistance: <ohm>}   # what drives the pair\n" in can
    assert "# load: " not in can
    assert "To fill in" not in usb


def test_a_class_of_the_board_file_keeps_its_name() -> None:
    pairs = pair("CAN", declared="winch"), pair("RS485", declared="rs485"), pair("USB", declared="a\x1bb")
    text, settings = read(*pairs)
    assert [class_of(settings, one) for one in pairs] == ["winch", "rs485", "usb2-high-speed-pairs"]
    rs485 = settings.class_of("RS485", ())
    assert rs485 is not None and rs485.load is not None and rs485.like == ""
    assert "class a?b in the board file" in text


def test_without_pairs_layers_or_reference() -> None:
    text, settings = read()
    assert settings.classes == () and settings.reference_nets is None
    assert "# No pair was found, so that no class is needed.\n" in text
    assert "# reference_nets: " in text


def test_the_stackup_to_fill_in_names_the_copper_of_the_file() -> None:
    layers = (("TOP", "copper"), ("IN 1", "copper"), ("BOTTOM", "copper"))
    text, settings = read(pair("CAN"), layers=layers, lacking=("thickness of TOP", "thickness of IN 1"))
    assert settings.stackup is None
    assert "# The board file lacks the thickness of TOP and more.\n" in text
    # As people will fill it in.
    filled = (
        text.replace("<mm>", "0.1 mm")
        .replace("permittivity: <number>", "permittivity: 4.2")
        .replace(": <number>", ": 0.02")
        .replace("# stackup:", "stackup:")
    )
    filled = filled.replace('#   - {name: "', '  - {name: "').replace('  - {name: "<name>"', '#   - {name: "<name>"')
    stackup = read_settings(Path("buoy.yaml"), forms=FORMS, text=filled).stackup
    assert stackup is not None
    assert [layer.name for layer in stackup] == ["TOP", "D1", "IN 1", "D2", "BOTTOM"]


def test_two_pairs_of_one_name_are_told_apart_by_their_nets() -> None:
    first = DraftPair(name="X", nets=("CAN_H", "CAN_L"))
    second = DraftPair(name="X", nets=("USB_DP", "USB_DM"))
    _, settings = read(first, second)
    assert [class_of(settings, one) for one in (first, second)] == ["can-pairs", "usb2-high-speed-pairs"]


@pytest.mark.parametrize(
    ("name", "known", "pattern"),
    [
        ("D[0]", ("D[0]",), "D[0]"),
        ("D[0]", ("D[0]", "D0"), "D[[]0]"),
        ("A*", ("A*", "AB"), "A[*]"),
        ("a\x1b[2Jb", (), "a?[[]2Jb"),
        (" lead", (), "?lead"),
        ("tail ", (), "tail?"),
        ("in side", (), "in side"),
        ("hard\u00a0blank", (), "hard?blank"),
        ("x" * 1200, (), "x" * 998 + "*"),
    ],
)
def test_patterns(name: str, known: tuple[str, ...], pattern: str) -> None:
    assert pattern_for(name, known) == pattern


ODD = [
    'a"b',
    "a\\b",
    "a: b",
    "#a",
    "- a",
    "&a",
    "*a",
    "!a",
    "{a}",
    "[a",
    "~",
    "null",
    "no",
    "1e3",
    "a\nb",
    "a\u202eb",
    "ä",
    "'",
    "%a",
    "@",
]


@pytest.mark.parametrize("name", ODD)
def test_odd_names(name: str) -> None:
    one = pair(name, declared=name)
    _, settings = read(
        one, pair("CAN"), reference=(name,), unpaired=(name,), layers=((name, "copper"),), lacking=(name,)
    )
    assert class_of(settings, one)
    assert settings.reference_nets is not None and len(settings.reference_nets) == 1


NAMES = st.text(st.characters(), min_size=1, max_size=12)


@effort(deadline=None, max_examples=25)
@given(st.lists(NAMES, max_size=5, unique=True), st.lists(NAMES, max_size=2), NAMES)
def test_any_names(names: list[str], others: list[str], file: str) -> None:
    pairs = [pair(name, declared=others[0] if others and n % 2 else "") for n, name in enumerate(names)]
    text = starter(Draft(file=file, pairs=tuple(pairs), unpaired=tuple(others), reference=tuple(others)), FORMS)
    settings = read_settings(Path("buoy.yaml"), forms=FORMS, text=text)
    assert all(class_of(settings, one) for one in pairs)
