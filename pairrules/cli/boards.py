"""Which boards the arguments of a command mean, and what became of each, in several processes where that is asked."""

from __future__ import annotations

import glob
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path

from pairrules.cli.progress import ProgressLine
from pairrules.errors import BoardError, UserError
from pairrules.result import Result
from pairrules.running.kept_check import kept_check, kept_results

ENDINGS = (".xml", ".cvg", ".json", ".xml.gz", ".cvg.gz", ".json.gz", ".zip")
"""What board files are called; files of other names are not looked into where a folder is named."""

_SIGNS = frozenset("*?[")


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """A board and how it is to be judged; options as of `pairrules check`.

    `found`: whether it was found in a folder or by a pattern, so that it may as well be no board.
    """

    path: str
    found: bool
    settings: str | None
    pair: str
    step: str
    today: date | None
    since: str | None
    cached: bool


def boards_of(arguments: Sequence[str]) -> tuple[tuple[str, bool], ...]:
    """Every file that the arguments mean, once, in order; and whether it was found rather than named.

    A folder means all files in it and below that are called as boards are; `*`, `?`, `[…]` and `**` mean what they
    match where there is no file of that very name.
    """
    named: dict[str, bool] = {}
    for argument in arguments:
        if Path(argument).is_dir():
            files = (path for path in Path(argument).rglob("*") if path.name.lower().endswith(ENDINGS))
            matched = sorted(str(path) for path in files if path.is_file() and not _hidden(path, argument))
        elif _SIGNS & set(argument) and not Path(argument).exists():
            names = glob.glob(argument, recursive=True)  # noqa: PTH207 - a pattern may begin at the root or above
            matched = sorted(name for name in names if Path(name).is_file())
        else:
            named[argument] = False
            continue
        if not matched:
            named[argument] = False  # reading it says what is wrong
        for name in matched:
            named.setdefault(name, True)
    return tuple(named.items())


def judged(asked: Sequence[Asked], *, jobs: int | None) -> Iterator[Result | UserError | None]:
    """What became of each board, in order: its result, its error, or `None` where it was found and is no board.

    jobs: how many processes; `None` for as many as there are processors.
    """
    if jobs == 1 or len(asked) == 1:
        for one in asked:
            with ProgressLine() as progress:
                yield _judge(one, jobs=jobs, progress=progress)
        return
    from concurrent.futures.process import BrokenProcessPool

    from pairrules.running.workers import in_processes, processors

    jobs = processors() if jobs is None else jobs
    done = 0
    with ProgressLine() as progress:
        try:
            for outcome in in_processes(_judge, asked, jobs=min(jobs, len(asked))):
                done += 1
                progress("judging boards", done, len(asked))
                yield outcome
        except BrokenProcessPool:
            rest = asked[done:]
        else:
            rest = ()
        # Which board cost the process its life is seen when each has one of its own.
        for one in rest:
            done += 1
            progress("judging boards", done, len(asked))
            try:
                yield from in_processes(_judge, [one], jobs=1)
            except BrokenProcessPool:
                found = "a worker process ended before the board was judged"
                yield BoardError(found, file=one.path, remedy="free memory or take fewer --jobs, then run again")


def _hidden(path: Path, folder: str) -> bool:
    return any(part.startswith(".") for part in path.relative_to(folder).parts)


def _judge(asked: Asked, *, jobs: int | None = 1, progress: ProgressLine | None = None) -> Result | UserError | None:
    if asked.found:
        from pairrules.running.foreign import is_foreign

        if is_foreign(asked.path):
            return None
    try:
        result = kept_check(
            asked.path,
            asked.settings,
            pairs=asked.pair,
            step=asked.step,
            today=asked.today,
            jobs=jobs,
            progress=progress,
            kept=kept_results() if asked.cached else None,
        )
        if asked.since is None:
            return result
        from pairrules.cli.earlier import earlier_result
        from pairrules.comparison.compare import with_baseline

        old = earlier_result(
            asked.since,
            asked.settings,
            settings_of=asked.path,
            step=asked.step,
            today=asked.today,
            jobs=jobs,
            cached=asked.cached,
        )
        return with_baseline(old, result)
    except UserError as error:
        return error
