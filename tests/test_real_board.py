"""The whole line on test case 10 of the IPC-2581 consortium, and on the same board written in another way.

The file was written for assembly: 2 of 18 copper layers, no stackup. It stands beside the checkout, never in it.
"""

from __future__ import annotations

import gzip
import json
import random
import re
from dataclasses import fields
from itertools import pairwise
from pathlib import Path

import pytest
from lxml import etree

from pairrules.cli import run
from pairrules.pipeline import check
from pairrules.result import Measures, PairResult, Result

BOARD = Path(__file__).resolve().parents[1] / ".." / "shared" / "boards" / "case-10-assembly.xml"
NAMESPACE = "{http://webstds.ipc.org/2581}"
MOST_MM = 0.55
LENGTHS = {"x", "y", "lineWidth", "diameter", "plusTol", "minusTol", "width", "height", "standoff", "value"}

pytestmark = pytest.mark.skipif(not BOARD.exists(), reason="the consortium's board is not beside the checkout")


@pytest.fixture(scope="module")
def result(tmp_path_factory: pytest.TempPathFactory) -> Result:
    settings = tmp_path_factory.mktemp("settings") / "pairrules.yaml"
    settings.write_text("extends: [base]\n")
    return check(BOARD, settings)


def pair(result: Result, name: str) -> PairResult:
    (found,) = (pair for pair in result.pairs if pair.name == name)
    return found


def test_seventeen_pairs_and_no_false_one(result: Result) -> None:
    lanes = (0, 1, 2, 3, 8, 9, 10, 11)
    expected = {f"LN{n}_PAD_{way}" for n in lanes for way in ("TX", "RX")} | {"REFCLK"}
    assert {pair.name for pair in result.pairs} == expected
    assert result.unpaired == ()


def test_sending_lanes_run_from_the_array_through_two_capacitors_to_the_connector(result: Result) -> None:
    for found in result.pairs:
        if found.name.endswith("_TX"):
            assert (found.source, found.load) == ("U1", "J1")
            assert sorted(part.leg for part in found.series) == ["minus", "plus"]
            assert all(part.ref.startswith("C") for part in found.series)
            assert len(found.nets_plus) == len(found.nets_minus) == 2
            assert (found.measures.vias_plus, found.measures.vias_minus) == (0, 0)


def test_the_first_lane_is_as_long_as_its_two_drawn_polylines(result: Result) -> None:
    measures = pair(result, "LN0_PAD_TX").measures
    assert measures.length_plus_mm == pytest.approx(58.422, abs=0.002)
    assert measures.length_minus_mm == pytest.approx(59.003, abs=0.002)
    assert measures.length_mismatch_mm == pytest.approx(-0.581, abs=0.002)
    drawn = polyline_lengths_mm()
    # Points nearer than half a micrometre are one place to the route, which is all the two may differ by.
    for leg, nets in (("plus", pair(result, "LN0_PAD_TX").nets_plus), ("minus", pair(result, "LN0_PAD_TX").nets_minus)):
        assert getattr(measures, f"length_{leg}_mm") == pytest.approx(sum(drawn[net] for net in nets), abs=5e-4)


def polyline_lengths_mm() -> dict[str, float]:
    """All drawn polyline of each net on TOP, by a plain search of the text: nothing of the reader is used."""
    text = BOARD.read_text(encoding="utf-8")
    top = text[text.index('<LayerFeature layerRef="TOP">') : text.index('<LayerFeature layerRef="BOTTOM">')]
    found: dict[str, float] = {}
    for net, body in re.findall(r'<Set net="([^"]+)"[^>]*>(.*?)</Set>', top, re.DOTALL):
        for line in re.findall(r"<Polyline>(.*?)</Polyline>", body, re.DOTALL):
            at = [complex(float(x), float(y)) for x, y in re.findall(r'x="([^"]+)" y="([^"]+)"', line)]
            found[net] = found.get(net, 0.0) + 25.4 * sum(abs(b - a) for a, b in pairwise(at))
    return found


def test_receiving_lanes_pass_one_via_and_pins_in_holes_are_none(result: Result) -> None:
    for found in result.pairs:
        if found.name.endswith("_RX"):
            assert {found.source, found.load} == {"U1", "J1"}
            assert (found.measures.vias_plus, found.measures.vias_minus) == (1, 1)
            assert any("barrels" in sentence for sentence in found.missing)


def test_what_the_file_lacks_is_said(result: Result) -> None:
    assert not result.board.complete
    assert any("no stackup" in sentence and "barrel" in sentence for sentence in result.board.missing)
    assert any("18 copper layers are drilled through" in sentence for sentence in result.board.missing)
    measures = pair(result, "REFCLK").measures
    assert measures.impedance_diff_ohm is None and measures.reference_uncovered_mm is None


def test_stray_ends_of_a_hundredth_are_stubs(result: Result) -> None:
    stubs = [m for p in result.pairs for m in (p.measures.stub_plus_mm, p.measures.stub_minus_mm) if m]
    assert any(0.005 < stub < 0.02 for stub in stubs)
    assert all(found.routed == "complete" for found in result.pairs)


