"""The whole line as one function: file → Board → links → measures → findings → Result."""

from __future__ import annotations

import hashlib
import os
import stat
from collections.abc import Callable
from dataclasses import dataclass
from datetime import date
from fnmatch import fnmatchcase
from pathlib import Path

from pairrules import __version__
from pairrules.balance.electrical import electrical
from pairrules.balance.pair_electrical import PairElectrical
from pairrules.balance.stack_heights import lacking
from pairrules.board.board import Board
from pairrules.board.given_stackup import with_stackup
from pairrules.board.given_values import with_part_values
from pairrules.checks.electrical_figures import ps_per_mm
from pairrules.checks.held_limits import held_limits
from pairrules.checks.judge_pair import judge_pair, verdict
from pairrules.checks.measures import balance_figures, geometric_measures, with_electrical
from pairrules.checks.pin_lengths import pin_extra
from pairrules.checks.rule import Subject, all_rules
from pairrules.checks.rule_help import rule_infos
from pairrules.checks.waiving import left_over, waive
from pairrules.drawn.pair_drawing import board_drawing, pair_drawing
from pairrules.drawn.window_copper import DrawnBoard
from pairrules.errors import BoardError, SettingsError, UsageError
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.solve import SectionSolution
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.measure import measure_link
from pairrules.pairing.find_links import PairRequest, find_links
from pairrules.pairing.link import Hop, Link
from pairrules.pairing.reference_nets import reference_nets
from pairrules.readers.packing import MOST_BYTES
from pairrules.readers.reader import read_board
from pairrules.result import BoardSummary, FoundPair, FoundPairs, PairResult, Result, SeriesPart, WaiverState
from pairrules.settings.likely_set import DraftPair
from pairrules.settings.pair_class import PairClass
from pairrules.settings.read_settings import Settings, find_settings, read_settings
from pairrules.settings.starter import Draft, starter
from pairrules.settings.waivers import Waiver, read_waivers, waivers_path

BESIDE_RULES = frozenset({"neighbour-tilt"})
"""Rules that look at foreign copper beside the legs, which costs most to find and is left out unless one is asked."""

Progress = Callable[[str, int, int], None]
"""Told what is being done, how much of it is done, and how much there is."""


def check(
    path: str | Path,
    settings: str | Path | None = None,
    *,
    pairs: str = "*",
    step: str = "",
    drawing: bool = False,
    today: date | None = None,
    settings_of: str | Path | None = None,
    progress: Progress | None = None,
) -> Result:
    """Read a board, measure its pairs, judge them.

    Parameters
    ----------
    path: the board file. settings: the settings file; `None` takes the nearest `pairrules.yaml` upward from the board,
        "" the shipped base set alone.
    pairs: which pairs, a pattern (`*`, `?`, `[…]`) over pair and net names.
    step: which board, where the file has several.
    drawing: whether the result carries what pictures and pages draw, which takes longer.
    today: the day that decides which waivers have expired; `None` for the clock's.
    settings_of: the board whose settings and waivers hold, where it is not this one and `settings` is `None`.
    progress: called as the work goes on.

    Raises
    ------
    BoardError: the file cannot be read or is no board. SettingsError: the settings or the waivers are wrong, all
    faults of a file at once. UsageError: no pair matches `pairs`.
    """
    opened = _open(path, settings, pairs=pairs, step=step, settings_of=settings_of)
    rules, board = all_rules(), opened.board
    waivers = read_waivers(_waiver_file(opened.settings, settings_of or path, settings), rules=rules)
    states: dict[Waiver, list[WaiverState]] = {waiver: [] for waiver in waivers}
    day = today or date.today()
    copper, store = BoardCopper(board, opened.reference), dict[CrossSection, SectionSolution]()
    results, drawn = [], DrawnBoard(copper)
    for done, link in enumerate(opened.links):
        if progress is not None:
            progress("measuring pairs", done, len(opened.links))
        klass = opened.settings.class_of(link.name, _net_names(board, link), link.klass)
        reach = None if klass is None else klass.reach_mm
        limits = opened.settings.limits_for(klass)
        beside = bool(limits.keys() & BESIDE_RULES)
        geometry = measure_link(board, link, reach_mm=reach, reference=opened.reference, copper=copper, beside=beside)
        figures = electrical(board, link, geometry, klass, copper=copper, store=store)
        measures = with_electrical(geometric_measures(geometry), figures)
        pins = pin_extra(
            board,
            link,
            geometry,
            lengths=opened.settings.pin_lengths_for(klass),
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
            reference=opened.reference,
            pins=pins,
        )
        judgement = judge_pair(subject, limits, rules, copper)
        nets = [_nets(board, hops) for hops in (link.hops_plus, link.hops_minus)]
        own = [waiver for waiver in waivers if waiver.means(link.name, *nets)]
        judgement, became = waive(judgement, own, day, name=link.name)
        for waiver, state in zip(own, became, strict=True):
            states[waiver].append(state)
        balance = balance_figures(figures, () if klass is None else klass.frequencies)
        found = _found_pair(board, link, None if klass is None else klass.name)
        notes = (*_notes(link, None if klass is None else klass.name, bool(limits)), *filter(None, (pins.missing,)))
        results.append(
            PairResult(
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
                verdict=verdict(judgement, geometry.routed),
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
                drawing=pair_drawing(subject, judgement.findings, limits, rules, drawn=drawn) if drawing else None,
            )
        )
    return Result(
        version=__version__,
        board=opened.summary,
        pairs=tuple(results),
        unpaired=opened.unpaired,
        settings=tuple(Path(name).name for name in opened.settings.files),
        rules=rule_infos(rules),
        drawing=board_drawing(board) if drawing else None,
        waivers=tuple(
            state
            for waiver, found in states.items()
            for state in (found or (left_over([waiver]) if pairs == "*" else ()))
        ),
    )


