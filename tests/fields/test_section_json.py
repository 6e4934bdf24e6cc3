"""Sections in JSON: what is read, what is answered, and the whole line for each fault."""

# ruff: noqa: E501  the sentences are asserted whole, one case a line

from __future__ import annotations

import copy
import json
import math
from typing import Any

import numpy as np
import pytest

from pairrules.errors import UsageError
from pairrules.fields.section_json import answer, answers, read_sections
from pairrules.fields.solve import solve_section
from tests.fields.closeness import near
from tests.fields.sections import contract_example, microstrip, strip

EXAMPLE: dict[str, Any] = {
    "pairrules_section": 1,
    "id": "one side poured",
    "unit": "mm",
    "layers": [{"y0": 0.0, "y1": 0.2, "er": 4.3, "loss_tangent": 0.02}],
    "patches": [{"er": 3.4, "polygon": [[-0.42, 0.2], [-0.08, 0.2], [-0.08, 0.25], [-0.42, 0.25]]}],
    "planes": [{"y": 0.0, "x": None}, {"y": 0.4, "x": [[None, 0.05], [0.3, None]]}],
    "conductors": [
        {"name": "plus", "role": "signal", "polygon": [[-0.4, 0.2], [-0.1, 0.2], [-0.1, 0.235], [-0.4, 0.235]]},
        {"name": "minus", "role": "signal", "strip": [0.1, 0.4, 0.2]},
        {"name": "pour", "role": "grounded", "polygon": [[0.6, 0.2], [2.0, 0.2], [2.0, 0.235], [0.6, 0.235]]},
    ],
}


def changed(path: str, value: object) -> dict[str, Any]:
    """The example with one value replaced, or added, at a path such as `layers.0.er`."""
    item = copy.deepcopy(EXAMPLE)
    *steps, last = path.split(".")
    inside: Any = item
    for step in steps:
        inside = inside[int(step)] if step.isdigit() else inside[step]
    inside[int(last) if last.isdigit() else last] = value
    return item


def test_the_contract_s_example() -> None:
    assert read_sections(json.dumps(EXAMPLE), "a.json") == [contract_example()]


def test_one_or_a_list() -> None:
    two = read_sections(json.dumps([EXAMPLE, changed("id", "other")]), "a.json")
    assert [section.id for section in two] == ["one side poured", "other"]


@pytest.mark.parametrize(("unit", "factor"), [("um", 1e-3), ("mil", 0.0254), ("in", 25.4), ("m", 1e3)])
def test_units(unit: str, factor: float) -> None:
    written = {
        "pairrules_section": 1,
        "unit": unit,
        "planes": [{"y": 0}],
        "conductors": [{"name": "plus", "role": "signal", "strip": [0, 0.3 / factor, 0.2 / factor]}],
    }
    (section,) = read_sections(json.dumps(written), "a.json")
    assert section.conductors[0].strip == pytest.approx((0.0, 0.3, 0.2), rel=1e-12)
    assert section.id == ""


def test_a_polygon_may_be_closed_or_open_and_go_round_either_way() -> None:
    corners = EXAMPLE["conductors"][0]["polygon"]
    closed = read_sections(json.dumps(changed("conductors.0.polygon", [*corners, corners[0]])), "a")[0]
    assert closed == contract_example()
    backward = read_sections(json.dumps(changed("conductors.0.polygon", corners[::-1])), "a")[0]
    assert near(solve_section(closed).C, 1e-9) == solve_section(backward).C


def test_stretches_of_a_plane_in_any_order() -> None:
    other = read_sections(json.dumps(changed("planes.1.x", [[0.3, None], [None, 0.05]])), "a")[0]
    assert other == contract_example()


