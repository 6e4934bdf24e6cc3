"""Names out of a hostile file do no harm in any report."""

from __future__ import annotations

import csv
import html
import io
import json
import re
from typing import Any
from xml.etree import ElementTree as ET

import pytest

from pairrules.reports import csv_table, junit, markdown, sarif
from pairrules.reports.picture import render as render_picture
from pairrules.reports.report import Look, reports_of
from pairrules.result import Result, Unjudged
from tests.reports.drawings import drawn
from tests.reports.hostile_names import HIDDEN, HOSTILE
from tests.reports.results import finding, pair, result

NAMES = pytest.mark.parametrize("name", [pytest.param(name, id=does) for does, name in HOSTILE.items()])


def evil(name: str) -> Result:
    """A result in which every text that can come from a file is the name."""
    texts: dict[str, Any] = {
        "plus": name,
        "minus": name,
        "klass": name,
        "nets_plus": (name,),
        "nets_minus": (name,),
        "source": name,
        "load": name,
        "missing": (name,),
    }
    bad = finding(message=f"{name} is longer", advice=f"mend {name}", source=name)
    flagged = pair(name, verdict="flag", findings=(bad,), unjudged=(Unjudged(rule="gap-band", missing=name),), **texts)
    lost = pair(name, verdict="undecided", unjudged=(Unjudged(rule="gap-band", missing=name),), **texts)
    waived = pair(name, verdict="waived", findings=(finding(message=name, waived=True),), **texts)
    return result(
        flagged, lost, waived, file=name, units=name, format=name, missing=(name,), unpaired=(name,), name=name
    )


@NAMES
@pytest.mark.parametrize("report", sorted({*reports_of("check"), *reports_of("measure")}))
def test_nothing_hidden_gets_into_any_report(report: str, name: str) -> None:
    one = {**reports_of("check"), **reports_of("measure")}[report]
    text = one.render(evil(name), Look())
    texts = [text, one.join((text, text))]
    if one.unreadable is not None:
        texts.append(one.unreadable(name, name, "0"))
    for told in texts:
        assert [repr(mark) for mark in HIDDEN if mark in told] == []
        told.encode("utf-8")


@NAMES
def test_junit_holds_the_name_as_text_alone(name: str) -> None:
    for text in (junit.render(evil(name), Look()), junit.unreadable(name, name, "0")):
        whole = ET.fromstring(text)
        tags = {element.tag for element in whole.iter()}
        assert tags <= {"testsuites", "testsuite", "testcase", "failure", "skipped", "error", "system-out"}
        keys = {key for element in whole.iter() for key in element.attrib}
        assert keys <= {"name", "classname", "message", "type", "tests", "failures", "errors", "skipped"}
        assert "<![CDATA[" not in text and "<!" not in text


@NAMES
def test_no_cell_starts_a_formula(name: str) -> None:
    for row in csv.reader(io.StringIO(csv_table.render(evil(name), Look()))):
        for cell in row:
            assert not cell.startswith(("=", "+", "@", "\t")), cell
            assert not cell.startswith("-") or re.fullmatch(r"-[\d.e+-]+", cell), cell


@NAMES
def test_markdown_has_no_markup_but_its_own(name: str) -> None:
    text = markdown.render(evil(name), Look()) + markdown.unreadable(name, name, "0")
    rest = re.sub(r"</?(?:code|details|summary|sub)>", "", text)
    assert "<" not in rest and ">" not in rest and "`" not in rest and "~" not in rest and "{" not in rest
    assert "](" not in text and "://" not in text and "www." not in text.lower()
    # In <code> servers look for no mentions; outside nothing may follow the sign that could be called.
    outside = re.sub(r"<code>.*?</code>", "", text)
    assert not re.search(r"@\w|#\d", html.unescape(outside))
    assert text.count("<details>") == text.count("</details>") and text.count("<code>") == text.count("</code>")
    table = [line for line in text.splitlines() if line.startswith("|")]
    assert {line.count("|") for line in table} == {5}


@NAMES
def test_sarif_holds_neither_links_nor_placeholders(name: str) -> None:
    def messages(plain: Any) -> list[str]:
        if isinstance(plain, list):
            return [text for one in plain for text in messages(one)]
        if isinstance(plain, dict):
            own = [plain["text"]] if isinstance(plain.get("text"), str) else []
            return own + [text for one in plain.values() for text in messages(one)]
        return []

    for told in (sarif.render(evil(name), Look()), sarif.unreadable(name, name, "0")):
        assert told.isascii()
        for text in messages(json.loads(told)):
            assert "](" not in text and not re.search(r"(?<!\{)\{(?:\{\{)*\d", text)


@NAMES
def test_a_picture_holds_the_name_as_text_alone(name: str) -> None:
    text = render_picture(*drawn(name))
    tags = {element.tag.rpartition("}")[2] for element in ET.fromstring(text).iter()}
    assert tags <= {
        "svg", "title", "defs", "pattern", "clipPath", "rect", "circle", "text", "path", "line", "g",
    }  # fmt: skip
    keys = {key for element in ET.fromstring(text).iter() for key in element.attrib}
    assert not {key for key in keys if key.lower().startswith("on") or "href" in key or key == "style"}
    assert [repr(mark) for mark in HIDDEN if mark in text] == []
    text.encode("utf-8")
