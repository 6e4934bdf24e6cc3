"""Links as JSON: the format to the letter, and every error with its place."""

from __future__ import annotations

import copy
from typing import Any

import numpy as np
import pytest

from pairrules.balance.conversion import by_cause, decibel, solve
from pairrules.balance.link_json import answer, read_link, section_matrices
from pairrules.balance.networks import Element, Line, Series, Shunt
from pairrules.errors import UsageError

POURED = (np.array([[2.25e-7, 1.7e-8], [1.7e-8, 2.7e-7]]), np.array([[1.26e-10, -7.5e-12], [-7.5e-12, 1.1e-10]]))

LINK: dict[str, Any] = {
    "pairrules_link": 1,
    "id": "unequal sources",
    "source": {"R": [1000, 1010]},
    "sections": [
        {
            "L": [[3.18e-7, 6.6e-8], [6.6e-8, 3.18e-7]],
            "C": [[1.08e-10, -1.1e-11], [-1.1e-11, 1.08e-10]],
            "R": [2.2, 1.8],
            "length": 0.01,
        },
        {"L": [[3.3e-7, 0], [0, 3.3e-7]], "C": [[1.3e-10, 0], [0, 1.3e-10]], "lengths": [0.1, 0.103]},
        {"section": "one side poured", "length": 0.05},
    ],
    "load": {
        "R_series": [10, 12],
        "R_ground": [1e6, 1e6],
        "C_ground": [1e-11, 1.1e-11],
        "R_across": 2e4,
        "C_across": 1e-8,
    },
    "frequencies": [50, 1000],
}


def solved(name: str) -> Any:
    return POURED if name == "one side poured" else None


def changed(path: list[str | int], value: Any) -> dict[str, Any]:
    """The link above with one value replaced; `...` removes it."""
    document = copy.deepcopy(LINK)
    at: Any = document
    for step in path[:-1]:
        at = at[step]
    if value is ...:
        del at[path[-1]]
    else:
        at[path[-1]] = value
    return document


def read(document: Any) -> Any:
    return read_link(document, solved=solved, file="link.json", place="[2]")


def test_the_answer_is_that_of_the_same_link_built_by_hand() -> None:
    first, second, _ = LINK["sections"]
    link: list[Element] = [
        Series(cause="source", resistance=(1000, 1010)),
        Line(
            cause="trace",
            inductance=first["L"],
            capacitance=first["C"],
            resistance=np.diag([2.2, 1.8]),
            lengths=(0.01, 0.01),
        ),
        Line(cause="trace", inductance=second["L"], capacitance=second["C"], lengths=(0.1, 0.103)),
        Line(cause="trace", inductance=POURED[0], capacitance=POURED[1], lengths=(0.05, 0.05)),
        Series(cause="load", resistance=(10, 12)),
        Shunt(
            cause="load",
            resistance=(1e6, 1e6),
            capacitance=(1e-11, 1.1e-11),
            across_resistance=2e4,
            across_capacitance=1e-8,
        ),
    ]
    response, causes = solve(link, [50, 1000]), by_cause(link, [50, 1000])
    found = answer(read(LINK))
    assert found["id"] == "unequal sources"
    assert [one["frequency_hz"] for one in found["results"]] == [50.0, 1000.0]
    for i, one in enumerate(found["results"]):
        assert one["conversion_db"] == decibel(response.conversion)[i]
        assert one["differential_gain_db"] == decibel(response.gain)[i]
        assert one["rejection_db"] == one["differential_gain_db"] - one["conversion_db"]
        for cause in ("source", "trace", "load"):
            assert one[f"{cause}_db"] == decibel(causes[cause])[i]


def test_source_and_load_alone_are_a_link_and_what_is_even_is_the_floor() -> None:
    document = {
        "pairrules_link": 1,
        "note": "the user's own",
        "source": {"R": [10, 0]},
        "sections": [],
        "load": {"R_ground": [1e4, 1e4]},
        "frequencies": [0, 50],
    }
    found = answer(read(document))
    assert found["id"] is None
    for one in found["results"]:
        assert one["conversion_db"] == pytest.approx(20 * np.log10(10 / 10010), abs=1e-9)
        assert one["source_db"] == one["conversion_db"]
        assert one["trace_db"] == one["load_db"] == -400.0


def test_null_says_that_a_resistance_is_not_there() -> None:
    open_ended = changed(["load"], {"R_ground": [None, 1e6], "R_across": None, "C_ground": [1e-11, 1e-11]})
    absent = changed(["load"], {"R_ground": [1e99, 1e6], "C_ground": [1e-11, 1e-11]})
    for one, other in zip(answer(read(open_ended))["results"], answer(read(absent))["results"], strict=True):
        assert one["conversion_db"] == pytest.approx(other["conversion_db"], abs=1e-9)


def test_a_sections_answer_gives_its_matrices_in_si_units() -> None:
    L, C = section_matrices(
        {"L_nH_per_m": [[318.0, 66.0], [66.0, 318.0]], "C_pF_per_m": [[108.0, -11.0], [-11.0, 108.0]]}
    )
    np.testing.assert_allclose(L, LINK["sections"][0]["L"])
    np.testing.assert_allclose(C, LINK["sections"][0]["C"])


