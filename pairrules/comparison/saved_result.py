"""A result read back from the JSON that a check wrote."""

from __future__ import annotations

import json
import math
from collections.abc import Callable
from typing import Any

from pairrules.errors import UsageError
from pairrules.result import (
    RESULT_VERSION,
    SEVERITIES,
    BalancePoint,
    BoardSummary,
    Finding,
    Measures,
    PairResult,
    Place,
    Result,
    SeriesPart,
    Unjudged,
)

MARK = "pairrules_result"
_AGAIN = "write it again with `pairrules check --format json`"
_VERDICTS = ("pass", "flag", "waived", "undecided")
_ROUTED = ("complete", "partial", "none")


def is_result(data: bytes) -> bool:
    """Whether a file looks like a saved result, and not like a board."""
    return data.lstrip(b"\xef\xbb\xbf \t\r\n")[:1] in {b"{", b"["} and f'"{MARK}"'.encode() in data


def read_result(data: bytes, name: str) -> Result:
    """The result in a file of JSON; what comparing does not need is left out.

    Raises
    ------
    UsageError: the file is damaged, of another version, or holds the results of several boards; with the place in it.
    """
    try:
        tree = json.loads(data.decode("utf-8-sig"), parse_constant=_no_number)
    except (ValueError, RecursionError) as error:
        raise UsageError("this is no whole JSON text", file=name, place=_line(error), remedy=_AGAIN) from None
    if isinstance(tree, list):
        if len(tree) != 1:
            raise UsageError(f"holds the results of {len(tree)} boards", file=name, remedy="give one board's result")
        tree = tree[0]
    top = _Table(tree, name, "")
    version = top.take(MARK, _integer)
    if version != RESULT_VERSION:
        raise UsageError(
            f"is a result of version {version}", file=name, place=MARK, remedy=f"version {RESULT_VERSION} is read here"
        )
    board = top.table("board")
    return Result(
        version=top.table("tool").take("version", _text),
        board=BoardSummary(
            file=board.take("file", _text),
            sha256=board.take("sha256", _text),
            format=board.take("format", _text),
            revision=board.take("revision", _text),
            units=board.take("units", _text),
            name=board.take("name", _text, ""),
            complete=board.take("complete", _flag),
            missing=board.texts("missing"),
        ),
        pairs=tuple(_pair(pair) for pair in top.tables("pairs")),
        unpaired=top.texts("unpaired"),
    )


def _pair(pair: _Table) -> PairResult:
    measures, known = pair.table("measures"), Measures.__dataclass_fields__
    whole = {"vias_plus", "vias_minus"}
    return PairResult(
        name=pair.take("name", _text),
        plus=pair.take("plus", _text),
        minus=pair.take("minus", _text),
        klass=pair.take("class", _maybe_text, None),
        found_by=pair.take("found_by", _text),
        nets_plus=pair.texts("nets_plus"),
        nets_minus=pair.texts("nets_minus"),
        source=pair.take("source", _text, ""),
        load=pair.take("load", _text, ""),
        series=tuple(
            SeriesPart(ref=one.take("ref", _text), value=one.take("value", _text), leg=one.take("leg", _text))
            for one in pair.tables("series", optional=True)
        ),
        routed=pair.word("routed", _ROUTED),
        verdict=pair.word("verdict", _VERDICTS),
        measures=Measures(
            **{key: measures.take(key, _maybe_integer if key in whole else _maybe_number, None) for key in known}
        ),
        balance=tuple(_balance(one) for one in pair.tables("balance")),
        findings=tuple(_finding(one) for one in pair.tables("findings")),
        unjudged=tuple(
            Unjudged(rule=one.take("rule", _text), missing=one.take("missing", _text))
            for one in pair.tables("unjudged", optional=True)
        ),
        missing=pair.texts("missing", optional=True),
        ends_plus=pair.texts("ends_plus", optional=True),
        ends_minus=pair.texts("ends_minus", optional=True),
    )


