"""The tables: for spreadsheets (no cell may run there), of all figures, of the pairs found."""

from __future__ import annotations

import csv
import io
import json

import pytest

from pairrules.reports import csv_table, measures_table, pairs_table
from pairrules.reports.figures import FIGURES
from pairrules.reports.report import Look, all_reports, reports_of
from pairrules.result import FoundPair, FoundPairs, Measures
from tests.reports.results import finding, pair, result, undecided


def rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text)))


def test_one_row_a_pair_with_units_in_the_headings() -> None:
    text = csv_table.render(result(pair("A"), pair("IN", verdict="flag", findings=(finding(),)), undecided()), Look())
    first, second, third = rows(text)
    assert first["length plus [mm]"] == "41.2" and first["delay plus [ps]"] == "" and first["vias plus"] == "1"
    assert second["findings"] == "leg-length: plus is 1.10 mm longer than minus; 0.50 mm is allowed"
    assert (second["blocker findings"], second["review findings"]) == ("0", "1")
    assert third["missing"] == "minus cannot be followed from end to end"
    assert "inductance mismatch [nH]" in first and "loop area [mm2]" in first


@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t", "\r"])
def test_no_text_cell_starts_a_formula(start: str) -> None:
    name = f"{start}cmd()"
    (row,) = rows(csv_table.render(result(pair(name), file=name), Look()))
    for column in ("board", "pair", "plus", "minus"):
        assert row[column].startswith("'")


def test_a_negative_number_stays_a_number() -> None:
    (row,) = rows(csv_table.render(result(pair(measures=Measures(length_mismatch_mm=-1.5))), Look()))
    assert row["length mismatch [mm]"] == "-1.5"


def test_tables_of_several_boards_have_one_heading() -> None:
    texts = tuple(csv_table.render(result(pair(name)), Look()) for name in ("A", "B"))
    assert [row["pair"] for row in rows(csv_table.join(texts))] == ["A", "B"]


def test_figures_are_those_of_the_result() -> None:
    assert [figure.key for figure in FIGURES] == list(Measures.__dataclass_fields__)


def test_all_figures_fit_eighty_columns() -> None:
    pairs = [pair(f"SENSOR_CHANNEL_{n}") for n in range(7)]
    text = measures_table.render(result(*pairs, missing=("word " * 40,)), Look())
    assert max(map(len, text.splitlines())) <= 80
    for one in pairs:
        assert one.name in text
    assert text.count("length plus [mm]") == 3
    assert "41.200" in text and "?" in text


def test_a_hostile_name_is_escaped_in_every_table() -> None:
    evil = "A\x1b[2J\u202e"
    found = FoundPairs(board=result(file=evil).board, pairs=(found_pair(evil),), unpaired=(evil,))
    texts = (
        csv_table.render(result(pair(evil), file=evil), Look()),
        measures_table.render(result(pair(evil, missing=(evil,)), missing=(evil,)), Look()),
        pairs_table.render(found, Look()),
        pairs_table.render_json(found),
    )
    for text in texts:
        assert "\x1b" not in text and "\u202e" not in text and "u202e" in text


def found_pair(name: str) -> FoundPair:
    return FoundPair(
        name=name,
        plus=f"{name}_P",
        minus=f"{name}_N",
        klass=None,
        found_by="net name",
        nets_plus=(f"{name}_P", f"{name}_P_C"),
        nets_minus=(f"{name}_N",),
        source="J1",
        load="",
        series=(),
        missing=("no part at the load end was found",),
    )


def test_pairs_found() -> None:
    found = FoundPairs(board=result().board, pairs=(found_pair("IN"),), unpaired=("CLK_P",))
    assert pairs_table.render(found, Look()) == (
        "buoy.json: 1 pair\n"
        "\n"
        "IN  (no class; found by net name)\n"
        "  plus   IN_P > IN_P_C\n"
        "  minus  IN_N\n"
        "  from J1 to an end that is not known\n"
        "  no part at the load end was found\n"
        "\n"
        "Named like half a pair, the other half is missing: CLK_P\n"
    )
    plain = json.loads(pairs_table.render_json(found))
    assert plain["pairs"][0]["nets_plus"] == ["IN_P", "IN_P_C"] and plain["unpaired"] == ["CLK_P"]


def test_reports_are_found_by_their_files() -> None:
    assert {"listing", "json", "csv"} <= set(reports_of("check"))
    assert {"table", "json", "csv"} <= set(reports_of("measure"))
    names = [report.name for report in all_reports().values()]
    assert len(names) == len(set(names))
