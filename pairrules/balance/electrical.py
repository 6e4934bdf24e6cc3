"""The electrical stage: one pair's sections, delays, mismatches, balance and pickup, with what each rests on.

The geometry of pairs comes in, one frozen record a pair goes out; the copper that cuts meet is looked up for all of
them at once. What cannot be known is `None`, and `missing` says why: "sections" for what the stackup lacks, "balance"
for what the class leaves open, "pickup" for a field, "electric" for swinging neighbours.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from fnmatch import fnmatchcase

import numpy as np

from pairrules.balance.board_link import (
    BoardLink,
    NoModelError,
    board_link,
    leg_resistance,
    load_admittance,
    part_spreads,
)
from pairrules.balance.board_parts import bias_paths, placed_hung, placed_series, terminations
from pairrules.balance.layer_changes import ReturnVias, layer_changes
from pairrules.balance.link_balance import balance_points
from pairrules.balance.met_copper import Beside, met_copper
from pairrules.balance.pair_electrical import BalanceAt, PairElectrical, PairSection
from pairrules.balance.pair_sections import UnsolvableError, pair_cuts, pair_sections
from pairrules.balance.pickup import edge_pickup, magnetic_pickup
from pairrules.balance.sampled_cuts import Cuts
from pairrules.balance.section_store import Store
from pairrules.balance.solved_link import SolvedLink
from pairrules.balance.stack_heights import Heights, heights_of, lacking
from pairrules.balance.tolerance import tolerated
from pairrules.board.board import Board
from pairrules.fields.chain_matrix import RangeError
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.hatched_copper import hatched_beside
from pairrules.geometry.loop_area import vector_area
from pairrules.geometry.pair_geometry import BARREL, JOIN, LegRoute, PairGeometry
from pairrules.pairing.link import Link
from pairrules.settings.pair_class import PairClass

SPEED_OF_LIGHT = 299792458.0

_SECTIONS, _BALANCE, _PICKUP = "sections", "balance", "pickup"


def electrical(
    board: Board, link: Link, geometry: PairGeometry, klass: PairClass | None, *, copper: BoardCopper, store: Store
) -> PairElectrical:
    """The electrical figures of one pair. Parameters as of `electricals`."""
    (found,) = electricals(board, [(link, geometry, klass)], copper=copper, store=store)
    return found


def electricals(
    board: Board, pairs: Sequence[tuple[Link, PairGeometry, PairClass | None]], *, copper: BoardCopper, store: Store
) -> list[PairElectrical]:
    """The electrical figures of pairs, each with its class.

    Parameters
    ----------
    pairs: a class's source, cable, load, frequencies, mask and pickup are used; `None` where a pair has none.
    copper: of the board. store: sections solved so far; added to.
    """
    gap = lacking(board.stackup)
    shared = _Shared(
        board=board,
        copper=copper,
        store=store,
        reference=frozenset(copper.reference_nets),
        gap=gap[0] if gap else "",
        heights=None if gap else heights_of(board.stackup),
        hatched=any(area.hatched for area in board.areas),
        returns=ReturnVias(board, frozenset(copper.reference_nets)),
    )
    stages = [_Stage(shared, *pair) for pair in pairs]
    cut = [(stage, cuts) for stage in stages if (cuts := stage.cuts()) is not None]
    if shared.heights is not None:
        own = [stage.own for stage, _ in cut]
        met = met_copper([cuts for _, cuts in cut], own, shared.heights, copper.cuts, shared.reference)
        for (stage, cuts), beside in zip(cut, met, strict=True):
            stage.solve(cuts, beside, shared.heights)
    return [stage.run() for stage in stages]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Shared:
    """What all pairs share. gap: what the stackup lacks. hatched: whether any area of the board is."""

    board: Board
    copper: BoardCopper
    store: Store
    reference: frozenset[int]
    gap: str
    heights: Heights | None
    hatched: bool
    returns: ReturnVias


class _Stage:
    """Gathers one pair's figures; lives only while they are worked out."""

    def __init__(self, shared: _Shared, link: Link, geometry: PairGeometry, klass: PairClass | None) -> None:
        self._shared, self._board, self._reference = shared, shared.board, shared.reference
        self._link, self._geometry, self._klass = link, geometry, klass
        self._sections: tuple[PairSection, ...] = ()
        self._missing: dict[str, str] = {}
        self._assumed: list[str] = []

    @property
    def own(self) -> frozenset[int]:
        """The pair's nets."""
        return frozenset(hop.net for hop in (*self._link.hops_plus, *self._link.hops_minus))

    def cuts(self) -> Cuts | None:
        """Where the pair is cut across, to be told what copper is met there; `None` where it has no sections."""
        shared = self._shared
        if shared.heights is None:
            self._missing[_SECTIONS] = (
                f"the stackup lacks the {shared.gap}: give it in the board file or under stackup: in the settings"
            )
            return None
        if not self._reference:
            self._missing[_SECTIONS] = "no net is known as reference: name it under reference_nets: in the settings"
            return None
        if shared.hatched and (hatched := hatched_beside(self._board, shared.copper.areas, self._geometry)):
            self._missing[_SECTIONS] = f"copper on {hatched} next to the legs is hatched, and how is not known"
            return None
        return pair_cuts(self._geometry)

    def solve(self, cuts: Cuts, beside: Sequence[Beside], heights: Heights) -> None:
        """Solve the sections of the cuts, each with what it meets."""
        legs = (self._geometry.plus, self._geometry.minus)
        longer = max(leg.track_mm for leg in legs if leg is not None)
        try:
            self._sections = pair_sections(
                cuts, beside, heights, track_mm=longer, layers=self._board.copper, store=self._shared.store
            )
        except UnsolvableError as error:
            self._missing[_SECTIONS] = str(error)
            return
        self._assumed += heights.assumed

    def run(self) -> PairElectrical:
        """The figures, once the sections are solved."""
        plus, minus = self._geometry.plus, self._geometry.minus
        if plus is None or minus is None or self._geometry.profile_plus is None:
            known = self._geometry.missing if self._geometry.plus is None and not self._geometry.broken else ()
            why = known[-1] if known else "a leg is not routed from end to end"
            return PairElectrical(missing=dict.fromkeys((_SECTIONS, _BALANCE, _PICKUP), why))
        board, link, klass = self._board, self._link, self._klass
        heights, sections = self._shared.heights, self._sections
        balance, source_ohm, solved = self._balance(sections, plus, minus)
        area = self._area(heights, plus, minus)
        electric, aggressor = self._electric(sections, solved)
        limit = None if heights is None else _quasi_static(heights, sections)
        self._note_validity(limit)
        changes = [
            change
            for leg, route, cover in (
                ("plus", plus, self._geometry.cover_plus),
                ("minus", minus, self._geometry.cover_minus),
            )
            if cover is not None
            for change in layer_changes(self._shared.returns, leg, route, cover)
        ]
        resistive = klass is not None and klass.load is not None and _gives_path(klass)
        return PairElectrical(
            sections=sections,
            **_figures(sections, plus, minus, self._barrel_delay(heights)),
            balance=balance,
            source_ohm=source_ohm,
            magnetic_v=self._magnetic(area),
            electric_v=electric,
            aggressor=aggressor,
            area_mm2=area,
            series=placed_series(link, plus, minus),
            hung=placed_hung(board, link, plus, minus),
            terminations=terminations(board, link, self._reference, plus, minus),
            bias=bias_paths(board, link, load_resistance=resistive),
            changes=tuple(changes),
            link=solved,
            quasi_static_hz=limit,
            assumed=tuple(dict.fromkeys(self._assumed)),
            missing=dict(sorted(self._missing.items())),
        )

    def _note_validity(self, limit: float | None) -> None:
        klass = self._klass
        asked = [] if klass is None else [*klass.frequencies, *(f for f, _ in klass.mask)]
        if limit is not None and asked and max(asked) > limit:
            self._assumed.append(
                f"above {limit / 1e9:.2g} GHz the cross-sections are wider than a tenth of a wavelength, "
                "and their quasi-static figures no more than an approximation"
            )

    def _balance(
        self, sections: tuple[PairSection, ...], plus: LegRoute, minus: LegRoute
    ) -> tuple[tuple[BalanceAt, ...], tuple[float, float] | None, SolvedLink | None]:
        klass = self._klass
        if klass is None or not (klass.frequencies or klass.mask):
            self._missing[_BALANCE] = (
                "the pair has no class with source, load and frequencies in the settings"
                if klass is None
                else f"no frequencies are given: add frequencies to class {klass.name} in the settings"
            )
            return (), None, None
        if _SECTIONS in self._missing:
            self._missing[_BALANCE] = self._missing[_SECTIONS]
            return (), None, None
        at = np.array(sorted({*klass.frequencies, *(f for f, _ in klass.mask)}), dtype=np.float64)
        try:
            link = board_link(self._board, self._link, klass, sections, (plus, minus), at, reference=self._reference)
        except NoModelError as error:
            self._missing[_BALANCE] = str(error)
            return (), None, None
        self._assumed += link.assumed
        try:
            solved = SolvedLink(elements=link.elements, frequencies_hz=at, own_rejection_db=link.load.own_rejection(at))
            return self._points(link, solved), link.source_ohm, solved
        except RangeError as error:
            self._missing[_BALANCE] = f"{error}: check the class's frequencies and cable"
            return (), None, None

    def _points(self, link: BoardLink, solved: SolvedLink) -> tuple[BalanceAt, ...]:
        at = solved.frequencies_hz
        points = balance_points(link.elements, at, solved.own_rejection_db)
        spreads = (*link.spreads, *part_spreads(self._board, self._link, link.elements))
        spread = tolerated(link.elements, spreads, at) if spreads else None
        admittance = load_admittance(link, at)
        found = []
        for i, point in enumerate(points):
            size, gain = abs(point.conversion), abs(point.gain)
            found.append(
                BalanceAt(
                    frequency_hz=point.frequency_hz,
                    source_db=point.source_db,
                    trace_db=point.trace_db,
                    cable_db=point.cable_db,
                    load_db=point.load_db,
                    total_db=point.total_db,
                    rejection_db=point.rejection_db,
                    conversion_loss_db=_db(gain / size) if size > 0 and gain > 0 else None,
                    worst_db=None if spread is None else _db(float(spread.worst[i])),
                    bound_db=None if spread is None else _db(float(spread.bound_95[i])),
                    load_ohm=1 / float(admittance[i]) if admittance[i] > 0 else math.inf,
                )
            )
        return tuple(found)

    def _area(self, heights: Heights | None, plus: LegRoute, minus: LegRoute) -> tuple[float, float, float] | None:
        middles = [math.nan] * len(self._board.copper)
        if heights is not None:
            middles = [(low + high) / 2 for low, high in heights.copper]
        if not len(plus.pieces) or not len(minus.pieces):
            return None
        x, y, z = vector_area(plus.pieces, minus.pieces, np.array(middles))
        return float(x), float(y), float(z)

    def _magnetic(self, area: tuple[float, float, float] | None) -> float | None:
        pickup = None if self._klass is None else self._klass.pickup
        if pickup is None or pickup.flux_density_t is None or pickup.frequency_hz is None:
            self._missing.setdefault(_PICKUP, "no field is given: add pickup to the pair's class in the settings")
            return None
        if area is None or any(math.isnan(v) for v in area):
            self._missing.setdefault(_PICKUP, "the heights of the layers are unknown, and with them the loop in space")
            return None
        found = magnetic_pickup(
            pickup.flux_density_t,
            [v * 1e-6 for v in area],
            [pickup.frequency_hz],
            direction=pickup.direction,
        )
        return float(found[0])

    def _electric(self, sections: tuple[PairSection, ...], solved: SolvedLink | None) -> tuple[float | None, str]:
        pickup = None if self._klass is None else self._klass.pickup
        if pickup is None or not pickup.aggressors:
            return None, ""
        if not sections or solved is None:
            why = self._missing.get(_SECTIONS) or self._missing.get(_BALANCE) or "the pair has no source"
            self._missing.setdefault("electric", why)
            return None, ""
        legs = leg_resistance(tuple(solved.elements))
        worst, name = 0.0, ""
        for net in sorted({net for section in sections for net in section.neighbours if net >= 0}):
            for aggressor in pickup.aggressors:
                if not fnmatchcase(self._board.nets[net], aggressor.net):
                    continue
                capacitance = _coupled(sections, net)
                volts = abs(edge_pickup(aggressor.swing_v, aggressor.rise_time_s, capacitance, legs))
                if volts > worst:
                    worst, name = volts, self._board.nets[net]
        return worst, name

    def _barrel_delay(self, heights: Heights | None) -> float:
        """Delay of a barrel [s/mm], by the mean permittivity of the stack."""
        if heights is None or not heights.slabs:
            return math.nan
        total = math.fsum(slab.y1 - slab.y0 for slab in heights.slabs)
        mean = math.fsum(slab.er * (slab.y1 - slab.y0) for slab in heights.slabs) / total
        return math.sqrt(mean) / SPEED_OF_LIGHT * 1e-3


