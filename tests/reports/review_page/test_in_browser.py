"""The page in a real browser: that it opens from disk and loads nothing, and that what it offers works."""

from __future__ import annotations

import base64
import json
import os
import re
from pathlib import Path
from typing import Any

import pytest

from pairrules.cli import run
from pairrules.reports.review_page.page import render
from tests.reports.hostile_names import HOSTILE
from tests.reports.review_page.browser import Page, wait_for
from tests.reports.review_page.test_page import drawn, hostile, whole

FLAGGED = ["LINK_CLOCK", "USB", "CAN"]
DOWN, UP, HOME, END, ENTER = "\ue015", "\ue013", "\ue011", "\ue010", "\ue007"
"""Keys by their code points. Source: W3C WebDriver, 17.4.2, table of keyboard actions."""


def in_view(page: Page) -> list[float]:
    return [
        float(value)
        for value in page.run("return document.querySelector('#map svg').getAttribute('viewBox').split(' ')")
    ]


def chosen(page: Page) -> str:
    return str(page.run("return document.getElementById('detail-title').lastChild.textContent"))


def kept(page: Page) -> dict[str, Any]:
    (key,) = page.run("return Object.keys(localStorage).filter((key) => key.startsWith('pairrules-review:'))")
    found: dict[str, Any] = json.loads(page.run("return localStorage.getItem(arguments[0])", key))
    return found


def test_it_opens_from_disk_and_asks_for_nothing(page: Page) -> None:
    page.log("performance")
    page.driver.refresh()
    for index in range(len(page.names())):
        page.click(f"#item-{index}")
    assert chosen(page) == FLAGGED[-1]
    asked = page.requests()
    assert asked and {address.split(":")[0] for address in asked} <= {"file", "data"}
    assert {address for address in asked if address.startswith("file:")} == {page.file.as_uri()}
    assert page.log("browser") == []


def test_flagged_pairs_are_listed_worst_first_and_the_first_is_shown(page: Page) -> None:
    assert page.names() == FLAGGED
    assert chosen(page) == "LINK_CLOCK"
    assert page.text("#listed") == "3 of 4 pairs listed"


def test_details_are_drawn_only_for_the_chosen_pair(page: Page) -> None:
    assert len(page.all("#detail h2")) == 1
    page.click("#item-1")
    assert chosen(page) == "USB" and len(page.all(".pair-picture svg.board-picture")) == 1
    assert page.all("#paper *") == []


@pytest.mark.parametrize(
    ("selector", "value", "names"),
    [
        ("#filter-klass", "usb", ["USB"]),
        ("#filter-rule", "leg-length", ["LINK_CLOCK", "USB"]),
        ("#filter-layer", "BOTTOM", ["LINK_CLOCK"]),
        ("#filter-decision", "mend", []),
        ("#filter-text", "can_h encl", ["CAN"]),
    ],
)
def test_filters(page: Page, selector: str, value: str, names: list[str]) -> None:
    page.run(
        "const field = document.querySelector(arguments[0]); field.value = arguments[1];"
        "field.dispatchEvent(new Event(field.matches('select') ? 'change' : 'input', { bubbles: true }))",
        selector,
        value,
    )
    assert page.names() == names


def test_filter_by_verdict(page: Page) -> None:
    page.click("#filter input[value=pass]")
    assert page.names() == [*FLAGGED, "CONVERTER"]
    page.click("#filter input[value=flag]")
    assert page.names() == ["CONVERTER"]
    page.click("#filter input[value=pass]")
    assert page.names() == [] and page.text("#listed") == "no verdict is ticked, so no pair is listed"


def test_keys_move_in_the_list_and_open_a_pair(page: Page) -> None:
    page.press("l", DOWN, DOWN)
    assert page.run("return document.activeElement.id") == "item-2"
    page.press(UP, ENTER)
    assert chosen(page) == "USB"
    page.press("n")
    assert chosen(page) == "CAN"
    page.press("p", "p", "p", "p")
    assert chosen(page) == "LINK_CLOCK"
    page.press("l", END)
    assert page.run("return document.activeElement.id") == "item-2"
    page.press(HOME)
    assert page.run("return document.activeElement.id") == "item-0"


def test_keys_are_written_on_the_page_and_letters_can_be_switched_off(page: Page) -> None:
    assert not page.find("#keys").is_displayed()
    page.press("?")
    assert page.find("#keys").is_displayed()
    page.click("#letters")
    page.press("n")
    assert chosen(page) == "LINK_CLOCK"


def test_letters_in_a_field_are_text(page: Page) -> None:
    page.press("/")
    page.press("n", "?")
    assert page.run("return document.getElementById('filter-text').value") == "n?"
    assert chosen(page) == "LINK_CLOCK" and not page.find("#keys").is_displayed()