def test_answer_holds_what_the_solution_says() -> None:
    section = contract_example()
    solved = solve_section(section)
    found = json.loads(json.dumps(answer(section, solution=solved), allow_nan=False))
    assert found["id"] == "one side poured"
    assert found["conductors"] == ["plus", "minus", "pour"]
    assert np.array(found["C_pF_per_m"]) == pytest.approx(solved.C * 1e12, rel=1e-12)
    assert np.array(found["Cair_pF_per_m"]) == pytest.approx(solved.Cair * 1e12, rel=1e-12)
    assert solved.pair is not None
    assert np.array(found["pair"]["C_pF_per_m"]) == pytest.approx(solved.pair.C * 1e12, rel=1e-12)
    assert np.array(found["pair"]["L_nH_per_m"]) == pytest.approx(np.asarray(solved.pair.L) * 1e9, rel=1e-12)
    # in air L Cair = 1/c², whatever the section
    product = np.array(found["pair"]["L_nH_per_m"]) @ np.array(found["pair"]["Cair_pF_per_m"]) * 1e-21
    assert product * 299792458.0**2 == pytest.approx(np.eye(2), abs=1e-9)
    assert found["impedance_diff_ohm"] == solved.pair.impedance_diff_ohm
    assert found["impedance_common_ohm"] == solved.pair.impedance_common_ohm
    assert found["unknowns"] == solved.unknowns
    assert "why_null" not in found


def test_a_figure_that_is_null_has_a_reason() -> None:
    lonely = answer(microstrip(w=(0.2, 0.25), s=0.15, h=1.0, er=4.3, planes=()))
    assert lonely["pair"]["L_nH_per_m"] is None
    assert lonely["impedance_common_ohm"] is None
    assert lonely["impedance_diff_ohm"] > 0
    reason = "no plane and no grounded conductor lets common-mode current return"
    assert lonely["why_null"] == {
        "pair.L_nH_per_m": reason,
        "pair.er_even": reason,
        "pair.er_modes": reason,
        "impedance_common_ohm": reason,
    }
    section = microstrip(w=(0.2, 0.2), s=0.2, h=0.2, er=4.2)
    single = answer(type(section)(conductors=section.conductors[:1], planes=section.planes))
    assert single["pair"] is None
    assert single["why_null"] == dict.fromkeys(
        ("pair", "impedance_diff_ohm", "impedance_common_ohm"), "a pair needs two signal conductors; this section has 1"
    )


def test_many_answers_keep_their_order() -> None:
    sections = [microstrip(w=(w, w), s=0.2, h=0.2, er=4.2, name=str(w)) for w in (0.3, 0.1, 0.2)]
    assert answers(sections) == [answer(section) for section in sections]


