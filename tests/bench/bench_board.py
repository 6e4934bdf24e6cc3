"""How long whole checks of big boards take and what memory they need, as ratios to yardsticks of the same run.

    python -m tests.bench.bench_board                  the whole table, a few minutes
    python -m tests.bench.bench_board --pairs 100      smaller

Yardsticks: bare `lxml.etree.iterparse` of the same file, each element cleared; `python -c pass`; and for gaps a plain
script of lxml and shapely that samples (`sampled_gaps.py`). Ratios are of processor time, since a busy machine
stretches the clock; those of several processes, "as run" with as many as there are processors, and of starting up are
of the clock. Each figure is measured in a process of its own and is the least of `--repeat` runs. Nothing is asserted.
"""

from __future__ import annotations

import argparse
import json
import os
import resource
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

from tests.bench.big_board import write_board

ROOT = Path(__file__).resolve().parents[2]
DEMO = "fixtures/demo/tide-gauge-buoy.json"


# -- what is measured, each in a process of its own -------------------------------------------------------------------


def iterparse(path: str) -> dict[str, float]:
    """The yardstick for whole boards."""
    from lxml import etree

    with _Clock() as clock:
        for _, element in etree.iterparse(path):
            element.clear()
            while element.getprevious() is not None:
                del element.getparent()[0]
    return clock.told()


def whole(path: str, *, jobs: int | None = 1, solved: bool = True) -> dict[str, float]:
    """A whole check; without `solved`, the electrical stage is replaced by one that knows nothing.

    jobs: `None` for as many processes as the command takes by itself.
    """
    from pairrules import pipeline
    from pairrules.balance.pair_electrical import PairElectrical
    from pairrules.running import pair_stage, workers

    if not solved:
        unknown = PairElectrical(missing={"sections": "not asked for"})
        pair_stage.electricals = lambda _, pairs, **__: [unknown for _ in pairs]  # type: ignore[assignment]
        pair_stage.lacking = lambda _: "not asked for"  # type: ignore[assignment]
    pairs = _Clock()
    judge = workers.judge_links

    def timed(*arguments: Any, **options: Any) -> Any:
        with pairs:
            return judge(*arguments, **options)

    pipeline.judge_links = timed  # type: ignore[attr-defined]
    with _Clock() as clock:
        result = pipeline.check(path, "", jobs=jobs)
    return {**clock.told(), "pairs_cpu": pairs.cpu, "pairs_wall": pairs.wall, "pairs": len(result.pairs)}


def gaps(path: str) -> dict[str, float]:
    """Gaps of every pair, by the profile and by sampling, and how far they are apart."""
    from pairrules.geometry.board_copper import BoardCopper
    from pairrules.geometry.gap_figures import gap_figures
    from pairrules.geometry.leg_route import leg_route
    from pairrules.geometry.pair_geometry import LegRoute
    from pairrules.geometry.spacing_profile import spacing_profiles
    from pairrules.pairing.find_links import find_links
    from pairrules.pairing.reference_nets import reference_nets
    from pairrules.readers.reader import read_board
    from tests.bench.sampled_gaps import read_segments, sampled_gaps

    board = read_board(Path(path).read_bytes(), path)
    reference = reference_nets(board, None)
    links = find_links(board, listed=(), ignore=(), reference=reference).links
    index = BoardCopper(board, reference).index
    pairs = []
    for link in links:
        plus, minus = leg_route(board, index, link.hops_plus), leg_route(board, index, link.hops_minus)
        assert isinstance(plus, LegRoute)
        assert isinstance(minus, LegRoute)
        pairs.append((plus.pieces, minus.pieces))
    with _Clock() as ours:
        found = []
        for first in range(0, len(pairs), 16):
            some = pairs[first : first + 16]
            spacings = spacing_profiles(some, [None] * len(some))
            found += [(gap_figures(one.plus), gap_figures(one.minus)) for one in spacings]
    nets = read_segments(Path(path))
    with _Clock() as theirs:
        sampled = []
        for link in links:
            legs: list[dict[str, list[Any]]] = [{}, {}]
            for leg, hops in zip(legs, (link.hops_plus, link.hops_minus), strict=True):
                for hop in hops:
                    for layer, segments in nets[board.nets[hop.net]].items():
                        leg.setdefault(layer, []).extend(segments)
            sampled.append((sampled_gaps(legs[0], legs[1]), sampled_gaps(legs[1], legs[0])))
    both = [each for one, other in zip(found, sampled, strict=True) for each in zip(one, other, strict=True)]
    apart = {
        "least": max(abs((one.least or 0) - other.least) for one, other in both),
        "median": max(abs((one.median or 0) - other.median) for one, other in both),
        "coupled": max(abs(one.coupled_mm - other.coupled) for one, other in both),
    }
    return {"ours": ours.cpu, "theirs": theirs.cpu, "pairs": len(found), **apart}


class _Clock:
    """Processor time of this process and clock time of a stretch of work."""

    def __init__(self) -> None:
        self.cpu = self.wall = 0.0

    def __enter__(self) -> _Clock:
        self._cpu, self._wall = time.process_time(), time.perf_counter()
        return self

    def __exit__(self, *_: object) -> None:
        self.cpu, self.wall = time.process_time() - self._cpu, time.perf_counter() - self._wall

    def told(self) -> dict[str, float]:
        """Both, and the greatest memory so far [MB] of this process or one of its workers, what they share included."""
        most = max(resource.getrusage(who).ru_maxrss for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN))
        return {"cpu": self.cpu, "wall": self.wall, "memory": most / (1e6 if sys.platform == "darwin" else 1e3)}


