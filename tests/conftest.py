"""For all tests: drawn examples are the same on every run, and no test judges how long anything takes."""

from __future__ import annotations

from hypothesis import settings

settings.register_profile("steady", deadline=None, derandomize=True)
settings.load_profile("steady")
