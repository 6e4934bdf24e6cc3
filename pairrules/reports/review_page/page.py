"""The page as text: the template filled, with style, script and data inside it."""

from __future__ import annotations

import base64
import hashlib
import json
from importlib.resources import files
from typing import Any

from jinja2 import DictLoader, Environment, StrictUndefined
from markupsafe import Markup

from pairrules.reports.cautions import CAUTIONS
from pairrules.reports.review_page.page_data import board_record, in_order, limit_texts, pair_record
from pairrules.reports.safe_text import safe
from pairrules.result import Result
from pairrules.schemas.glossary import MODELS

SCRIPTS = ("elements", "decisions", "exports", "pair_order", "picture", "board_map", "charts", "details", "page")
"""Parts of the page's script in the order in which they build on one another; together one function's body."""

_UNSAFE_IN_SCRIPT = {ord(c): f"\\u{ord(c):04x}" for c in "<>&"}


def render(result: Result) -> str:
    """The page. It loads nothing, and runs no script but its own: its policy names that one by its digest.

    Source: W3C, Content Security Policy Level 3, 2.3.1 (hash sources).
    """
    folder = files("pairrules.reports.review_page")
    templates = {"page.html": (folder / "templates" / "page.html").read_text(encoding="utf-8")}
    environment = Environment(
        loader=DictLoader(templates), autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    style = (folder / "static" / "page.css").read_text(encoding="utf-8")
    parts = [(folder / "static" / f"{name}.js").read_text(encoding="utf-8") for name in SCRIPTS]
    script = '"use strict";\n(() => {\n' + "\n".join(parts) + "})();\n"
    pairs = in_order(result)
    limits = limit_texts(pairs)
    return environment.get_template("page.html").render(
        result=result,
        board=result.board,
        cautions=CAUTIONS,
        models=tuple(MODELS.values()),
        title=safe(result.board.name or result.board.file),
        safe=safe,
        # Our own files, not the board's: nothing in them to be escaped.
        style=Markup(style),
        script=Markup(script),
        style_hash=_digest(style),
        script_hash=_digest(script),
        board_json=as_json(board_record(result, pairs, limits)),
        pairs_json=[as_json(pair_record(pair, limits)) for pair in pairs],
    )


def as_json(record: dict[str, Any]) -> Markup:
    """JSON that can stand inside a script element: no character in it ends the element or opens another."""
    text = json.dumps(record, allow_nan=False, separators=(",", ":"))
    return Markup(text.translate(_UNSAFE_IN_SCRIPT))


def _digest(text: str) -> str:
    return "sha256-" + base64.b64encode(hashlib.sha256(text.encode("utf-8")).digest()).decode("ascii")