FAULTS: list[tuple[Any, str]] = [
    (7, "[2]: 7 is no object; give a link, see pairrules_link version 1"),
    (changed(["pairrules_link"], 2), "[2]: pairrules_link is not 1; this version reads links of version 1"),
    (changed(["pairrules_link"], True), "[2]: pairrules_link is not 1; this version reads links of version 1"),
    (changed(["source"], ...), "[2]: source is missing; add source"),
    (changed(["source"], {}), "[2].source: R is missing; add R"),
    (changed(["source"], [1, 2]), "[2].source: [1, 2] is no object; give an object with R"),
    (changed(["source", "R"], 5), "[2].source.R: 5 is not a list of two numbers; write [plus, minus]"),
    (changed(["source", "R"], [1, -1]), "[2].source.R[1]: -1 is no number not below 0; give one in SI units"),
    (changed(["source", "R"], [1e30, 1]), "[2].source.R[0]: 1e+30 is out of reach; give one in SI units"),
    (changed(["source", "R"], [1e-30, 1]), "[2].source.R[0]: 1e-30 is out of reach; give one in SI units"),
    (changed(["source", "R"], [True, 1]), "[2].source.R[0]: true is no number not below 0; give one in SI units"),
    (changed(["source", "R"], [None, 1]), "[2].source.R[0]: null is no number not below 0; give one in SI units"),
    (
        changed(["source", "R"], [10**400, 1]),
        "[2].source.R[0]: 1" + "0" * 56 + "... is no number not below 0; give one in SI units",
    ),
    (changed(["sections"], {}), "[2].sections: {} is no list; give a list of sections, [] for none"),
    (changed(["sectoins"], []), '[2]: "sectoins" is no key of this format; write sections'),
    (changed(["sections", 0, "len"], 1), '[2].sections[0]: "len" is no key of this format; write length'),
    (changed(["sections", 0, "L"], ...), "[2].sections[0]: L is missing; add L"),
    (changed(["sections", 0, "L"], [[1, 2]]), "[2].sections[0].L: [[1, 2]] is not a 2 × 2 matrix; write [plus, minus]"),
    (
        changed(["sections", 0, "L", 0, 1], 7e-8),
        "[2].sections[0].L: the matrix is not symmetric; give both places off the diagonal the same value",
    ),
    (
        changed(["sections", 1, "L"], [[3e-7, 4e-7], [4e-7, 3e-7]]),
        "[2].sections[1].L: the matrix stores negative energy; "
        "the square of the place off the diagonal is at most the product of the others",
    ),
    (
        changed(["sections", 0, "C"], [[1e-10, 1e-11], [1e-11, 1e-10]]),
        "[2].sections[0].C: C12 is positive; give the Maxwell matrix, whose C12 is negative",
    ),
    (
        changed(["sections", 0, "length"], ...),
        "[2].sections[0]: length is missing; give length, or lengths for legs without coupling",
    ),
    (
        changed(["sections", 1, "length"], 1),
        "[2].sections[1]: length and lengths are both given; give length, or lengths for legs without coupling",
    ),
    (
        changed(["sections", 1, "L"], [[3e-7, 1e-8], [1e-8, 3e-7]]),
        "[2].sections[1].lengths: the legs are coupled; give one length, or 0 for L12 and C12",
    ),
    (
        changed(["sections", 2, "section"], "two sides"),
        '[2].sections[2].section: no section has the id "two sides"; put that section into the same list',
    ),
    (
        changed(["sections", 2, "L"], [[1, 0], [0, 1]]),
        "[2].sections[2].L: a section is named as well; keep the name or the matrices",
    ),
    (changed(["load", "R_grond"], [1, 1]), '[2].load: "R_grond" is no key of this format; write R_ground'),
    (
        changed(["load", "R_ground"], [0, 1]),
        "[2].load.R_ground[0]: 0 is no number greater than 0; give one in SI units",
    ),
    (changed(["load", "R_across"], 0), "[2].load.R_across: 0 is no number greater than 0; give one in SI units"),
    (changed(["load", "C_across"], "1n"), '[2].load.C_across: "1n" is no number not below 0; give one in SI units'),
    (
        changed(["load", "C_ground"], [None, 0]),
        "[2].load.C_ground[0]: null is no number not below 0; give one in SI units",
    ),
    (changed(["frequencies"], []), "[2].frequencies: [] is no list of frequencies; give at least one, in Hz"),
    (changed(["frequencies", 1], "1k"), '[2].frequencies[1]: "1k" is no number not below 0; give one in SI units'),
]


@pytest.mark.parametrize(("document", "line"), FAULTS, ids=[line[:60] for _, line in FAULTS])
def test_faults_are_told_with_their_place(document: Any, line: str) -> None:
    with pytest.raises(UsageError) as caught:
        read(document)
    assert str(caught.value) == f"link.json: {line}"


def test_a_link_beyond_the_range_of_numbers_is_told() -> None:
    case = read(changed(["sections", 0, "length"], 1e9))
    with pytest.raises(UsageError) as caught:
        answer(case)
    assert str(caught.value) == (
        "link.json: [2]: the link attenuates by more than numbers can hold; "
        "check the sections' lengths and resistances, and the frequencies"
    )


def test_a_line_too_long_to_compute_is_refused() -> None:
    with pytest.raises(UsageError) as caught:
        answer(read(changed(["sections", 0, "length"], 1e20)))
    assert str(caught.value) == (
        "link.json: [2]: a line is longer than 2^40 radians, too long to compute; "
        "check the sections' lengths and the frequencies"
    )
