"""Every kind and key that settings know is understood by the models, and no model reads a key that settings refuse."""

from __future__ import annotations

from collections.abc import Iterator

import pytest

from pairrules.balance.cable import cable_elements
from pairrules.balance.load_models import load_model
from pairrules.balance.source_models import source_elements
from pairrules.settings.network_models import CABLE_FORM, LOAD_FORMS, SOURCE_FORMS
from pairrules.settings.shapes import Quantity, Table


class Watched(dict[str, float]):
    """Values that remember which keys were asked for."""

    def __init__(self, values: dict[str, float]) -> None:
        super().__init__(values)
        self.asked: set[str] = set()

    def __contains__(self, key: object) -> bool:
        self.asked.add(str(key))
        return super().__contains__(key)

    def __getitem__(self, key: str) -> float:
        self.asked.add(key)
        return super().__getitem__(key)

    def get(self, key: str, default: float = 0.0) -> float:  # type: ignore[override]
        self.asked.add(key)
        return super().get(key, default)


def keys(table: Table, prefix: str = "") -> Iterator[str]:
    for key, shape in table.keys.items():
        if isinstance(shape, Table):
            yield from keys(shape, f"{prefix}{key}.")
        elif isinstance(shape, Quantity):
            yield prefix + key


def values(table: Table) -> Watched:
    return Watched(dict.fromkeys(keys(table), 0.01))


SPREAD = {"tolerance"}
"""Of a source's or load's parts: what the tolerance study spreads, no part of the nominal network."""

ALIKE_IN_ALL_LOADS = {
    "line-receiver": {"capacitance"},
    "adc": {"across"},
    "instrumentation-amplifier": {"across"},
}
"""Keys of the one network these kinds share that settings do not offer for each."""


@pytest.mark.parametrize("kind", sorted(SOURCE_FORMS))
def test_sources(kind: str) -> None:
    given = values(SOURCE_FORMS[kind])
    source_elements(kind, given)
    one_leg = Watched({key: value for key, value in given.items() if key != "minus"})
    source_elements(kind, one_leg)
    assert given.asked | one_leg.asked == set(given) - SPREAD


@pytest.mark.parametrize("kind", sorted(LOAD_FORMS))
def test_loads(kind: str) -> None:
    given = values(LOAD_FORMS[kind])
    load_model(kind, given)
    read = given.asked - ALIKE_IN_ALL_LOADS.get(kind, set())
    assert read | SPREAD == set(given) | SPREAD


def test_cable() -> None:
    given = values(CABLE_FORM)
    cable_elements(given)
    assert given.asked == set(given)
