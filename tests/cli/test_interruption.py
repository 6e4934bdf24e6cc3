"""Stopped by the user, a full disk, a pipe nobody reads, a locked folder: a clear line, nothing half-written."""

from __future__ import annotations

import ctypes
import os
import resource
import signal
import stat
import subprocess
import sys
import threading
from pathlib import Path

import pytest

from pairrules import pipeline
from pairrules.cli import output, run
from tests.cli.boards import put

ROOT = Path(__file__).resolve().parents[2]
FULL = Path("/dev/full")
BEFORE = "what stood here before\n"

WAITING = """
import signal, sys, time
# A shell that starts the tests in the background has interrupts ignored, and so do all their children.
signal.signal(signal.SIGINT, signal.default_int_handler)
import pairrules.cli, pairrules.cli.check as check
def judged(*_, **__):
    print("ready", flush=True)
    time.sleep(60)
check.judged = judged
sys.exit(pairrules.cli.run(sys.argv[1:]))
"""


def pairrules(*arguments: str, cwd: Path, **more: object) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "pairrules", *arguments, "--no-cache"]
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    return subprocess.run(  # type: ignore[call-overload,no-any-return]
        command, cwd=cwd, stderr=subprocess.PIPE, text=True, check=False, env=environment, **more
    )


def held(folder: Path) -> set[str]:
    return {path.name for path in folder.iterdir()}


def test_the_user_stops_it(tmp_path: Path) -> None:
    board, out = put(tmp_path, bump=1.0), tmp_path / "out.txt"
    out.write_text(BEFORE, encoding="utf-8")
    command = [sys.executable, "-c", WAITING, "check", str(board), "--output", str(out)]
    with subprocess.Popen(
        command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, cwd=ROOT, start_new_session=True
    ) as running:
        assert running.stdout is not None
        assert running.stdout.readline() == "ready\n"
        os.killpg(running.pid, signal.SIGINT)
        printed, said = running.communicate(timeout=60)
    assert (running.returncode, printed) == (130, "")
    assert said == "pairrules: interrupted, nothing more is written\n"
    assert out.read_text(encoding="utf-8") == BEFORE
    assert held(tmp_path) == {"buoy.json", "out.txt"}


def test_stopped_while_the_output_is_written(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    board, out = put(tmp_path, bump=1.0), tmp_path / "out.txt"
    out.write_text(BEFORE, encoding="utf-8")

    def stopped(_: Path) -> int:
        raise KeyboardInterrupt

    monkeypatch.setattr(output, "_mode", stopped)
    assert run(["check", str(board), "--no-cache", "--output", str(out)]) == 130
    assert capsys.readouterr().err == "pairrules: interrupted, nothing more is written\n"
    assert out.read_text(encoding="utf-8") == BEFORE
    assert held(tmp_path) == {"buoy.json", "out.txt"}


@pytest.mark.skipif(not FULL.is_char_device(), reason="this system has no device that is always full")
@pytest.mark.parametrize("arguments", [("check", "buoy.json"), ("check", "buoy.json", "--format", "json")])
def test_a_full_disk_behind_stdout(tmp_path: Path, arguments: tuple[str, ...]) -> None:
    put(tmp_path, bump=1.0)
    with FULL.open("w", encoding="utf-8") as full:
        done = pairrules(*arguments, cwd=tmp_path, stdout=full)
    assert done.stderr == "pairrules: the output cannot be written (no space left on device); make room for it\n"
    assert done.returncode == 2


@pytest.mark.skipif(not FULL.is_char_device(), reason="this system has no device that is always full")
def test_a_full_disk_behind_stderr_leaves_the_status(tmp_path: Path) -> None:
    command = [sys.executable, "-m", "pairrules", "check", "gone.json", "--no-cache"]
    with FULL.open("w", encoding="utf-8") as full:
        done = subprocess.run(command, cwd=ROOT, stdout=subprocess.PIPE, stderr=full, check=False)
    assert (done.returncode, done.stdout) == (3, b"")


@pytest.mark.skipif(not FULL.is_char_device(), reason="this system has no device that is always full")
def test_a_device_is_written_into_and_stays_a_device(tmp_path: Path) -> None:
    put(tmp_path, bump=1.0)
    done = pairrules("check", "buoy.json", "--output", str(FULL), cwd=tmp_path, stdout=subprocess.PIPE)
    assert done.stderr == (
        "pairrules: /dev/full: --output cannot be written (No space left on device); "
        "name a file in a folder you may write to\n"
    )
    assert (done.returncode, done.stdout) == (2, "")
    assert FULL.is_char_device()


def test_a_file_that_may_not_grow(tmp_path: Path) -> None:
    """As on a disk that fills up half-way: the old file stays, nothing else is left."""
    put(tmp_path, bump=1.0)
    out = tmp_path / "out.json"
    out.write_text(BEFORE, encoding="utf-8")
    done = pairrules(
        "check", "buoy.json", "--format", "json", "--output", "out.json", cwd=tmp_path, stdout=subprocess.PIPE,
        preexec_fn=lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (1000, 1000)),
    )  # fmt: skip
    assert done.stderr == (
        "pairrules: out.json: --output cannot be written (File too large); name a file in a folder you may write to\n"
    )
    assert (done.returncode, done.stdout) == (2, "")
    assert out.read_text(encoding="utf-8") == BEFORE
    assert held(tmp_path) == {"buoy.json", "out.json"}


