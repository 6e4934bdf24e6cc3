"""A user's error as the lines stderr shows: one a fault, nothing in them that moves the cursor."""

from __future__ import annotations

import contextlib

import click

from pairrules.errors import SettingsError, UserError
from pairrules.reports.safe_text import safe


def error_lines(error: UserError) -> tuple[str, ...]:
    """One line for each fault of a settings file, one line for any other error."""
    faults = error.faults if isinstance(error, SettingsError) else (str(error),)
    return tuple(f"pairrules: {safe(' '.join(fault.split()))}" for fault in faults)


def say(line: str) -> None:
    """A line on stderr; where even that cannot be written, the exit status has to tell."""
    with contextlib.suppress(OSError):
        click.echo(line, err=True)