def waiver_file_of(path: str | Path, settings: str | Path | None = None) -> Path:
    """Where a board's waivers stand or, where there are none yet, belong. Parameters and errors as of `check`."""
    return _waiver_file(_settings(path, settings), path, settings)


def _settings(path: str | Path, settings: str | Path | None) -> Settings:
    forms = {name: rule.form for name, rule in all_rules().items()}
    return read_settings(_settings_path(path, settings), forms=forms)


def _waiver_file(chosen: Settings, path: str | Path, settings: str | Path | None) -> Path:
    return waivers_path(chosen.waivers, _settings_path(path, settings), Path(path))


def find_pairs(path: str | Path, settings: str | Path | None = None, *, pairs: str = "*", step: str = "") -> FoundPairs:
    """Which pairs a board has and how they were found, without measuring them. Parameters and errors as of `check`."""
    opened = _open(path, settings, pairs=pairs, step=step)
    found = []
    for link in opened.links:
        klass = opened.settings.class_of(link.name, _net_names(opened.board, link), link.klass)
        found.append(_found_pair(opened.board, link, None if klass is None else klass.name))
    return FoundPairs(board=opened.summary, pairs=tuple(found), unpaired=opened.unpaired)


def pair_classes(
    path: str | Path, settings: str | Path | None = None, *, pairs: str = "*", step: str = ""
) -> tuple[Settings, tuple[tuple[FoundPair, PairClass | None], ...]]:
    """The settings of a board, and every pair with the class it ended up in. Parameters and errors as of `check`."""
    opened = _open(path, settings, pairs=pairs, step=step)
    found = []
    for link in opened.links:
        klass = opened.settings.class_of(link.name, _net_names(opened.board, link), link.klass)
        found.append((_found_pair(opened.board, link, None if klass is None else klass.name), klass))
    return opened.settings, tuple(found)


def draft_settings(path: str | Path, *, pairs: str = "*", step: str = "", progress: Progress | None = None) -> str:
    """A first settings file for a board, whatever settings lie beside it. Parameters and errors as of `check`."""
    opened = _open(path, "", pairs=pairs, step=step)
    board = opened.board
    copper, store = BoardCopper(board, opened.reference), dict[CrossSection, SectionSolution]()
    drafts = []
    for done, link in enumerate(opened.links):
        if progress is not None:
            progress("measuring pairs", done, len(opened.links))
        geometry = measure_link(board, link, reach_mm=None, reference=opened.reference, copper=copper)
        figures = electrical(board, link, geometry, None, copper=copper, store=store)
        found = _found_pair(board, link, None)
        ends = (board.parts[part] for part in (link.source, link.load) if part >= 0)
        drafts.append(
            DraftPair(
                name=found.name,
                nets=_net_names(board, link),
                declared=link.klass,
                ends=tuple(" ".join((part.ref, part.value, part.package)).strip() for part in ends),
                series=tuple(part.ref for part in found.series),
                impedance_ohm=figures.impedance_diff_ohm,
            )
        )
    draft = Draft(
        file=Path(path).name,
        pairs=tuple(drafts),
        unpaired=opened.unpaired,
        reference=tuple(board.nets[net] for net in opened.reference),
        layers=tuple((layer.name, layer.kind) for layer in board.stackup.layers),
        lacking=lacking(board.stackup),
    )
    return starter(draft, {name: rule.form for name, rule in all_rules().items()})


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Opened:
    """A board read and its links found."""

    board: Board
    summary: BoardSummary
    settings: Settings
    reference: tuple[int, ...]
    links: tuple[Link, ...]
    unpaired: tuple[str, ...]


