"""A waiver written into the text of a waiver file, with all comments and the order of what stands there kept."""

from __future__ import annotations

import json
import re
from typing import Any

import yaml

from pairrules.settings.waivers import Waiver

_WORD = re.compile(r"[A-Za-z][A-Za-z0-9_-]*")
_NO_TEXT = {"y", "n", "yes", "no", "on", "off", "true", "false", "null"}
"""Words that YAML 1.1 takes for something else than a text."""

_KEYS = ("rule", "pair", "reason", "who", "until", "fingerprint")


def with_waiver(text: str, waiver: Waiver, place: int | None) -> str:
    """The text of the file with one more waiver, or with one that stands there renewed.

    Parameters
    ----------
    text: of a file that `read_waivers` takes. place: which waiver to renew, from 0; `None` for a new one at the end.

    Raises
    ------
    ValueError: where the text is laid out in a way that cannot be written into, such as a value that is an alias.
    """
    root: Any = yaml.compose(text, Loader=yaml.SafeLoader)
    values = {key: _written(waiver, key) for key in _KEYS if key != "who" or waiver.who}
    if place is None:
        return _appended(text, root, values)
    return _renewed(text, root.value[place], values)


def _written(waiver: Waiver, key: str) -> str:
    if key == "pair" and len(waiver.pair) > 1:
        return "[" + ", ".join(_quoted(name) for name in waiver.pair) + "]"
    if key == "until":
        return waiver.until.isoformat()
    if key in {"rule", "pair"}:
        return _quoted(waiver.rule if key == "rule" else waiver.pair[0])
    return json.dumps(getattr(waiver, key), ensure_ascii=False)


def _quoted(name: str) -> str:
    """A plain word as it is, anything else in double quotes. Source: a JSON string is a YAML 1.2 text (clause 1.3)."""
    plain = _WORD.fullmatch(name) and name.lower() not in _NO_TEXT
    return name if plain else json.dumps(name, ensure_ascii=False)


def _appended(text: str, root: Any, values: dict[str, str]) -> str:
    end = "\r\n" if "\r\n" in text else "\n"
    listed = isinstance(root, yaml.SequenceNode)
    if listed and root.flow_style:
        entry = "{" + ", ".join(f"{key}: {value}" for key, value in values.items()) + "}"
        close = root.end_mark.index - 1
        filled = bool(root.value) and not text[root.value[-1].end_mark.index : close].strip().startswith(",")
        return text[:close] + (", " if filled else "") + entry + text[close:]
    if text and not text.endswith(("\n", "\r")):
        text += end
    indent = " " * (root.start_mark.column if listed else 0)
    first, *others = (f"{key}: {value}" for key, value in values.items())
    lines = [f"{indent}- {first}", *(f"{indent}  {other}" for other in others)]
    return text + "".join(line + end for line in lines)


def _renewed(text: str, entry: Any, values: dict[str, str]) -> str:
    """Each value replaced where it stands, from the last to the first, so that earlier places stay where they are."""
    stands = {key.value: (key, value) for key, value in entry.value}
    edits: list[tuple[int, int, str]] = []
    for key, written in values.items():
        if key in {"rule", "pair"}:
            continue
        if key in stands:
            value = stands[key][1]
            if value.value != _meant(written):
                after = "\n" if getattr(value, "style", None) in {"|", ">"} else ""
                edits.append((value.start_mark.index, value.end_mark.index, written + after))
        elif entry.flow_style:
            at = stands["reason"][1].end_mark.index
            edits.append((at, at, f", {key}: {written}"))
        else:
            at = stands["reason"][0].start_mark
            edits.append((at.index, at.index, f"{key}: {written}\n{' ' * at.column}"))
    for start, stop, new in sorted(edits, reverse=True):
        text = text[:start] + new + text[stop:]
    return text


def _meant(written: str) -> str:
    return str(json.loads(written)) if written.startswith('"') else written
