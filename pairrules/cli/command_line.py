"""The commands as a group, and what becomes of their errors.

`main` alone turns errors into lines and exit statuses: 0 nothing flagged, 1 something flagged, 2 wrong usage or
settings, 3 a board could not be read.
"""

from __future__ import annotations

import errno
import importlib
import os
import sys
from collections.abc import Sequence

import click

from pairrules import __version__
from pairrules.cli.error_lines import error_lines, say
from pairrules.cli.overview import commands, overview
from pairrules.errors import UserError

INTERRUPTED = 130
BROKEN_PIPE = 141
"""128 plus the number of the signal, as POSIX shells report them."""

_FULL = {errno.ENOSPC, errno.EDQUOT, errno.EFBIG, errno.EIO}
"""The medium takes no more, or fails."""


class LazyGroup(click.Group):
    """A group whose commands are imported when they are run."""

    def get_help(self, ctx: click.Context) -> str:
        """The same text that is told without this library."""
        return "" if ctx.resilient_parsing else overview().rstrip("\n")

    def list_commands(self, ctx: click.Context) -> list[str]:
        """The names, sorted."""
        del ctx
        return sorted(commands())

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """The command, or for the group's own help just its name and line."""
        if cmd_name not in commands():
            return None
        if ctx.resilient_parsing or not _runs(ctx, cmd_name):
            return click.Command(cmd_name, help=commands()[cmd_name])
        found: click.Command = importlib.import_module(f"pairrules.cli.{cmd_name}").command
        return found

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """Remember which command runs before it is looked up."""
        ctx.meta["pairrules.runs"] = args[0] if args else ""
        return super().resolve_command(ctx, args)


def _runs(ctx: click.Context, name: str) -> bool:
    return bool(ctx.meta.get("pairrules.runs") == name)


@click.group(cls=LazyGroup, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="pairrules", message="%(prog)s %(version)s")
def group() -> None:
    """All commands."""


def run(arguments: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit status; errors a user can mend become one line each on stderr."""
    try:
        # Not `group.main`, which takes a reader that has gone away for an exit status of 1.
        with group.make_context("pairrules", list(sys.argv[1:] if arguments is None else arguments)) as ctx:
            group.invoke(ctx)
        sys.stdout.flush()
    except click.exceptions.Exit as end:
        return _ended(end.exit_code)
    except click.exceptions.NoArgsIsHelpError as error:
        say(error.format_message())
        return 2
    except click.ClickException as error:
        say(_usage_line(error))
        return 2
    except UserError as error:
        for line in error_lines(error):
            say(line)
        return error.exit_status
    except (click.Abort, KeyboardInterrupt):
        say("pairrules: interrupted, nothing more is written")
        return INTERRUPTED
    except OSError as error:
        return _not_printed(error)
    return 0


def _ended(status: int) -> int:
    try:
        sys.stdout.flush()
    except OSError as error:
        return _not_printed(error)
    return status


def _not_printed(error: OSError) -> int:
    """The status where stdout's reader has gone, or its medium is full. Raises: any other error, which is ours."""
    if not isinstance(error, BrokenPipeError) and error.errno not in _FULL:
        raise error
    # Else the interpreter would complain when it flushes at exit.
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    if isinstance(error, BrokenPipeError):
        return BROKEN_PIPE
    say(f"pairrules: the output cannot be written ({(error.strerror or 'unknown reason').lower()}); make room for it")
    return 2


def _usage_line(error: click.ClickException) -> str:
    command = error.ctx.command_path if isinstance(error, click.UsageError) and error.ctx is not None else "pairrules"
    said = " ".join(error.format_message().split()).rstrip(".?")
    return f"{command}: {said[:1].lower()}{said[1:]}; see `{command} --help`"
