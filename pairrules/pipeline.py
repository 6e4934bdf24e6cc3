"""The whole line as one function: file → Board → links → measures → findings → Result."""

from __future__ import annotations

import hashlib
import os
import stat
from collections.abc import Iterator
from contextlib import ExitStack, contextmanager
from dataclasses import dataclass
from datetime import date
from fnmatch import fnmatchcase
from pathlib import Path

from pairrules import __version__
from pairrules.balance.electrical import electrical
from pairrules.balance.section_store import Store
from pairrules.balance.stack_heights import lacking
from pairrules.board.board import Board
from pairrules.board.given_stackup import with_stackup
from pairrules.board.given_values import with_part_values
from pairrules.checks.rule import all_rules
from pairrules.checks.rule_help import rule_infos
from pairrules.checks.waiving import left_over
from pairrules.drawn.pair_drawing import board_drawing
from pairrules.errors import BoardError, SettingsError, UsageError
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.measure import measure_link
from pairrules.pairing.find_links import PairRequest, find_links
from pairrules.pairing.link import Link
from pairrules.pairing.reference_nets import reference_nets
from pairrules.readers.long_file import LongFile
from pairrules.readers.packing import MOST_BYTES
from pairrules.readers.reader import read_board
from pairrules.result import BoardSummary, FoundPair, FoundPairs, Result, WaiverState
from pairrules.running.pair_stage import PairStage, found_pair, net_names
from pairrules.running.workers import Progress, judge_links
from pairrules.settings.likely_set import DraftPair
from pairrules.settings.pair_class import PairClass
from pairrules.settings.read_settings import Settings, find_settings, read_settings, settings_looked_for
from pairrules.settings.starter import Draft, starter
from pairrules.settings.waivers import FILE_NAME as WAIVERS_NAME
from pairrules.settings.waivers import Waiver, read_waivers, waivers_path