def test_the_board_zooms_and_moves_by_key_button_and_wheel(page: Page) -> None:
    home = in_view(page)
    page.press("m", "+")
    closer = in_view(page)
    assert closer[2] == pytest.approx(home[2] / 1.5, rel=0.01)
    page.press("\ue014")
    assert in_view(page)[0] > closer[0]
    page.press("0")
    assert in_view(page) == home
    page.run(
        "document.querySelector('#map svg').dispatchEvent("
        "new WheelEvent('wheel', { deltaY: -300, clientX: 700, clientY: 300, cancelable: true }))"
    )
    assert in_view(page)[2] < home[2]
    page.run("[...document.querySelectorAll('#map .zooms button')].find((one) => one.textContent === 'All').click()")
    assert in_view(page) == home


def test_coordinates_under_the_pointer_are_the_boards(page: Page) -> None:
    # The demo board is 80 by 50 mm with its corner at the origin: the middle of the whole view is (40, 25).
    page.run("document.querySelector('#map svg').scrollIntoView({ block: 'center' })")
    page.run(
        "const svg = document.querySelector('#map svg'), box = svg.getBoundingClientRect();"
        "svg.dispatchEvent(new PointerEvent('pointermove', {"
        " clientX: box.left + box.width / 2, clientY: box.top + box.height / 2 }))"
    )
    found = re.fullmatch(r"\(([\d.]+), ([\d.]+)\) mm", page.text("#map output"))
    assert found is not None
    assert float(found[1]) == pytest.approx(40.0, abs=0.2) and float(found[2]) == pytest.approx(25.0, abs=0.2)


def test_layers_can_be_left_out(page: Page) -> None:
    def shown(layer: int) -> int:
        return len([one for one in page.all(f"#map [data-layer='{layer}']") if one.is_displayed()])

    assert shown(0) and shown(3)
    page.click("#map-controls input[value='3']")
    assert shown(0) and not shown(3)


def test_numbers_on_the_board_are_those_of_the_list_and_lead_to_the_pair(page: Page) -> None:
    numbers = page.run("return [...document.querySelectorAll('#map .pin text')].map((one) => one.textContent)")
    assert sorted(set(numbers)) == ["1", "2", "3"]
    page.run(
        "[...document.querySelectorAll('#map .pin')].find((one) => one.querySelector('text').textContent === '2')"
        ".dispatchEvent(new MouseEvent('click', { bubbles: true }))"
    )
    assert chosen(page) == "USB"


def test_a_pair_shows_picture_profiles_curves_limits_and_advice(page: Page) -> None:
    titles = page.run("return [...document.querySelectorAll('#detail figcaption')].map((one) => one.textContent)")
    assert [title.split(",")[0] for title in titles] == [
        "Gap between the legs along plus",
        "Running difference of the lengths",
        "Differential impedance along plus",
        "Common mode turned into signal",
        "Rejection of common mode",
    ]
    for selector in (
        ".copper.plus",
        ".copper.minus",
        ".copper.reference",
        ".opening",
        ".via.used",
        ".part-edge",
        ".pin",
    ):
        assert page.all(f"#detail .pair-picture {selector}"), selector
    # Legs differ in pattern as well as in colour.
    dashes = [
        page.run(
            "return getComputedStyle(document.querySelector(arguments[0])).strokeDasharray", f"#detail .centre.{leg}"
        )
        for leg in ("plus", "minus")
    ]
    assert dashes[0] == "none" and dashes[1] != "none"
    detail = page.text("#detail")
    for said in (
        "minus is 3.39 mm longer than plus",
        "measured 3.393 mm",
        "limit 0.5 mm",
        "beyond it by 2.893 mm",
        "add 3.39 mm to plus",
    ):
        assert said in detail
    assert "3.393 mm against 0.5 mm" in page.text("#detail .limit-list")


def test_the_place_along_the_route_is_marked_and_told(page: Page) -> None:
    page.run(
        "const slider = document.getElementById('along'); slider.value = 3;"
        "slider.dispatchEvent(new Event('input', { bubbles: true }))"
    )
    assert re.search(
        r"at [\d.]+ mm, TOP \([\d.]+, [\d.]+\) mm, gap 0\.15 mm, [\d.]+ ohm, difference", page.text(".along-said")
    )
    assert page.find("#detail .spot").is_displayed()


def test_decisions_are_kept_over_a_reload(page: Page) -> None:
    accept(page, 0, "leg-length", reason="slow clock", who="A. Tern", until="2099-12-31")
    page.open(fresh=False)
    assert page.find("input[name='decision-0-leg-length'][value=accept]").is_selected()
    assert page.find("input[name='decision-0-leg-length-text']").get_attribute("value") == "slow clock"
    assert "1/2 decided" in page.text("#item-0") and "1 of 4 findings decided, 3 open" in page.text("#save-body")
    page.click("input[name='decision-0-leg-length'][value='']")
    assert kept(page)["decisions"] == {}


