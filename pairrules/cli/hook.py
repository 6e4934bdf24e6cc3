"""`pairrules hook`: have git check staged boards before every commit."""

from __future__ import annotations

import os
import shlex
import signal
import sys
import tempfile
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import click

from pairrules.errors import UsageError

if TYPE_CHECKING:
    from collections.abc import Iterator

MARK = "# pairrules: checks staged boards before each commit; `pairrules hook remove` takes it out"
KEPT = "pre-commit.before-pairrules"
"""What a hook that was there before is called then; it runs first, and what it refuses stays refused."""


@click.group(name="hook")
def command() -> None:
    """Have git check staged boards before every commit, against what the last commit held."""


@command.command()
def install() -> None:
    """Put the hook where git looks for it; a hook that is there already is kept and called first."""
    hook = _hook_file()
    kept = hook.with_name(KEPT)
    try:
        hook.parent.mkdir(parents=True, exist_ok=True)
        if _present(hook) and not _ours(hook):
            if _present(kept):
                raise UsageError(
                    "another hook was kept here already", file=str(kept), remedy="move it away, then install again"
                )
            hook.rename(kept)
        hook.unlink(missing_ok=True)
        hook.write_text(_script(), encoding="utf-8", newline="\n")
        hook.chmod(0o755)
    except OSError as error:
        raise _unwritable(hook, error) from error
    click.echo(f"{hook} checks staged boards before each commit")


@command.command()
def remove() -> None:
    """Take the hook out, and put back the one that was there before."""
    hook = _hook_file()
    kept = hook.with_name(KEPT)
    if not _ours(hook):
        raise UsageError("there is no hook of pairrules", file=str(hook), remedy="nothing need be done")
    try:
        hook.unlink()
        if _present(kept):
            kept.rename(hook)
    except OSError as error:
        raise _unwritable(hook, error) from error
    click.echo(f"{hook} is taken out")


@command.command()
@click.pass_context
def run(ctx: click.Context) -> None:
    """Check the staged boards; what the last commit held already is told, but does not stop the commit.

    Exit status as of `pairrules check`.
    """
    from pairrules.running.staged import lay_out

    with _ended_cleanly(), tempfile.TemporaryDirectory(prefix="pairrules-") as folder:
        staged = lay_out(Path(folder))
        status = 0
        for name in staged.boards:
            status = max(status, _check(name, staged.new, staged.old if name in staged.known else None, staged.top))
    ctx.exit(status)


def _check(name: str, new: Path, old: Path | None, top: Path) -> int:
    from pairrules.cli.boards import Asked, judged
    from pairrules.cli.error_lines import error_lines
    from pairrules.cli.output import look
    from pairrules.errors import UserError
    from pairrules.reports.listing import render

    before = None if old is None else str(old / name)
    asked = Asked(
        path=str(new / name),
        found=True,
        settings=_settings(name, new, top),
        pair="*",
        step="",
        today=None,
        since=before,
        cached=False,
    )
    (outcome,) = judged([asked], jobs=None)
    if outcome is None:
        return 0
    if isinstance(outcome, UserError) and before is not None and outcome.file.startswith(before):
        # The version that was committed cannot be judged: the staged one is, by itself.
        (outcome,) = judged([replace(asked, since=None)], jobs=None)
    if isinstance(outcome, UserError):
        for line in error_lines(outcome):
            click.echo(line.replace(f"{new}{os.sep}", ""), err=True)
        return outcome.exit_status
    assert outcome is not None
    stands = [
        finding
        for pair in outcome.pairs
        for finding in pair.findings
        if not finding.waived and finding.baseline != "unchanged"
    ]
    if not stands:
        return 0
    click.echo(render(replace(outcome, board=replace(outcome.board, file=name)), look(None)), nl=False, err=True)
    return 1


def _settings(name: str, new: Path, top: Path) -> str | None:
    """Settings are looked for among what is staged; above the repository they are where they are."""
    from pairrules.settings.read_settings import FILE_NAME, find_settings

    if any((folder / FILE_NAME).is_file() for folder in (new / name).parents if folder.is_relative_to(new)):
        return None
    above = find_settings(top.parent)
    return "" if above is None else str(above)


def _script() -> str:
    python = shlex.quote(sys.executable)
    return f"""#!/bin/sh
{MARK}
kept="$(dirname -- "$0")/{KEPT}"
if [ -x "$kept" ]; then
  "$kept" "$@" || exit $?
fi
if [ -x {python} ]; then
  exec {python} -m pairrules hook run
fi
if command -v pairrules >/dev/null 2>&1; then
  exec pairrules hook run
fi
echo "pairrules: not installed any more; run 'pairrules hook install' again or remove $0" >&2
exit 2
"""


def _hook_file() -> Path:
    """Where git looks for the hook: in the repository, or where `core.hooksPath` says; worktrees share it."""
    from pairrules.running.staged import git

    top = os.fsdecode(git("rev-parse", "--show-toplevel").rstrip(b"\n"))
    folder = os.fsdecode(git("rev-parse", "--git-path", "hooks", at=Path(top)).rstrip(b"\n"))
    return Path(top) / folder / "pre-commit"


def _present(path: Path) -> bool:
    return path.exists() or path.is_symlink()


def _ours(hook: Path) -> bool:
    try:
        return MARK in hook.read_text(encoding="utf-8", errors="replace")
    except OSError:
        return False


def _unwritable(hook: Path, error: OSError) -> UsageError:
    return UsageError(
        f"the hook cannot be written ({error.strerror})", file=str(hook), remedy="ask for the right to write there"
    )


@contextmanager
def _ended_cleanly() -> Iterator[None]:
    """Signals that end a program end it through its clean-up, so that no laid-out file stays behind."""

    def end(number: int, _: object) -> None:
        raise SystemExit(128 + number)

    numbers = [getattr(signal, name) for name in ("SIGTERM", "SIGHUP") if hasattr(signal, name)]
    before = {number: signal.signal(number, end) for number in numbers}
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