MEASURED: dict[str, Callable[[str], dict[str, float]]] = {
    "iterparse": iterparse,
    "geometry": lambda path: whole(path, solved=False),
    "geometry as run": lambda path: whole(path, jobs=None, solved=False),
    "whole as run": lambda path: whole(path, jobs=None),
    "whole": whole,
    "two": lambda path: whole(path, jobs=2),
    "gaps": gaps,
}


# -- the table --------------------------------------------------------------------------------------------------------


def main() -> None:
    """Measure everything, or one thing in this process."""
    parser = argparse.ArgumentParser(description="Ratios of whole checks to yardsticks of the same run.")
    parser.add_argument("--pairs", type=int, default=400)
    parser.add_argument("--repeat", type=int, default=1)
    parser.add_argument("--growth", type=int, nargs=2, default=(50, 800), metavar=("FEW", "MANY"))
    parser.add_argument("--only", nargs=2, help=argparse.SUPPRESS)
    given = parser.parse_args()
    if given.only:
        print(json.dumps(MEASURED[given.only[0]](given.only[1])))
        return
    with tempfile.TemporaryDirectory() as folder:
        _table(Path(folder), given.pairs, given.growth, given.repeat)


def _table(folder: Path, pairs: int, growth: tuple[int, int], repeat: int) -> None:
    def measure(what: str, path: Path, by: str = "cpu") -> dict[str, float]:
        runs = [json.loads(_run("-m", "tests.bench.bench_board", "--only", what, str(path))[0]) for _ in range(repeat)]
        return min(runs, key=lambda told: told.get(by, 0.0))

    _start_up(folder, repeat)
    big = _board(folder, pairs)
    size = big.stat().st_size / 1e6
    print(f"\nboard of {pairs} pairs, {size:.1f} MB, in times of bare iterparse")
    bare = measure("iterparse", big, by="wall")
    _row("bare iterparse, clock", bare["wall"], "s", "")
    for what, told_as, target in (("geometry", "geometry rules", 5), ("whole", "with electrical", 8)):
        alone, told = measure(what, big), measure(f"{what} as run", big, by="wall")
        _row(f"{told_as}, clock, as run", told["wall"] / bare["wall"], "x", f"<= {target}")
        _row("  one process, processor time", alone["cpu"] / bare["cpu"], "x", "")
        _row("  of it the pairs", alone["pairs_cpu"] / bare["cpu"], "x", "")
        _row("  peak memory of a process", told["memory"], "MB", f"< {150 + 1.2 * size:.0f}")
    one, two = (measure(what, big, by="pairs_wall")["pairs_wall"] for what in ("whole", "two"))
    _row("--jobs 2 on the pairs, clock", one / two, "x", ">= 1.6")

    print(f"\nprocessor time a pair, from {growth[0]} to {growth[1]} pairs")
    for what in ("geometry", "whole"):
        few, many = (measure(what, _board(folder, count)) for count in growth)
        each = [told["pairs_cpu"] / told["pairs"] for told in (few, many)]
        _row(f"{what}: grows by", 100 * (each[1] / each[0] - 1), "%", "< 20")
        _row("  a pair", 1000 * each[1], "ms", "")

    print("\ngaps of 50 pairs, routes and profiles, against sampling every micrometre")
    told = measure("gaps", _board(folder, 50), by="ours")
    _row("as fast as sampling", told["theirs"] / told["ours"], "x", ">= 20")
    for name in ("least", "median", "coupled"):
        _row(f"  {name}: apart at most", 1000 * told[name], "um", "1" if name != "coupled" else "")


def _start_up(folder: Path, repeat: int) -> None:
    print("starting up, in times of `python -c pass`, clock, least of several")
    env = {"XDG_CACHE_HOME": str(folder / "cache")}
    ours = ("-m", "pairrules")
    _run(*ours, "check", DEMO, env=env, fails=True)
    times = {}
    for name, words in (
        ("pass", ("-c", "pass")),
        ("--version", (*ours, "--version")),
        ("--help", (*ours, "--help")),
        ("check, answered from what is kept", (*ours, "check", DEMO)),
    ):
        times[name] = min(_run(*words, env=env, fails=True)[1] for _ in range(10 * repeat))
    for name, target in (("--version", 4), ("--help", 4), ("check, answered from what is kept", 12)):
        _row(name, times[name] / times["pass"], "x", f"<= {target}")


def _board(folder: Path, pairs: int) -> Path:
    path = folder / f"{pairs}.xml"
    if not path.exists():
        write_board(path, pairs=pairs)
    return path


def _run(*words: str, env: dict[str, str] | None = None, fails: bool = False) -> tuple[str, float]:
    start = time.perf_counter()
    done = subprocess.run(
        [sys.executable, *words],
        cwd=ROOT,
        env={**os.environ, "OPENBLAS_NUM_THREADS": "1", **(env or {})},
        stdout=subprocess.PIPE,
        text=True,
        check=not fails,
    )
    return done.stdout, time.perf_counter() - start


def _row(what: str, value: float, unit: str, target: str) -> None:
    print(f"  {what:<36}{value:>10.2f} {unit:<4}{f'target {target}' if target else ''}", flush=True)


if __name__ == "__main__":
    main()
