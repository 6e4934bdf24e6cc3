"""Pairs measured many in one pass come out as when each is measured alone."""

from __future__ import annotations

from dataclasses import fields, is_dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from pairrules.board import Tracks
from pairrules.geometry import measure
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.legs import laid_out
from pairrules.geometry.measure import Asked, measure_links
from pairrules.geometry.pair_geometry import TRACK, Pieces
from pairrules.pairing.find_links import find_links
from pairrules.pairing.reference_nets import reference_nets
from pairrules.readers.reader import read_board

DEMO = Path(__file__).resolve().parents[2] / "fixtures" / "demo" / "tide-gauge-buoy.json"


def same(one: Any, other: Any, where: str) -> None:
    assert type(one) is type(other), where
    if is_dataclass(one):
        for field in fields(one):
            same(getattr(one, field.name), getattr(other, field.name), f"{where}.{field.name}")
    elif isinstance(one, np.ndarray):
        assert one.shape == other.shape, where
        if one.dtype.kind == "f":
            assert np.allclose(one, other, rtol=0.0, atol=1e-9, equal_nan=True), where
        else:
            assert np.array_equal(one, other), where
    elif isinstance(one, float):
        assert one == pytest.approx(other, abs=1e-9), where
    elif isinstance(one, tuple):
        assert len(one) == len(other), where
        for place, (a, b) in enumerate(zip(one, other, strict=True)):
            same(a, b, f"{where}[{place}]")
    else:
        assert one == other, where


@pytest.mark.parametrize("at_once", [4_000.0, 60.0])
def test_pairs_of_the_demo_board(at_once: float, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(measure, "LONGEST_PASS_MM", at_once)
    board = read_board(DEMO.read_bytes(), "demo")
    reference = reference_nets(board, None)
    links = find_links(board, listed=(), ignore=(), reference=reference).links
    kept = board.tracks.net != links[3].plus  # a leg that is not whole, among others that are
    columns = {one.name: getattr(board.tracks, one.name)[kept] for one in fields(Tracks)}
    board = replace(board, tracks=Tracks(**columns))
    copper = BoardCopper(board, reference)
    asked = [Asked(link=link, reach_mm=None if i % 2 else 0.4, beside=i % 3 != 0) for i, link in enumerate(links)]
    together = measure_links(board, asked, copper=copper)
    assert sum(found.routed == "complete" for found in together) > 5
    assert any(found.routed != "complete" for found in together)
    assert any(found.neighbours_plus is not None for found in together)
    for one, found in zip(asked, together, strict=True):
        (alone,) = measure_links(board, [one], copper=copper)
        same(found, alone, one.link.name)


def pieces(*lengths: float) -> Pieces:
    ends = np.cumsum([0.0, *lengths])
    at = np.column_stack([ends, np.zeros(len(ends))])
    count = len(lengths)
    return Pieces(
        start=at[:-1],
        end=at[1:],
        centre=np.full((count, 2), np.nan),
        sweep=np.zeros(count),
        width=np.full(count, 0.1),
        layer=np.zeros(count, dtype=np.int64),
        kind=np.full(count, TRACK),
        length=np.array(lengths),
    )


def test_lengths_are_summed_within_each_leg() -> None:
    legs = laid_out([pieces(), pieces(1.0, 2.0, 3.0), pieces(), pieces(5.0), pieces(7.0, 1.0)])
    assert legs.before(legs.pieces.length).tolist() == [0.0, 1.0, 3.0, 0.0, 0.0, 7.0]
    assert legs.leg.tolist() == [1, 1, 1, 3, 4, 4]
    assert legs.spans(np.array([0, 0, 2, 3, 5])) == [(0, 0), (0, 3), (3, 3), (3, 4), (4, 5)]
