"""For all tests: drawn examples are the same on every run, and no test judges how long anything takes."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from hypothesis import settings

settings.register_profile("steady", deadline=None, derandomize=True)
settings.load_profile("steady")


@pytest.fixture(scope="session", autouse=True)
def _own_cache_folder(tmp_path_factory: pytest.TempPathFactory) -> Iterator[None]:
    """Nothing that a test does is kept for the next run, and nothing kept answers a test."""
    folder = str(tmp_path_factory.mktemp("cache"))
    with pytest.MonkeyPatch.context() as patch:
        for name in ("XDG_CACHE_HOME", "LOCALAPPDATA"):
            patch.setenv(name, folder)
        yield
