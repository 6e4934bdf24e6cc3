"""Sections written in JSON, version 1: reads them, and answers with what the field solution gives.

`read_sections(text, name)` gives the sections of a file, `answer(section)` the JSON object for one of them, `answers`
for several. `section_from(item, name, place)` reads one object that stands in a larger document, such as a list that
also holds links. Everything wrong with the text is a `UsageError` (exit status 2) that names file and place.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Iterable, Mapping
from typing import Any

import numpy as np

from pairrules.errors import UsageError
from pairrules.fields.cross_section import ROLES, Conductor, CrossSection, Layer, Patch, Plane, Point
from pairrules.fields.solve import SectionSolution, solve_section

VERSION_KEY = "pairrules_section"
"""The key that marks an object as a section; its value is the version."""

UNIT_MM = {"mm": 1.0, "um": 1e-3, "mil": 0.0254, "in": 25.4, "m": 1e3}
"""Millimetres in each unit of length a section may be written in. Source: the inch is 25.4 mm exactly (1959)."""

_KEYS = (VERSION_KEY, "id", "unit", "layers", "patches", "planes", "conductors")


def read_sections(text: str, name: str) -> list[CrossSection]:
    """The sections of a JSON text that holds one section or a list of them, in order.

    Parameters
    ----------
    text: the text. name: what to call it in errors, such as the file's name.

    Raises
    ------
    UsageError: where the text is no JSON, or no section of version 1; names the place.
    """
    try:
        document = json.loads(text, parse_constant=_refuse_constant)
    except RecursionError:
        raise UsageError(
            "brackets are nested too deeply", file=name, remedy="give a section or a list of them"
        ) from None
    except ValueError as fault:
        where = f"line {fault.lineno}" if isinstance(fault, json.JSONDecodeError) else ""
        what = fault.msg if isinstance(fault, json.JSONDecodeError) else str(fault)
        raise UsageError(f"this is no JSON: {what}", file=name, place=where, remedy="mend the text there") from None
    if isinstance(document, list):
        return [section_from(item, name, f"[{place}]") for place, item in enumerate(document)]
    return [section_from(document, name, "")]


def section_from(item: object, name: str, place: str) -> CrossSection:
    """The section that one parsed JSON object means; `place` is its path in the document, "" for the whole of it.

    Raises
    ------
    UsageError: names file, place, what is wrong and the remedy.
    """
    reader = _Reader(name, place)
    fields = reader.fields(item, "", _KEYS, needed=(VERSION_KEY, "unit", "conductors"))
    if fields[VERSION_KEY] != 1 or isinstance(fields[VERSION_KEY], bool):
        raise reader.fault(VERSION_KEY, f"version is {_shown(fields[VERSION_KEY])}", "only version 1 is known")
    unit = fields["unit"]
    if not isinstance(unit, str) or unit not in UNIT_MM:
        raise reader.fault("unit", f"unit is {_shown(unit)}", f"give one of {', '.join(UNIT_MM)}")
    identity = fields.get("id", "")
    if not isinstance(identity, str):
        raise reader.fault("id", f"id is {_shown(identity)}", "give a text")
    reader.scale = UNIT_MM[unit]
    section: CrossSection = reader.built(
        "",
        lambda: CrossSection(
            id=identity,
            layers=tuple(reader.layer(value, at) for at, value in reader.items(fields, "layers")),
            patches=tuple(reader.patch(value, at) for at, value in reader.items(fields, "patches")),
            planes=tuple(reader.plane(value, at) for at, value in reader.items(fields, "planes")),
            conductors=tuple(reader.conductor(value, at) for at, value in reader.items(fields, "conductors")),
        ),
    )
    return section


def answer(section: CrossSection, *, name: str = "", solution: SectionSolution | None = None) -> dict[str, Any]:
    """What the field solution gives for a section, ready to be written as JSON.

    Parameters
    ----------
    section: the section. name: what to call its file in errors. solution: its solution where that is known already.

    Returns
    -------
    `id`, `conductors` (names), `C_pF_per_m`, `Cair_pF_per_m` (Maxwell matrices in the order of `conductors`),
    `G_over_omega_pF_per_m` (conductance over angular frequency, from the loss tangents), `pair` (`None` unless there
    are two signals) with `C_pF_per_m`, `Cair_pF_per_m`, `L_nH_per_m`, `er_odd`, `er_even`, `er_modes`;
    `impedance_diff_ohm`, `impedance_common_ohm`, `unknowns`; `why_null`, a reason for each figure that is null.

    Raises
    ------
    UsageError: where copper overlaps or touches that must not.
    """
    if solution is None:
        try:
            solution = solve_section(section)
        except ValueError as fault:
            raise UsageError(
                str(fault), file=name, place=_named(section), remedy="keep copper of different potentials apart"
            ) from None
    pair = solution.pair
    why: dict[str, str] = {}
    if pair is None:
        lacking = f"a pair needs two signal conductors; this section has {len(section.signals)}"
        why = dict.fromkeys(("pair", "impedance_diff_ohm", "impedance_common_ohm"), lacking)
    elif pair.L is None:
        lacking = "no plane and no grounded conductor lets common-mode current return"
        keys = ("pair.L_nH_per_m", "pair.er_even", "pair.er_modes", "impedance_common_ohm")
        why = dict.fromkeys(keys, lacking)
    if solution.joined:
        lacking = f"grounded copper that touches ({', '.join(solution.joined)}) has no bounded capacitance to itself"
        why |= dict.fromkeys(("C_pF_per_m", "Cair_pF_per_m", "G_over_omega_pF_per_m"), lacking)
    found: dict[str, Any] = {
        "id": section.id,
        "conductors": [conductor.name for conductor in section.conductors],
        "C_pF_per_m": _rows(solution.C, 1e12),
        "Cair_pF_per_m": _rows(solution.Cair, 1e12),
        "G_over_omega_pF_per_m": _rows(solution.G_per_omega, 1e12),
        "pair": None
        if pair is None
        else {
            "C_pF_per_m": _rows(pair.C, 1e12),
            "Cair_pF_per_m": _rows(pair.Cair, 1e12),
            "L_nH_per_m": None if pair.L is None else _rows(pair.L, 1e9),
            "er_odd": pair.er_odd,
            "er_even": pair.er_even,
            "er_modes": None if pair.er_modes is None else list(pair.er_modes),
        },
        "impedance_diff_ohm": None if pair is None else pair.impedance_diff_ohm,
        "impedance_common_ohm": None if pair is None else pair.impedance_common_ohm,
        "unknowns": solution.unknowns,
    }
    if why:
        found["why_null"] = why
    return found


def answers(sections: Iterable[CrossSection], *, name: str = "") -> list[dict[str, Any]]:
    """`answer` for each of several sections, in order."""
    return [answer(section, name=name) for section in sections]


class _Reader:
    """Knows the file's name, the path of the section in it, and the unit in mm."""

    def __init__(self, name: str, place: str) -> None:
        self.name = name
        self.place = place
        self.scale = 1.0

    def fault(self, place: str, found: str, remedy: str) -> UsageError:
        path = f"{self.place}.{place}" if self.place and place else self.place or place
        return UsageError(found, file=self.name, place=path, remedy=remedy)

    def built(self, place: str, build: Callable[[], Any]) -> Any:
        try:
            return build()
        except ValueError as fault:
            raise self.fault(place, str(fault), "mend it there") from None

    def fields(self, item: object, place: str, known: tuple[str, ...], needed: tuple[str, ...]) -> Mapping[str, Any]:
        if not isinstance(item, dict):
            raise self.fault(place, f"{_shown(item)} is no object", f"give an object with {', '.join(needed)}")
        for key in needed:
            if key not in item:
                raise self.fault(place, f"{key} is missing", f"add {key}")
        unknown = sorted(key for key in item if key not in known)
        if unknown:
            raise self.fault(place, f"{_shown(unknown[0])} is not known here", f"use {', '.join(known)}")
        return item

    def items(self, fields: Mapping[str, Any], key: str) -> list[tuple[str, Any]]:
        listed = fields.get(key, [])
        if not isinstance(listed, list):
            raise self.fault(key, f"{key} is {_shown(listed)}", "give a list")
        return [(f"{key}[{place}]", value) for place, value in enumerate(listed)]

    def number(self, value: object, place: str) -> float:
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise self.fault(place, f"{_shown(value)} is no number", "give a number")
        if abs(value) > 10**15 or not math.isfinite(value):
            raise self.fault(place, f"{_shown(value)} is out of reach", "give a number of ordinary size")
        return float(value)

    def length(self, value: object, place: str) -> float:
        return self.number(value, place) * self.scale

    def polygon(self, value: object, place: str) -> tuple[Point, ...]:
        if not isinstance(value, list):
            raise self.fault(place, f"{_shown(value)} is no polygon", "give a list of [x, y]")
        points = []
        for number, point in enumerate(value):
            at = f"{place}[{number}]"
            if not isinstance(point, list) or len(point) != 2:
                raise self.fault(at, f"{_shown(point)} is no point", "give [x, y]")
            points.append((self.length(point[0], f"{at}[0]"), self.length(point[1], f"{at}[1]")))
        if len(points) > 1 and points[0] == points[-1]:
            points.pop()
        return tuple(points)

    def layer(self, item: object, place: str) -> Layer:
        fields = self.fields(item, place, ("y0", "y1", "er", "loss_tangent", "name"), needed=("y0", "y1", "er"))
        y0, y1 = (self.length(fields[key], f"{place}.{key}") for key in ("y0", "y1"))
        er = self.number(fields["er"], f"{place}.er")
        tangent = self.number(fields.get("loss_tangent", 0), f"{place}.loss_tangent")
        layer: Layer = self.built(place, lambda: Layer(y0=y0, y1=y1, er=er, loss_tangent=tangent))
        return layer

    def patch(self, item: object, place: str) -> Patch:
        fields = self.fields(item, place, ("polygon", "er", "loss_tangent", "name"), needed=("polygon", "er"))
        polygon = self.polygon(fields["polygon"], f"{place}.polygon")
        er = self.number(fields["er"], f"{place}.er")
        tangent = self.number(fields.get("loss_tangent", 0), f"{place}.loss_tangent")
        patch: Patch = self.built(place, lambda: Patch(polygon=polygon, er=er, loss_tangent=tangent))
        return patch

    def plane(self, item: object, place: str) -> Plane:
        fields = self.fields(item, place, ("y", "x", "name"), needed=("y",))
        y = self.length(fields["y"], f"{place}.y")
        across = fields.get("x")
        if across is None:
            return Plane(y=y)
        if not isinstance(across, list):
            raise self.fault(f"{place}.x", f"{_shown(across)} is no list", "give null or a list of [from, to]")
        stretches = []
        for number, stretch in enumerate(across):
            at = f"{place}.x[{number}]"
            if not isinstance(stretch, list) or len(stretch) != 2:
                raise self.fault(at, f"{_shown(stretch)} is no stretch", "give [from, to], null for no end")
            start = -math.inf if stretch[0] is None else self.length(stretch[0], f"{at}[0]")
            end = math.inf if stretch[1] is None else self.length(stretch[1], f"{at}[1]")
            stretches.append((start, end))
        plane: Plane = self.built(place, lambda: Plane(y=y, intervals=tuple(sorted(stretches))))
        return plane

    def conductor(self, item: object, place: str) -> Conductor:
        fields = self.fields(item, place, ("name", "role", "polygon", "strip"), needed=("name", "role"))
        if not isinstance(fields["name"], str):
            raise self.fault(f"{place}.name", f"name is {_shown(fields['name'])}", "give a text")
        role = fields["role"]
        if role not in ROLES:
            raise self.fault(f"{place}.role", f"role is {_shown(role)}", f"give one of {', '.join(ROLES)}")
        polygon = self.polygon(fields["polygon"], f"{place}.polygon") if "polygon" in fields else None
        strip: tuple[float, float, float] | None = None
        if "strip" in fields:
            given = fields["strip"]
            if not isinstance(given, list) or len(given) != 3:
                raise self.fault(f"{place}.strip", f"{_shown(given)} is no strip", "give [x0, x1, y]")
            x0, x1, y = (self.length(value, f"{place}.strip[{number}]") for number, value in enumerate(given))
            strip = (x0, x1, y)
        conductor: Conductor = self.built(
            place, lambda: Conductor(name=fields["name"], role=role, polygon=polygon, strip=strip)
        )
        return conductor


def _refuse_constant(text: str) -> float:
    raise ValueError(f"{text} is no number here")


def _shown(value: object) -> str:
    """A short form of a value for an error, without control characters."""
    text = json.dumps(value, ensure_ascii=True)
    return text if len(text) <= 40 else text[:37] + "..."


def _named(section: CrossSection) -> str:
    printable = "".join(letter if letter.isprintable() else "?" for letter in section.id)
    return f"section {printable!r}" if section.id else ""


def _rows(matrix: np.ndarray[Any, np.dtype[np.float64]], factor: float) -> list[list[float | None]]:
    rows: list[list[float]] = (matrix * factor).tolist()
    return [[value if math.isfinite(value) else None for value in row] for row in rows]
