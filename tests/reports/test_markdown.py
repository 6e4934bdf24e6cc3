"""The comment on a change."""

from __future__ import annotations

from dataclasses import replace

import pytest

from pairrules.reports import markdown
from pairrules.reports.cautions import CAUTIONS
from pairrules.reports.report import Look
from pairrules.result import WaiverState
from tests.reports.results import finding, pair, result, undecided


def test_the_whole_comment() -> None:
    lapsed = WaiverState(rule="leg-length", pair="W", state="gone", why="it is mended", reason="", who="", until="")
    whole = result(
        pair("A"),
        pair("IN", verdict="flag", findings=(finding(baseline="worse"),)),
        undecided(),
        missing=("no inner layer",),
        unpaired=("CLK_P",),
    )
    assert markdown.render(replace(whole, waivers=(lapsed,)), Look()) == (
        "### Pairs of <code>buoy.json</code>\n"
        "\n"
        "3 pairs: 1 flagged, 1 undecided, 1 passed\n"
        "\n"
        "| pair | verdict | worst | what |\n"
        "| --- | --- | --- | --- |\n"
        "| <code>IN</code> | flagged | review | leg-length: worse than before; "
        "plus is 1.10 mm longer than minus; 0.50 mm is allowed |\n"
        "| <code>LOST</code> | undecided | | minus cannot be followed from end to end |\n"
        "\n"
        "<details><summary><code>IN</code>: <code>IN&#95;P</code> and <code>IN&#95;N</code>, "
        "class <code>sensor</code></summary>\n"
        "\n"
        "- **review** leg-length: worse than before; plus is 1.10 mm longer than minus; 0.50 mm is allowed\n"
        "  - at <code>TOP</code> (12.7, 25.4) mm\n"
        "  - to do: add 1.10 mm to minus\n"
        "  - limit from: common practice, no source\n"
        "\n"
        "</details>\n"
        "\n"
        "<details><summary>What the file lacks</summary>\n"
        "\n"
        "- no inner layer\n"
        "- named like half a pair, the other half is missing: <code>CLK&#95;P</code>\n"
        "\n"
        "</details>\n"
        "\n"
        "Waivers that do not hold:\n"
        "\n"
        "- leg-length of <code>W</code>: it is mended\n"
        "\n"
        f"<sub>{CAUTIONS}</sub>\n"
    )


def test_worst_first_then_what_stood_before_then_undecided() -> None:
    stood = finding(severity="blocker", baseline="unchanged")
    text = markdown.render(
        result(
            undecided("E_LOST"),
            pair("D_STOOD", verdict="flag", findings=(stood,)),
            pair("C_NOTE", verdict="flag", findings=(finding(severity="note"),)),
            pair("B_BLOCKER", verdict="flag", findings=(finding(severity="blocker"),)),
            pair("A_PASS"),
        ),
        Look(),
    )
    rows = [line.split("|")[1].strip() for line in text.splitlines() if line.startswith("| <code>")]
    names = [row.removeprefix("<code>").removesuffix("</code>").replace("&#95;", "_") for row in rows]
    assert names == ["B_BLOCKER", "C_NOTE", "D_STOOD", "E_LOST"]


def test_a_comment_stays_below_what_servers_take() -> None:
    long = finding(message="word " * 60, advice="word " * 60, source="word " * 20)
    pairs = [pair(f"SENSOR_{n:04}", verdict="flag", findings=(long, long)) for n in range(3000)]
    text = markdown.render(result(*pairs), Look())
    assert len(text) < 65_000
    assert "and 2950 more pairs, flagged or undecided" in text
    assert "The details of 2980 more flagged pairs are left out." in text


@pytest.mark.parametrize(
    ("message", "written"),
    [
        ("1.10 mm (plus): 10 %", "1.10 mm (plus): 10 %"),
        ("a|b", "a&#124;b"),
        ("ask @team", "ask @&#8203;team"),
        ("see #12", "see &#35;&#8203;12"),
        ("as in 0a1b2c3d4e", "as in 0a1b2c&#8203;3d4e"),
        ("1000000 Hz", "1000000 Hz"),
        ("https://x.invalid", "https&#58;//x.invalid"),
    ],
)
def test_text_reads_as_written_and_calls_nobody(message: str, written: str) -> None:
    text = markdown.render(result(pair(verdict="flag", findings=(finding(message=message),))), Look())
    assert f"leg-length: {written}\n" in text


def test_no_pairs() -> None:
    assert markdown.render(result(), Look()).splitlines()[2] == "no pairs"
