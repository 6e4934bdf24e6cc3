"""Which file wins, which class holds, which limits a class has."""

from pathlib import Path

import pytest

from pairrules.checks.rule import all_rules
from pairrules.errors import SettingsError
from pairrules.settings.limit import RuleForm, Timed
from pairrules.settings.pair_class import PairClass, unreachable
from pairrules.settings.read_settings import find_settings, read_settings
from pairrules.settings.settings import Settings

FORMS = {
    "half-pair": RuleForm(quantities={}, required=()),
    "leg-length": RuleForm(quantities={"most": "length"}, required=("most",)),
    "via-match": RuleForm(quantities={"most": "count"}, required=("most",)),
}


def read(folder: Path, **files: str) -> Settings:
    """The settings of `top.yaml`, the other files beside it."""
    for name, text in files.items():
        (folder / f"{name}.yaml").write_text(text, encoding="utf-8")
    return read_settings(folder / "top.yaml", forms=FORMS)


def mosts(settings: Settings) -> dict[str, float | None]:
    return {rule: limit.quantities.get("most") for rule, limit in settings.limits.items()}


def test_the_file_lies_over_what_it_extends_and_later_ones_over_earlier(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        one="extends: []\nlimits: {leg-length: {most: 1 mm}, via-match: {most: 1}, half-pair: {}}\n",
        two="extends: []\nlimits: {leg-length: {most: 2 mm}, via-match: {most: 2}}\n",
        top="extends: [./one.yaml, ./two.yaml]\nlimits: {leg-length: {most: 3 mm}}\n",
    )
    assert mosts(settings) == {"half-pair": None, "leg-length": 3.0, "via-match": 2.0}
    assert settings.files == tuple(str(tmp_path / f"{name}.yaml") for name in ("one", "two", "top"))
    assert settings.limits["via-match"].place == f"{tmp_path / 'two.yaml'} line 2"


def test_a_file_reached_twice_counts_once_where_first_reached(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        root="extends: []\nlimits: {leg-length: {most: 1 mm}}\n",
        one="extends: [./root.yaml]\nlimits: {leg-length: {most: 2 mm}}\n",
        two="extends: [./root.yaml]\n",
        top="extends: [./one.yaml, ./two.yaml]\n",
    )
    assert mosts(settings) == {"leg-length": 2.0}


def test_files_that_build_on_each_other_are_a_fault(tmp_path: Path) -> None:
    with pytest.raises(SettingsError) as caught:
        read(tmp_path, one="extends: [./top.yaml]\n", top="extends: [./one.yaml]\n")
    one, top = tmp_path / "one.yaml", tmp_path / "top.yaml"
    assert caught.value.faults == (
        f"{one}: line 1, column 11: extends {top}, which builds on this file; take one of the two out",
    )


def test_a_lower_files_fault_is_told_under_its_own_name(tmp_path: Path) -> None:
    with pytest.raises(SettingsError) as caught:
        read(tmp_path, one="extends: []\nlimit: {}\n", top="extends: [./one.yaml]\nclases: {}\n")
    assert caught.value.faults == (
        f"{tmp_path / 'top.yaml'}: line 2, column 1: the top level knows no 'clases'; write 'classes'",
        f"{tmp_path / 'one.yaml'}: line 2, column 1: the top level knows no 'limit'; write 'limits'",
    )


def test_quantities_are_never_mixed_and_an_open_severity_is_the_lower_ones(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        one="extends: []\nlimits: {leg-length: {most: 1 mm, severity: blocker, source: a book}}\n",
        top="extends: [./one.yaml]\nlimits: {leg-length: {most: 2 mm}, via-match: {most: 0}}\n",
    )
    length, vias = settings.limits["leg-length"], settings.limits["via-match"]
    assert (length.severity, length.source) == ("blocker", "set by the project")
    assert vias.severity == "review"


