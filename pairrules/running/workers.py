"""Work in several processes: pairs of one board, or boards; the same results in the same order for any number."""

from __future__ import annotations

import multiprocessing
import os
import signal
import sys
from collections.abc import Callable, Iterable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from typing import TypeVar

from pairrules.errors import BoardError
from pairrules.pairing.link import Link
from pairrules.running.kept_sections import add_to, taken_from
from pairrules.running.pair_stage import Judged, PairStage

Progress = Callable[[str, int, int], None]
"""Told what is being done, how much of it is done, and how much there is."""

Given = TypeVar("Given")
Made = TypeVar("Made")

_MANY = 64
_MOST_PROCESSES = 8
_MOST_LINKS = 16
_SHARES = 8
"""Links are judged in so many shares or more, `_MOST_LINKS` at most in one: whatever the number of processes, the same
are measured in one pass, and none is left with all the long ones."""


def judge_links(
    stage: PairStage, links: Sequence[Link], *, jobs: int | None = 1, name: str = "", progress: Progress | None = None
) -> list[Judged]:
    """Every link judged, in order.

    Parameters: jobs: how many processes, `None` for as many as pay. name: of the board, for messages. progress: called
    as the work goes on.
    Raises: BoardError where a worker process ended before its work was done.
    """
    found: list[Judged] = []
    every = len(links)
    if jobs is None:
        jobs = processors() if every > _MANY else 1
    size = max(1, min(_MOST_LINKS, every // _SHARES))
    shares = [links[i : i + size] for i in range(0, every, size)]
    if jobs > 1 and every > _MANY:
        # What they need of the board's copper is then at hand when the workers fork, once for all.
        stage.make_ready(links, threads=jobs)
    if jobs == 1 or len(shares) < 2:
        for share in shares:
            if progress is not None:
                progress("measuring pairs", len(found), every)
            found += stage.judge(share)
        return found
    try:
        told = in_processes(_judge_share, shares, jobs=min(jobs, len(shares)), start=_take_stage, given=stage)
        for judged, sections in told:
            found += judged
            add_to(stage.store, sections)
            if progress is not None:
                progress("measuring pairs", len(found), every)
    except BrokenProcessPool:
        raise BoardError(
            "a worker process ended before its pairs were measured",
            file=name,
            remedy="free memory or take fewer --jobs, then run again",
        ) from None
    return found


def processors() -> int:
    """How many processes may work at once here, `_MOST_PROCESSES` at most: each takes memory of its own."""
    usable = len(os.sched_getaffinity(0)) if sys.platform == "linux" else os.cpu_count()
    return min(usable or 1, _MOST_PROCESSES)


def in_processes(
    work: Callable[[Given], Made],
    items: Iterable[Given],
    *,
    jobs: int,
    start: Callable[..., None] | None = None,
    given: object = None,
) -> Iterator[Made]:
    """What `work` makes of each item, in order, from `jobs` processes.

    Parameters: start: called once in each process, with `given`.
    Raises: BrokenProcessPool where a process was ended from outside; what `work` raises.
    """
    pool = ProcessPoolExecutor(jobs, mp_context=_context(), initializer=_begin, initargs=(start, given))
    try:
        yield from pool.map(work, items)
    finally:
        pool.shutdown(cancel_futures=True)


def _context() -> multiprocessing.context.BaseContext:
    """Forked where that is safe, so that workers share the board that has been read."""
    return multiprocessing.get_context("fork" if sys.platform == "linux" else "spawn")


def _begin(start: Callable[..., None] | None, given: object) -> None:
    # The parent alone answers an interrupt from the keyboard, which reaches all of them.
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    if start is not None:
        start(given)


_STAGE: list[PairStage] = []
"""The stage of this worker process."""


def _take_stage(stage: PairStage) -> None:
    _STAGE[:] = [stage]


def _judge_share(links: Sequence[Link]) -> tuple[list[Judged], dict[bytes, bytes]]:
    """The links judged, and the sections solved on the way that are to be kept."""
    return _STAGE[0].judge(links), taken_from(_STAGE[0].store)
