"""What is done with each pair, link after link: measured, solved, judged, told; the same in any process."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from datetime import date
from functools import cached_property

import numpy as np

from pairrules.balance.electrical import electricals
from pairrules.balance.pair_electrical import PairElectrical
from pairrules.balance.section_store import Store
from pairrules.balance.stack_heights import lacking
from pairrules.board.board import Board
from pairrules.checks.electrical_figures import ps_per_mm
from pairrules.checks.held_limits import held_limits
from pairrules.checks.judge_pair import judge_pair, verdict
from pairrules.checks.measures import balance_figures, geometric_measures, with_electrical
from pairrules.checks.pin_lengths import pin_extra
from pairrules.checks.rule import Subject, all_rules
from pairrules.checks.waiving import waive
from pairrules.drawn.pair_drawing import pair_drawing
from pairrules.drawn.window_copper import DrawnBoard
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.measure import Asked, measure_links
from pairrules.geometry.pair_geometry import PairGeometry
from pairrules.pairing.link import Hop, Link
from pairrules.result import FoundPair, PairResult, SeriesPart, WaiverState
from pairrules.settings.limit import Limit
from pairrules.settings.pair_class import PairClass
from pairrules.settings.settings import Settings
from pairrules.settings.waivers import Waiver

BESIDE_RULES = frozenset({"neighbour-tilt"})
"""Rules that look at foreign copper beside the legs, which costs most to find and is left out unless one is asked."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Judged:
    """A pair's result, and what became of its waivers: place among all waivers, and state."""

    pair: PairResult
    waivers: tuple[tuple[int, WaiverState], ...]


@dataclass(frozen=True, kw_only=True, eq=False)
class PairStage:
    """All that judging a pair needs; what is worth keeping from pair to pair is made when first needed.

    Parameters
    ----------
    reference: the reference nets. waivers: all of the board. day: the day that decides which have expired.
    drawing: whether results carry what pictures and pages draw.
    """

    board: Board
    settings: Settings
    reference: tuple[int, ...]
    waivers: tuple[Waiver, ...]
    day: date
    drawing: bool = False
    store: Store = field(default_factory=dict)

    @cached_property
    def copper(self) -> BoardCopper:
        """The board's copper in the forms that measuring needs."""
        return BoardCopper(self.board, self.reference)

    @cached_property
    def drawn(self) -> DrawnBoard:
        """The board's copper as it is drawn."""
        return DrawnBoard(self.copper)

    def __getstate__(self) -> dict[str, object]:
        return {name: value for name, value in self.__dict__.items() if name not in {"copper", "drawn"}}

    def make_ready(self, links: Sequence[Link], threads: int) -> None:
        """Make what links need of the board's copper ready, in so many threads; the rest is made when asked for."""
        board = self.board
        nets = {hop.net for link in links for hop in (*link.hops_plus, *link.hops_minus)}
        own = set(board.tracks.layer[np.isin(board.tracks.net, sorted(nets))].tolist())
        beside = {layer + step for layer in own for step in (-1, 1)} & set(range(len(board.copper)))
        cuts = not lacking(board.stackup)
        self.copper.make_ready(sorted(own | beside), beside=beside, cuts=cuts, threads=threads)

    def judge(self, links: Sequence[Link]) -> list[Judged]:
        """Measure links, solve their sections, let every rule with a limit judge."""
        classes = [self.settings.class_of(link.name, net_names(self.board, link), link.klass) for link in links]
        limits = [self.settings.limits_for(klass) for klass in classes]
        asked = [
            Asked(
                link=link,
                reach_mm=None if klass is None else klass.reach_mm,
                beside=bool(own.keys() & BESIDE_RULES),
            )
            for link, klass, own in zip(links, classes, limits, strict=True)
        ]
        measured = measure_links(self.board, asked, copper=self.copper)
        pairs = list(zip(links, measured, classes, strict=True))
        figures = electricals(self.board, pairs, copper=self.copper, store=self.store)
        return [self._judged(*pair, found, own) for pair, found, own in zip(pairs, figures, limits, strict=True)]

    def _judged(
        self,
        link: Link,
        geometry: PairGeometry,
        klass: PairClass | None,
        figures: PairElectrical,
        limits: Mapping[str, Limit],
    ) -> Judged:
        board, rules = self.board, all_rules()
        measures = with_electrical(geometric_measures(geometry), figures)
        pins = pin_extra(
            board,
            link,
            geometry,
            lengths=self.settings.pin_lengths_for(klass),
            expected=() if klass is None else klass.expects_pin_lengths,
            slowness=ps_per_mm(figures),
        )
        breakout = 0.0 if klass is None else klass.breakout_mm or 0.0
        subject = Subject(
            board=board,
            link=link,
            geometry=geometry,
            measures=measures,
            breakout_mm=breakout,
            electrical=figures,
            klass=klass,
            reference=self.reference,
            pins=pins,
        )
        judgement = judge_pair(subject, limits, rules, self.copper)
        nets = [_nets(board, hops) for hops in (link.hops_plus, link.hops_minus)]
        own = [place for place, waiver in enumerate(self.waivers) if waiver.means(link.name, *nets)]
        judgement, became = waive(judgement, [self.waivers[place] for place in own], self.day, name=link.name)
        balance = balance_figures(figures, () if klass is None else klass.frequencies)
        found = found_pair(board, link, None if klass is None else klass.name)
        notes = (*_notes(link, None if klass is None else klass.name, bool(limits)), *filter(None, (pins.missing,)))
        pair = PairResult(
            name=found.name,
            plus=found.plus,
            minus=found.minus,
            klass=found.klass,
            found_by=found.found_by,
            nets_plus=found.nets_plus,
            nets_minus=found.nets_minus,
            source=found.source,
            load=found.load,
            series=found.series,
            routed=geometry.routed,
            verdict=verdict(judgement, geometry.routed, whole=link.ends_known and not geometry.unseen),
            measures=measures,
            balance=balance,
            findings=judgement.findings,
            unjudged=judgement.unjudged,
            missing=tuple(dict.fromkeys((*link.missing, *geometry.missing, *_unknown(figures, klass), *notes))),
            assumed=figures.assumed,
            quasi_static_hz=figures.quasi_static_hz,
            limits=held_limits(limits, rules, judgement, measures, balance),
            line_plus=_line(board, link.plus, link.hops_plus),
            line_minus=_line(board, link.minus, link.hops_minus),
            ends_plus=_ends(board, link.hops_plus),
            ends_minus=_ends(board, link.hops_minus),
            drawing=pair_drawing(subject, judgement.findings, limits, rules, drawn=self.drawn)
            if self.drawing
            else None,
        )
        return Judged(pair=pair, waivers=tuple(zip(own, became, strict=True)))


