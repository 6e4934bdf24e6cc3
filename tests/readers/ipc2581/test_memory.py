"""What has been read is freed: the tree holds what the parser has read ahead, however long the file is."""

from __future__ import annotations

from typing import Any

import pytest

from pairrules.readers.ipc2581 import file_content
from tests.readers.ipc2581.documents import LAYERS, box, document, feature, line, read

MANY = 8000

AHEAD = 32 * 1024 // len('<Person name="p"/>') + 2
"""The parser reads ahead a chunk of 32 KiB; so many of the shortest elements below stand in one."""


def test_finished_elements_do_not_pile_up(monkeypatch: pytest.MonkeyPatch) -> None:
    held: list[int] = []
    prune = file_content._Walk.prune

    def watched(walk: Any, place: int) -> None:
        node = walk.root
        while node is not None and len(node):
            held.append(len(node))
            node = node[-1]
        prune(walk, place)

    monkeypatch.setattr(file_content._Walk, "prune", watched)
    silk = LAYERS + '<Layer name="SILK" layerFunction="SILKSCREEN" side="TOP" polarity="POSITIVE"/>'
    drawn = f'<LayerFeature layerRef="SILK">{feature(line((0, 0), (5, 0))) * MANY}</LayerFeature>'
    measured = (
        f"<DfxMeasurementList>{f'<DfxMeasurement>{box(0, 0, 1, 1)}</DfxMeasurement>' * MANY}</DfxMeasurementList>"
    )
    people = "<LogisticHeader>" + '<Person name="p"/>' * MANY + "</LogisticHeader>"
    sets = feature(line((0, 0), (1, 0))) * MANY
    board = read(document(sets, layers=silk, more_features=drawn + measured, bom=people))
    assert len(board.tracks) == MANY
    assert max(held) <= AHEAD
