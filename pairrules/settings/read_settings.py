"""Settings from their file and the rule sets it builds on.

A file builds on those it `extends`, in order, each laid over the ones before; the file itself lies on top. Without
`extends` it builds on the shipped set `base`; `extends: []` builds on nothing. A file reached twice counts once, where
it is first reached.
"""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from pairrules.settings.faults import Faults, nearest
from pairrules.settings.limit import Limit, RuleForm
from pairrules.settings.nodes import LARGEST_BYTES, Node, decode, parse
from pairrules.settings.one_file import OneFile, one_file
from pairrules.settings.pair_class import LimitsAndOff, PairClass, laid_over, limits_over, pins_over
from pairrules.settings.read_shape import Entry, read_shape
from pairrules.settings.settings import Settings
from pairrules.settings.settings_form import settings_form
from pairrules.settings.shapes import Table
from pairrules.shipped import rules_folder

__all__ = ["BASE", "FILE_NAME", "Settings", "find_settings", "read_settings", "settings_looked_for"]

FILE_NAME = "pairrules.yaml"
"""The name `find_settings` looks for."""

BASE = "base"
_DEFAULT_SEVERITY = "review"


def find_settings(board_path: Path) -> Path | None:
    """The `pairrules.yaml` nearest to a board: in its folder, or the nearest folder above that has one."""
    last = settings_looked_for(board_path)[-1]
    return last if last.is_file() else None


def settings_looked_for(board_path: Path) -> tuple[Path, ...]:
    """The places where `find_settings` looks, in order, up to the one that holds the file."""
    start = board_path.resolve()
    places = []
    for folder in (start, *start.parents):
        places.append(folder / FILE_NAME)
        if places[-1].is_file():
            break
    return tuple(places)


def read_settings(path: Path | None, *, forms: Mapping[str, RuleForm], text: str | None = None) -> Settings:
    """The settings of a file, merged with all it builds on.

    Parameters
    ----------
    path: the file; None for the shipped base set alone.
    forms: the rules that exist, and what a limit may say of each.
    text: the file's text where it is not to be read from `path` (which then only names it).

    Raises
    ------
    SettingsError: with all faults of all files of the chain.
    """
    chain = _Chain(settings_form(forms))
    if path is None and text is None:
        faults = Faults(f"{BASE}.yaml")
        chain.add_shipped(BASE, faults, None)
    else:
        named = Path("settings") if path is None else path
        faults = Faults(str(named))
        chain.add_own(named, faults, None, text)
    faults.raise_if_any()
    return _merged(chain.files, faults)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Read:
    content: OneFile
    faults: Faults


class _Chain:
    """The files in the order in which they are laid over one another."""

    def __init__(self, form: Table) -> None:
        self.files: list[_Read] = []
        self._form = form
        self._done: set[Path] = set()
        self._entered: list[Path] = []

    def add_shipped(self, name: str, faults: Faults, at: Node | None) -> None:
        folder = rules_folder()
        known = sorted(file.stem for file in folder.glob("*.yaml"))
        if name not in known:
            faults.add(
                f"extends the unknown rule set {name!r}", f"{nearest(name, known)}, or a path such as ./{name}.yaml", at
            )
            return
        self._add(folder / f"{name}.yaml", faults, faults.of_file(f"{name}.yaml"), at, None, shipped=True)

    def add_own(self, path: Path, faults: Faults, at: Node | None, text: str | None = None) -> None:
        self._add(path, faults, faults.of_file(str(path)), at, text, shipped=False)

    def _add(
        self, path: Path, asking: Faults, faults: Faults, at: Node | None, text: str | None, *, shipped: bool
    ) -> None:
        resolved = Path(os.path.realpath(path))  # Path.resolve stops with an error at links in a circle
        if resolved in self._entered:
            asking.add(f"extends {faults.file}, which builds on this file", "take one of the two out", at)
            return
        if resolved in self._done:
            return
        if text is None:
            text = _text_of(path, asking, faults, at)
        if text is None:
            return
        node = parse(text, faults)
        entry: Entry | None = None if node is None else read_shape(node, self._form, "", faults)
        if entry is None:
            return
        self._entered.append(resolved)
        self._read(entry, path.parent, faults, shipped=shipped)
        self._entered.pop()
        self._done.add(resolved)

    def _read(self, entry: Entry, folder: Path, faults: Faults, *, shipped: bool) -> None:
        content = one_file(entry, faults, folder=folder, shipped=shipped)
        if content.extends is None:
            if not (shipped and faults.file == f"{BASE}.yaml"):
                self.add_shipped(BASE, faults, None)
        else:
            for name, at in content.extends:
                if "/" in name or "\\" in name or name.endswith((".yaml", ".yml")):
                    self.add_own(folder / name, faults, at)
                else:
                    self.add_shipped(name, faults, at)
        self.files.append(_Read(content=content, faults=faults))


