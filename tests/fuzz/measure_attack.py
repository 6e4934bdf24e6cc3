"""Runs the command line on files and tells the exit status, what it said, and by how much the memory's peak grew.

`python -m tests.fuzz.measure_attack FILE...` prints a JSON object a file. Each has a process of its own, forked after
sound boards were checked, so that the libraries are loaded and what remains is the file's own doing. A file is a board,
or, by the end of its name, settings or waivers of a small sound board.
"""

from __future__ import annotations

import contextlib
import io
import json
import os
import re
import resource
import shutil
import sys
import tempfile
import time
from pathlib import Path

from fixtures.boards import straight_pair
from fixtures.ipc2581_writer import to_ipc2581
from pairrules.cli import run
from pairrules.settings.waivers import FILE_NAME

SETTINGS, WAIVERS = ".settings.yaml", ".waivers.yaml"


def main() -> None:
    """Print one JSON object a file."""
    with tempfile.TemporaryDirectory() as folder, contextlib.redirect_stdout(io.StringIO()):
        for name, data in (
            ("b.json", json.dumps(straight_pair().board).encode()),
            ("b.xml", to_ipc2581(straight_pair().board)),
        ):
            path = Path(folder) / name
            path.write_bytes(data)
            run(["check", str(path), "--no-cache"])
    for path in sys.argv[1:]:
        sys.stdout.flush()
        child = os.fork()
        if not child:
            with tempfile.TemporaryDirectory() as folder:
                found = measured(path, command(path, Path(folder)))
            print(json.dumps(found), flush=True)
            os._exit(0)
        os.waitpid(child, 0)


def command(path: str, folder: Path) -> list[str]:
    """The command that a file is given to, in this process alone. Waivers lie beside their board, in the folder."""
    board = Path(path)
    if path.endswith((SETTINGS, WAIVERS)):
        board = folder / "board.json"
        board.write_text(json.dumps(straight_pair().board), encoding="utf-8")
    if path.endswith(WAIVERS):
        shutil.copy(path, folder / FILE_NAME)
    more = ["--settings", path] if path.endswith(SETTINGS) else []
    return ["check", str(board), "--no-cache", "--jobs", "1", *more]


def measured(path: str, arguments: list[str]) -> dict[str, int | float | str]:
    """What became of one file."""
    before = peak_kilobytes(anew=True)
    begun = time.process_time()
    said = io.StringIO()
    with contextlib.redirect_stderr(said), contextlib.redirect_stdout(io.StringIO()):
        status = run(arguments)
    seconds = time.process_time() - begun
    grown = (peak_kilobytes() - before) / 1024
    return {"file": path, "status": status, "said": said.getvalue(), "megabytes": grown, "seconds": seconds}


def peak_kilobytes(*, anew: bool = False) -> int:
    """Peak of the memory held; with `anew` it is first set back to what is held now, where the system can.

    Source: proc(5), `/proc/pid/clear_refs` and `VmHWM` in `/proc/pid/status`.
    """
    status = Path("/proc/self/status")
    if not status.exists():
        return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    if anew:
        Path("/proc/self/clear_refs").write_text("5", encoding="ascii")
    found = re.search(r"VmHWM:\s+([0-9]+) kB", status.read_text(encoding="ascii"))
    return int(found[1]) if found else resource.getrusage(resource.RUSAGE_SELF).ru_maxrss


if __name__ == "__main__":
    main()
