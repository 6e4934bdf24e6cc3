"""The hook of plain git: it checks what is staged and nothing else, and leaves nothing behind."""

from __future__ import annotations

import os
import shutil
import stat
import subprocess
import sys
from pathlib import Path

import pytest

from tests.cli.boards import limits, put

pytestmark = pytest.mark.skipif(
    shutil.which("git") is None or os.name == "nt", reason="git and a POSIX shell are needed"
)
ROOT = Path(__file__).resolve().parents[2]


class Repository:
    """A repository whose path has spaces and letters beyond ASCII."""

    def __init__(self, folder: Path) -> None:
        self.top = folder / "Boje Süd" / "tide gauge"
        self.top.mkdir(parents=True)
        self.scratch = folder / "scratch"
        self.scratch.mkdir()
        self.env = {
            **{name: value for name, value in os.environ.items() if not name.startswith("GIT_")},
            "GIT_CONFIG_GLOBAL": os.devnull,
            "GIT_CONFIG_SYSTEM": os.devnull,
            "GIT_AUTHOR_NAME": "a",
            "GIT_AUTHOR_EMAIL": "a@example.org",
            "GIT_COMMITTER_NAME": "a",
            "GIT_COMMITTER_EMAIL": "a@example.org",
            "TMPDIR": str(self.scratch),
            "PYTHONPATH": str(ROOT),
            "OPENBLAS_NUM_THREADS": "1",
        }
        self.run("git", "init", "-q")
        limits(self.top)

    def run(self, *words: str, at: Path | None = None) -> subprocess.CompletedProcess[str]:
        return subprocess.run(words, cwd=at or self.top, env=self.env, capture_output=True, text=True, check=False)

    def ours(self, *words: str, at: Path | None = None) -> subprocess.CompletedProcess[str]:
        return self.run(sys.executable, "-m", "pairrules", *words, at=at)

    def commit(self, *, at: Path | None = None) -> subprocess.CompletedProcess[str]:
        self.run("git", "add", "-A", at=at)
        return self.run("git", "commit", "-q", "-m", "board", at=at)


@pytest.fixture
def repository(tmp_path: Path) -> Repository:
    return Repository(tmp_path)


def test_a_flagged_board_stops_the_commit_and_a_mended_one_does_not(repository: Repository) -> None:
    assert repository.ours("hook", "install").returncode == 0
    folder = repository.top / "größe 1"
    folder.mkdir()
    put(folder, "bøye 2.json", bump=1.0)
    (repository.top / "package.json").write_text('{"name": "no board"}', encoding="utf-8")
    stopped = repository.commit()
    assert stopped.returncode == 1
    assert "leg-length" in stopped.stderr
    assert "größe 1/bøye 2.json" in stopped.stderr
    assert str(repository.scratch) not in stopped.stderr
    # What is staged counts, not what lies in the work tree.
    put(folder, "bøye 2.json", bump=0.1)
    assert repository.run("git", "commit", "-q", "-m", "board").returncode == 1
    assert repository.commit().returncode == 0
    put(folder, "bøye 2.json", bump=1.0)
    (repository.top / "note").write_text("x", encoding="utf-8")
    repository.run("git", "add", "note")
    assert repository.run("git", "commit", "-q", "-m", "note").returncode == 0
    assert list(repository.scratch.iterdir()) == []
    assert (
        repository.run("git", "status", "--porcelain").stdout.strip()
        == 'M "gr\\303\\266\\303\\237e 1/b\\303\\270ye 2.json"'
    )


def test_what_the_last_commit_held_already_does_not_stop(repository: Repository) -> None:
    put(repository.top, bump=1.0)
    assert repository.commit().returncode == 0
    assert repository.ours("hook", "install").returncode == 0
    put(repository.top, bump=1.0, name="buoy.json", outline=[[-5, -5], [30, -5], [30, 10], [-5, 10]])
    assert repository.commit().returncode == 0
    put(repository.top, bump=2.0)
    worse = repository.commit()
    assert worse.returncode == 1
    assert list(repository.scratch.iterdir()) == []


def test_an_earlier_hook_is_kept_called_and_put_back(repository: Repository) -> None:
    hooks = repository.top / ".git" / "hooks"
    hooks.mkdir(exist_ok=True)
    earlier = hooks / "pre-commit"
    earlier.write_text("#!/bin/sh\n[ ! -e stop ]\n", encoding="utf-8")
    earlier.chmod(0o755)
    for _ in range(2):
        assert repository.ours("hook", "install").returncode == 0
    put(repository.top)
    (repository.top / "stop").write_text("", encoding="utf-8")
    assert repository.commit().returncode == 1
    (repository.top / "stop").unlink()
    assert repository.commit().returncode == 0
    assert repository.ours("hook", "remove").returncode == 0
    assert earlier.read_text(encoding="utf-8") == "#!/bin/sh\n[ ! -e stop ]\n"
    assert earlier.stat().st_mode & stat.S_IXUSR
    assert sorted(path.name for path in hooks.iterdir() if "sample" not in path.name) == ["pre-commit"]
    again = repository.ours("hook", "remove")
    assert again.returncode == 2
    assert again.stderr == f"pairrules: {earlier}: there is no hook of pairrules; nothing need be done\n"


def test_worktrees_and_a_hooks_path_of_ones_own(repository: Repository) -> None:
    put(repository.top)
    repository.commit()
    repository.run("git", "config", "core.hooksPath", "meine haken")
    beside = repository.top.parent / "beside"
    assert repository.run("git", "worktree", "add", "-q", str(beside)).returncode == 0
    assert repository.ours("hook", "install", at=beside).returncode == 0
    assert (beside / "meine haken" / "pre-commit").is_file()
    put(beside, bump=1.0)
    repository.run("git", "add", "buoy.json", at=beside)
    assert repository.run("git", "commit", "-q", "-m", "board", at=beside).returncode == 1


def test_outside_a_repository(tmp_path: Path) -> None:
    repository = Repository(tmp_path)
    told = repository.ours("hook", "run", at=tmp_path)
    assert told.returncode == 2
    assert told.stderr.startswith("pairrules: git rev-parse failed: fatal: not a git repository")
    assert told.stderr.count("\n") == 1
