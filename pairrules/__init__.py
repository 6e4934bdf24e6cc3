"""Checks the balanced pairs of an exported board.

`pairrules.check(path, settings)` is the whole line from a board file to a `Result`, the same that the command line
runs. It is looked up when first used, so that `import pairrules` costs nothing.
"""

from __future__ import annotations

TYPE_CHECKING = False  # of `typing`, whose import takes longer than all of this
if TYPE_CHECKING:
    from typing import Any

    from pairrules.pipeline import check as check

__version__ = "0.1.0"
__all__ = ["__version__", "check"]


def __getattr__(name: str) -> Any:
    if name == "check":
        from pairrules.pipeline import check

        return check
    raise AttributeError(f"module 'pairrules' has no attribute {name!r}")
