"""The shipped schemas: sound, described, and of one mind with the reader."""

from __future__ import annotations

import json

import pytest
from jsonschema import Draft202012Validator

from pairrules.schemas import SCHEMAS, schema_text
from tests.readers.plain_json_cases import BAD, GOOD, Bad

BOARD = Draft202012Validator(json.loads(schema_text("board")))


def test_the_two_interfaces_have_one() -> None:
    assert {"board", "result"} <= set(SCHEMAS)
    assert list(SCHEMAS) == sorted(SCHEMAS)


@pytest.mark.parametrize("name", SCHEMAS)
def test_schema_is_sound_and_described(name: str) -> None:
    schema = json.loads(schema_text(name))
    Draft202012Validator.check_schema(schema)
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    assert schema["title"]
    assert schema["description"]


def test_no_schema_of_that_name() -> None:
    with pytest.raises(KeyError, match="bard"):
        schema_text("bard")


@pytest.mark.parametrize("name", GOOD)
def test_what_the_reader_takes_the_schema_takes(name: str) -> None:
    BOARD.validate(GOOD[name]())


@pytest.mark.parametrize("case", BAD, ids=[case.name for case in BAD])
def test_what_the_reader_refuses_the_schema_refuses_where_it_can(case: Bad) -> None:
    # The other way round too: where a case says that the schema cannot tell, it must not.
    assert BOARD.is_valid(case.tree()) is not case.schema
