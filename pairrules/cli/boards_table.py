"""A line a board, for the end of a listing of many."""

from __future__ import annotations

from collections.abc import Sequence

from pairrules.reports.safe_text import safe
from pairrules.result import Result

_COUNTS = ("pairs", "pass", "flag", "waived", "undecided")


def boards_table(outcomes: Sequence[tuple[str, Result | None, bool]]) -> str:
    """The table.

    Parameters: outcomes: of each board its file, its result (`None` where it could not be judged), and whether
    something in it is flagged at or above the chosen severity.
    """
    names = [safe(file) for file, _, _ in outcomes]
    wide = max(len("board"), *(len(name) for name in names))
    lines = ["board".ljust(wide) + "".join(f"{head:>11}" for head in _COUNTS)]
    for name, (_, result, flagged) in zip(names, outcomes, strict=True):
        counts = ["-"] * len(_COUNTS) if result is None else [str(result.summary[head]) for head in _COUNTS]
        said = "not judged" if result is None else "flagged" if flagged else ""
        lines.append((name.ljust(wide) + "".join(f"{count:>11}" for count in counts) + f"  {said}").rstrip())
    return "\n".join(lines) + "\n"
