"""Waivers: findings that the project has decided to live with, each with its reason, its end and its copper."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date
from pathlib import Path

from pairrules.settings import nodes
from pairrules.settings.faults import Faults, nearest
from pairrules.settings.nodes import LARGEST_BYTES, decode, parse
from pairrules.settings.read_shape import Entry, read_shape
from pairrules.settings.shapes import Either, ListOf, Table, Text

FILE_NAME = "pairrules-waivers.yaml"
"""The name looked for beside the settings, or beside the board, where the settings name none."""

WAIVERS_FORM = ListOf(
    of=Table(
        keys={
            "rule": Text(),
            "pair": Either(scalar=Text(), nested=ListOf(of=Text(), least=2, most=2)),
            "reason": Text(),
            "who": Text(),
            "until": Text(),
            "fingerprint": Text(),
        },
        required=("rule", "pair", "reason", "until", "fingerprint"),
    ),
    least=0,
)
"""The form of the whole file: a list of waivers."""

FINGERPRINT = re.compile(r"[0-9]{1,8}:[0-9a-f-]+")
_DAY = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Waiver:
    """One waiver.

    Parameters
    ----------
    rule: the rule's name. pair: the pair's name or one of its nets; or two nets, one of each leg.
    reason: why the finding is lived with. who: whose decision it is, "" where not said.
    until: the last day it holds. fingerprint: of the finding it was given for.
    line: where it stands in its file, from 1; 0 where it stands in none.
    """

    rule: str
    pair: tuple[str, ...]
    reason: str
    who: str
    until: date
    fingerprint: str
    line: int = 0

    def means(self, name: str, nets_plus: Iterable[str], nets_minus: Iterable[str]) -> bool:
        """Whether it is of the pair with this name and these nets."""
        plus, minus = set(nets_plus), set(nets_minus)
        if len(self.pair) == 1:
            return self.pair[0] == name or self.pair[0] in plus | minus
        one, other = self.pair
        return (one in plus and other in minus) or (other in plus and one in minus)


def waivers_path(named: Path | None, settings: Path | None, board: Path) -> Path:
    """The waiver file: the one the settings name, else the one beside the settings, else beside the board.

    Where there is none yet, this is where a new one belongs.
    """
    if named is not None:
        return named
    folders = [path.parent for path in (settings, board) if path is not None]
    found = (folder / FILE_NAME for folder in folders if (folder / FILE_NAME).is_file())
    return next(found, folders[0] / FILE_NAME)


def read_waivers(path: Path, *, rules: Iterable[str], text: str | None = None) -> tuple[Waiver, ...]:
    """The waivers of a file, in its order; none where there is no file.

    Parameters
    ----------
    rules: names of the rules there are. text: the file's text where it is not to be read from `path`.

    Raises
    ------
    SettingsError: with all faults of the file.
    """
    faults = Faults(str(path))
    if text is None:
        text = waivers_text(path, faults)
    node = parse(text or "", faults)
    found: list[Waiver] = []
    if node is not None and not _says_nothing(node):
        entries: tuple[Entry, ...] = read_shape(node, WAIVERS_FORM, "waivers", faults) or ()
        known = sorted(rules)
        found = [waiver for entry in entries if (waiver := _waiver(entry, known, faults)) is not None]
        _refuse_twins(found, entries, faults)
    faults.raise_if_any()
    return tuple(found)


def _says_nothing(node: nodes.Node) -> bool:
    """A file that is empty, or all comments, is a table without entries to the parser, an empty document a text."""
    if isinstance(node, nodes.Mapping):
        return not node.entries
    return isinstance(node, nodes.Scalar) and node.empty


def waivers_text(path: Path, faults: Faults) -> str | None:
    """The file's text, "" where there is no file; a fault and `None` where it cannot be read."""
    try:
        with path.open("rb") as stream:
            data = stream.read(LARGEST_BYTES + 1)
    except FileNotFoundError:
        return ""
    except OSError:
        faults.add("cannot be opened", "give a file that may be read, or take `waivers` out of the settings")
        return None
    return decode(data, faults)


def _waiver(entry: Entry, rules: list[str], faults: Faults) -> Waiver | None:
    rule, until, mark = entry.get("rule"), entry.get("until"), entry.get("fingerprint")
    if rule is not None and rule not in rules:
        faults.add(f"{entry.path}.rule is {rule!r}, which is no rule", nearest(rule, rules), entry.nodes["rule"])
    day = None
    if until is not None:
        day = as_day(until)
        if day is None:
            faults.add(f"{entry.path}.until is {until!r}", "write a day, such as 2031-05-17", entry.nodes["until"])
    if mark is not None and not FINGERPRINT.fullmatch(mark):
        faults.add(
            f"{entry.path}.fingerprint is {mark!r}",
            "copy the fingerprint of the finding from the JSON result, or let `pairrules waive` write the waiver",
            entry.nodes["fingerprint"],
        )
    pair, reason = entry.get("pair"), entry.get("reason")
    if rule is None or pair is None or reason is None or day is None or mark is None:
        return None
    return Waiver(
        rule=rule,
        pair=(pair,) if isinstance(pair, str) else pair,
        reason=reason,
        who=entry.get("who") or "",
        until=day,
        fingerprint=mark,
        line=entry.node.line,
    )


def as_day(text: str) -> date | None:
    """The day a text such as "2031-05-17" means; `None` where it means none. Source: ISO 8601, extended format."""
    if not _DAY.fullmatch(text):
        return None
    try:
        return date.fromisoformat(text)
    except ValueError:
        return None


def _refuse_twins(found: list[Waiver], entries: tuple[Entry, ...], faults: Faults) -> None:
    places = {entry.node.line: entry for entry in entries}
    first: dict[tuple[str, tuple[str, ...]], Waiver] = {}
    for waiver in found:
        before = first.setdefault((waiver.rule, tuple(sorted(waiver.pair))), waiver)
        if before is not waiver:
            entry = places[waiver.line]
            faults.add(
                f"{entry.path} waives {waiver.rule} of {' and '.join(waiver.pair)} a second time",
                f"it is already in line {before.line}; keep one",
                entry.node,
            )
