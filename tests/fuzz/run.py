"""Fuzzing by one command: `python tests/fuzz/run.py --count N --seed S`. Exit status 1 where a fault was found.

Each changed board goes through the whole command line in this process. Faults are told once a kind, with the number
that repeats the case (`--only`), and kept in `--keep`. Field solutions are kept from board to board, and but one board
in `--solve-every` has new sections solved in truth: the solver would take nine tenths of the time, and what a board
file can break lies before it. With `--atheris` the library of that name, where installed, chooses the changes.
"""

from __future__ import annotations

import argparse
import os
import sys
import tempfile
import time
from collections import Counter
from pathlib import Path
from random import Random
from typing import Any

for _threads in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS"):
    os.environ.setdefault(_threads, "1")
sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from pairrules import pipeline  # noqa: E402  the paths and threads come first
from pairrules.running import pair_stage  # noqa: E402
from tests.fuzz.corpus import Input, drawn  # noqa: E402
from tests.fuzz.one_input import Outcome, outcome  # noqa: E402

_MOST_KEPT = 20_000


def case(seed: int, number: int) -> Input:
    """The case of that number: all follows from the two."""
    return drawn(Random(f"{seed}:{number}"))


def main() -> int:
    """Run, tell what came of it."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--count", type=int, default=1000)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--first", type=int, default=0)
    parser.add_argument("--only", type=int, help="run the case of this number alone and say what became of it")
    parser.add_argument("--solve-every", type=int, default=10)
    parser.add_argument("--keep", type=Path, help="folder for the inputs of faults")
    parser.add_argument("--atheris", action="store_true")
    chosen = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        run = Run(Path(folder) / "case", chosen.keep, chosen.solve_every)
        if chosen.atheris:
            return guided(run, chosen.count, chosen.seed)
        numbers = range(chosen.first, chosen.first + chosen.count) if chosen.only is None else (chosen.only,)
        for number in numbers:
            found = run.one(f"{chosen.seed}-{number}", case(chosen.seed, number), number)
            if chosen.only is not None:
                print(found)
            elif run.done % 5000 == 0:
                print(run.told(), flush=True)
    print(run.told())
    return 1 if run.faults else 0


class Run:
    """A run: outcomes counted, faults told once a kind."""

    def __init__(self, folder: Path, keep: Path | None, solve_every: int) -> None:
        self.folder, self.keep, self.solve_every = folder, keep, max(1, solve_every)
        self.done = 0
        self.slowest = (0.0, "")
        self.statuses: Counter[int] = Counter()
        self.faults: Counter[str] = Counter()
        self.begun = time.perf_counter()
        self.solver = Sections()

    def one(self, name: str, given: Input, number: int) -> Outcome:
        """One case, `name` for messages."""
        self.solver.real = number % self.solve_every == 0
        found = outcome(self.folder, given.board, settings=given.settings, waivers=given.waivers, form=given.form)
        self.done += 1
        self.statuses[found.status] += 1
        self.slowest = max(self.slowest, (found.seconds, name))
        if found.fault:
            kind = found.fault
            if not self.faults[kind]:
                print(f"{name} ({given.form}): {kind}", flush=True)
                if self.keep is not None:
                    self.keep.mkdir(parents=True, exist_ok=True)
                    (self.keep / f"{name}.board").write_bytes(given.board)
                    for what, data in (("settings", given.settings), ("waivers", given.waivers)):
                        if data is not None:
                            (self.keep / f"{name}.{what}.yaml").write_bytes(data)
            self.faults[kind] += 1
        return found

    def told(self) -> str:
        """How far, with what outcomes."""
        rate = self.done / max(1e-9, time.perf_counter() - self.begun)
        statuses = ", ".join(f"{count} ended with {status}" for status, count in sorted(self.statuses.items()))
        slow = f"the slowest {self.slowest[1]} took {self.slowest[0]:.2f} s"
        return f"{self.done} cases ({rate:.0f}/s): {statuses}; {sum(self.faults.values())} faults; {slow}"


class Sections(dict[Any, Any]):
    """Field solutions kept over boards; where not `real`, one of a section with like conductors stands for a new one.

    Settings that were read before are kept too: they take a quarter of a small board's time.
    """

    def __init__(self) -> None:
        super().__init__()
        self.real = True
        self.likes: dict[tuple[str, ...], Any] = {}
        solve = pair_stage.electricals

        def electricals(*arguments: Any, **named: Any) -> Any:
            return solve(*arguments, **{**named, "store": self})

        pair_stage.electricals = electricals
        read, settings = pipeline.read_settings, dict[bytes, Any]()

        def read_settings(path: Path | None, **named: Any) -> Any:
            key = b"" if path is None else path.read_bytes()
            if key not in settings:
                if len(settings) > _MOST_KEPT // 100:
                    settings.clear()
                settings[key] = read(path, **named)
            return settings[key]

        pipeline.read_settings = read_settings

    def get(self, section: Any, default: Any = None) -> Any:
        found = super().get(section, default)
        return self.likes.get(_roles(section)) if found is None and not self.real else found

    def __setitem__(self, section: Any, solution: Any) -> None:
        self.likes.setdefault(_roles(section), solution)
        if len(self) < _MOST_KEPT:
            super().__setitem__(section, solution)


def _roles(section: Any) -> tuple[str, ...]:
    return tuple(one.role for one in section.conductors)


class Choices(Random):
    """Random choices that a string of bytes makes, so that a changed byte changes a choice; zeros after its end."""

    def __init__(self, data: bytes) -> None:
        super().__init__(0)
        self.data, self.place = data, 0

    def getrandbits(self, k: int, /) -> int:
        size = -(-k // 8)
        taken = self.data[self.place : self.place + size].ljust(size, b"\0")
        self.place += size
        return int.from_bytes(taken, "little") >> (8 * size - k)

    def random(self) -> float:
        return self.getrandbits(53) / 2**53


def guided(run: Run, count: int, seed: int) -> int:
    """Changes chosen by the library atheris from what they reach; it stops at the first fault and keeps its bytes."""
    try:
        import atheris
    except ImportError:
        print("atheris is not installed; `pip install atheris`, or leave --atheris out", file=sys.stderr)
        return 2

    def one(data: bytes) -> None:
        found = run.one(data.hex()[:40], drawn(Choices(data)), run.done)
        if found.fault:
            raise AssertionError(found.fault)

    atheris.instrument_all()
    atheris.Setup([sys.argv[0], f"-runs={count}", f"-seed={seed}", "-max_len=400", "-len_control=0"], one)
    atheris.Fuzz()
    return 0


if __name__ == "__main__":
    sys.exit(main())
