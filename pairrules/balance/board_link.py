"""The link of one pair as a chain of elements: source, cable, sections, vias, series parts, what hangs on it, load."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from itertools import zip_longest

import numpy as np
import numpy.typing as npt

from pairrules.balance.board_parts import hung_elements, series_element, value_of
from pairrules.balance.cable import cable_elements
from pairrules.balance.levers import is_via
from pairrules.balance.load_models import LoadModel, load_model
from pairrules.balance.networks import DifferenceInput, Element, Line, Series, Shunt, via
from pairrules.balance.pair_electrical import PairSection
from pairrules.balance.source_models import source_elements
from pairrules.balance.tolerance import Spread, spreads_of
from pairrules.balance.track_resistance import track_resistance
from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.fields.loss import resistance
from pairrules.geometry.pair_geometry import LegRoute, ViaUse
from pairrules.pairing.link import Link
from pairrules.settings.pair_class import PairClass

VIA_PITCH = 5.08e-9 / 25.4e-3
"""Inductance of a barrel per metre [H/m] before the logarithm: L = 5.08 h (ln(4h/d) + 1) nH, h and d in inch.
Source: H. Johnson and M. Graham, High-Speed Digital Design, 1993 (recalled, not re-read)."""


class NoModelError(Exception):
    """The link cannot be modelled; the sentence says what is missing."""


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardLink:
    """A link ready to be solved.

    Parameters
    ----------
    elements: source first. load: the receiver's model. spreads: values that tolerances let vary.
    source_ohm: each leg's source resistance [ohm]. assumed: one sentence each.
    """

    elements: tuple[Element, ...]
    load: LoadModel
    spreads: tuple[Spread, ...]
    source_ohm: tuple[float, float]
    assumed: tuple[str, ...]


def board_link(
    board: Board,
    link: Link,
    klass: PairClass,
    sections: tuple[PairSection, ...],
    legs: tuple[LegRoute, LegRoute],
    frequencies: Floats,
    reference: frozenset[int],
) -> BoardLink:
    """The chain of a pair of the class.

    Raises: NoModelError where source or load are not given, or a value that counts is not known.
    """
    if klass.source is None:
        raise NoModelError(f"no source is given: add source to class {klass.name} in the settings")
    assumed: list[str] = []
    try:
        source = source_elements(klass.source.kind, klass.source.values)
        cable = () if klass.cable is None else cable_elements(klass.cable.values)
        load = _load(klass)
    except ValueError as error:
        raise NoModelError(f"class {klass.name}: {error}") from error
    steps = len(link.series)
    hung = hung_elements(board, link, reference, load_step=steps, given=_given(klass))
    if load is None and not any(step >= steps for step, _ in hung.shunts):
        raise NoModelError(f"no load is given and no part makes one: add load to class {klass.name} in the settings")
    if hung.unknown:
        assumed.append(f"left out, as their values are not known: {', '.join(hung.unknown)}")
    elements: list[Element] = [*source, *cable]
    for hop in range(steps + 1):
        elements += _lines(tuple(s for s in sections if s.hop == hop), frequencies)
        elements += _vias(board, link, legs, hop)
        elements += [shunt for step, shunt in hung.shunts if step == hop]
        if hop < steps:
            part, note = series_element(board, link.series[hop])
            if part is None:
                raise NoModelError(note)
            if note:
                assumed.append(note)
            elements.append(part)
    model = load or LoadModel(elements=())
    elements += model.elements
    spreads = _spreads(klass, elements)
    return BoardLink(
        elements=tuple(elements),
        load=model,
        spreads=spreads,
        source_ohm=_source_ohm(source),
        assumed=tuple(assumed),
    )


def load_admittance(link: BoardLink, frequencies: Floats) -> Floats:
    """Greatest admittance magnitude [S] of one leg's load in common mode at each frequency (F,)."""
    omega = 2 * np.pi * frequencies[:, None]
    total = np.zeros((len(frequencies), 2), dtype=np.complex128)
    for element in link.elements:
        if element.cause != "load":
            continue
        if isinstance(element, Shunt):
            total += 1 / np.asarray(element.resistance) + 1j * omega * np.asarray(element.capacitance)
        elif isinstance(element, DifferenceInput):
            total += 1 / (np.asarray(element.r1) + np.asarray(element.r2))
    found: Floats = np.abs(total).max(axis=1)
    return found