def _gives_path(klass: PairClass) -> bool:
    values = {} if klass.load is None else klass.load.values
    if klass.load is not None and klass.load.kind == "difference-amplifier":
        return True
    return any(key in values for key in ("resistance", "plus.resistance", "minus.resistance")) and (
        klass.load is None or klass.load.kind != "transformer"
    )


def _coupled(sections: tuple[PairSection, ...], net: int) -> tuple[float, float]:
    """Capacitance [F] from a net to plus and to minus, over all sections that it runs beside."""
    total = [0.0, 0.0]
    for section in sections:
        lengths = [(span[1] - span[0]) * 1e-3 for span in (section.plus_mm, section.minus_mm)]
        legs = (0, 1) if section.leg == "both" else ((0,) if section.leg == "plus" else (1,))
        for neighbour, coupling in zip(section.neighbours, section.coupling, strict=True):
            if neighbour == net:
                for place, leg in enumerate(legs):
                    total[leg] += coupling[place] * lengths[leg]
    return total[0], total[1]


def _figures(
    sections: tuple[PairSection, ...], plus: LegRoute, minus: LegRoute, barrel_s_mm: float
) -> dict[str, float | None]:
    """Impedances, delays and mismatches from the sections; all `None` where there are none."""
    names = (
        "impedance_diff_ohm",
        "impedance_common_ohm",
        "delay_plus_ps",
        "delay_minus_ps",
        "resistance_mismatch_ohm",
        "capacitance_mismatch_pf",
        "inductance_mismatch_nh",
    )
    if not sections:
        return dict.fromkeys(names)
    both = [s for s in sections if s.leg == "both"]
    weight = math.fsum(s.plus_mm[1] - s.plus_mm[0] for s in both)

    def mean(values: list[float | None]) -> float | None:
        if weight <= 0 or None in values:
            return None
        return math.fsum((v or 0.0) * (s.plus_mm[1] - s.plus_mm[0]) for v, s in zip(values, both, strict=True)) / weight

    totals = []
    for leg, route in enumerate((plus, minus)):
        delay = resistance = capacitance = inductance = length = 0.0
        for s in sections:
            span = (s.plus_mm, s.minus_mm)[leg]
            own = (span[1] - span[0]) * 1e-3
            if own <= 0 or s.leg not in {"both", ("plus", "minus")[leg]}:
                continue
            row = leg if s.leg == "both" else 0
            length += own
            delay += s.delay * own
            resistance += float(s.R[row]) * own
            capacitance += float(s.C[row].sum()) * own
            inductance += float(s.L[row, row]) * own
        delay += _beside_tracks(route, delay / length if length else math.nan, barrel_s_mm)
        totals.append((delay, resistance, capacitance, inductance))
    (delay_p, r_p, c_p, l_p), (delay_m, r_m, c_m, l_m) = totals
    found = (
        mean([s.impedance_diff_ohm for s in both]),
        mean([s.impedance_common_ohm for s in both]),
        delay_p * 1e12,
        delay_m * 1e12,
        r_p - r_m,
        (c_p - c_m) * 1e12,
        (l_p - l_m) * 1e9,
    )
    return {name: None if v is None or math.isnan(v) else v for name, v in zip(names, found, strict=True)}


