"""A result to compare with: saved as JSON, or made by judging a board."""

from __future__ import annotations

from dataclasses import replace
from datetime import date
from fnmatch import fnmatchcase
from pathlib import Path

from pairrules.cli.progress import ProgressLine
from pairrules.comparison.saved_result import is_result, read_result
from pairrules.result import Result
from pairrules.running.kept_check import kept_check, kept_results


def is_saved(path: str) -> bool:
    """Whether a file holds a saved result, and not a board."""
    return is_result(_bytes(path))


def earlier_result(
    path: str,
    settings: str | None,
    *,
    settings_of: str | None = None,
    pair: str = "*",
    step: str = "",
    today: date | None = None,
    jobs: int | None = 1,
    cached: bool = False,
) -> Result:
    """The result in a file of JSON, or of judging the board in it; only pairs that match `pair`.

    Parameters and errors as of `pipeline.check`; UsageError for a damaged result.
    """
    data = _bytes(path)
    if is_result(data):
        saved = read_result(data, path)
        kept = (
            one
            for one in saved.pairs
            if any(fnmatchcase(name, pair) for name in (one.name, *one.nets_plus, *one.nets_minus))
        )
        return replace(saved, pairs=tuple(kept))
    with ProgressLine() as progress:
        return kept_check(
            path,
            settings,
            pairs=pair,
            step=step,
            today=today,
            settings_of=settings_of,
            jobs=jobs,
            progress=progress,
            kept=kept_results() if cached else None,
        )


def _bytes(path: str) -> bytes:
    try:
        return Path(path).read_bytes()
    except (OSError, ValueError):
        return b""  # judging it as a board will say what is wrong with the file
