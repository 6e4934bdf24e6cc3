"""Who may import whom, held against the syntax trees; and what starting the command line must not import."""

from __future__ import annotations

import ast
import json
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

PACKAGE = Path(__file__).resolve().parents[1] / "pairrules"

LEAVES = {"drawing", "errors", "result"}
"""The result's types, what is drawn, and the errors a user can cause: open to every room, themselves above none."""

ROOMS = {
    "board": set(),
    "readers": {"board"},
    "pairing": {"board"},
    "geometry": {"board", "pairing"},
    "fields": set(),
    "balance": {"board", "fields", "geometry", "pairing", "settings"},
    "checks": {"board", "balance", "fields", "geometry", "pairing", "settings"},
    "drawn": {"balance", "board", "checks", "geometry", "pairing", "settings"},
    "settings": {"board", "shipped"},
    "manual": {"board", "checks", "reports", "schemas", "settings", "shipped"},
    "reports": {"board", "schemas"},
    "schemas": set(),
    "shipped": set(),
    "errors": set(),
    "comparison": {"board", "reports"},
    "drawing": set(),
    "result": set(),
}
"""Each room and those below it. `cli`, `pipeline`, `running` and the package sit on top and may import everything."""

TOP = {"cli", "pipeline", "running", "__init__", "__main__"}

ONLY = {("reports", "board"): {"pairrules.board.coordinates", "pairrules.board.units"}}
"""Reports write coordinates in the file's units, but never see a board."""

SIBLINGS = ("readers", "reports")
"""Rooms whose members, one file or folder each, know nothing of each other but what the room itself provides."""

HEAVY = {"numpy", "shapely", "lxml", "yaml", "scipy"}


def modules() -> list[Path]:
    return sorted(PACKAGE.rglob("*.py"))


def imported(path: Path) -> Iterator[tuple[int, str]]:
    """Line and full name of every import, those inside functions too; of `from a import b` both a and a.b."""
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            yield from ((node.lineno, alias.name) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}:{node.lineno} is a relative import"
            yield node.lineno, node.module or ""
            if node.module == "pairrules":
                yield from ((node.lineno, f"pairrules.{alias.name}") for alias in node.names)


def room(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def ours() -> Iterator[tuple[Path, int, str]]:
    for path in modules():
        for line, name in imported(path):
            if name.startswith("pairrules."):
                yield path, line, name


def test_imports_go_down_the_table() -> None:
    wrong = []
    for path, line, name in ours():
        own, other = room(path), name.split(".")[1]
        if own in TOP or other == own or other in LEAVES or name == "pairrules.__version__":
            continue
        if other not in ROOMS[own] or name not in ONLY.get((own, other), {name}):
            wrong.append(f"{path.relative_to(PACKAGE)}:{line} imports {name}")
    assert wrong == []


def test_every_folder_has_its_place_in_the_table() -> None:
    assert {room(path) for path in modules()} <= ROOMS.keys() | TOP


def test_rules_import_no_rule() -> None:
    rules = {path.stem for path in (PACKAGE / "checks").glob("*.py") if "\nRULE = " in path.read_text(encoding="utf-8")}
    assert "leg_length" in rules
    wrong = [
        f"{path.name}:{line}"
        for path, line, name in ours()
        if room(path) == "checks" and name.removeprefix("pairrules.checks.") in rules
    ]
    assert wrong == []


@pytest.mark.parametrize(("folder", "constant"), [("readers", "\nREADER"), ("reports", "\nREPORT")])
def test_readers_and_reports_do_not_import_their_siblings(folder: str, constant: str) -> None:
    members = set()
    for path in sorted((PACKAGE / folder).iterdir()):
        top = path / "__init__.py" if path.is_dir() else path
        if top.suffix == ".py" and top.exists() and constant in top.read_text(encoding="utf-8"):
            members.add(path.stem)
    assert len(members) >= 1
    wrong = []
    for path, line, name in ours():
        parts = name.split(".")
        inside = path.relative_to(PACKAGE).parts
        if inside[0] != folder or parts[1] != folder or len(parts) < 3:
            continue
        if parts[2] in members and parts[2] != inside[1].removesuffix(".py"):
            wrong.append(f"{path.relative_to(PACKAGE)}:{line} imports {name}")
    assert wrong == []


def loaded(*arguments: str) -> set[str]:
    """Top packages that are loaded after the command line has run with these arguments."""
    code = (
        "import json, sys\n"
        "from pairrules.cli import run\n"
        f"run({list(arguments)!r})\n"
        "sys.stdout.flush()\n"
        "print('\\n' + json.dumps(sorted({name.split('.')[0] for name in sys.modules})))\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=PACKAGE.parent)
    return set(json.loads(done.stdout.splitlines()[-1]))


@pytest.mark.parametrize("arguments", [("--version",), ("--help",), ("schema", "board"), ("nonsense",)])
def test_light_commands_load_nothing_heavy(arguments: tuple[str, ...]) -> None:
    assert loaded(*arguments) & HEAVY == set()


def test_importing_the_package_loads_nothing_heavy_and_offers_check() -> None:
    code = "import sys, pairrules; print(sorted(sys.modules)); pairrules.check"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=PACKAGE.parent)
    names = {name.strip("'[] ").split(".")[0] for name in done.stdout.split(",")}
    assert names & (HEAVY | {"click"}) == set()


def test_a_check_answered_from_what_is_kept_loads_nothing_heavy(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for name in ("XDG_CACHE_HOME", "LOCALAPPDATA", "HOME"):
        monkeypatch.setenv(name, str(tmp_path))
    demo = str(PACKAGE.parent / "fixtures" / "demo" / "tide-gauge-buoy.json")
    arguments = ("check", demo, "--pair", "LINK_CLOCK", "--output", str(tmp_path / "out.txt"))
    assert loaded(*arguments) & HEAVY >= {"numpy", "shapely"}
    first = (tmp_path / "out.txt").read_bytes()
    assert loaded(*arguments) & HEAVY == set()
    assert (tmp_path / "out.txt").read_bytes() == first