@pytest.mark.parametrize("arguments", [("check", "buoy.json", "--format", "json"), ("measure", "buoy.json")])
def test_a_pipe_that_nobody_reads(tmp_path: Path, arguments: tuple[str, ...]) -> None:
    put(tmp_path, bump=1.0)
    reading, writing = os.pipe()
    os.close(reading)
    try:
        done = pairrules(*arguments, cwd=tmp_path, stdout=writing)
    finally:
        os.close(writing)
    assert (done.returncode, done.stderr) == (141, "")


def test_a_named_pipe_gets_the_whole_text_and_stays_a_pipe(tmp_path: Path) -> None:
    put(tmp_path, bump=1.0)
    pipe, got = tmp_path / "pipe", list[str]()
    os.mkfifo(pipe)
    reader = threading.Thread(target=lambda: got.append(pipe.read_text(encoding="utf-8")))
    reader.start()
    done = pairrules("check", "buoy.json", "--output", "pipe", cwd=tmp_path, stdout=subprocess.PIPE)
    reader.join(timeout=60)
    assert (done.returncode, done.stderr) == (0, "")
    assert got[0] == pairrules("check", "buoy.json", cwd=tmp_path, stdout=subprocess.PIPE).stdout
    assert stat.S_ISFIFO(pipe.stat().st_mode)


def test_a_link_stays_a_link(tmp_path: Path) -> None:
    put(tmp_path, bump=1.0)
    (tmp_path / "kept").mkdir()
    (tmp_path / "out.txt").symlink_to("kept/real.txt")
    assert run(["check", str(tmp_path / "buoy.json"), "--no-cache", "--output", str(tmp_path / "out.txt")]) == 0
    assert (tmp_path / "out.txt").is_symlink()
    assert (tmp_path / "kept" / "real.txt").read_text(encoding="utf-8").startswith(str(tmp_path))
    assert held(tmp_path / "kept") == {"real.txt"}


def without_privilege(arguments: list[str]) -> int:
    """Run the command in a child process that may write only where modes allow it. Returns: the exit status.

    Root may write anywhere by one capability, CAP_DAC_OVERRIDE, which the child gives up; what it is to read may lie in
    folders of root's own, so it stays root. Source: capabilities(7), capset(2).
    """
    sys.stdout.flush()
    child = os.fork()
    if not child:
        status = 99
        try:
            if os.geteuid() == 0:
                libc = ctypes.CDLL(None, use_errno=True)
                version, sets = (ctypes.c_uint32 * 2)(0x20080522, 0), (ctypes.c_uint32 * 6)()
                assert libc.capget(version, sets) == 0
                sets[0] &= ~(1 << 1)
                assert libc.capset(version, sets) == 0
            status = run(arguments)
        finally:
            sys.stdout.flush()
            sys.stderr.flush()
            os._exit(status)
    return os.waitstatus_to_exitcode(os.waitpid(child, 0)[1])


@pytest.mark.skipif(os.geteuid() == 0 and sys.platform != "linux", reason="root may write anywhere")
def test_a_folder_that_may_not_be_written(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    board, folder = put(tmp_path), tmp_path / "locked"
    folder.mkdir(mode=0o555)
    out = folder / "out.txt"
    assert without_privilege(["check", str(board), "--no-cache", "--jobs", "1", "--output", str(out)]) == 2
    assert capfd.readouterr() == (
        "",
        f"pairrules: {out}: --output cannot be written (Permission denied); name a file in a folder you may write to\n",
    )
    assert held(folder) == set()


def test_a_folder_that_is_none(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    board = put(tmp_path)
    out = board / "out.txt"
    assert run(["check", str(board), "--no-cache", "--output", str(out)]) == 2
    assert capsys.readouterr() == (
        "",
        f"pairrules: {out}: --output cannot be written (Not a directory); name a file in a folder you may write to\n",
    )


@pytest.mark.skipif(not Path("/dev/zero").is_char_device(), reason="this system has no device without end")
def test_a_device_is_no_board(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "/dev/zero", "--no-cache"]) == 3
    assert capsys.readouterr().err == "pairrules: /dev/zero: this is a device, not a file; name the board file\n"


def test_a_file_beyond_any_board(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    board = put(tmp_path)
    monkeypatch.setattr(pipeline, "MOST_BYTES", 100)
    assert run(["check", str(board), "--no-cache"]) == 3
    said = "the file is larger than 0 GB; export the board by itself, not a panel or an archive of many"
    assert capsys.readouterr().err == f"pairrules: {board}: {said}\n"
