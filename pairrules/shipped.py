"""Where the rule sets and the demo board that come with the package lie.

A wheel carries them inside the package; an editable install, an sdist and a plain checkout have them beside it.
"""

from __future__ import annotations

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent


def rules_folder() -> Path:
    """The folder of the shipped rule sets (`base.yaml` and others)."""
    return _first(_PACKAGE / "shipped" / "rules", _PACKAGE.parent / "rules")


def demo_folder() -> Path:
    """The folder of the demo board, in both formats."""
    return _first(_PACKAGE / "shipped" / "demo", _PACKAGE.parent / "fixtures" / "demo")


def _first(*candidates: Path) -> Path:
    for candidate in candidates:
        if candidate.is_dir():
            return candidate
    raise FileNotFoundError(f"the installation lacks {candidates[-1].name}; install pairrules again")
