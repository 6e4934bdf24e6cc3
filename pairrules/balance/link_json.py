"""A link given as JSON, version 1: read into elements, and answered. SI units.

Order: source resistances, sections as they stand, `R_series` of the load, then `R_ground`,
`C_ground`, `R_across` and `C_across` at the load's nodes; the answer is the voltage across those. All sections count to
the cause "trace". A key left out means that the part is not there: no resistance, nothing to reference, nothing across;
`null` says the same of `R_ground` and `R_across`. Other keys at the top are the user's own notes.
"""

from __future__ import annotations

import difflib
import json
import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np

from pairrules.balance.conversion import by_cause, decibel, solve
from pairrules.balance.networks import Element, Floats, Line, Series, Shunt
from pairrules.errors import UsageError
from pairrules.fields.chain_matrix import RangeError

Solved: TypeAlias = Callable[[str], tuple[Floats, Floats] | None]
"""Name of a section to its L [H/m] and C [F/m], both (2, 2); None where no section has that name."""

_TOP = ("pairrules_link", "id", "source", "sections", "load", "frequencies")
_SECTION = ("L", "C", "R", "length", "lengths", "section")
_LOAD = ("R_series", "R_ground", "C_ground", "R_across", "C_across")

_ROUNDING = 1e-6
"""How far L12 and L21 may differ by the rounding of whoever wrote them."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LinkCase:
    """A link as read: its `id` (None where not given), elements source first, frequencies [Hz], and its place."""

    id: object
    elements: tuple[Element, ...]
    frequencies: Floats
    file: str
    place: str


_LEAST, _OPEN = 1e-24, 1e100
"""Least magnitude in SI units, and the greatest of a resistance across, which people write for none; beyond what
`_Node.number` takes, products of a few leave the range of numbers."""


@dataclass(frozen=True, slots=True)
class _Node:
    """A value of the document and where it stands."""

    value: Any
    place: str
    file: str

    def fault(self, found: str, remedy: str) -> UsageError:
        return UsageError(found, file=self.file, place=self.place, remedy=remedy)

    def shown(self) -> str:
        text = json.dumps(self.value)
        return text if len(text) <= 60 else text[:57] + "..."

    def has(self, key: str) -> bool:
        return key in self.value

    def at(self, key: str | int) -> _Node:
        if isinstance(key, int):
            return _Node(self.value[key], f"{self.place}[{key}]", self.file)
        if key not in self.value:
            raise self.fault(f"{key} is missing", f"add {key}")
        return _Node(self.value[key], f"{self.place}.{key}" if self.place else key, self.file)

    def table(self, keys: Sequence[str]) -> _Node:
        if not isinstance(self.value, dict):
            raise self.fault(f"{self.shown()} is no object", "give an object with " + ", ".join(keys))
        for key in self.value:
            if key not in keys:
                raise self.unknown(key, keys)
        return self

    def unknown(self, key: str, keys: Sequence[str]) -> UsageError:
        near = difflib.get_close_matches(key, keys, n=1)
        remedy = f"write {near[0]}" if near else "known are " + ", ".join(keys)
        return self.fault(f"{json.dumps(key)[:60]} is no key of this format", remedy)

    def number(self, *, least: float = 0.0, above: bool = False, most: float = 1e24) -> float:
        value = _finite(self.value)
        if value is None or value < least or (above and value == least):
            wanted = "greater than" if above else "not below"
            raise self.fault(f"{self.shown()} is no number {wanted} {least:g}", "give one in SI units")
        if value != 0 and not _LEAST < abs(value) <= most:
            raise self.fault(f"{self.shown()} is out of reach", "give one in SI units")
        return value

    def row(self, count: int, wanted: str) -> list[_Node]:
        if not isinstance(self.value, list) or len(self.value) != count:
            raise self.fault(f"{self.shown()} is not {wanted}", "write [plus, minus]")
        return [self.at(i) for i in range(count)]

    def legs(self, *, above: bool = False, absent: float | None = None) -> Floats:
        """Two numbers; `null` stands for `absent` where that is given."""
        nodes = self.row(2, "a list of two numbers")
        return np.array([_or_absent(node, above=above, absent=absent) for node in nodes])

    def matrix(self) -> Floats:
        """A symmetric 2×2 matrix."""
        rows = self.row(2, "a 2 × 2 matrix")
        entries = np.array(
            [[node.number(least=-math.inf) for node in row.row(2, "a row of two numbers")] for row in rows]
        )
        size = np.abs(entries).max()
        if abs(entries[0, 1] - entries[1, 0]) > _ROUNDING * size:
            raise self.fault("the matrix is not symmetric", "give both places off the diagonal the same value")
        entries[0, 1] = entries[1, 0] = (entries[0, 1] + entries[1, 0]) / 2
        if (
            entries[0, 0] < 0
            or entries[1, 1] < 0
            or entries[0, 1] ** 2 > entries[0, 0] * entries[1, 1] * (1 + _ROUNDING)
        ):
            raise self.fault(
                "the matrix stores negative energy",
                "the square of the place off the diagonal is at most the product of the others",
            )
        return entries


def read_link(document: object, *, solved: Solved, file: str = "", place: str = "") -> LinkCase:
    """A link from a parsed JSON object.

    Parameters: document: the object. solved: gives the matrices of a section that is named. file, place: for messages.
    Raises: UsageError with the path of what is wrong.
    """
    top = _Node(document, place, file)
    if not isinstance(document, dict):
        raise top.fault(f"{top.shown()} is no object", "give a link, see pairrules_link version 1")
    if type(document.get("pairrules_link")) is not int or document["pairrules_link"] != 1:
        raise top.fault("pairrules_link is not 1", "this version reads links of version 1")
    for key in document:
        if key not in _TOP and difflib.get_close_matches(key, _TOP, n=1, cutoff=0.8):
            raise top.unknown(key, _TOP)
    sections = top.at("sections")
    if not isinstance(sections.value, list):
        raise sections.fault(f"{sections.shown()} is no list", "give a list of sections, [] for none")
    elements: list[Element] = [_source(top.at("source"))]
    elements += [_section(sections.at(i), solved) for i in range(len(sections.value))]
    elements += _load(top.at("load"))
    return LinkCase(
        id=document.get("id"),
        elements=tuple(elements),
        frequencies=_frequencies(top.at("frequencies")),
        file=file,
        place=place,
    )


def answer(case: LinkCase) -> dict[str, Any]:
    """The answer to a link: its `id` and `results`, one a frequency, ratios in dB (an exact zero is −400 dB).

    Raises: UsageError where the link attenuates beyond the range of numbers.
    """
    try:
        response = solve(case.elements, case.frequencies)
        causes = by_cause(case.elements, case.frequencies)
    except RangeError as error:
        raise UsageError(
            str(error), file=case.file, place=case.place, remedy="check the sections' lengths and the frequencies"
        ) from None
    if not (np.isfinite(response.conversion).all() and np.isfinite(response.gain).all()):
        raise UsageError(
            "the link attenuates by more than numbers can hold",
            file=case.file,
            place=case.place,
            remedy="check the sections' lengths and resistances, and the frequencies",
        )
    nothing = np.zeros_like(response.conversion)
    columns = {
        "conversion_db": decibel(response.conversion),
        "source_db": decibel(causes.get("source", nothing)),
        "trace_db": decibel(causes.get("trace", nothing)),
        "load_db": decibel(causes.get("load", nothing)),
        "differential_gain_db": decibel(response.gain),
    }
    columns["rejection_db"] = columns["differential_gain_db"] - columns["conversion_db"]
    results = [
        {"frequency_hz": float(frequency)} | {name: float(column[i]) for name, column in columns.items()}
        for i, frequency in enumerate(case.frequencies)
    ]
    return {"id": case.id, "results": results}


def _source(node: _Node) -> Element:
    return Series(cause="source", resistance=node.table(("R",)).at("R").legs())


def _section(node: _Node, solved: Solved) -> Element:
    node.table(_SECTION)
    if node.has("section"):
        for key in ("L", "C"):
            if node.has(key):
                raise node.at(key).fault("a section is named as well", "keep the name or the matrices")
        inductance, capacitance = _named(node.at("section"), solved)
    else:
        inductance, capacitance = node.at("L").matrix(), node.at("C").matrix()
        if capacitance[0, 1] > 0:
            raise node.at("C").fault("C12 is positive", "give the Maxwell matrix, whose C12 is negative")
    resistance = np.diag(node.at("R").legs()) if node.has("R") else np.zeros((2, 2))
    if node.has("length") == node.has("lengths"):
        found = "length and lengths are both given" if node.has("length") else "length is missing"
        raise node.fault(found, "give length, or lengths for legs without coupling")
    if node.has("length"):
        lengths = np.full(2, node.at("length").number())
    else:
        lengths = node.at("lengths").legs()
        if inductance[0, 1] or capacitance[0, 1]:
            raise node.at("lengths").fault("the legs are coupled", "give one length, or 0 for L12 and C12")
    return Line(cause="trace", inductance=inductance, capacitance=capacitance, resistance=resistance, lengths=lengths)


def _named(node: _Node, solved: Solved) -> tuple[Floats, Floats]:
    found = solved(node.value) if isinstance(node.value, str) else None
    if found is None:
        raise node.fault(f"no section has the id {node.shown()}", "put that section into the same list")
    return found


def _load(node: _Node) -> list[Element]:
    node.table(_LOAD)

    def legs(key: str, absent: float, *, above: bool = False) -> Floats:
        given = absent if math.isinf(absent) else None
        return node.at(key).legs(above=above, absent=given) if node.has(key) else np.full(2, absent)

    across = _or_absent(node.at("R_across"), above=True, absent=math.inf) if node.has("R_across") else math.inf
    return [
        Series(cause="load", resistance=legs("R_series", 0.0)),
        Shunt(
            cause="load",
            resistance=legs("R_ground", math.inf, above=True),
            capacitance=legs("C_ground", 0.0),
            across_resistance=across,
            across_capacitance=node.at("C_across").number() if node.has("C_across") else 0.0,
        ),
    ]


def _frequencies(node: _Node) -> Floats:
    if not isinstance(node.value, list) or not node.value:
        raise node.fault(f"{node.shown()} is no list of frequencies", "give at least one, in Hz")
    return np.array([node.at(i).number() for i in range(len(node.value))])


def _or_absent(node: _Node, *, above: bool, absent: float | None) -> float:
    if node.value is None and absent is not None:
        return absent
    return node.number(above=above, most=_OPEN) if above else node.number()


def _finite(value: object) -> float | None:
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        return None
    try:
        number = float(value)
    except OverflowError:
        return None
    return number if math.isfinite(number) else None


def section_matrices(pair: Mapping[str, Any]) -> tuple[Floats, Floats]:
    """L [H/m] and C [F/m] from the `pair` of a section's answer (nH/m, pF/m)."""
    return np.array(pair["L_nH_per_m"]) * 1e-9, np.array(pair["C_pF_per_m"]) * 1e-12
