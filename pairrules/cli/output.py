"""Where a command's text goes: to stdout, or whole into a file; and how wide and colourful it is."""

from __future__ import annotations

import os
import stat
import sys
import tempfile
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import click

from pairrules.errors import UsageError
from pairrules.reports.report import Look


@dataclass(frozen=True, slots=True)
class ToWrite:
    """A text and the file it goes to. `option`: what named the file, for messages."""

    text: str
    file: str
    option: str = "--output"


def write(text: str, output: str | None) -> None:
    """Write to stdout, or to a file which then has either all of the text or what it had before.

    Raises: UsageError where the file cannot be written.
    """
    if output is None:
        click.echo(text, nl=False)
        sys.stdout.flush()
    else:
        write_files((ToWrite(text, output),))


def write_files(files: Sequence[ToWrite]) -> None:
    """Write several files. Only when the texts of all are on the disk do they take the places of the old ones.

    What a link leads to is written, not put in the link's place; devices and pipes are written into.
    Raises: UsageError where one cannot be written; then no file is changed, but where the medium fails between two
    renames.
    """
    staged: list[tuple[Path, ToWrite]] = []
    try:
        direct = [one for one in files if _is_device(one.file)]
        for one in files:
            if one not in direct:
                staged.append((_stage(one), one))  # noqa: PERF401  where one fails, those before it are known
        for one in direct:
            _write_into(one)
        for temporary, one in staged:
            try:
                temporary.replace(_target(one))
            except OSError as error:
                raise _unwritable(one, error) from error
    finally:
        for temporary, _ in staged:
            temporary.unlink(missing_ok=True)


def _is_device(file: str) -> bool:
    """Whether it is there and neither file nor folder: a rename would put a file in the place of the device."""
    try:
        mode = Path(file).stat().st_mode
    except (OSError, ValueError):
        return False
    return not stat.S_ISREG(mode) and not stat.S_ISDIR(mode)


def _write_into(one: ToWrite) -> None:
    try:
        with Path(one.file).open("w", encoding="utf-8", newline="\n") as device:
            device.write(one.text)
    except BrokenPipeError:
        raise
    except OSError as error:
        raise _unwritable(one, error) from error


def _target(one: ToWrite) -> Path:
    return Path(os.path.realpath(one.file))


def _stage(one: ToWrite) -> Path:
    """The text in a file beside its target, of the target's mode."""
    target = _target(one)
    if target.is_dir():
        raise UsageError(f"{one.option} names a folder", file=one.file, remedy="name a file in it")
    try:
        # In the same folder, since only within one file system a rename replaces a file in one step.
        handle, name = tempfile.mkstemp(prefix=f".{target.name}.", dir=target.parent)
    except (OSError, ValueError) as error:
        raise _unwritable(one, error) from error
    try:
        with os.fdopen(handle, "w", encoding="utf-8", newline="\n") as file:
            file.write(one.text)
        Path(name).chmod(_mode(target))
    except OSError as error:
        Path(name).unlink(missing_ok=True)
        raise _unwritable(one, error) from error
    except BaseException:
        Path(name).unlink(missing_ok=True)
        raise
    return Path(name)


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


def _unwritable(one: ToWrite, error: OSError | ValueError) -> UsageError:
    return UsageError(
        f"{one.option} cannot be written ({getattr(error, 'strerror', None) or error})",
        file=one.file,
        remedy="name a file in a folder you may write to",
    )