def test_what_an_accepted_finding_lacks_is_said_and_not_saved(page: Page) -> None:
    page.click("input[name='decision-0-leg-length'][value=accept]")
    assert page.text("#detail .lack:not(:empty)") == (
        "To be saved as a waiver it still needs a reason, who accepts it, until when."
    )
    assert page.text("#save-waivers") == "Save decisions: 0 waivers"
    assert "LINK_CLOCK, leg-length lacks a reason, who accepts it, until when" in page.text("#save-body")


def test_the_saved_waivers_are_read_by_the_next_check(
    page: Page, project: Path, downloads: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    accept(page, 1, "leg-length", reason='it is "slow": #1 \\ half', who="A. Tern", until="2099-12-31")
    page.click("#save-waivers")
    text = page.saved("pairrules-waivers.yaml", downloads)
    (downloads / "pairrules-waivers.yaml").unlink()
    file = project / "pairrules-waivers.yaml"
    file.write_text(text, encoding="utf-8")
    try:
        assert run(["check", "--pair", "USB", "--format", "json", str(project / "tide-gauge-buoy.json")]) == 0
        found = json.loads(capsys.readouterr().out)
        assert [(one["rule"], one["waived"]) for one in found["pairs"][0]["findings"]] == [("leg-length", True)]
        assert found["pairs"][0]["verdict"] == "waived"
        again = project / "again.html"
        assert run(["review", "--pair", "USB", str(project / "tide-gauge-buoy.json"), "-o", str(again)]) == 0
    finally:
        file.unlink()
    # A later page keeps the waiver, reason and all, in what it saves.
    later = Page(page.driver, again).open()
    assert later.text("#save-waivers") == "Save decisions: 0 waivers"
    later.click("#save-waivers")
    assert later.saved("pairrules-waivers.yaml", downloads).splitlines()[1:] == text.splitlines()[1:]
    (downloads / "pairrules-waivers.yaml").unlink()


def test_the_task_list_names_pair_layer_place_and_what_to_do(page: Page, downloads: Path) -> None:
    page.click("#item-1")
    page.click("input[name='decision-1-leg-length'][value=mend]")
    page.find("input[name='decision-1-leg-length-text']").send_keys("before the next run")
    page.click("#item-2")
    page.click("input[name='decision-2-loop-area'][value=ask]")
    page.find("input[name='decision-2-loop-area-text']").send_keys("could the choke come closer?")
    page.click("#save-tasks")
    text = page.saved("pairrules-tasks.txt", downloads)
    lines = text.splitlines()
    assert (
        lines[0]
        == f"Tasks from the review of {page.file.parent / 'tide-gauge-buoy.json'} (tide gauge and weather buoy)"
    )
    assert lines[1:12] == [
        "",
        "To mend",
        "",
        "1. USB (USB_DP and USB_DM): leg-length",
        "   found: plus is 1.80 mm longer than minus; 0.50 mm is allowed",
        "   where: TOP (64.45, 25.125) mm; TOP (60.45, 24.825) mm",
        "   to do: add 1.80 mm to minus, or take it out of plus, between TOP (64.45, 25.125) mm and "
        "TOP (60.45, 24.825) mm: 1.50 mm of the difference arises there",
        "   remark: before the next run",
        "",
        "To ask",
        "",
    ]
    assert lines[12] == "2. CAN (CAN_H and CAN_L): loop-area"
    assert [line.split(":")[0] for line in lines[13:]] == ["   found", "   where", "   to do", "   question"]
    assert lines[-1] == "   question: could the choke come closer?"


def accept(page: Page, index: int, rule: str, *, reason: str, who: str, until: str) -> None:
    page.click(f"#item-{index}")
    name = f"decision-{index}-{rule}"
    page.click(f"input[name='{name}'][value=accept]")
    page.find(f"input[name='{name}-text']").send_keys(reason)
    page.find(f"input[name='{name}-who']").send_keys(who)
    page.run(
        "const field = document.querySelector(arguments[0]); field.value = arguments[1];"
        "field.dispatchEvent(new Event('input', { bubbles: true }))",
        f"input[name='{name}-until']",
        until,
    )


def test_light_and_dark_follow_the_system_and_a_switch(page: Page) -> None:
    def paper() -> str:
        return str(page.run("return getComputedStyle(document.body).backgroundColor"))

    light = paper()
    page.media(scheme="dark")
    dark = paper()
    assert light != dark
    page.run(
        "const look = document.getElementById('look'); look.value = 'light';"
        "look.dispatchEvent(new Event('change', { bubbles: true }))"
    )
    assert paper() == light
    page.open(fresh=False)
    assert paper() == light


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_no_violation_of_accessibility(page: Page, scheme: str) -> None:
    axe = Path(os.environ.get("PAIRRULES_TEST_AXE", ""))
    if not axe.is_file():
        pytest.skip("axe-core is not there (npm install axe-core; its axe.min.js named in PAIRRULES_TEST_AXE)")
    page.media(scheme=scheme)
    page.press("?")
    page.click("input[name='decision-0-leg-length'][value=accept]")
    page.click("#detail details summary")
    page.run(axe.read_text(encoding="utf-8"))
    found = page.driver.execute_async_script(
        "const done = arguments[0]; axe.run().then((found) => done("
        "found.violations.map((one) => one.id + ': ' + one.nodes.map((node) => node.target).join(' | '))))"
    )
    assert found == []


BEYOND = (
    "const right = document.documentElement.clientWidth + 1;"
    "return [...document.querySelectorAll('body *')].filter((one) => !one.closest('svg, .skips')"
    " && one.getClientRects().length && one.getBoundingClientRect().right > right)"
    ".map((one) => one.outerHTML.slice(0, 120))"
)


OUTSIDE_CHART = (
    "return [...document.querySelectorAll('.chart text')].filter((one) => {"
    " const own = one.getBoundingClientRect(), all = one.closest('svg').getBoundingClientRect();"
    " return own.left < all.left - 1 || own.right > all.right + 1"
    "  || own.top < all.top - 1 || own.bottom > all.bottom + 1;"
    "}).map((one) => one.textContent)"
)


@pytest.mark.parametrize("width", [360, 1280])
def test_nothing_is_cut_off_on_the_screen(page: Page, width: int) -> None:
    page.open(width, 800)
    page.press("?")
    for index in range(3):
        page.click(f"#item-{index}")
        for choice in page.all("#detail input[value=accept]"):
            page.run("arguments[0].click()", choice)
        assert page.run("return document.documentElement.scrollWidth") <= width
        assert page.run(BEYOND) == []
        assert page.run(OUTSIDE_CHART) == []


def test_nothing_is_cut_off_on_paper_and_every_listed_pair_is_there(page: Page) -> None:
    # A4 less the margins of the page's own style is 186 mm, 703 px at 96 to the inch.
    page.open(703, 1000)
    page.run("window.dispatchEvent(new Event('beforeprint'))")
    page.media("print")
    assert page.run("return document.documentElement.scrollWidth") <= 703
    assert page.run(BEYOND) == []
    assert page.run(OUTSIDE_CHART) == []
    assert len(page.all("#paper .paper-pair")) == 3
    assert not page.find("#filter").is_displayed() and not page.find("#detail").is_displayed()
    page.media()
    page.run("window.dispatchEvent(new Event('afterprint'))")
    assert page.all("#paper *") == []
    pdf = base64.b64decode(page.driver.print_page())
    # The overview and at least one sheet for each of the three pairs.
    assert pdf.startswith(b"%PDF") and len(re.findall(rb"/Type\s*/Page\b", pdf)) >= 4


@pytest.mark.parametrize("evil", HOSTILE.values(), ids=HOSTILE)
def test_hostile_names_do_nothing(driver: Any, tmp_path: Path, evil: str) -> None:
    file = tmp_path / "hostile.html"
    file.write_text(render(hostile(evil)), encoding="utf-8")
    page = Page(driver, file)
    page.media()
    page.open(360, 800)
    assert page.log("browser") == []
    assert page.run("return [...document.querySelectorAll('script')].length") == 3
    assert not page.all("#detail [onload], #list [onload], img, iframe")
    assert page.run("return document.documentElement.scrollWidth") <= 360


def test_long_names_are_broken_not_cut(driver: Any, tmp_path: Path) -> None:
    file = tmp_path / "long.html"
    file.write_text(render(whole(drawn("N" * 300, klass="K" * 200), layers=("L" * 100, "GND"))), encoding="utf-8")
    page = Page(driver, file)
    page.media()
    for width in (360, 1280):
        page.open(width, 800)
        assert page.run("return document.documentElement.scrollWidth") <= width
        assert page.run(BEYOND) == []


def test_a_board_without_pairs_says_so(driver: Any, tmp_path: Path) -> None:
    file = tmp_path / "empty.html"
    file.write_text(render(whole()), encoding="utf-8")
    page = Page(driver, file).open()
    assert page.text("#listed") == "0 of 0 pairs listed" and "No pair is chosen" in page.text("#detail")
    assert page.log("browser") == []


def test_the_address_names_the_pair(page: Page) -> None:
    page.click("#item-1")
    assert page.driver.current_url.endswith("#pair=USB")
    page.driver.get("about:blank")
    page.driver.get(page.file.as_uri() + "#pair=CAN")
    assert wait_for(lambda: chosen(page)) == "CAN"
