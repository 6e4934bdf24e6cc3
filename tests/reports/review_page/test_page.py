"""The page as text: what it holds, and that nothing of the board can become more than text."""

from __future__ import annotations

import base64
import hashlib
import json
import re
from dataclasses import replace
from html.parser import HTMLParser
from typing import Any

import pytest

from pairrules.drawing import Drawing, DrawnOutline
from pairrules.reports.cautions import CAUTIONS
from pairrules.reports.review_page.page import render
from pairrules.result import Finding, Place, Result, WaiverState
from tests.reports.drawings import drawing
from tests.reports.hostile_names import HIDDEN, HOSTILE
from tests.reports.results import finding, pair, result, undecided


class Elements(HTMLParser):
    """Elements and attributes of a page, and the text of those that hold data or script."""

    def __init__(self, page: str) -> None:
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.texts: dict[str, str] = {}
        self._open = ""
        self.feed(page)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))
        self._open = dict(attrs).get("id") or tag if tag in {"script", "style", "title"} else ""

    def handle_endtag(self, tag: str) -> None:
        self._open = ""

    def handle_data(self, data: str) -> None:
        if self._open:
            self.texts[self._open] = self.texts.get(self._open, "") + data

    def data(self, name: str) -> Any:
        return json.loads(self.texts[name])


def drawn(name: str, *, verdict: str = "flag", findings: tuple[Finding, ...] | None = None, **more: Any) -> Any:
    found = (finding(at=(Place(layer="TOP", x_mm=1.0, y_mm=2.0),)),) if findings is None else findings
    return pair(name, verdict=verdict, findings=found, drawing=drawing(name), **more)


def whole(*pairs: Any, **board: Any) -> Result:
    layers = board.pop("layers", ("TOP", "GND"))
    around = Drawing(
        layers=layers,
        outline=((0.0, 0.0), (20.0, 0.0), (20.0, 10.0), (0.0, 10.0)),
        extent=(0.0, 0.0, 20.0, 10.0),
        units="mm",
        parts=(DrawnOutline(ref=board.pop("ref", "J1"), side="top", outline=((0.0, 0.0), (1.0, 0.0), (1.0, 1.0))),),
    )
    return replace(result(*pairs, **board), drawing=around)


def test_pairs_stand_in_the_order_of_the_listing_and_each_has_its_details() -> None:
    note, blocker = finding(severity="note"), finding(severity="blocker")
    page = Elements(
        render(
            whole(
                pair("PASSED"),
                undecided("LOST"),
                drawn("A_NOTE", findings=(note,)),
                drawn("Z_WORST", findings=(blocker,)),
            )
        )
    )
    assert [one["name"] for one in page.data("board")["pairs"]] == ["Z_WORST", "A_NOTE", "LOST", "PASSED"]
    assert [page.data(f"pair-{i}")["drawing"] is None for i in range(4)] == [False, False, True, True]
    assert page.data("pair-2")["unjudged"][0][0] == "gap-band"


def test_places_have_their_coordinates_in_the_units_of_the_file_and_of_the_drawing() -> None:
    at = (Place(layer="TOP", x_mm=25.4, y_mm=50.8),)
    page = Elements(render(whole(drawn("IN", findings=(finding(at=at),)), units="INCH")))
    board = page.data("board")
    assert board["pairs"][0]["findings"][0]["at"] == [["TOP", "(1.0000, 2.0000) in", 25400, -50800]]
    assert board["unit"] == {"name": "in", "mm": 25.4, "decimals": 4}


def test_the_page_says_what_it_rests_on() -> None:
    held = WaiverState(
        rule="leg-length",
        pair="IN",
        state="expired",
        why="it held until 2026-01-31",
        reason="prototype",
        who="A. Tern",
        until="2026-01-31",
    )
    text = render(
        replace(
            whole(drawn("IN"), missing=("no inner layers",), unpaired=("CLK_P",)),
            settings=("base.yaml", "pairrules.yaml"),
            waivers=(held,),
        )
    )
    for said in (CAUTIONS, "no inner layers", "CLK_P", "base.yaml, pairrules.yaml", "pairrules 0.1.0", "ab" * 32):
        assert said in text
    assert "leg-length of IN: expired, it held until 2026-01-31; until 2026-01-31, A. Tern: prototype" in text


def test_nothing_is_loaded_and_only_the_own_script_and_style_may_run() -> None:
    text = render(whole(drawn("IN")))
    page = Elements(text)
    links = [attrs.get("href") for tag, attrs in page.tags if tag == "link"]
    assert links == ["data:,"]
    assert not [attrs for _, attrs in page.tags if "src" in attrs or "style" in attrs]
    assert not re.search(r"https?://(?!www\.w3\.org/2000/svg)", text)
    policy = next(attrs["content"] for _, attrs in page.tags if attrs.get("http-equiv") == "Content-Security-Policy")
    assert policy is not None and policy.startswith("default-src 'none'; ")
    for kind in ("script", "style"):
        digest = base64.b64encode(hashlib.sha256(page.texts[kind].encode()).digest()).decode()
        assert f"{kind}-src 'sha256-{digest}'" in policy


@pytest.mark.parametrize("evil", HOSTILE.values(), ids=HOSTILE)
def test_hostile_text_stays_text(evil: str) -> None:
    harmless = Elements(render(hostile("harmless")))
    text = render(hostile(evil))
    page = Elements(text)
    assert [tag for tag, _ in page.tags] == [tag for tag, _ in harmless.tags]
    assert [sorted(attrs) for _, attrs in page.tags] == [sorted(attrs) for _, attrs in harmless.tags]
    assert page.texts["script"] == harmless.texts["script"]
    assert not [mark for mark in HIDDEN if mark in text]
    one = page.data("board")["pairs"][0]
    # A waiver has to name the pair as its file does, whatever is shown.
    assert one.get("key", one["name"]) == evil


def hostile(evil: str) -> Result:
    found = finding(message=evil, advice=evil, source=evil, at=(Place(layer=evil, x_mm=1.0, y_mm=2.0),))
    shown = drawn(evil, findings=(found,), klass=evil, missing=(evil,), assumed=(evil,), source=evil, load=evil)
    return replace(
        whole(shown, file=evil, name=evil, missing=(evil,), unpaired=(evil,), layers=(evil, "GND"), ref=evil),
        settings=(evil,),
    )


def test_same_result_same_bytes() -> None:
    shown = whole(drawn("IN"), drawn("OUT"))
    assert render(shown) == render(shown)


def test_a_board_without_pairs_and_without_drawing() -> None:
    page = Elements(render(result()))
    assert page.data("board")["pairs"] == [] and page.data("board")["extent"] is None
