"""The glossary has every figure of a result, once, with its model and unit."""

from __future__ import annotations

from dataclasses import fields

from pairrules.result import BalancePoint, Measures
from pairrules.schemas.glossary import MODELS, glossary


def test_every_figure_and_no_other() -> None:
    names = [field.name for record in (Measures, BalancePoint) for field in fields(record)]
    assert sorted(glossary()) == sorted(names)


def test_every_definition_stands_for_itself_and_no_two_are_alike() -> None:
    definitions = [entry.definition for entry in glossary().values()]
    assert len(set(definitions)) == len(definitions)
    assert not [text for text in definitions if text.startswith("The same") or not text.endswith(".")]


def test_every_figure_rests_on_a_model_and_has_the_unit_its_name_ends_with() -> None:
    for entry in glossary().values():
        assert entry.model in MODELS
        assert bool(entry.unit) is not entry.name.startswith("vias")
    assert glossary()["loop_area_mm2"].unit == "mm²" and glossary()["inductance_mismatch_nh"].unit == "nH"


def test_every_model_says_where_it_holds_and_what_it_leaves_out() -> None:
    for model in MODELS.values():
        assert model.valid and model.assumes.endswith(".") and model.leaves_out.endswith(".")
        assert model.text.endswith(".") and not model.brief.endswith(".") and not model.source.endswith(".")
    assert {name for name, model in MODELS.items() if model.electrical} == {"balance", "electric-pickup", "sections"}
