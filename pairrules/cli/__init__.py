"""The command line: one command a file, each imported only when it runs.

What is asked most and needs least, the version and the list of commands, is answered before the library for command
lines is imported: that takes as long as the interpreter's own start, several times over.
"""

from __future__ import annotations

import os
import sys

TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Sequence


def run(arguments: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit status; errors a user can mend become one line each on stderr."""
    from pairrules.cli.command_line import run as run_commands

    return run_commands(arguments)


def main() -> None:
    """Entry point."""
    # Sections are systems of a few hundred unknowns: threads of the linear algebra library cost more than they give.
    for name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ.setdefault(name, "1")
    told = _told(sys.argv[1:])
    if told:
        try:
            sys.stdout.write(told)
            sys.stdout.flush()
        except OSError:
            told = ""  # the command line knows what to say of that
        if told:
            return
    sys.exit(run())


def _told(words: list[str]) -> str:
    if words == ["--version"]:
        from pairrules import __version__

        return f"pairrules {__version__}\n"
    if words in (["--help"], ["-h"]):
        from pairrules.cli.overview import overview

        return overview()
    return ""