def test_off_takes_a_rule_away_and_a_class_may_bring_it_back(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        one="extends: []\nlimits: {leg-length: {most: 1 mm}, via-match: {most: 0, severity: note}, half-pair: {}}\n",
        top=(
            "extends: [./one.yaml]\nlimits: {leg-length: off}\n"
            "classes:\n"
            "  fast: {match: [F*], limits: {leg-length: {most: 2 mm}, via-match: {most: 2}}}\n"
            "  slow: {match: [S*], limits: {via-match: off}}\n"
            "  crawling: {match: [C*], like: slow, limits: {via-match: {most: 9}}}\n"
        ),
    )
    assert sorted(settings.limits_for(None)) == ["half-pair", "via-match"]
    fast, slow, crawling = settings.classes
    assert list(settings.limits_for(fast)) == ["half-pair", "leg-length", "via-match"]
    assert settings.limits_for(fast)["via-match"].severity == "note"
    assert list(settings.limits_for(slow)) == ["half-pair"]
    assert settings.limits_for(crawling)["via-match"].quantities == {"most": 9.0}


def test_a_class_like_another_takes_all_it_does_not_say_but_the_patterns(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        one=(
            "extends: []\nclasses:\n"
            "  bus: {load: {kind: line-receiver, across: 120 ohm}, frequencies: [1 MHz, 1 kHz], breakout: 2 mm,\n"
            "        limits: {leg-length: {most: 5 mm}, via-match: {most: 2}}}\n"
        ),
        top=(
            "extends: [./one.yaml]\nclasses:\n"
            "  buoy: {like: bus, match: [BUOY*], breakout: 0 mm, limits: {leg-length: {most: 1 mm}}}\n"
            "  far: {like: buoy, match: [FAR*]}\n"
        ),
    )
    buoy, far, bus = settings.classes
    assert [one.name for one in settings.classes] == ["buoy", "far", "bus"]
    assert buoy.load == far.load == bus.load
    assert buoy.frequencies == (1e3, 1e6)
    assert (buoy.breakout_mm, far.breakout_mm, bus.breakout_mm) == (0.0, 0.0, 2.0)
    assert {rule: limit.quantities["most"] for rule, limit in far.limits.items()} == {
        "leg-length": 1.0,
        "via-match": 2.0,
    }
    assert (buoy.match, far.match, bus.match) == (("BUOY*",), ("FAR*",), ())


def test_a_class_of_the_same_name_lies_over_the_lower_one(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        one="extends: []\nclasses:\n  bus: {match: [A*], reach: 1 mm}\n  other: {match: [B*]}\n",
        top="extends: [./one.yaml]\nclasses:\n  own: {match: [O*]}\n  bus: {breakout: 3 mm}\n",
    )
    assert [one.name for one in settings.classes] == ["own", "bus", "other"]
    assert (settings.classes[1].match, settings.classes[1].reach_mm, settings.classes[1].breakout_mm) == (
        ("A*",),
        1.0,
        3.0,
    )


def test_the_projects_own_pairs_come_first_and_single_values_win(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        one="extends: []\npairs: [{plus: A, minus: B}, {ignore: [X]}]\nreference_nets: [GND]\nwaivers: one-w.yaml\n",
        top="extends: [./one.yaml]\npairs: [{ignore: [Y]}, {plus: C, minus: D, name: tide}]\nreference_nets: [VSS]\n",
    )
    assert [(pair.plus, pair.minus, pair.name) for pair in settings.pairs] == [("C", "D", "tide"), ("A", "B", "")]
    assert settings.ignore == ("Y", "X")
    assert settings.reference_nets == ("VSS",)
    assert settings.waivers == tmp_path / "one-w.yaml"
    assert settings.stackup is None


def test_the_first_class_that_fits_holds_unless_the_board_declares_one() -> None:
    settings = read_settings(
        Path("demo.yaml"),
        forms=FORMS,
        text="extends: []\nclasses: {a: {match: [BUOY]}, b: {match: ['BU*', 'D[0]']}, c: {}}\n",
    )

    def name(pair: str, *nets: str, declared: str = "") -> str | None:
        found = settings.class_of(pair, nets, declared)
        return None if found is None else found.name

    assert name("BUOY") == "a"
    assert name("BUNK") == "b"
    assert name("pair", "BUOY", "BUOX") == "a"
    assert name("buoy") is None
    assert name("D[0]") == "b"
    assert name("BUOY", declared="c") == "c"
    assert name("BUOY", declared="unheard of") == "a"


