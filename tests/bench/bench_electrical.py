"""Benchmark of the electrical stage: a board of many pairs, its sections solved once each, its links solved by cause.

    OPENBLAS_NUM_THREADS=1 python -m tests.bench.bench_electrical [--pairs 200]

Reading and geometry are done before the clock starts. Then the stage runs twice over all pairs: with an empty store of
sections, and with the store filled; the difference is what solving costs. Nothing is asserted.
"""

from __future__ import annotations

import argparse
import tempfile
import time
from pathlib import Path

from pairrules.balance.electrical import electricals
from pairrules.balance.section_store import Store
from pairrules.fields.solve import solve_section
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.measure import measure_link
from pairrules.pairing.find_links import find_links
from pairrules.pairing.reference_nets import reference_nets
from pairrules.readers.reader import read_board
from pairrules.settings.network_models import LoadSpec, SourceSpec
from pairrules.settings.pair_class import PairClass
from tests.bench.big_board import write_board

LANE = PairClass(
    name="lane",
    place="benchmark",
    source=SourceSpec(kind="line-driver", values={"resistance": 50.0, "mismatch": 0.05}),
    load=LoadSpec(kind="line-receiver", values={"resistance": 50e3, "across": 100.0}),
    frequencies=(1e6, 1e8, 1e9),
)

SHARE = 16
"""So many links are judged at once in a run."""


def main() -> None:
    """Time the stage."""
    parser = argparse.ArgumentParser(description="time the electrical stage")
    parser.add_argument("--pairs", type=int, default=200)
    given = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "board.xml"
        write_board(path, pairs=given.pairs, background=4)
        board = read_board(path.read_bytes(), path.name)
    reference = reference_nets(board, None)
    links = find_links(board, reference=reference).links
    copper = BoardCopper(board, reference)
    measured = [measure_link(board, link, reach_mm=None, reference=reference, copper=copper) for link in links]
    asked = [(link, geometry, LANE) for link, geometry in zip(links, measured, strict=True)]
    shares = [asked[i : i + SHARE] for i in range(0, len(asked), SHARE)]
    store: Store = {}
    spent = []
    for _ in range(2):
        begun = time.perf_counter()
        found = [figures for share in shares for figures in electricals(board, share, copper=copper, store=store)]
        spent.append(time.perf_counter() - begun)
    sections = list(store)
    begun = time.perf_counter()
    for section in sections:
        solve_section(section)
    together = time.perf_counter() - begun
    figured = sum(figures.impedance_diff_ohm is not None for figures in found)
    print(f"{len(links)} links, {figured} with figures, {len(sections)} distinct sections")
    print(f"stage, empty store    {spent[0]:7.2f} s  {1e3 * spent[0] / len(links):6.1f} ms a link")
    print(f"stage, filled store   {spent[1]:7.2f} s  {1e3 * spent[1] / len(links):6.1f} ms a link")
    print(f"sections in one batch {together:7.2f} s  {1e3 * together / len(sections):6.1f} ms a section")


if __name__ == "__main__":
    main()
