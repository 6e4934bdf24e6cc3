"""The generator of big boards: the same bytes for a seed, and boards that mean what they seem to."""

from __future__ import annotations

import hashlib
from pathlib import Path

from pairrules.pipeline import check
from tests.bench.big_board import write_board
from tests.bench.sampled_gaps import read_segments, sampled_gaps


def test_the_same_seed_gives_the_same_bytes(tmp_path: Path) -> None:
    digests = []
    for number, seed in enumerate((1, 1, 2)):
        path = tmp_path / f"{number}.xml"
        write_board(path, pairs=3, seed=seed)
        digests.append(hashlib.sha256(path.read_bytes()).hexdigest())
    assert digests[0] == digests[1] != digests[2]


def test_every_pair_is_found_and_its_least_gap_agrees_with_sampling(tmp_path: Path) -> None:
    path = tmp_path / "board.xml"
    write_board(path, pairs=3)
    result = check(path, "")
    assert [pair.name for pair in result.pairs] == ["LINK0", "LINK1", "LINK2"]
    assert {pair.routed for pair in result.pairs} == {"complete"}
    assert result.board.missing == ()
    nets = read_segments(path)
    for pair in result.pairs:
        legs: list[dict[str, list[tuple[float, float, float, float, float]]]] = [{}, {}]
        for leg, names in zip(legs, (pair.nets_plus, pair.nets_minus), strict=True):
            for name in names:
                for layer, segments in nets[name].items():
                    leg.setdefault(layer, []).extend(segments)
        sampled = sampled_gaps(legs[0], legs[1])
        assert pair.measures.gap_min_mm is not None
        assert abs(pair.measures.gap_min_mm - sampled.least) < 0.001
        assert pair.measures.gap_median_mm is not None
        assert abs(pair.measures.gap_median_mm - sampled.median) < 0.001
        assert pair.measures.coupled_mm is not None
        assert abs(pair.measures.coupled_mm - sampled.coupled) < 0.01