def _beside_tracks(route: LegRoute, track_s_m: float, barrel_s_mm: float) -> float:
    """Delay [s] of joins inside pads, at the tracks' mean, and of barrels; barrels of unknown height are left out."""
    pieces = route.pieces
    joins = float(pieces.length[pieces.kind == JOIN].sum())
    barrels = float(np.nansum(pieces.length[pieces.kind == BARREL]))
    total = joins * 1e-3 * track_s_m if joins else 0.0
    return total + (barrels * barrel_s_mm if barrels else 0.0)


def _quasi_static(heights: Heights, sections: tuple[PairSection, ...]) -> float | None:
    """Frequency [Hz] at which the widest section spans a tenth of a wavelength in its dielectric.

    Common practice, no source: below it the cross-section's field is quasi-static to a per cent or so.
    """
    if not sections or not heights.slabs:
        return None
    spans = [
        max(
            sum(s.widths_mm) + (0.0 if math.isnan(s.gap_mm) else s.gap_mm),
            *(abs(heights.copper[k][0] - heights.copper[s.layer][0]) for k in s.planes or (s.layer,)),
        )
        for s in sections
    ]
    er = max(slab.er for slab in heights.slabs)
    return SPEED_OF_LIGHT / (10 * math.sqrt(er) * max(spans) * 1e-3)


def _db(ratio: float) -> float:
    return 20 * math.log10(max(ratio, 1e-20))
