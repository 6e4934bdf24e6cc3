"""What has been read is freed: no more elements live than those of one record, however long the file is."""

from __future__ import annotations

import pytest

from pairrules.readers.ipc2581 import parsing
from pairrules.readers.ipc2581.element import Element
from tests.readers.ipc2581.documents import LAYERS, box, document, feature, line, read

MANY = 8000


def test_finished_elements_do_not_pile_up(monkeypatch: pytest.MonkeyPatch) -> None:
    live = most = 0

    class Counted(Element):
        """An element that is counted while it lives."""

        __slots__ = ()

        def __init__(self, tag: str, attributes: dict[str, str], line: int) -> None:
            nonlocal live, most
            super().__init__(tag, attributes, line)
            live += 1
            most = max(most, live)

        def __del__(self) -> None:
            nonlocal live
            live -= 1

    monkeypatch.setattr(parsing, "Element", Counted)
    silk = LAYERS + '<Layer name="SILK" layerFunction="SILKSCREEN" side="TOP" polarity="POSITIVE"/>'
    drawn = f'<LayerFeature layerRef="SILK">{feature(line((0, 0), (5, 0))) * MANY}</LayerFeature>'
    measured = (
        f"<DfxMeasurementList>{f'<DfxMeasurement>{box(0, 0, 1, 1)}</DfxMeasurement>' * MANY}</DfxMeasurementList>"
    )
    people = "<LogisticHeader>" + '<Person name="p"/>' * MANY + "</LogisticHeader>"
    sets = feature(line((0, 0), (1, 0))) * MANY
    board = read(document(sets, layers=silk, more_features=drawn + measured, bom=people))
    assert len(board.tracks) == MANY
    assert most < 100
