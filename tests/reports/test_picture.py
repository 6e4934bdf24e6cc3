"""The picture of a pair: what stands in it, where, and that it needs nothing beside itself."""

from __future__ import annotations

import re
from dataclasses import replace
from xml.etree import ElementTree as ET

import pytest

from pairrules.drawing import DrawnPlace
from pairrules.reports.picture import MINUS, PLUS, render
from pairrules.reports.picture_marks import Canvas, markers, scale_bar
from tests.reports.drawings import drawing, drawn
from tests.reports.results import result

SVG = "{http://www.w3.org/2000/svg}"


def texts(svg: str) -> list[str]:
    return ["".join(text.itertext()) for text in ET.fromstring(svg).iter(f"{SVG}text")]


def test_it_says_what_it_shows() -> None:
    told = texts(render(*drawn("IN")))
    assert told[0] == "Pair IN: IN and IN"
    assert "plus, IN (route: line)" in told and "minus, IN (route: dashes)" in told
    assert "no reference copper on IN2" in told and "IN (source)" in told
    assert "1 review leg-length: IN is longer" in [" ".join(line.split()) for line in told]
    figures = " ".join(told).replace("\u00a0", " ")
    assert "length plus: 41.200 mm" in figures and "length, plus less minus: 1.100 mm" in figures
    assert "Measure the built" in figures


def test_the_legs_differ_in_colour_in_fill_and_in_line() -> None:
    svg = render(*drawn())
    fills = re.findall(r'fill="([^"]+)" fill-rule="evenodd" stroke="([^"]+)"', svg)
    assert (PLUS, PLUS) in fills
    assert [fill for fill, edge in fills if edge == MINUS and fill.startswith("url(#")] != []
    routes = re.findall(r'fill="none" stroke="#000000" stroke-width="1\.2"( stroke-dasharray="[^"]+")?/>', svg)
    assert [bool(dashes) for dashes in routes] == [False, True]


def test_nothing_is_fetched_and_nothing_runs() -> None:
    svg = render(*drawn())
    assert re.findall(r"https?://[^\"]+", svg) == ["http://www.w3.org/2000/svg"]
    assert "href" not in svg and "<script" not in svg and "<style" not in svg and "@import" not in svg


def test_identifiers_of_two_pairs_differ_so_that_one_page_may_hold_both() -> None:
    first, second = (set(re.findall(r'id="([^"]+)"', render(*drawn(name)))) for name in ("A", "B"))
    assert len(first) == len(second) == 5 and not first & second


def test_same_input_same_bytes() -> None:
    assert render(*drawn()) == render(*drawn())


def test_an_arc_bulges_to_its_own_side() -> None:
    whole, one = drawn()
    (way, _) = re.findall(r'<path d="([^"]+)" fill="none" stroke="#000000" stroke-width="1\.2"', render(whole, one))[
        ::-1
    ]
    halves = re.findall(r"A([\d.]+) \1 0 0 ([01]) ([\d.]+) ([\d.]+)", way)
    assert len(halves) == 2
    # Counter-clockwise on the board, whose y points up, is against SVG's positive angle: sweep flag 0.
    assert {flag for _, flag, _, _ in halves} == {"0"}
    canvas = Canvas.fitted(one.drawing.window, left=20, top=40, width=960, tallest=620)  # type: ignore[union-attr]
    assert float(halves[0][0]) == pytest.approx(canvas.scale, abs=0.01)
    # The arc's middle lies right of and below its chord: (9 + sin 45°, 2 − cos 45°).
    assert (float(halves[0][2]), float(halves[0][3])) == pytest.approx(canvas.xy((9.70711, 1.29289)), abs=0.02)


def test_without_a_drawing_there_is_no_picture() -> None:
    whole, one = drawn()
    with pytest.raises(ValueError, match="the result carries no drawing of 'IN'"):
        render(whole, replace(one, drawing=None))
    with pytest.raises(ValueError, match="the result carries no drawing of 'IN'"):
        render(result(one), one)


@pytest.mark.parametrize("window", [(0.0, 0.0, 100.0, 0.5), (0.0, 0.0, 0.5, 100.0), (3.0, 4.0, 3.0, 4.0)])
def test_flat_tall_and_pointlike_windows_keep_their_proportions_and_stay_seen(
    window: tuple[float, float, float, float],
) -> None:
    canvas = Canvas.fitted(window, left=20, top=40, width=960, tallest=620)
    for x, y in ((window[0], window[1]), (window[2], window[3])):
        seen_x, seen_y = canvas.xy((x, y))
        assert 20 - 1e-6 <= seen_x <= 980 + 1e-6 and 40 - 1e-6 <= seen_y <= 40 + canvas.height + 1e-6
    assert canvas.height <= 620 + 1e-6 and canvas.width <= 960 + 1e-6
    assert canvas.height / canvas.scale == pytest.approx(window[3] - window[1])


def test_the_scale_bar_is_as_long_as_it_says() -> None:
    for width in (0.7, 3.0, 24.0, 400.0):
        canvas = Canvas.fitted((0.0, 0.0, width, width / 4), left=20, top=40, width=960, tallest=620)
        bar = scale_bar(canvas)
        left, right = re.findall(r"M([\d.]+) [\d.]+v8", bar)
        (length,) = re.findall(r">([\d.e-]+) mm<", bar)
        assert (float(right) - float(left)) / canvas.scale == pytest.approx(float(length), rel=0.01)
        assert float(length) in {a * 10**n for a in (1, 2, 5) for n in range(-2, 3)}


def test_findings_at_one_place_share_a_mark_and_marks_keep_apart() -> None:
    canvas = Canvas.fitted((0.0, 0.0, 20.0, 10.0), left=20, top=40, width=960, tallest=620)
    places = [(number, (5.0, 5.0)) for number in (1, 2, 2)] + [
        (number, (5.0 + number / 5, 5.0)) for number in (3, 4, 5)
    ]
    svg = markers(canvas, tuple(places))
    assert re.findall(r">([\d,]+)<", svg) == ["1,2", "3", "4", "5"]
    boxes = [tuple(map(float, found)) for found in re.findall(r'<rect x="([\d.]+)" y="([\d.]+)" width="([\d.]+)"', svg)]
    for i, (x, y, wide) in enumerate(boxes):
        for x2, y2, wide2 in boxes[i + 1 :]:
            assert x + wide <= x2 or x2 + wide2 <= x or abs(y - y2) >= 20


def test_every_place_of_the_drawing_is_numbered() -> None:
    whole, one = drawn()
    more = replace(drawing("IN"), places=tuple(DrawnPlace(number=n, layer=0, at=(n * 1.0, 0.0)) for n in range(1, 10)))
    told = texts(render(whole, replace(one, drawing=more)))
    assert [str(n) for n in range(1, 10) if str(n) not in told] == []