def _open(
    path: str | Path, settings: str | Path | None, *, pairs: str, step: str, settings_of: str | Path | None = None
) -> _Opened:
    name = str(path)
    data = _bytes(Path(path), name)
    chosen = _settings(settings_of or path, settings)
    board = with_part_values(_stacked(read_board(data, name, step=step), chosen), chosen.part_values)
    reference = reference_nets(board, chosen.reference_nets)
    listed = tuple(PairRequest(plus=p.plus, minus=p.minus, name=p.name, place=p.place) for p in chosen.pairs)
    pairing = find_links(board, listed=listed, ignore=chosen.ignore, reference=reference)
    links = tuple(link for link in pairing.links if _wanted(board, link, pairs))
    if pairs != "*" and not links:
        raise UsageError(
            f"no pair or net of a pair matches {pairs!r}", file=name, remedy="`pairrules pairs` lists them"
        )
    summary = BoardSummary(
        file=name,
        sha256=hashlib.sha256(data).hexdigest(),
        format=board.format,
        revision=board.revision,
        units=board.units,
        name=board.name,
        complete=board.complete,
        missing=tuple(dict.fromkeys((*board.missing, *pairing.missing))),
    )
    return _Opened(
        board=board, summary=summary, settings=chosen, reference=reference, links=links, unpaired=pairing.unpaired
    )


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


def _stacked(board: Board, settings: Settings) -> Board:
    if settings.stackup is None:
        return board
    try:
        return with_stackup(board, settings.stackup)
    except ValueError as error:
        raise SettingsError(
            str(error),
            file=settings.files[-1] if settings.files else "",
            place="stackup",
            remedy="name every copper layer as the board file does, top to bottom",
        ) from error


def _bytes(path: Path, name: str) -> bytes:
    try:
        with path.open("rb") as file:
            mode = os.fstat(file.fileno()).st_mode
            if not (stat.S_ISREG(mode) or stat.S_ISFIFO(mode)):
                raise BoardError("this is a device, not a file", file=name, remedy="name the board file")
            data = file.read(MOST_BYTES + 1)
    except FileNotFoundError as error:
        raise BoardError("there is no such file", file=name, remedy="check the path") from error
    except IsADirectoryError as error:
        raise BoardError("this is a folder", file=name, remedy="name the board file in it") from error
    except PermissionError as error:
        if path.is_dir():
            raise BoardError("this is a folder", file=name, remedy="name the board file in it") from error
        raise BoardError("the file may not be read", file=name, remedy="ask for the right to read it") from error
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise BoardError(f"the file cannot be read ({reason})", file=name, remedy="check path and medium") from error
    if len(data) > MOST_BYTES:
        found = f"the file is larger than {MOST_BYTES // 1024**3} GB"
        raise BoardError(found, file=name, remedy="export the board by itself, not a panel or an archive of many")
    if not data:
        raise BoardError("the file is empty", file=name, remedy="export the board again")
    return data


def _settings_path(board: str | Path, settings: str | Path | None) -> Path | None:
    if settings is None:
        return find_settings(Path(board))
    return Path(settings) if str(settings) else None


def _wanted(board: Board, link: Link, pattern: str) -> bool:
    # A name with brackets in it is found by itself, though as a pattern it stands for another.
    return any(name == pattern or fnmatchcase(name, pattern) for name in (link.name, *_net_names(board, link)))


def _nets(board: Board, hops: tuple[Hop, ...]) -> tuple[str, ...]:
    return tuple(board.nets[hop.net] for hop in hops)


def _ends(board: Board, hops: tuple[Hop, ...]) -> tuple[str, ...]:
    """The pins at which a leg begins and ends."""
    rows = {row for hop in hops[:1] for row in hop.start} | {row for hop in hops[-1:] for row in hop.end}
    pads = board.pads
    return tuple(sorted({f"{board.parts[pads.part[row]].ref}.{pads.pin[row]}" for row in rows if pads.part[row] >= 0}))


def _net_names(board: Board, link: Link) -> tuple[str, ...]:
    hops = (*link.hops_plus, *link.hops_minus)
    return tuple(dict.fromkeys(board.nets[net] for net in (link.plus, link.minus, *(hop.net for hop in hops))))


def _line(board: Board, net: int, hops: tuple[Hop, ...]) -> int:
    """Line of the file where a leg's copper first stands: that of the net that names it, else of its first that has."""
    return next((board.net_lines[one] for one in (net, *(hop.net for hop in hops)) if board.net_lines[one]), 0)


def _found_pair(board: Board, link: Link, klass: str | None) -> FoundPair:
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
