"""The listing as it reads, its order, its width, and that nothing in a board's names can steer a terminal."""

from __future__ import annotations

import re

from pairrules.reports.cautions import CAUTIONS
from pairrules.reports.listing import REPORT
from pairrules.reports.report import Look
from tests.reports.results import finding, pair, result, undecided

PLAIN = Look()


def test_the_whole_listing() -> None:
    got = REPORT.render(
        result(
            pair("A"),
            pair("IN", verdict="flag", findings=(finding(),)),
            undecided(),
            unpaired=("CLK_P",),
            missing=("no copper layer between TOP and BOTTOM is in the file",),
        ),
        PLAIN,
    )
    assert got == (
        "buoy.json: 3 pairs: 1 flagged, 1 undecided, 1 passed (plain JSON 1, units mm)\n"
        "\n"
        "IN  (IN_P and IN_N, class sensor)\n"
        "  review     leg-length: plus is 1.10 mm longer than minus; 0.50 mm is allowed\n"
        "             at TOP (12.7, 25.4) mm\n"
        "             to do: add 1.10 mm to minus\n"
        "             limit from: common practice, no source\n"
        "\n"
        "Undecided (1)\n"
        "  LOST\n"
        "    minus cannot be followed from end to end (gap-band, leg-length)\n"
        "\n"
        "Passed (1): A\n"
        "\n"
        "Named like half a pair, the other half is missing: CLK_P\n"
        "\n"
        "The file lacks\n"
        "  - no copper layer between TOP and BOTTOM is in the file\n"
        "\n"
        "All figures are estimates from the exported copper. They are no proof of\n"
        "isolation, of electromagnetic compatibility or of safety. Measure the built\n"
        "board; local codes and licensed practice decide.\n"
    )


def test_pairs_undecided_for_the_same_reasons_stand_together() -> None:
    other = pair("OTHER", verdict="undecided", routed="partial", missing=("plus has no copper in the file",))
    got = REPORT.render(result(undecided("LOST"), other, undecided("GONE")), PLAIN)
    assert (
        "Undecided (3)\n"
        "  LOST, GONE\n"
        "    minus cannot be followed from end to end (gap-band, leg-length)\n"
        "  OTHER\n"
        "    plus has no copper in the file\n"
    ) in got


def test_worst_first() -> None:
    note, review, blocker = (finding(severity=severity) for severity in ("note", "review", "blocker"))
    got = REPORT.render(
        result(
            pair("D_NOTE", verdict="flag", findings=(note,)),
            pair("C_TWO", verdict="flag", findings=(review, review)),
            pair("B_ONE", verdict="flag", findings=(review,)),
            pair("A_ONE", verdict="flag", findings=(review,)),
            pair("E_BLOCKER", verdict="flag", findings=(blocker,)),
        ),
        PLAIN,
    )
    assert re.findall(r"^(\w+)  \(", got, re.M) == ["E_BLOCKER", "C_TWO", "A_ONE", "B_ONE", "D_NOTE"]


def test_coordinates_in_the_units_of_the_file() -> None:
    flagged = pair("IN", verdict="flag", findings=(finding(),))
    assert "at TOP (0.5000, 1.0000) in\n" in REPORT.render(result(flagged, units="INCH"), PLAIN)
    assert "at TOP (500.0, 1000.0) mil\n" in REPORT.render(result(flagged, units="mil"), PLAIN)
    assert "at TOP (12700, 25400) um\n" in REPORT.render(result(flagged, units="MICRON"), PLAIN)


def test_eighty_columns_with_long_names_left_whole() -> None:
    names = [f"SENSOR-{'LONG-' * 9}{n:02}" for n in range(12)]
    flagged = pair(names[0], verdict="flag", findings=(finding(message="word " * 40, advice="more " * 40),))
    got = REPORT.render(result(flagged, *(pair(name) for name in names[1:]), unpaired=tuple(names)), PLAIN)
    assert max(map(len, got.splitlines())) <= 80
    assert all(re.search(rf"\b{name}\b", got) for name in names)


def test_a_name_longer_than_a_line_is_still_shown_whole() -> None:
    name = "N" * 300
    got = REPORT.render(result(pair(name)), PLAIN)
    assert max(map(len, got.splitlines())) <= 80
    assert name in re.sub(r"\n *", "", got)


def test_amounts_and_coordinates_are_not_parted_at_a_line_end() -> None:
    for fill in range(30, 80):
        message = "x" * (fill - 20) + " 12.34 mm and TOP (100.25, 200.5) mm"
        got = REPORT.render(result(pair("IN", verdict="flag", findings=(finding(message=message),))), PLAIN)
        assert "12.34 mm" in got and "(100.25, 200.5) mm" in got, fill


def test_hostile_names_are_shown_as_escapes() -> None:
    evil = "A\x1b[31m\u202eB\u2066\u200f\r\nC\ue000"
    got = REPORT.render(
        result(
            pair(evil, verdict="flag", findings=(finding(message=evil, advice=evil, source=evil),)),
            undecided(evil),
            pair(evil),
            unpaired=(evil,),
            missing=(evil,),
            file=evil,
            units=evil,
            revision=evil,
        ),
        Look(colour=True),
    )
    bare = got.replace("\x1b[1;33m", "").replace("\x1b[0m", "")
    assert re.search(r"[^\n\x20-\x7e²]", bare) is None
    assert "A\\x1b[31m\\u202eB\\u2066\\u200f\\x0d\\x0aC\\ue000" in re.sub(r"\n *", "", bare)


def test_colour_only_where_asked_and_says_nothing_by_itself() -> None:
    shown = result(pair("IN", verdict="flag", findings=(finding(severity="blocker"),)))
    plain, coloured = REPORT.render(shown, PLAIN), REPORT.render(shown, Look(colour=True))
    assert "\x1b" not in plain
    assert "\x1b[1;31mblocker\x1b[0m" in coloured
    assert re.sub(r"\x1b\[[\d;]*m", "", coloured) == plain


def test_a_board_without_pairs() -> None:
    got = REPORT.render(result(), PLAIN)
    assert got.startswith("buoy.json: no pairs (plain JSON 1, units mm)\n\nAll figures are estimates")
    assert " ".join(got.split()).endswith(CAUTIONS)


def test_a_waived_finding_is_named_so() -> None:
    got = REPORT.render(result(pair("IN", verdict="flag", findings=(finding(), finding(waived=True)))), PLAIN)
    assert got.count("  waived     leg-length") == 1 and got.count("  review     leg-length") == 1
