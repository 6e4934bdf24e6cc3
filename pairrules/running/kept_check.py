"""A check answered from what is kept, where nothing that it rests on has changed; else done, and its result kept.

A result rests on the board's bytes, every settings and waiver file that was read, those that were looked for and not
there, the options, the day where there are waivers, and the tool itself. Answering loads no numerical library.
"""

from __future__ import annotations

import hashlib
import json
import os
import stat
from collections.abc import Iterable
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING, Any

from pairrules import __version__
from pairrules.result import Result
from pairrules.running.kept_results import KeptResults
from pairrules.running.plain_records import from_plain, to_plain
from pairrules.shipped import rules_folder

if TYPE_CHECKING:
    from pairrules.running.workers import Progress

_FORM = 1
_PACKAGE = Path(__file__).resolve().parents[1]


def kept_results() -> KeptResults:
    """The user's own folder of results, where the platform puts such things."""
    from platformdirs import user_cache_path

    return KeptResults(user_cache_path("pairrules", appauthor=False) / "results")


def kept_check(
    path: str,
    settings: str | None = None,
    *,
    pairs: str = "*",
    step: str = "",
    today: date | None = None,
    settings_of: str | None = None,
    jobs: int | None = 1,
    progress: Progress | None = None,
    kept: KeptResults | None,
) -> Result:
    """`pipeline.check`, answered from `kept` where it can be; `None` keeps nothing and asks nothing.

    Where it has to be done, sections that earlier runs solved are taken from the same folder, and new ones go there.
    """
    digest = None if kept is None else _digest(path)
    asked: dict[str, Any] = {
        "pairs": pairs,
        "step": step,
        "today": today,
        "settings_of": settings_of,
        "jobs": jobs,
        "progress": progress,
    }
    if kept is None or not digest:
        from pairrules.pipeline import check

        return check(path, settings, **asked)
    day = (today or date.today()).isoformat()
    tool = _tool()
    key = _key(tool, digest, path, settings, pairs, step, settings_of)
    found = _believed(kept.get(key), day)
    if found is not None:
        return found
    from pairrules.pipeline import check, files_asked_for
    from pairrules.running.kept_sections import KeptSections
    from pairrules.running.section_file import SectionFile

    sections = KeptSections(SectionFile(kept.folder), f"{__version__} {tool}")
    rests_on = _state(files_asked_for(settings_of or path, settings))
    result = check(path, settings, **asked, store=sections)
    sections.save()
    if result.board.sha256 == digest and rests_on == _state(path for path, _ in rests_on):
        entry = {"rests_on": rests_on, "day": day if result.waivers else "", "result": to_plain(result)}
        kept.put(key, entry)
    return result


def _believed(entry: Any, day: str) -> Result | None:
    """The result of an entry where all it rests on is as it was."""
    try:
        rests_on = [(str(path), str(digest)) for path, digest in entry["rests_on"]]
        if entry["day"] not in {"", day} or _state(path for path, _ in rests_on) != rests_on:
            return None
        return from_plain(Result, entry["result"])
    except (KeyError, TypeError, ValueError):
        return None


def _state(paths: Iterable[str | Path]) -> list[tuple[str, str]]:
    """Each file by its full path, with its digest; "" where it is not there or cannot be read."""
    return [(os.path.abspath(path), _digest(path)) for path in paths]  # noqa: PTH100 - links are not followed


def _digest(path: str | Path) -> str:
    """SHA-256 of a file's bytes; "" where it is no file that can be read twice."""
    try:
        with open(path, "rb") as file:  # noqa: PTH123 - a device must not be opened through its folder's rights
            if not stat.S_ISREG(os.fstat(file.fileno()).st_mode):
                return ""
            return hashlib.file_digest(file, "sha256").hexdigest()
    except (OSError, ValueError):
        return ""


def _key(tool: str, digest: str, path: str, *options: str | None) -> str:
    asked = [_FORM, __version__, tool, digest, path, os.path.abspath(path), *options]  # noqa: PTH100
    return hashlib.sha256(json.dumps(asked).encode()).hexdigest()


def _tool() -> str:
    """A digest of the installed tool: its files' names, sizes and times, so that a changed one never answers as it was.

    Their contents would say the same and cost as much as a small check.
    """
    told = []
    for folder in (_PACKAGE, rules_folder()):
        for at, folders, names in os.walk(folder):
            folders[:] = sorted(name for name in folders if name != "__pycache__")
            for name in sorted(names):
                of = os.stat(os.path.join(at, name))  # noqa: PTH116, PTH118 - hundreds of files, in a few milliseconds
                told.append(f"{at}/{name} {of.st_size} {of.st_mtime_ns}")
    return hashlib.sha256("\n".join(told).encode("utf-8", "surrogateescape")).hexdigest()
