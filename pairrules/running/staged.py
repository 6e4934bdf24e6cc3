"""What is about to be committed, laid out in a folder of its own: staged boards, settings, and the boards as they were.

Nothing of the work tree is read and the repository's index is not touched, so that a check tells of the commit.
"""

from __future__ import annotations

import os
import subprocess
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from pairrules.errors import UsageError

BOARD_ENDINGS = (".xml", ".cvg", ".json", ".xml.gz", ".cvg.gz", ".json.gz")
SETTINGS_ENDINGS = (".yaml", ".yml")


@dataclass(frozen=True, slots=True, kw_only=True)
class Staged:
    """What is staged: paths within the repository, and where they lie as staged and as last committed.

    `known`: those of `boards` that the last commit holds too.
    """

    boards: tuple[str, ...]
    known: frozenset[str]
    new: Path
    old: Path
    top: Path


def lay_out(folder: Path) -> Staged:
    """Lay out the staged boards of the repository around the working folder, and all staged settings, in `folder`.

    Raises: UsageError outside a repository, or where git cannot tell.
    """
    top = Path(os.fsdecode(git("rev-parse", "--show-toplevel").rstrip(b"\n")))
    first = git("rev-parse", "-q", "--verify", "HEAD^{commit}", at=top, may_fail=True) == b""
    # Against an empty tree before the first commit.
    base = git("hash-object", "-t", "tree", os.devnull, at=top).decode().strip() if first else "HEAD"
    changed = git(
        "diff-index", "--cached", "--no-renames", "--diff-filter=AMT", "--name-only", "-z", base, "--", at=top
    )
    boards = tuple(name for name in _names(changed) if name.lower().endswith(BOARD_ENDINGS))
    new, old = folder / "new", folder / "old"
    if not boards:
        return Staged(boards=(), known=frozenset(), new=new, old=old, top=top)
    listed = _names(git("ls-files", "-z", at=top))
    settings = [name for name in listed if name.lower().endswith(SETTINGS_ENDINGS)]
    _check_out((*boards, *settings), new, top)
    known: set[str] = set()
    if not first:
        committed = _names(git("ls-tree", "-r", "-z", "--name-only", "--full-tree", "HEAD", at=top))
        known = set(boards) & set(committed)
        index = {"GIT_INDEX_FILE": str(folder / "index")}
        git("read-tree", "HEAD", at=top, extra=index)
        _check_out(tuple(sorted(known)), old, top, extra=index)
    regular = tuple(name for name in boards if (new / name).is_file() and not (new / name).is_symlink())
    return Staged(boards=regular, known=frozenset(known), new=new, old=old, top=top)


def git(
    *arguments: str,
    at: Path | None = None,
    may_fail: bool = False,
    given: bytes | None = None,
    extra: dict[str, str] | None = None,
) -> bytes:
    """What git answers; b"" where it fails and may.

    Raises: UsageError with the first line of what git said.
    """
    try:
        done = subprocess.run(
            ["git", *arguments],
            cwd=at,
            input=given,
            stdin=subprocess.DEVNULL if given is None else None,
            capture_output=True,
            check=False,
            env={**os.environ, **(extra or {})},
        )
    except OSError as error:
        raise UsageError("git cannot be run", remedy="install git, or put it on the path") from error
    if done.returncode == 0:
        return done.stdout
    if may_fail:
        return b""
    said = done.stderr.decode("utf-8", "replace").strip().splitlines() or [f"status {done.returncode}"]
    raise UsageError(f"git {arguments[0]} failed: {said[0]}", remedy="run this within a git repository")


def _check_out(names: Sequence[str], folder: Path, top: Path, *, extra: dict[str, str] | None = None) -> None:
    folder.mkdir(parents=True, exist_ok=True)
    given = b"".join(os.fsencode(name) + b"\0" for name in names)
    git("checkout-index", "-z", "--stdin", "-q", "-f", f"--prefix={folder}/", at=top, given=given, extra=extra)


def _names(listed: bytes) -> list[str]:
    return [os.fsdecode(name) for name in listed.split(b"\0") if name]