def rewritten(seed: int) -> bytes:
    """The board in millimetres, under another prefix, gzipped, every polyline in single shuffled segments."""
    tree = etree.parse(BOARD, etree.XMLParser(resolve_entities=False, no_network=True))
    chance = random.Random(seed)
    for element in tree.iter():
        if not isinstance(element.tag, str):
            continue
        if element.get("units") == "INCH":
            element.set("units", "MILLIMETER")
        if element.tag == f"{NAMESPACE}NonstandardAttribute":
            continue
        for name in LENGTHS & set(element.attrib):
            element.set(name, repr(float(element.get(name)) * 25.4))
    for features in list(tree.iter(f"{NAMESPACE}Features")):
        cut_lines(features, chance)
    text = etree.tostring(tree.getroot(), encoding="unicode")
    text = re.sub(r"<(/?)([A-Za-z])", r"<\1other:\2", text.replace("IPC-2581 ", "IPC-2581 xmlns:other='x' ", 1))
    text = text.replace("xmlns:other='x' ", "").replace('xmlns="', 'xmlns:other="', 1)
    return gzip.compress(text.encode(), mtime=0)


def cut_lines(features: etree._Element, chance: random.Random) -> None:
    for line in list(features.iter(f"{NAMESPACE}Polyline")):
        at = [(e.get("x"), e.get("y")) for e in line if e.tag.endswith(("PolyBegin", "PolyStepSegment"))]
        style = next(e for e in line if e.tag == f"{NAMESPACE}LineDescRef")
        holder = line.getparent()
        place = holder.index(line)
        holder.remove(line)
        segments = [tuple(chance.sample(ends, 2)) for ends in pairwise(at)]
        chance.shuffle(segments)
        for start, end in segments:
            piece = etree.Element(f"{NAMESPACE}Polyline")
            etree.SubElement(piece, f"{NAMESPACE}PolyBegin", x=start[0], y=start[1])
            etree.SubElement(piece, f"{NAMESPACE}PolyStepSegment", x=end[0], y=end[1])
            piece.append(etree.fromstring(etree.tostring(style)))
            holder.insert(place, piece)


def test_the_same_board_written_otherwise_has_the_same_figures(result: Result, tmp_path: Path) -> None:
    path = tmp_path / "board.xml.gz"
    path.write_bytes(rewritten(7))
    (tmp_path / "pairrules.yaml").write_text("extends: [base]\n")
    other = check(path)
    assert other.board.units == "MILLIMETER"
    assert len(other.pairs) == len(result.pairs)
    for found in result.pairs:
        again = pair(other, found.name)
        assert (again.nets_plus, again.nets_minus, again.source, again.load) == (
            found.nets_plus,
            found.nets_minus,
            found.source,
            found.load,
        )
        for field in fields(Measures):
            before, after = getattr(found.measures, field.name), getattr(again.measures, field.name)
            assert (before is None) == (after is None), field.name
            if before is not None:
                assert after == pytest.approx(before, abs=1e-6), (found.name, field.name)


@pytest.fixture(scope="module")
def lanes(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Result]:
    """The board under settings of its own: a class for the sending lanes, nothing for the others."""
    settings = tmp_path_factory.mktemp("lanes") / "pairrules.yaml"
    settings.write_text(
        "extends: []\n"
        "classes:\n"
        "  lane:\n"
        '    match: ["LN*_PAD_TX"]\n'
        "    limits:\n"
        f"      leg-length: {{most: {MOST_MM} mm, severity: review, source: skew budget of the lane}}\n"
        "      half-pair: {severity: review, source: common practice}\n",
        encoding="utf-8",
    )
    return settings, check(BOARD, settings)


def test_the_lanes_flagged_are_those_whose_drawn_polylines_differ_by_more_than_the_limit(
    lanes: tuple[Path, Result],
) -> None:
    drawn, over = polyline_lengths_mm(), set()
    for found in lanes[1].pairs:
        if not found.name.endswith("_TX"):
            assert (found.findings, found.limits) == ((), ())
            continue
        measures = found.measures
        assert measures.stub_plus_mm is not None and measures.stub_minus_mm is not None
        # Branches and stray ends are drawn, but are no part of the route.
        plus = sum(drawn[net] for net in found.nets_plus) - measures.stub_plus_mm
        minus = sum(drawn[net] for net in found.nets_minus) - measures.stub_minus_mm
        assert abs(abs(plus - minus) - MOST_MM) > 0.01
        if abs(plus - minus) > MOST_MM:
            over.add(found.name)
            (finding,) = found.findings
            assert finding.rule == "leg-length"
            assert finding.measured == pytest.approx(abs(plus - minus), abs=5e-4)
    flagged = {found.name for found in lanes[1].pairs if found.findings}
    assert flagged == over
    assert 0 < len(over) < 8


def test_no_rule_fires_without_a_limit_that_the_user_can_find(
    result: Result, lanes: tuple[Path, Result], capsys: pytest.CaptureFixture[str]
) -> None:
    settings, judged = lanes
    assert run(["settings", "--settings", str(settings), "--format", "json", str(BOARD)]) == 0
    told = {
        pair["name"]: {one["rule"]: one for one in pair["limits"]}
        for pair in json.loads(capsys.readouterr().out)["pairs"]
    }
    assert told.keys() == {found.name for found in judged.pairs}
    for found in judged.pairs:
        assert told[found.name].keys() == {held.rule for held in found.limits}
        for finding in found.findings:
            limit = told[found.name][finding.rule]
            assert finding.source == limit["source"] == "skew budget of the lane"
            # Line 6 is the limit's, in the file that was given.
            assert limit["place"] == f"{settings} line 6"
    for found in result.pairs:
        held = {one.rule: one for one in found.limits}
        for finding in found.findings:
            assert finding.source and finding.source.startswith(held[finding.rule].source)
