"""Sections and links on their own: reads a file that holds one or a list of them, and answers each by its kind.

A list may mix both, since a link may name a section beside it; the answers keep the list's order.
"""

from __future__ import annotations

import json
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from pairrules.balance.link_json import answer as answer_link
from pairrules.balance.link_json import read_link, section_matrices
from pairrules.balance.networks import Floats
from pairrules.errors import UsageError
from pairrules.fields.section_json import answer as answer_section
from pairrules.fields.section_json import section_from

SECTION, LINK = "pairrules_section", "pairrules_link"


def answers(path: str, wanted: str) -> tuple[list[str], list[dict[str, Any]], bool]:
    """The kinds and the answers of all objects of a file, and whether it holds a list.

    Parameters: path: a file, "-" for stdin. wanted: the kind (`SECTION` or `LINK`) the file must hold at least one of.
    Raises: UsageError with the path of what is wrong.
    """
    name = "stdin" if path == "-" else path
    document = _parse(_read(path, name), name)
    items = document if isinstance(document, list) else [document]
    places = [f"[{i}]" if isinstance(document, list) else "" for i in range(len(items))]
    kinds = [_kind(item, name, place) for item, place in zip(items, places, strict=True)]
    if items and wanted not in kinds:
        other = "section" if wanted == LINK else "link"
        raise UsageError(f"{wanted} is in no object", file=name, remedy=f"use `pairrules {other}` for this file")
    found: dict[int, dict[str, Any]] = {}
    for i, item in enumerate(items):
        if kinds[i] == SECTION:
            found[i] = answer_section(section_from(item, name, places[i]), name=name)
    sections = _Sections([(places[i], found[i]) for i in sorted(found)], name)
    for i, item in enumerate(items):
        if kinds[i] == LINK:
            found[i] = answer_link(read_link(item, solved=sections.matrices, file=name, place=places[i]))
    return kinds, [found[i] for i in range(len(items))], isinstance(document, list)


def as_json(found: Sequence[dict[str, Any]], *, listed: bool) -> str:
    """The answers as JSON text: a list where the file holds one, else the one object."""
    return json.dumps(list(found) if listed else found[0], indent=2, allow_nan=False) + "\n"


class _Sections:
    """Solved sections by their id."""

    def __init__(self, solved: Sequence[tuple[str, dict[str, Any]]], name: str) -> None:
        self.solved = solved
        self.name = name

    def matrices(self, wanted: str) -> tuple[Floats, Floats] | None:
        """L [H/m] and C [F/m] of the section with that id, None where there is none."""
        fitting = [(place, answer) for place, answer in self.solved if answer["id"] == wanted]
        if not fitting:
            return None
        if len(fitting) > 1:
            raise UsageError(
                f"two sections have the id {json.dumps(wanted)}",
                file=self.name,
                place=f"{fitting[1][0]}.id",
                remedy="give each its own",
            )
        place, answer = fitting[0]
        pair = answer["pair"]
        if pair is None or pair["L_nH_per_m"] is None:
            reasons = answer.get("why_null", {})
            why = reasons.get("pair") or reasons.get("pair.L_nH_per_m") or "it is no pair over a reference"
            raise UsageError(
                f"a link cannot run through this section: {why}",
                file=self.name,
                place=place,
                remedy="name a section with two signals and a reference",
            )
        return section_matrices(pair)


def _read(path: str, name: str) -> str:
    try:
        data = sys.stdin.buffer.read() if path == "-" else Path(path).read_bytes()
    except OSError as error:
        reason = (error.strerror or "unknown reason").lower()
        raise UsageError(f"cannot be read ({reason})", file=name, remedy="give a JSON file, or - for stdin") from None
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise UsageError("this is no UTF-8 text", file=name, remedy="give a JSON file") from None


def _parse(text: str, name: str) -> Any:
    try:
        return json.loads(text, parse_constant=_refuse_constant)
    except RecursionError:
        raise UsageError("brackets are nested too deeply", file=name, remedy="give one object or a list") from None
    except json.JSONDecodeError as error:
        raise UsageError(
            f"this is no JSON: {error.msg[:1].lower()}{error.msg[1:]}",
            file=name,
            place=f"line {error.lineno}",
            remedy="mend the text there",
        ) from None
    except ValueError as error:
        raise UsageError(f"this is no JSON: {error}", file=name, remedy="write a plain number") from None


def _refuse_constant(text: str) -> float:
    raise ValueError(f"{text} is no number here")


def _kind(item: object, name: str, place: str) -> str:
    kinds = [kind for kind in (SECTION, LINK) if isinstance(item, dict) and kind in item]
    if len(kinds) != 1:
        raise UsageError(
            f"both {SECTION} and {LINK} are given" if kinds else f"neither of {SECTION} and {LINK} is given",
            file=name,
            place=place,
            remedy="give one of them with its version, 1",
        )
    return kinds[0]
