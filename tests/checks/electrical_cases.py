"""What a case file says of a pair beside its copper: parts, the figures of the electrical stage, the pair's class."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import fields, replace
from pathlib import Path
from typing import Any

import numpy as np
import yaml

from pairrules.balance.pair_electrical import (
    BalanceAt,
    BiasPath,
    LayerChange,
    PairElectrical,
    PairSection,
    Placed,
    Termination,
)
from pairrules.board import Board
from pairrules.board.pads import Part
from pairrules.pairing.link import HungPart, SeriesStep
from pairrules.settings.pair_class import PairClass
from pairrules.settings.read_settings import read_settings

Case = Mapping[str, Any]

PICOFARAD = 1e-12


def with_parts(on: Board, parts: Mapping[str, Mapping[str, str]]) -> Board:
    """The board with further parts: reference to value and package. They have no pads."""
    more = tuple(
        Part(ref=ref, value=str(of.get("value", "")), package=of.get("package", "")) for ref, of in parts.items()
    )
    return replace(on, parts=(*on.parts, *more))


def series(on: Board, case: Case) -> tuple[SeriesStep, ...]:
    """`series: [[C1, C2], [R1, null]]`: plus and minus of each step."""
    return tuple(SeriesStep(plus=_part(on, plus), minus=_part(on, minus)) for plus, minus in case.get("series", []))


def hung(on: Board, case: Case) -> tuple[HungPart, ...]:
    """`hung: [{part: C3, leg: plus}]`; to reference and before any series part unless said."""
    return tuple(
        HungPart(
            part=_part(on, one["part"]),
            kind=one.get("kind", "to reference"),
            leg=one["leg"],
            pads=(),
            step=one.get("step", 0),
        )
        for one in case.get("hung", [])
    )


def klass(case: Case) -> PairClass | None:
    """The class as settings would give it."""
    if "class" not in case:
        return None
    text = yaml.safe_dump({"extends": [], "classes": {"demo": {"match": ["A"], **case["class"]}}})
    (found,) = read_settings(Path("case.yaml"), forms={}, text=text).classes
    return found


def electrical(on: Board, case: Case) -> PairElectrical | None:
    """What the electrical stage would tell, as far as the case says it."""
    if "electrical" not in case:
        return None
    said = dict(case["electrical"])
    made: dict[str, Any] = {
        "sections": tuple(_section(on, one) for one in said.pop("sections", [])),
        "balance": tuple(_balance(one) for one in said.pop("balance", [])),
        **{name: _placed(on, said.pop(name, [])) for name in ("series", "hung")},
        "terminations": tuple(
            Termination(**one | {"parts": tuple(_part(on, ref) for ref in one["parts"])})
            for one in said.pop("terminations", [])
        ),
        "bias": tuple(
            BiasPath(
                leg=one["leg"],
                capacitor=_part(on, one["capacitor"]),
                resistance=one["resistance"],
                parts=tuple(_part(on, ref) for ref in one.get("parts", [])),
                by_load=one.get("by_load", False),
            )
            for one in said.pop("bias", [])
        ),
        "changes": tuple(
            LayerChange(
                **one
                | {name: on.copper.index(one[name]) for name in ("enter", "leave")}
                | {name: tuple(on.copper.index(layer) for layer in one[name]) for name in ("before", "after")}
            )
            for one in said.pop("changes", [])
        ),
    }
    for name in ("source_ohm", "area_mm2"):
        if name in said:
            made[name] = tuple(said.pop(name))
    return PairElectrical(**made, **said)


def _placed(on: Board, said: Sequence[tuple[str, str, float, int]]) -> tuple[Placed, ...]:
    return tuple(Placed(part=_part(on, ref), leg=leg, along_mm=along, step=step) for ref, leg, along, step in said)


def _balance(said: Mapping[str, Any]) -> BalanceAt:
    unknown = ("source", "trace", "cable", "load", "total", "rejection", "conversion_loss", "worst", "bound")
    figures: dict[str, Any] = {f"{name}_db": None for name in unknown}
    return BalanceAt(**{**figures, "load_ohm": np.inf, **said})


def _section(on: Board, said: Mapping[str, Any]) -> PairSection:
    """`mm`: (from, to) on both legs; `ohm`; `tilt` of the capacitances; `leg` where one is alone."""
    first, last = said["mm"]
    leg, tilt = said.get("leg", "both"), said.get("tilt", 0.0)
    plus_mm = (first, last) if leg != "minus" else (first, first)
    minus_mm = tuple(said.get("minus_mm", (first, last) if leg != "plus" else (first, first)))
    C = 100 * PICOFARAD * np.array([[1 + tilt, -0.1], [-0.1, 1 - tilt]])
    L = np.array([[3e-7, 6e-8], [6e-8, 3e-7]])
    if leg != "both":
        C, L = C[:1, :1], L[:1, :1]
    figures: dict[str, Any] = {
        "leg": leg,
        "plus_mm": plus_mm,
        "minus_mm": (minus_mm[0], minus_mm[1]),
        "hop": said.get("hop", 0),
        "layer": 0,
        "start": (first, 0.0),
        "end": (last, 0.0),
        "width_plus_mm": 0.2,
        "width_minus_mm": 0.2,
        "gap_mm": 0.3,
        "thickness_mm": 0.035,
        "C": C,
        "L": L,
        "R": np.zeros(len(C)),
        "loss": np.zeros_like(C),
        "impedance_diff_ohm": said.get("ohm"),
        "impedance_common_ohm": None,
        "delay": said.get("delay", 6e-9),
        "planes": (1,),
        "neighbours": tuple(on.nets.index(net) for net in said.get("neighbours", [])),
    }
    # What rules do not look at is not said.
    unsaid = {one.name: None for one in fields(PairSection)}
    return PairSection(**{**unsaid, **figures})


def _part(on: Board, ref: str | None) -> int:
    return -1 if ref is None else next(index for index, part in enumerate(on.parts) if part.ref == ref)