def check(
    path: str | Path,
    settings: str | Path | None = None,
    *,
    pairs: str = "*",
    step: str = "",
    drawing: bool = False,
    today: date | None = None,
    settings_of: str | Path | None = None,
    jobs: int | None = 1,
    store: Store | None = None,
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
    jobs: how many processes measure pairs, `None` for as many as there are processors where there are many pairs; the
        result is the same for any number.
    store: cross-sections solved so far, added to; `None` for none.
    progress: called as the work goes on.

    Raises
    ------
    BoardError: the file cannot be read or is no board. SettingsError: the settings or the waivers are wrong, all
    faults of a file at once. UsageError: no pair matches `pairs`.
    """
    opened = _open(path, settings, pairs=pairs, step=step, settings_of=settings_of)
    waivers = read_waivers(_waiver_file(opened.settings, settings_of or path, settings), rules=all_rules())
    stage = PairStage(
        board=opened.board,
        settings=opened.settings,
        reference=opened.reference,
        waivers=waivers,
        day=today or date.today(),
        drawing=drawing,
        store={} if store is None else store,
    )
    judged = judge_links(stage, opened.links, jobs=jobs, name=str(path), progress=progress)
    states: dict[Waiver, list[WaiverState]] = {waiver: [] for waiver in waivers}
    for one in judged:
        for place, state in one.waivers:
            states[waivers[place]].append(state)
    return Result(
        version=__version__,
        board=opened.summary,
        pairs=tuple(one.pair for one in judged),
        unpaired=opened.unpaired,
        settings=tuple(Path(name).name for name in opened.settings.files),
        rules=rule_infos(all_rules()),
        drawing=board_drawing(opened.board) if drawing else None,
        waivers=tuple(
            state
            for waiver, found in states.items()
            for state in (found or (left_over([waiver]) if pairs == "*" else ()))
        ),
    )


def waiver_file_of(path: str | Path, settings: str | Path | None = None) -> Path:
    """Where a board's waivers stand or, where there are none yet, belong. Parameters and errors as of `check`."""
    return _waiver_file(_settings(path, settings), path, settings)


def files_asked_for(path: str | Path, settings: str | Path | None = None) -> tuple[Path, ...]:
    """The settings and waiver files that a check of a board reads, and those it looks for where there are none.

    Errors as of `check`. Shipped rule sets are left out.
    """
    chosen = _settings(path, settings)
    looked_for = settings_looked_for(Path(path)) if settings is None else ()
    own = [Path(name) for name in chosen.files if Path(name).is_file()]
    near = [folder / WAIVERS_NAME for folder in (*(file.parent for file in own), Path(path).parent)]
    return tuple(dict.fromkeys((*looked_for, *own, _waiver_file(chosen, path, settings), *near)))


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
        klass = opened.settings.class_of(link.name, net_names(opened.board, link), link.klass)
        found.append(found_pair(opened.board, link, None if klass is None else klass.name))
    return FoundPairs(board=opened.summary, pairs=tuple(found), unpaired=opened.unpaired)


def pair_classes(
    path: str | Path, settings: str | Path | None = None, *, pairs: str = "*", step: str = ""
) -> tuple[Settings, tuple[tuple[FoundPair, PairClass | None], ...]]:
    """The settings of a board, and every pair with the class it ended up in. Parameters and errors as of `check`."""
    opened = _open(path, settings, pairs=pairs, step=step)
    found = []
    for link in opened.links:
        klass = opened.settings.class_of(link.name, net_names(opened.board, link), link.klass)
        found.append((found_pair(opened.board, link, None if klass is None else klass.name), klass))
    return opened.settings, tuple(found)


def draft_settings(path: str | Path, *, pairs: str = "*", step: str = "", progress: Progress | None = None) -> str:
    """A first settings file for a board, whatever settings lie beside it. Parameters and errors as of `check`."""
    opened = _open(path, "", pairs=pairs, step=step)
    board = opened.board
    copper = BoardCopper(board, opened.reference)
    store: Store = {}
    drafts = []
    for done, link in enumerate(opened.links):
        if progress is not None:
            progress("measuring pairs", done, len(opened.links))
        geometry = measure_link(board, link, reach_mm=None, reference=opened.reference, copper=copper)
        figures = electrical(board, link, geometry, None, copper=copper, store=store)
        found = found_pair(board, link, None)
        ends = (board.parts[part] for part in (link.source, link.load) if part >= 0)
        drafts.append(
            DraftPair(
                name=found.name,
                nets=net_names(board, link),
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
    with _bytes(Path(path), name) as data:
        chosen = _settings(settings_of or path, settings)
        board = read_board(data, name, step=step)
        digest = data.sha256() if isinstance(data, LongFile) else hashlib.sha256(data).hexdigest()
    board = with_part_values(_stacked(board, chosen), chosen.part_values)
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
        sha256=digest,
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


@contextmanager
def _bytes(path: Path, name: str) -> Iterator[bytes | LongFile]:
    """The bytes of a file while it is open. What has no size of its own, such as a pipe, is read at once."""
    with ExitStack() as opened:
        data, size = _begun(path, name, opened)
        if size > MOST_BYTES:
            found = f"the file is larger than {MOST_BYTES // 1024**3} GB"
            raise BoardError(found, file=name, remedy="export the board by itself, not a panel or an archive of many")
        if not size:
            raise BoardError("the file is empty", file=name, remedy="export the board again")
        yield data


def _begun(path: Path, name: str, opened: ExitStack) -> tuple[bytes | LongFile, int]:
    try:
        file = opened.enter_context(path.open("rb"))
        told = os.fstat(file.fileno())
        if not (stat.S_ISREG(told.st_mode) or stat.S_ISFIFO(told.st_mode)):
            raise BoardError("this is a device, not a file", file=name, remedy="name the board file")
        if stat.S_ISREG(told.st_mode) and told.st_size:
            return LongFile(file, told.st_size, name), told.st_size
        data = file.read(MOST_BYTES + 1)
        return data, len(data)
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


def _settings_path(board: str | Path, settings: str | Path | None) -> Path | None:
    if settings is None:
        return find_settings(Path(board))
    return Path(settings) if str(settings) else None


def _wanted(board: Board, link: Link, pattern: str) -> bool:
    # A name with brackets in it is found by itself, though as a pattern it stands for another.
    return any(name == pattern or fnmatchcase(name, pattern) for name in (link.name, *net_names(board, link)))
