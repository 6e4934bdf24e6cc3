"""The collector of cycles rests while a file is read, and only then."""

from __future__ import annotations

import gc

import pytest

from pairrules.readers.uncollected import uncollected


def test_it_rests_within_and_works_on_afterwards() -> None:
    assert gc.isenabled()
    with uncollected():
        assert not gc.isenabled()
    assert gc.isenabled()


def test_it_works_on_after_an_error() -> None:
    with pytest.raises(ValueError, match="broken"), uncollected():
        raise ValueError("broken")
    assert gc.isenabled()


def test_one_that_was_off_stays_off() -> None:
    gc.disable()
    try:
        with uncollected():
            pass
        assert not gc.isenabled()
    finally:
        gc.enable()