def _load(klass: PairClass) -> LoadModel | None:
    if klass.load is None:
        return None
    return load_model(klass.load.kind, klass.load.values, klass.load.rejection)


def _given(klass: PairClass) -> frozenset[str]:
    """What the load says in full, so that parts of the board there are not counted again.

    Plain impedances are the whole load as it is seen; the other kinds describe a device, to which parts add.
    """
    if klass.load is None:
        return frozenset()
    values = klass.load.values
    if klass.load.kind == "impedance":
        given = {key.partition(".")[2] for key in values if key.startswith(("plus.", "minus."))}
        return frozenset(given | {key for key in values if key.startswith("across.")})
    return frozenset({"across.resistance"} if "across" in values or klass.load.kind == "transformer" else ())


def _lines(sections: tuple[PairSection, ...], frequencies: Floats) -> list[Element]:
    """Sections of one hop as lines; where legs alone follow each other they advance together.

    A coupled section has one length, the shorter leg's; what the longer leg has more is a line of its own with the
    section's odd-mode figures.
    """
    found: list[Element] = []
    alone: list[list[PairSection]] = [[], []]
    losses = _losses(sections, frequencies)

    def flush() -> None:
        found.extend(_alone(alone, losses))
        alone[0], alone[1] = [], []

    for section in sections:
        if section.leg != "both":
            alone[0 if section.leg == "plus" else 1].append(section)
            continue
        flush()
        lengths = [(span[1] - span[0]) * 1e-3 for span in (section.plus_mm, section.minus_mm)]
        common = min(lengths)
        R, G = losses[id(section)]
        if common > 0:
            found.append(
                Line(
                    cause="trace",
                    inductance=section.L,
                    capacitance=section.C,
                    resistance=R,
                    conductance=G,
                    lengths=(common, common),
                )
            )
        if max(lengths) - common > 1e-12:
            excess = [length - common for length in lengths]
            L = float(section.L[0, 0] + section.L[1, 1] - 2 * section.L[0, 1]) / 2
            C = 1 / (L * (1 / section.delay) ** 2)
            found.append(
                Line(
                    cause="trace",
                    inductance=np.eye(2) * L,
                    capacitance=np.eye(2) * C,
                    resistance=R * np.eye(2),
                    lengths=excess,
                )
            )
    flush()
    return found


def _alone(alone: list[list[PairSection]], losses: Mapping[int, tuple[Floats, Floats]]) -> list[Element]:
    """Stretches of each leg alone as uncoupled lines, leg by leg side by side, the longer leg's rest after them."""
    found: list[Element] = []
    for plus, minus in zip_longest(*alone):
        one, other = plus or minus, minus or plus
        (R_plus, G_plus), (R_minus, G_minus) = losses[id(one)], losses[id(other)]
        found.append(
            Line(
                cause="trace",
                inductance=_diagonal(one.L[0, 0], other.L[0, 0]),
                capacitance=_diagonal(one.C[0, 0], other.C[0, 0]),
                resistance=_diagonal(R_plus, R_minus),
                conductance=_diagonal(G_plus, G_minus),
                lengths=[0.0 if s is None else _own_length(s) for s in (plus, minus)],
            )
        )
    return found


def _losses(sections: tuple[PairSection, ...], frequencies: Floats) -> dict[int, tuple[Floats, Floats]]:
    """Resistance [ohm/m] and conductance [S/m] of each section by its `id`: (F, 2, 2) of both legs, (F,) of one.

    The reference is ideal. Sections that were solved as one have the same.
    """
    omega = 2 * np.pi * frequencies
    known: dict[int, tuple[Floats, Floats]] = {}
    found: dict[int, tuple[Floats, Floats]] = {}
    alone = [section for section in sections if section.leg != "both"]
    if alone:
        R = track_resistance(
            [s.R[0] for s in alone], [s.widths_mm[0] for s in alone], [s.thickness_mm for s in alone], frequencies
        )
        G = omega[:, None] * np.array([s.loss[0, 0] for s in alone])
        found.update((id(section), (R[:, i], G[:, i])) for i, section in enumerate(alone))
    for section in sections:
        if section.leg == "both":
            key = id(section.loss)
            if key not in known:
                known[key] = _pair_resistance(section, frequencies), omega[:, None, None] * section.loss
            found[id(section)] = known[key]
    return found