def _balance(row: _Table) -> BalancePoint:
    figures = (key for key in BalancePoint.__dataclass_fields__ if key != "frequency_hz")
    return BalancePoint(
        frequency_hz=row.take("frequency_hz", _number), **{key: row.take(key, _maybe_number, None) for key in figures}
    )


def _finding(one: _Table) -> Finding:
    return Finding(
        rule=one.take("rule", _text),
        severity=one.word("severity", SEVERITIES),
        measured=one.take("measured", _maybe_number),
        limit=one.take("limit", _maybe_number),
        unit=one.take("unit", _text),
        message=one.take("message", _text),
        advice=one.take("advice", _text),
        at=tuple(
            Place(layer=at.take("layer", _text), x_mm=at.take("x_mm", _number), y_mm=at.take("y_mm", _number))
            for at in one.tables("at")
        ),
        source=one.take("source", _text, ""),
        waived=one.take("waived", _flag),
        fingerprint=one.take("fingerprint", _text),
    )


_NEEDED = object()


class _Table:
    """An object of the JSON text that knows its place; whatever is amiss in it becomes one line."""

    def __init__(self, value: object, file: str, path: str) -> None:
        self._file, self._path = file, path
        if not isinstance(value, dict):
            raise self._amiss(path, "is no object")
        self._value = value

    def take(self, key: str, kind: Callable[[object], Any], absent: Any = _NEEDED) -> Any:
        """The member, made sure of by `kind`, which raises TypeError or ValueError with what is wrong."""
        if key not in self._value:
            if absent is _NEEDED:
                raise self._amiss(self._path, f"lacks {key!r}")
            return absent
        try:
            return kind(self._value[key])
        except (TypeError, ValueError) as error:
            raise self._amiss(self._below(key), str(error)) from None

    def word(self, key: str, words: tuple[str, ...]) -> str:
        """A text that is one of `words`."""
        text: str = self.take(key, _text)
        if text not in words:
            raise self._amiss(self._below(key), f"is {text!r}, none of {', '.join(words)}")
        return text

    def table(self, key: str) -> _Table:
        """A member that is an object."""
        return _Table(self.take(key, lambda value: value), self._file, self._below(key))

    def tables(self, key: str, *, optional: bool = False) -> list[_Table]:
        """A member that is a list of objects."""
        values = self.take(key, _list, [] if optional else _NEEDED)
        return [_Table(value, self._file, f"{self._below(key)}[{i}]") for i, value in enumerate(values)]

    def texts(self, key: str, *, optional: bool = False) -> tuple[str, ...]:
        """A member that is a list of texts."""
        values = self.take(key, _list, [] if optional else _NEEDED)
        if not all(isinstance(value, str) for value in values):
            raise self._amiss(self._below(key), "holds something else than texts")
        return tuple(values)

    def _below(self, key: str) -> str:
        return f"{self._path}.{key}" if self._path else key

    def _amiss(self, path: str, found: str) -> UsageError:
        return UsageError(found, file=self._file, place=path or "the result", remedy=_AGAIN)


def _text(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError("is no text")
    return value


def _maybe_text(value: object) -> str | None:
    return None if value is None else _text(value)


def _flag(value: object) -> bool:
    if not isinstance(value, bool):
        raise TypeError("is neither true nor false")
    return value


def _integer(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError("is no whole number")
    return value


def _maybe_integer(value: object) -> int | None:
    return None if value is None else _integer(value)


def _number(value: object) -> float:
    if not isinstance(value, int | float) or isinstance(value, bool):
        raise TypeError("is no number")
    try:
        number = float(value)
    except OverflowError:
        number = math.inf
    if not math.isfinite(number):
        raise ValueError("is no finite number")
    return number


def _maybe_number(value: object) -> float | None:
    return None if value is None else _number(value)


def _list(value: object) -> list[Any]:
    if not isinstance(value, list):
        raise TypeError("is no list")
    return value


def _no_number(text: str) -> float:
    raise ValueError(f"{text} is no number")


def _line(error: Exception) -> str:
    return f"line {error.lineno}" if isinstance(error, json.JSONDecodeError) else ""
