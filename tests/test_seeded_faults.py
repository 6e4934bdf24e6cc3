"""False and missed alarms: a board with one fault a pair for every rule, and the same board mended.

Every pair stands under the limits of every rule, so that each fault also tries all rules that are not meant by it.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping
from functools import cache
from pathlib import Path

import pytest

from fixtures.board_drawing import Tree
from fixtures.ipc2581_writer import to_ipc2581
from fixtures.seeded_faults import FAULTS, Fault, mended, seeded, settings_text
from pairrules.checks.rule import all_rules
from pairrules.pipeline import check
from pairrules.result import PairResult, Result

WRITTEN: Mapping[str, tuple[str, Callable[[Tree], bytes]]] = {
    "JSON": ("buoy.json", lambda board: json.dumps(board).encode()),
    "IPC-2581": ("buoy.xml", to_ipc2581),
}

Checked = Callable[[str, bool], Result]


@pytest.fixture(scope="module")
def checked(tmp_path_factory: pytest.TempPathFactory) -> Checked:
    """The board in a format, with its faults or without, judged by its settings."""
    folder = tmp_path_factory.mktemp("buoy")
    (folder / "pairrules.yaml").write_text(settings_text(), encoding="utf-8")

    @cache
    def result(form: str, faulty: bool) -> Result:
        name, write = WRITTEN[form]
        path: Path = folder / name
        path.write_bytes(write(seeded() if faulty else mended()))
        return check(path)

    return result


def pair_of(result: Result, fault: Fault) -> PairResult:
    (found,) = (pair for pair in result.pairs if pair.plus == f"{fault.pair}_P")
    return found


def test_there_is_one_fault_for_every_rule_each_in_a_pair_of_its_own() -> None:
    assert sorted(fault.rule for fault in FAULTS) == sorted(all_rules())
    assert len({fault.pair for fault in FAULTS}) == len(FAULTS)


@pytest.mark.parametrize("form", WRITTEN)
def test_every_pair_is_found_and_stands_under_every_rule(checked: Checked, form: str) -> None:
    result = checked(form, True)
    assert {(pair.plus, pair.minus) for pair in result.pairs} == {(f"{f.pair}_P", f"{f.pair}_N") for f in FAULTS}
    assert result.unpaired == () and result.board.missing == ()
    for fault in FAULTS:
        pair = pair_of(result, fault)
        assert pair.klass == fault.rule
        assert [held.rule for held in pair.limits] == sorted(all_rules())


@pytest.mark.parametrize("form", WRITTEN)
@pytest.mark.parametrize("fault", FAULTS, ids=[f"{fault.pair}: {fault.rule}" for fault in FAULTS])
def test_a_fault_is_found_by_its_rule_once_and_by_no_other(checked: Checked, form: str, fault: Fault) -> None:
    pair = pair_of(checked(form, True), fault)
    assert [finding.rule for finding in pair.findings] == [fault.rule]
    assert pair.verdict == "flag"
    if fault.undecided:
        # Figures of a route that is not there: no rule may take them for good, and none guesses.
        assert pair.routed == "partial"
        assert {"leg-length", "pair-impedance", "trace-balance"} <= {one.rule for one in pair.unjudged}
    else:
        assert pair.unjudged == ()


@pytest.mark.parametrize("form", WRITTEN)
def test_the_mended_board_has_no_finding_and_nothing_undecided(checked: Checked, form: str) -> None:
    for pair in checked(form, False).pairs:
        assert (pair.name, pair.findings, pair.unjudged, pair.verdict) == (pair.name, (), (), "pass")


@pytest.mark.parametrize("faulty", [True, False], ids=["with faults", "mended"])
def test_both_formats_tell_the_same(checked: Checked, faulty: bool) -> None:
    first, second = (checked(form, faulty) for form in WRITTEN)
    for fault in FAULTS:
        one, other = pair_of(first, fault), pair_of(second, fault)
        assert (one.source, one.load, one.series, one.routed) == (other.source, other.load, other.series, other.routed)
        assert [finding.message for finding in one.findings] == [finding.message for finding in other.findings]
        assert one.unjudged == other.unjudged