FAULTS = [
    (changed("unit", "cm"), 'a.json: unit: unit is "cm"; give one of mm, um, mil, in, m'),
    (changed("pairrules_section", 2), "a.json: pairrules_section: version is 2; only version 1 is known"),
    (changed("id", 5), "a.json: id: id is 5; give a text"),
    (changed("size", 5), 'a.json: "size" is not known here; use pairrules_section, id, unit, layers, patches, planes, conductors'),
    (changed("layers", {}), "a.json: layers: layers is {}; give a list"),
    (changed("layers.0.er", "x"), 'a.json: layers[0].er: "x" is no number; give a number'),
    (changed("layers.0.er", True), "a.json: layers[0].er: true is no number; give a number"),
    (changed("layers.0.er", 0.5), "a.json: layers[0]: er = 0.5 is no relative permittivity; give 1 or more; mend it there"),
    (changed("layers.0.y0", 0.2), "a.json: layers[0]: y0 = 0.2 is not below y1 = 0.2; mend it there"),
    (changed("layers.0.loss_tangent", -1), "a.json: layers[0]: loss_tangent = -1 is not within 0 and 1; mend it there"),
    (changed("layers.0", 7), "a.json: layers[0]: 7 is no object; give an object with y0, y1, er"),
    (changed("layers.0", {"y0": 0, "y1": 1}), "a.json: layers[0]: er is missing; add er"),
    (changed("patches.0.polygon", [[0, 0], [1, 1]]), "a.json: patches[0]: a polygon of 2 corners encloses nothing; give three or more; mend it there"),
    (changed("patches.0.polygon.1", [0]), "a.json: patches[0].polygon[1]: [0] is no point; give [x, y]"),
    (changed("patches.0.polygon.1", [0, None]), "a.json: patches[0].polygon[1][1]: null is no number; give a number"),
    (changed("patches.0.polygon", [[0, 0], [1, 1], [2, 2]]), "a.json: patches[0]: the polygon encloses no area; mend it there"),
    (changed("planes.1.x", 3), "a.json: planes[1].x: 3 is no list; give null or a list of [from, to]"),
    (changed("planes.1.x", [[0]]), "a.json: planes[1].x[0]: [0] is no stretch; give [from, to], null for no end"),
    (changed("planes.1.x", [[1, 0]]), "a.json: planes[1]: x[0] does not run from a smaller to a greater x; mend it there"),
    (changed("planes.1.x", [[0, 2], [1, 3]]), "a.json: planes[1]: x[1] starts before the stretch left of it ends; mend it there"),
    (changed("conductors.1.role", "hot"), 'a.json: conductors[1].role: role is "hot"; give one of signal, grounded, floating'),
    (changed("conductors.1.role", ["signal"]), 'a.json: conductors[1].role: role is ["signal"]; give one of signal, grounded, floating'),
    (changed("conductors.1.name", None), "a.json: conductors[1].name: name is null; give a text"),
    (changed("conductors.1.name", "plus"), "a.json: conductor name 'plus' stands more than once; mend it there"),
    (changed("conductors.1.strip", [0, 1]), "a.json: conductors[1].strip: [0, 1] is no strip; give [x0, x1, y]"),
    (changed("conductors.1.strip", [1, 0, 0]), "a.json: conductors[1]: strip runs from 1 to 0, not to a greater x; mend it there"),
    (changed("conductors.0.strip", [0, 1, 0]), "a.json: conductors[0]: a conductor has either a polygon or a strip; mend it there"),
    (changed("conductors", []), "a.json: a section needs at least one conductor; mend it there"),
    (changed("conductors.1.strip.0", 10**400), "a.json: conductors[1].strip[0]: 1000000000000000000000000000000000000... is out of reach; give a number of ordinary size"),
    ([EXAMPLE, changed("unit", None)], "a.json: [1].unit: unit is null; give one of mm, um, mil, in, m"),
    ([3], "a.json: [0]: 3 is no object; give an object with pairrules_section, unit, conductors"),
]  # fmt: skip


@pytest.mark.parametrize(("document", "sentence"), FAULTS)
def test_faults_name_the_place(document: object, sentence: str) -> None:
    with pytest.raises(UsageError) as caught:
        read_sections(json.dumps(document), "a.json")
    assert str(caught.value) == sentence
    assert caught.value.exit_status == 2


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ('{\n"unit": }', "a.json: line 2: this is no JSON: Expecting value; mend the text there"),
        ('{"unit": NaN}', "a.json: this is no JSON: NaN is no number here; mend the text there"),
        ("[" * 100000, "a.json: brackets are nested too deeply; give a section or a list of them"),
        ("", "a.json: line 1: this is no JSON: Expecting value; mend the text there"),
    ],
)
def test_text_that_is_no_json(text: str, sentence: str) -> None:
    with pytest.raises(UsageError) as caught:
        read_sections(text, "a.json")
    assert str(caught.value) == sentence


def test_copper_that_touches_is_the_user_s_fault() -> None:
    section = microstrip(
        w=(0.2, 0.2), s=0.2, h=0.2, er=4.2, extra=(strip("guard", 0.2, 0.5, 0.2, "grounded"),), name="x\x1b[2J"
    )
    with pytest.raises(UsageError) as caught:
        answer(section, name="a.json")
    assert (
        str(caught.value)
        == "a.json: section 'x?[2J': conductor 'minus' and conductor 'guard' touch; keep copper of different potentials apart"
    )


def test_infinite_numbers_are_refused() -> None:
    with pytest.raises(UsageError):
        read_sections(
            '{"pairrules_section": 1, "unit": "mm", "conductors": [], "layers": [{"y0": 1e999, "y1": 2, "er": 2}]}', "a"
        )
    assert math.isinf(json.loads("1e999"))