def test_a_class_is_unreachable_only_when_all_its_patterns_are_taken() -> None:
    def classes(*patterns: tuple[str, ...]) -> tuple[PairClass, ...]:
        return tuple(PairClass(name=f"c{i}", place="", match=match) for i, match in enumerate(patterns))

    def found(*patterns: tuple[str, ...]) -> list[tuple[str, str]]:
        return [(one.name, taker) for one, taker in unreachable(classes(*patterns))]

    assert found(("A*",), ("AB", "A?C*")) == [("c1", "c0")]
    assert found(("A*",), ("AB", "B")) == []
    assert found(("A?",), ("AB",)) == []
    assert found(("*a*",), ("[ab]",)) == []
    assert found(("A",), (), ("A",)) == [("c2", "c0")]


def test_without_a_file_only_the_shipped_base_holds() -> None:
    forms = {name: RuleForm(quantities=rule.quantities, required=rule.required) for name, rule in all_rules().items()}
    settings = read_settings(None, forms=forms)
    assert settings.files == ("base.yaml",)
    assert settings.limits["leg-length"].place == "base.yaml line 5"
    own = read_settings(Path("demo.yaml"), forms=forms, text="")
    assert (own.limits, own.files) == (settings.limits, ("base.yaml", "demo.yaml"))


def test_reading_twice_gives_the_same(tmp_path: Path) -> None:
    text = "extends: []\nclasses: {b: {match: [B*], limits: {half-pair: off}}, a: {match: [A*], like: b}}\n"
    first, second = (read(tmp_path, top=text) for _ in range(2))
    assert repr(first) == repr(second)
    assert first == second


def test_the_nearest_settings_upward_are_found(tmp_path: Path) -> None:
    deep = tmp_path / "project" / "output" / "step"
    deep.mkdir(parents=True)
    (tmp_path / "pairrules.yaml").write_text("")
    assert find_settings(deep / "board.json") == tmp_path / "pairrules.yaml"
    (tmp_path / "project" / "pairrules.yaml").write_text("")
    assert find_settings(deep / "board.json") == tmp_path / "project" / "pairrules.yaml"


def test_lengths_of_pins_are_merged_pin_by_pin_and_a_class_wins(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        one="extends: []\npin_lengths: {U1: {A1: 1 mm, A2: 2 mm}}\n",
        top="extends: [./one.yaml]\n"
        "pin_lengths: {U1: {A2: 12 ps}, J1: {5: 3 mm}}\n"
        "classes: {a: {match: [A], pin_lengths: {U1: {A1: 4 mm}}}}\n",
    )
    assert settings.pin_lengths_for(None) == {"J1": {"5": 3.0}, "U1": {"A1": 1.0, "A2": Timed(amount=12.0)}}
    assert settings.pin_lengths_for(settings.classes[0])["U1"] == {"A1": 4.0, "A2": Timed(amount=12.0)}


def test_each_value_of_a_class_knows_where_it_was_said(tmp_path: Path) -> None:
    settings = read(
        tmp_path,
        one="extends: []\nclasses:\n  base:\n    rise_time: 1 ns\n    limits: {half-pair: off}\n    breakout: 1 mm\n",
        top="extends: [./one.yaml]\nclasses:\n  a:\n    match: [A]\n    like: base\n    breakout: 2 mm\n",
    )
    places = next(one for one in settings.classes if one.name == "a").places
    one, top = tmp_path / "one.yaml", tmp_path / "top.yaml"
    assert places["rise_time"] == f"{one} line 4"
    assert places["limits.half-pair"] == f"{one} line 5"
    assert places["breakout"] == f"{top} line 6"
