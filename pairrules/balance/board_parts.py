"""What the parts on a pair mean for its network: series elements, terminations, direct-current paths, places."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from pairrules.balance.leg_stretches import hop_ends, track_before
from pairrules.balance.networks import Element, Series, Shunt
from pairrules.balance.pair_electrical import BiasPath, Placed, Termination
from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.board.part_values import PartValue, part_value
from pairrules.geometry.curves import nearest
from pairrules.geometry.nearest_track import curves_of
from pairrules.geometry.pair_geometry import TRACK, LegRoute, Pieces
from pairrules.pairing.link import HungPart, Link, SeriesStep

LEGS = ("plus", "minus")


@dataclass(frozen=True, slots=True, kw_only=True)
class Hung:
    """Shunt elements of the parts that hang on a pair, by how many series parts lie between the source and them.

    Parameters
    ----------
    shunts: (step, element) in order. tolerances: of each shunt's resistors, `None` where not written.
    unknown: references of parts whose value is not written or whose kind is no resistor or capacitor.
    """

    shunts: tuple[tuple[int, Shunt], ...]
    unknown: tuple[str, ...]


def value_of(board: Board, part: int) -> PartValue:
    """What is written on a part."""
    return part_value(board.parts[part].ref, board.parts[part].value)


def series_element(board: Board, step: SeriesStep) -> tuple[Element | None, str]:
    """The series element of a step, and what had to be assumed or is missing ("" where nothing).

    Returns `None` with a sentence that names the part where a value that counts is not written.
    """
    if step.plus == step.minus and step.plus >= 0:
        ref = board.parts[step.plus].ref
        return Series(cause="trace"), f"the choke {ref} is taken as a short: its inductances are not known"
    resistance, inductance, capacitance = [0.0, 0.0], [0.0, 0.0], [math.inf, math.inf]
    noted = ""
    for leg, part in enumerate((step.plus, step.minus)):
        if part < 0:
            continue
        found = value_of(board, part)
        ref = board.parts[part].ref
        if found.kind == "ferrite bead":
            noted = f"the bead {ref} is taken as a short: its inductance is not known"
        elif found.value is None or not found.kind:
            return None, f"the value of {ref} is not known"
        elif found.kind == "resistor":
            resistance[leg] = found.value
        elif found.kind == "inductor":
            inductance[leg] = found.value
        elif found.value > 0:
            capacitance[leg] = found.value
        else:
            return None, f"the value of {ref} is zero"
    return Series(cause="trace", resistance=resistance, inductance=inductance, capacitance=capacitance), noted


def hung_elements(
    board: Board, link: Link, reference: frozenset[int], *, load_step: int, given: frozenset[str]
) -> Hung:
    """Shunt elements of resistors and capacitors that hang on the pair.

    Parameters
    ----------
    load_step: steps from there on belong to the load, those before to the trace.
    given: what the settings say of the load already and is therefore not taken from parts there: "resistance",
        "capacitance" (of the legs), "across.resistance", "across.capacitance".

    Notes
    -----
    A part to a supply or bias net counts as one to reference: such a net is held by its own capacitors (common
    practice, no source). Two parts that meet in a middle net nothing else holds lie across the legs.
    """
    shunts: list[tuple[int, Shunt]] = []
    unknown: list[str] = []
    middles = _middles(board, link, reference)
    for hung in link.hung:
        found = value_of(board, hung.part)
        ref = board.parts[hung.part].ref
        if found.kind == "capacitance" and found.value:
            # A protection part or a further node of a bus, with its capacitance from each leg it is on to reference.
            cause = "load" if hung.step >= load_step else "trace"
            legs = tuple(found.value if hung.leg in {leg, "both"} else 0.0 for leg in LEGS)
            shunts.append((hung.step, Shunt(cause=cause, capacitance=legs)))
            continue
        if hung.kind == "tap":
            continue
        if found.kind not in {"resistor", "capacitor"} or not found.value:
            unknown.append(ref)
            continue
        cause = "load" if hung.step >= load_step else "trace"
        name = "resistance" if found.kind == "resistor" else "capacitance"
        if hung.kind == "across":
            if cause == "load" and f"across.{name}" in given:
                continue
            across = {f"across_{name}": found.value}
            shunts.append((hung.step, Shunt(cause=cause, **across)))
        elif hung.other in middles and hung.other >= 0:
            continue
        elif not (cause == "load" and name in given):
            absent = math.inf if name == "resistance" else 0.0
            legs = tuple(found.value if hung.leg == leg else absent for leg in LEGS)
            shunts.append((hung.step, Shunt(cause=cause, **{name: legs})))
    for middle in sorted(middles):
        plus, minus = middles[middle]
        if "across.resistance" in given and plus.step >= load_step:
            continue
        both = [value_of(board, part.part).value for part in (plus, minus)]
        if None not in both:
            total = math.fsum(v for v in both if v is not None)
            cause = "load" if plus.step >= load_step else "trace"
            shunts.append((plus.step, Shunt(cause=cause, across_resistance=total)))
    shunts.sort(key=lambda item: item[0])
    return Hung(shunts=tuple(shunts), unknown=tuple(sorted(set(unknown))))


def _middles(board: Board, link: Link, reference: frozenset[int]) -> dict[int, tuple[HungPart, HungPart]]:
    """Nets that just two resistors of this pair meet in, one from each leg: net to (plus's, minus's)."""
    found: dict[int, dict[str, list[HungPart]]] = {}
    for hung in link.hung:
        if hung.kind == "to net" and hung.other >= 0 and hung.other not in reference:
            found.setdefault(hung.other, {}).setdefault(hung.leg, []).append(hung)
    middles = {}
    for net, legs in found.items():
        plus, minus = legs.get("plus", []), legs.get("minus", [])
        alone = int((board.pads.net == net).sum()) == 2
        resistors = all(value_of(board, part.part).kind == "resistor" for part in (*plus, *minus))
        if len(plus) == len(minus) == 1 and alone and resistors and plus[0].step == minus[0].step:
            middles[net] = (plus[0], minus[0])
    return middles


def placed_series(link: Link, plus: LegRoute, minus: LegRoute) -> tuple[Placed, ...]:
    """Where along each leg its series parts and the parts that hang on it stand."""
    found = []
    for leg, route in (("plus", plus), ("minus", minus)):
        ends = hop_ends(route.pieces)
        present = [k for k, step in enumerate(link.series) if getattr(step, leg) >= 0]
        for place, k in enumerate(present):
            if place < len(ends) - 1:
                found.append(Placed(part=getattr(link.series[k], leg), leg=leg, along_mm=ends[place], step=k))
    return tuple(found)


def placed_hung(board: Board, link: Link, plus: LegRoute, minus: LegRoute) -> tuple[Placed, ...]:
    """Where along its leg each part that hangs on the pair meets the route."""
    found = []
    for hung in link.hung:
        for leg, route, hops in (("plus", plus, link.hops_plus), ("minus", minus, link.hops_minus)):
            nets = {hop.net for hop in hops}
            pads = [row for row in hung.pads if int(board.pads.net[row]) in nets]
            if pads and len(route.pieces):
                along = min(along_route(route.pieces, board.pads.at[row]) for row in pads)
                found.append(Placed(part=hung.part, leg=leg, along_mm=along, step=-1))
    return tuple(found)


def along_route(pieces: Pieces, at: Sequence[float] | Floats) -> float:
    """Track length [mm] from the source end to the point of a route nearest to `at`."""
    rows = np.flatnonzero(pieces.kind == TRACK)
    if not len(rows):
        return 0.0
    t, away = nearest(curves_of(pieces).take(rows), np.tile(np.asarray(at, dtype=np.float64), (len(rows), 1)))
    best = int(np.argmin(away))
    return float(track_before(pieces)[rows[best]] + t[best] * pieces.length[rows[best]])


def terminations(
    board: Board, link: Link, reference: frozenset[int], plus: LegRoute, minus: LegRoute
) -> tuple[Termination, ...]:
    """Resistors between the legs, alone or as two that meet in a middle net."""
    groups: list[tuple[tuple[int, ...], tuple[int, ...], float | None]] = []
    for hung in link.hung:
        found = value_of(board, hung.part)
        if hung.kind == "across" and found.kind == "resistor":
            groups.append(((hung.part,), hung.pads, found.value))
    by_net: dict[int, dict[str, HungPart]] = {}
    for hung in link.hung:
        if hung.kind == "to net" and hung.other >= 0 and value_of(board, hung.part).kind == "resistor":
            by_net.setdefault(hung.other, {})[hung.leg] = hung
    for net in sorted(by_net):
        legs = by_net[net]
        if set(legs) == set(LEGS) and net not in reference:
            both = [value_of(board, legs[leg].part).value for leg in LEGS]
            total = None if None in both else math.fsum(v for v in both if v is not None)
            if total is not None and total > _MOST_TERMINATION_OHM:
                continue
            parts = tuple(sorted(legs[leg].part for leg in LEGS))
            groups.append((parts, (*legs["plus"].pads, *legs["minus"].pads), total))
    found_at = []
    for parts, pads, value in groups:
        ends = []
        for route, hops in ((plus, link.hops_plus), (minus, link.hops_minus)):
            own = [row for row in pads if int(board.pads.net[row]) in {hop.net for hop in hops}]
            if own:
                along = along_route(route.pieces, board.pads.at[own[0]])
                ends.append((along, route.track_mm - along))
        if ends:
            found_at.append(
                Termination(
                    parts=parts,
                    resistance=value,
                    to_source_mm=max(end[0] for end in ends),
                    to_load_mm=max(end[1] for end in ends),
                )
            )
    return tuple(found_at)


_MOST_TERMINATION_OHM = 2000.0
"""Two resistors to a common net count as a split termination up to this sum, beyond it as bias (no source)."""


def bias_paths(board: Board, link: Link, *, load_resistance: bool) -> tuple[BiasPath, ...]:
    """The direct-current path behind each leg's last series capacitor; empty where no leg has one.

    `load_resistance`: whether the receiver itself gives each leg a path.
    """
    found = []
    for leg in LEGS:
        capacitors = [
            (k, getattr(step, leg))
            for k, step in enumerate(link.series)
            if getattr(step, leg) >= 0 and value_of(board, getattr(step, leg)).kind == "capacitor"
        ]
        if not capacitors:
            continue
        step, part = capacitors[-1]
        resistors = [
            hung.part
            for hung in link.hung
            if hung.step > step
            and hung.leg in {leg, "both"}
            and hung.kind in {"to reference", "to net"}
            and value_of(board, hung.part).kind == "resistor"
        ]
        values = [value_of(board, hung).value for hung in resistors]
        conductance = math.fsum(1 / v for v in values if v)
        known = None not in values
        total = (1 / conductance if conductance else math.inf) if known else None
        found.append(
            BiasPath(leg=leg, capacitor=part, resistance=total, parts=tuple(sorted(resistors)), by_load=load_resistance)
        )
    return tuple(found)
