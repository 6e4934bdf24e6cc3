"""Every command and what it does, read from the first lines of this folder's files, so that help imports none."""

from __future__ import annotations

import os

ABOUT = "Checks the balanced pairs of an exported board: geometry, impedance, rejection of common mode."
_OPENS, _NAMED = '"""`pairrules ', "`: "


def commands() -> dict[str, str]:
    """The commands by name, sorted, and the line that tells what each does."""
    folder = os.path.dirname(__file__)  # noqa: PTH120 - pathlib's import takes longer than all of this
    found = {}
    for name in sorted(os.listdir(folder)):  # noqa: PTH208
        if name.endswith(".py"):
            with open(os.path.join(folder, name), encoding="utf-8") as file:  # noqa: PTH118, PTH123
                line = file.readline()
            if line.startswith(_OPENS) and _NAMED in line:
                command, _, does = line.removeprefix(_OPENS).rstrip('"\n').partition(_NAMED)
                found[command] = does
    return found


def overview() -> str:
    """The text of `pairrules --help`."""
    every = commands()
    wide = max(map(len, every))
    lines = [
        "Usage: pairrules [OPTIONS] COMMAND [ARGS]...",
        "",
        f"  {ABOUT}",
        "",
        "Options:",
        "  --version   Show the version and exit.",
        "  -h, --help  Show this message and exit.",
        "",
        "Commands, each with its own --help:",
        *(f"  {name:<{wide}}  {does}" for name, does in every.items()),
    ]
    return "\n".join(lines) + "\n"
