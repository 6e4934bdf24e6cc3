"""File names as URI references."""

from __future__ import annotations

from urllib.parse import unquote, urlsplit

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairrules.reports.file_uri import file_uri


@pytest.mark.parametrize(
    ("name", "uri"),
    [
        ("board.xml", "board.xml"),
        ("./boards/rev b.xml", "boards/rev%20b.xml"),
        ("../a#1?.xml", "../a%231%3F.xml"),
        ("c:board.xml", "c%3Aboard.xml"),
        ("Pegel/Boje µ.xml", "Pegel/Boje%20%C2%B5.xml"),
        ("100%.xml", "100%25.xml"),
        ("raw\udcff.xml", "raw%FF.xml"),
        ("lone\ud800.xml", "lone%ED%A0%80.xml"),
        ("/srv/boards/a b.xml", "file:///srv/boards/a%20b.xml"),
    ],
)
def test_encoded(name: str, uri: str) -> None:
    assert file_uri(name) == uri


@given(st.lists(st.text(st.characters(codec="utf-8", exclude_characters="/\0"), min_size=1), min_size=1, max_size=4))
def test_a_relative_name_comes_back_and_is_no_other_kind_of_reference(parts: list[str]) -> None:
    name = "/".join(part for part in parts if part != ".") or "x"
    uri = file_uri(name)
    split = urlsplit(uri)
    assert (split.scheme, split.netloc, split.query, split.fragment) == ("", "", "", "")
    assert unquote(uri) == name and uri.isascii()