def _diagonal(plus: npt.ArrayLike, minus: npt.ArrayLike) -> Floats:
    found = np.zeros((*np.shape(plus), 2, 2))
    found[..., 0, 0], found[..., 1, 1] = plus, minus
    return found


def _pair_resistance(section: PairSection, frequencies: Floats) -> Floats:
    """Resistance of both legs (F, 2, 2) [ohm/m]; the reference is ideal. Zero where copper has no height."""
    if section.skin is None or np.isnan(section.skin.direct).any():
        return np.zeros((len(frequencies), 2, 2))
    return resistance(section.skin, frequencies)


def _own_length(section: PairSection) -> float:
    """Length [m] of the leg that is alone in a section."""
    start, end = section.plus_mm if section.leg == "plus" else section.minus_mm
    return (end - start) * 1e-3


def _vias(board: Board, link: Link, legs: tuple[LegRoute, LegRoute], hop: int) -> list[Element]:
    """The barrels of one hop, plus's and minus's together, as inductances; a barrel of unknown height is left out."""
    inductance = [0.0, 0.0]
    for leg, (route, hops) in enumerate(zip(legs, (link.hops_plus, link.hops_minus), strict=True)):
        net = hops[min(hop, len(hops) - 1)].net
        for use in route.vias:
            if use.via >= 0 and int(board.vias.net[use.via]) == net and hop < len(hops):
                inductance[leg] += barrel_inductance(board, use)
    return list(via(inductance, (0.0, 0.0))) if any(inductance) else []


def barrel_inductance(board: Board, use: ViaUse) -> float:
    """Inductance [H] of a barrel alone, its return far away; 0 where height or drill is unknown."""
    height = board.stackup.barrel_mm(use.enter, use.leave) * 1e-3
    drill = float(board.vias.drill[use.via]) * 1e-3 if use.via >= 0 else math.nan
    if not (height > 0 and drill > 0):
        return 0.0
    return max(0.0, VIA_PITCH * height * (math.log(4 * height / drill) + 1))


def _spreads(klass: PairClass, elements: list[Element]) -> tuple[Spread, ...]:
    found: list[Spread] = []
    for cause, spec in (("source", klass.source), ("load", klass.load)):
        share = 0.0 if spec is None else spec.values.get("tolerance", 0.0)
        if share > 0:
            found += spreads_of(elements, share, cause=cause)
    return tuple(found)


def part_spreads(board: Board, link: Link, elements: tuple[Element, ...]) -> tuple[Spread, ...]:
    """Spreads of series parts whose tolerance is written on them; series elements stand in the order of the steps."""
    found: list[Spread] = []
    rows = [i for i, e in enumerate(elements) if isinstance(e, Series) and e.cause == "trace" and not is_via(e)]
    for row, step in zip(rows, link.series, strict=False):
        for leg, part in enumerate((step.plus, step.minus)):
            if part < 0 or step.plus == step.minus:
                continue
            value = value_of(board, part)
            name = {"resistor": "resistance", "capacitor": "capacitance", "inductor": "inductance"}.get(value.kind)
            if value.tolerance and name:
                found.append(Spread(element=row, field=name, at=(leg,), share=value.tolerance))
    return tuple(found)


def leg_resistance(elements: tuple[Element, ...]) -> tuple[float, float]:
    """Resistance [ohm] of each leg as a difference between them finds it, at low frequency.

    The source's legs, every resistor from a leg to reference, and half of every resistor between the legs, in parallel;
    resistors in series with the tracks are taken as small beside these.
    """
    conductance = np.zeros(2)
    with np.errstate(divide="ignore"):
        conductance += 1 / np.array(_source_ohm(tuple(e for e in elements if e.cause == "source")))
        for element in elements:
            if isinstance(element, Shunt):
                conductance += 1 / np.asarray(element.resistance) + 2 / np.asarray(element.across_resistance)
            elif isinstance(element, DifferenceInput):
                conductance += 1 / (np.asarray(element.r1) + np.asarray(element.r2))
        legs = 1 / conductance
    return float(legs[0]), float(legs[1])


def _source_ohm(source: tuple[Element, ...]) -> tuple[float, float]:
    total = np.zeros(2)
    for element in source:
        if isinstance(element, Series):
            total += np.asarray(element.resistance)
    return float(total[0]), float(total[1])
