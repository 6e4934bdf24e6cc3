"""Test case 10 of the IPC-2581 consortium, where it lies beside the checkout: what its balanced pairs are is public."""

from pathlib import Path

import pytest

from pairrules.pairing.find_links import find_links
from pairrules.pairing.reference_nets import reference_nets

BOARD = Path(__file__).resolve().parents[2] / ".." / "shared" / "boards" / "case-10-assembly.xml"
LANES = (0, 1, 2, 3, 8, 9, 10, 11)


@pytest.mark.skipif(not BOARD.is_file(), reason="the consortium's test case 10 is not beside the checkout")
def test_seventeen_pairs() -> None:
    reader = pytest.importorskip("pairrules.readers.reader")
    board = reader.read_board(BOARD.read_bytes(), BOARD.name)
    found = find_links(board, reference=reference_nets(board, None))
    expected = sorted([f"LN{lane}_PAD_{way}" for lane in LANES for way in ("RX", "TX")] + ["REFCLK"])
    assert sorted(link.name for link in found.links) == expected
    assert (found.unpaired, found.missing) == ((), ())
    for link in found.links:
        assert link.missing == ()
        ends = board.parts[link.source].ref, board.parts[link.load].ref
        assert ends == (("U1", "J1") if link.name.endswith("TX") else ("J1", "U1"))
        series = [board.parts[part].ref[0] for step in link.series for part in (step.plus, step.minus)]
        assert series == (["C", "C"] if link.name.endswith("TX") else [])
        assert all(hop.start and hop.end for hop in (*link.hops_plus, *link.hops_minus))