def found_pair(board: Board, link: Link, klass: str | None) -> FoundPair:
    """A link in the names of its nets and parts. klass: its class in the settings, where it has one."""
    return FoundPair(
        name=link.name,
        plus=board.nets[link.plus],
        minus=board.nets[link.minus],
        klass=klass or link.klass or None,
        found_by=link.found_by,
        nets_plus=tuple(board.nets[hop.net] for hop in link.hops_plus),
        nets_minus=tuple(board.nets[hop.net] for hop in link.hops_minus),
        source=board.parts[link.source].ref if link.source >= 0 else "",
        load=board.parts[link.load].ref if link.load >= 0 else "",
        series=tuple(part for step in link.series for part in _series(board, step.plus, step.minus)),
        missing=link.missing,
    )


def _series(board: Board, plus: int, minus: int) -> tuple[SeriesPart, ...]:
    if plus == minus:
        return () if plus < 0 else (SeriesPart(ref=board.parts[plus].ref, value=board.parts[plus].value, leg="both"),)
    return tuple(
        SeriesPart(ref=board.parts[part].ref, value=board.parts[part].value, leg=leg)
        for part, leg in ((plus, "plus"), (minus, "minus"))
        if part >= 0
    )


def _nets(board: Board, hops: tuple[Hop, ...]) -> tuple[str, ...]:
    return tuple(board.nets[hop.net] for hop in hops)


def _ends(board: Board, hops: tuple[Hop, ...]) -> tuple[str, ...]:
    """The pins at which a leg begins and ends."""
    rows = {row for hop in hops[:1] for row in hop.start} | {row for hop in hops[-1:] for row in hop.end}
    pads = board.pads
    return tuple(sorted({f"{board.parts[pads.part[row]].ref}.{pads.pin[row]}" for row in rows if pads.part[row] >= 0}))


def net_names(board: Board, link: Link) -> tuple[str, ...]:
    """All nets of a link, those that name it first."""
    hops = (*link.hops_plus, *link.hops_minus)
    return tuple(dict.fromkeys(board.nets[net] for net in (link.plus, link.minus, *(hop.net for hop in hops))))


def _line(board: Board, net: int, hops: tuple[Hop, ...]) -> int:
    """Line of the file where a leg's copper first stands: that of the net that names it, else of its first that has."""
    return next((board.net_lines[one] for one in (net, *(hop.net for hop in hops)) if board.net_lines[one]), 0)


def _unknown(figures: PairElectrical, klass: PairClass | None) -> tuple[str, ...]:
    """Why electrical figures are unknown: always for the sections, for the rest only where the class asks for it."""
    wanted = {"sections"}
    if klass is not None and (klass.frequencies or klass.mask):
        wanted.add("balance")
    if klass is not None and klass.pickup is not None:
        wanted |= {"pickup", "electric"} if klass.pickup.flux_density_t is not None else {"electric"}
    return tuple(why for group, why in figures.missing.items() if group in wanted)


def _notes(link: Link, klass: str | None, limited: bool) -> tuple[str, ...]:
    notes = []
    if link.klass and link.klass != klass:
        notes.append(f"the file puts the pair in class {link.klass}, which the settings do not have")
    if not limited:
        notes.append("no limit holds for the pair; give it a class with limits in the settings")
    return tuple(notes)
