"""One input through the whole command line, and what must hold of the outcome whatever the input is."""

from __future__ import annotations

import contextlib
import io
import json
import os
import resource
import signal
import sys
import time
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any, NoReturn

from pairrules.cli import run

STATUSES = (0, 1, 2, 3)
MOST_SECONDS = 10.0
"""Of the processor's time: far more than any of the small boards takes."""
MOST_MEGABYTES = 300.0
"""By which the peak of memory may grow while one input is checked."""

_WRITING = os.O_WRONLY | os.O_RDWR | os.O_CREAT | os.O_TRUNC | os.O_APPEND
_FORBIDDEN = frozenset({"os.system", "subprocess.Popen", "socket.connect", "os.exec", "os.fork", "os.posix_spawn"})
_MOVING = frozenset({"os.rename", "os.remove", "os.mkdir", "os.link", "os.symlink", "os.rmdir", "shutil.rmtree"})


class TooLong(BaseException):
    """Raised out of an input that takes too long; nothing in the program may catch it."""


@dataclass(frozen=True)
class Outcome:
    """What became of an input: exit status, text on stderr, `fault` where something that must hold does not."""

    status: int
    said: str
    seconds: float
    fault: str = ""


def outcome(
    folder: Path, board: bytes, *, settings: bytes | None = None, waivers: bytes | None = None, form: str = "json"
) -> Outcome:
    """Check a board in a folder of its own and say what became of it.

    A fault is: an exception that reaches the top, a status other than 0 to 3, too much time or memory, a file other
    than the output, a program or a connection opened, an output beside an error, a figure that is not finite.
    """
    folder.mkdir(parents=True, exist_ok=True)
    for left_over in folder.iterdir():
        left_over.unlink()
    path, out = folder / "board", folder / "out"
    path.write_bytes(board)
    arguments = ["check", str(path), "--no-cache", "--format", form, "--output", str(out)]
    if settings is not None:
        (folder / "settings.yaml").write_bytes(settings)
        arguments += ["--settings", str(folder / "settings.yaml")]
    if waivers is not None:
        (folder / "pairrules-waivers.yaml").write_bytes(waivers)
    given = sorted(folder.rglob("*"))
    stderr, stdout = io.StringIO(), io.StringIO()
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    begun = time.process_time()
    status = -1
    try:
        with (
            contextlib.redirect_stderr(stderr),
            contextlib.redirect_stdout(stdout),
            _Watch.over(folder) as touched,
            _bounded(MOST_SECONDS),
        ):
            status = run(arguments)
        fault = ""
    except TooLong:
        fault = f"takes longer than {MOST_SECONDS} s"
    except Exception as error:
        fault = f"{type(error).__name__}: {error} ({_raised_at(error)})"
    seconds = time.process_time() - begun
    grown = (resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - peak) / 1024
    said = stderr.getvalue()
    fault = fault or _fault(status, said, stdout.getvalue(), out, form)
    if not fault and grown > MOST_MEGABYTES:
        fault = f"takes {grown:.0f} MB"
    if not fault and touched:
        fault = f"touches {touched[0]}"
    left = set(folder.rglob("*")) - {*given, out}
    if not fault and left:
        fault = f"leaves {sorted(left)[0].name}"
    return Outcome(status=status, said=said, seconds=seconds, fault=fault)


def _fault(status: int, said: str, printed: str, out: Path, form: str) -> str:
    if status not in STATUSES:
        return f"ends with status {status}"
    if "Traceback" in said or printed:
        return "prints what it should not"
    lines = said.splitlines()
    if status in {2, 3}:
        if out.exists():
            return "leaves an output beside an error"
        if not lines or not all(line.startswith("pairrules: ") and line.isprintable() for line in lines):
            return f"says {said!r}"
        return ""
    if said:
        return f"says {said!r}"
    if not out.exists():
        return "leaves no output"
    return _not_finite(out.read_text(encoding="utf-8")) if form == "json" else ""


def _not_finite(text: str) -> str:
    def refuse(constant: str) -> NoReturn:
        raise ValueError(constant)

    def finite(number: str) -> float:
        value = float(number)
        if value in {float("inf"), float("-inf")}:
            raise ValueError(number)
        return value

    try:
        json.loads(text, parse_constant=refuse, parse_float=finite)
    except ValueError as error:
        return f"writes no finite figure: {error}"
    return ""


def _raised_at(error: BaseException) -> str:
    """The place in the program nearest to where an exception was raised, so that like faults are counted as one."""
    at = "?"
    step = error.__traceback__
    while step is not None:
        code = step.tb_frame.f_code
        if f"{os.sep}pairrules{os.sep}" in code.co_filename:
            at = f"{Path(code.co_filename).name}:{step.tb_lineno}"
        step = step.tb_next
    return at


@contextlib.contextmanager
def _bounded(seconds: float) -> Iterator[None]:
    def stop(*_: object) -> NoReturn:
        raise TooLong

    # Time of this process alone, so that a busy machine makes no fault.
    before = signal.signal(signal.SIGPROF, stop)
    signal.setitimer(signal.ITIMER_PROF, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0)
        signal.signal(signal.SIGPROF, before)


class _Watch:
    """Listens to what the interpreter opens and moves; installed once, since such a hook cannot be taken out again."""

    folder: str | None = None
    touched: tuple[list[str], ...] = ()
    installed = False

    @classmethod
    @contextlib.contextmanager
    def over(cls, folder: Path) -> Iterator[list[str]]:
        if not cls.installed:
            sys.addaudithook(cls.heard)
            cls.installed = True
        touched: list[str] = []
        cls.touched = (touched,)
        cls.folder = str(folder)
        try:
            yield touched
        finally:
            cls.folder = None

    @classmethod
    def heard(cls, event: str, arguments: tuple[Any, ...]) -> None:
        if cls.folder is None:
            return
        if event in _FORBIDDEN:
            cls.touched[0].append(event)
        elif event == "open":
            path, mode, flags = arguments
            writes = bool(flags & _WRITING) if isinstance(flags, int) else mode is not None and mode != "r"
            if writes and cls._outside(path):
                cls.touched[0].append(str(path))
        elif event in _MOVING:
            cls.touched[0].extend(str(one) for one in arguments if cls._outside(one))

    @classmethod
    def _outside(cls, path: object) -> bool:
        """Whether it is a path outside the case's folder; compiled modules are the interpreter's own affair."""
        if not isinstance(path, str | os.PathLike):
            return False
        text = os.fspath(path)
        inside = isinstance(text, str) and (text == cls.folder or text.startswith(f"{cls.folder}{os.sep}"))
        return not inside and "__pycache__" not in str(text)
