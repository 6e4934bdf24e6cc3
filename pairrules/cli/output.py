"""Where a command's text goes: to stdout, or whole into a file; and how wide and colourful it is."""

from __future__ import annotations

import os
import sys
import tempfile
from pathlib import Path

import click

from pairrules.errors import UsageError
from pairrules.reports.report import Look


def write(text: str, output: str | None) -> None:
    """Write to stdout, or to a file which then has either all of the text or what it had before.

    Raises: UsageError where the file cannot be written.
    """
    if output is None:
        click.echo(text, nl=False)
        return
    target = Path(output)
    if target.is_dir():
        raise UsageError("--output names a folder", file=output, remedy="name a file in it")
    try:
        # In the same folder, since only within one file system a rename replaces a file in one step.
        handle, name = tempfile.mkstemp(prefix=f".{target.name}.", dir=target.parent)
    except OSError as error:
        raise _unwritable(output, error) from error
    try:
        with os.fdopen(handle, "w", encoding="utf-8", newline="\n") as file:
            file.write(text)
        Path(name).chmod(_mode(target))
        Path(name).replace(target)
    except OSError as error:
        Path(name).unlink(missing_ok=True)
        raise _unwritable(output, error) from error
    except BaseException:
        Path(name).unlink(missing_ok=True)
        raise


def look(output: str | None) -> Look:
    """Colour only on a terminal, and not where NO_COLOR is set and not empty (no-color.org)."""
    colour = output is None and sys.stdout.isatty() and not os.environ.get("NO_COLOR")
    return Look(width=80, colour=colour)


def _mode(target: Path) -> int:
    """The mode the file has, or the one a new file gets; temporary files are made private."""
    if target.exists():
        return target.stat().st_mode & 0o777
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask


def _unwritable(output: str, error: OSError) -> UsageError:
    return UsageError(
        f"--output cannot be written ({error.strerror})", file=output, remedy="name a file in a folder you may write to"
    )