def _text_of(path: Path, asking: Faults, faults: Faults, at: Node | None) -> str | None:
    try:
        with path.open("rb") as stream:
            data = stream.read(LARGEST_BYTES + 1)
    except OSError as error:
        reason = "does not exist" if isinstance(error, FileNotFoundError) else "cannot be opened"
        if at is None:
            faults.add(reason, "give the path of a settings file")
        else:
            asking.add(f"extends {faults.file}, which {reason}", "mend the path; it is relative to this file", at)
        return None
    return decode(data, faults)


def _merged(files: list[_Read], faults: Faults) -> Settings:
    """All files in one, the last one uppermost."""
    merged = Settings()
    limits: LimitsAndOff = ({}, ())
    classes: dict[str, PairClass] = {}
    places: dict[str, tuple[Node, Faults]] = {}
    for read in files:
        own = read.content
        limits = limits_over(own.limits, limits)
        named = {one.name: _on_same_name(one, classes.get(one.name)) for one in own.classes}
        classes = named | {name: one for name, one in classes.items() if name not in named}
        places |= {name: (node, read.faults) for name, node in own.like_nodes}
        merged = replace(
            merged,
            stackup=merged.stackup if own.stackup is None else own.stackup,
            reference_nets=merged.reference_nets if own.reference_nets is None else own.reference_nets,
            pairs=own.pairs + merged.pairs,
            ignore=own.ignore + merged.ignore,
            part_values={**merged.part_values, **own.part_values},
            pin_lengths=pins_over(own.pin_lengths, merged.pin_lengths),
            waivers=merged.waivers if own.waivers is None else own.waivers,
            files=(*merged.files, read.faults.file),
        )
    resolved = _without_like(classes, places)
    faults.raise_if_any()
    general = {rule: _with_severity(limit, None) for rule, limit in limits[0].items()}
    return replace(merged, limits=general, classes=tuple(_with_severities(one, general) for one in resolved))


def _on_same_name(upper: PairClass, lower: PairClass | None) -> PairClass:
    """A class that stands in a lower file too: completed by it, its patterns included."""
    if lower is None:
        return upper
    return replace(laid_over(upper, lower), match=upper.match or lower.match, like=upper.like or lower.like)


def _without_like(classes: Mapping[str, PairClass], places: Mapping[str, tuple[Node, Faults]]) -> list[PairClass]:
    """Each class completed by the class it is like, and what that is like in turn."""
    found: list[PairClass] = []
    for name, one in classes.items():
        done, passed = one, [name]
        while passed[-1] in classes and (like := classes[passed[-1]].like):
            if like in passed or like not in classes:
                _note_like(like, passed, classes, places)
                break
            done = laid_over(done, classes[like])
            passed.append(like)
        found.append(done)
    return found


def _note_like(
    like: str, passed: list[str], classes: Mapping[str, PairClass], places: Mapping[str, tuple[Node, Faults]]
) -> None:
    """A fault at the class whose own `like` is wrong; those that only lead to it stay silent."""
    if like not in classes and len(passed) == 1:
        node, faults = places[passed[0]]
        others = [name for name in classes if name != passed[0]]
        faults.add(
            f"classes.{passed[0]}.like names the unknown class {like!r}",
            f"{nearest(like, others)}, or extend the rule set that has it",
            node,
        )
    elif like == passed[0]:
        node, faults = places[passed[0]]
        way = "itself" if len(passed) == 1 else f"itself by way of {', '.join(passed[1:])}"
        faults.add(f"classes.{passed[0]} is like {way}", "take one 'like' out", node)


def _with_severities(one: PairClass, general: Mapping[str, Limit]) -> PairClass:
    limits = {rule: _with_severity(limit, general.get(rule)) for rule, limit in one.limits.items()}
    return replace(one, limits=limits)


def _with_severity(limit: Limit, general: Limit | None) -> Limit:
    """The limit with the severity of the one for all pairs, or with the usual one, where it says none itself."""
    if limit.severity:
        return limit
    if general is None:
        return replace(limit, severity=_DEFAULT_SEVERITY, severity_place="default")
    return replace(limit, severity=general.severity, severity_place=general.severity_place or general.place)
