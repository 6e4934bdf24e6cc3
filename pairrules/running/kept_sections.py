"""A store of solved sections that knows those of earlier runs: the same figures to the last bit, without solving.

A section is known by all of its rounded dimensions and materials, the solver's form and whatever else its figures rest
on. The file is read when the first section is asked for.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Mapping, MutableMapping

import msgspec
import numpy as np

from pairrules.balance.section_store import SectionMatrices, Store
from pairrules.board.columns import Floats
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.loss import SkinIntegrals
from pairrules.running.section_file import SectionFile

SOLVER_FORM = 1
"""To be raised when what is kept of a section, or what its numbers mean, changes."""


class _Skin(msgspec.Struct, array_like=True, frozen=True):
    legs: list[float]
    grounded: list[float]
    direct: list[float]
    why_nan: list[str]


class _Solved(msgspec.Struct, array_like=True, frozen=True):
    """`SectionMatrices` as plain numbers; matrices row by row."""

    C: list[float]
    L: list[float]
    loss: list[float]
    diff: float | None
    common: float | None
    delay: float
    skin: _Skin | None
    coupling: list[list[float]]


_DECODER = msgspec.msgpack.Decoder(_Solved | str)


class KeptSections(MutableMapping[CrossSection, SectionMatrices | str]):
    """The store. rests_on: what the figures rest on beside the sections, such as the version of the tool."""

    def __init__(self, file: SectionFile, rests_on: str) -> None:
        self._file = file
        self._rests_on = hashlib.sha256(f"{SOLVER_FORM} {np.__version__} {rests_on}".encode()).digest()
        self._known: dict[CrossSection, SectionMatrices | str] = {}
        self._kept: dict[bytes, bytes] | None = None
        self._new: dict[bytes, bytes] = {}

    def __getitem__(self, section: CrossSection) -> SectionMatrices | str:
        found = self._known.get(section)
        if found is None:
            if self._kept is None:
                self._kept = self._file.read()
            found = self._known[section] = _decoded(self._kept[self._key(section)], section)
        return found

    def __setitem__(self, section: CrossSection, matrices: SectionMatrices | str) -> None:
        self._known[section] = matrices
        self._new[self._key(section)] = _encoded(matrices)

    def __delitem__(self, section: CrossSection) -> None:
        del self._known[section]
        self._new.pop(self._key(section), None)

    def __iter__(self) -> Iterator[CrossSection]:
        return iter(self._known)

    def __len__(self) -> int:
        return len(self._known)

    def save(self) -> None:
        """Add what was solved to the file."""
        self._file.add(self.taken())

    def taken(self) -> dict[bytes, bytes]:
        """What was solved since this was last asked for, as it goes to the file."""
        new, self._new = self._new, {}
        return new

    def add(self, new: Mapping[bytes, bytes]) -> None:
        """Take over what another process solved."""
        self._new.update(new)

    def _key(self, section: CrossSection) -> bytes:
        return hashlib.sha256(self._rests_on + msgspec.msgpack.encode(section)).digest()


def taken_from(store: Store) -> dict[bytes, bytes]:
    """What was solved into a store and is to be kept; nothing of a store that keeps nothing."""
    return store.taken() if isinstance(store, KeptSections) else {}


def add_to(store: Store, new: Mapping[bytes, bytes]) -> None:
    """Hand to a store what another process solved."""
    if isinstance(store, KeptSections):
        store.add(new)


def _encoded(matrices: SectionMatrices | str) -> bytes:
    if isinstance(matrices, str):
        return msgspec.msgpack.encode(matrices)
    skin = matrices.skin
    return msgspec.msgpack.encode(
        _Solved(
            C=_row(matrices.C),
            L=_row(matrices.L),
            loss=_row(matrices.loss),
            diff=matrices.diff,
            common=matrices.common,
            delay=matrices.delay,
            skin=None
            if skin is None
            else _Skin(
                legs=_row(skin.legs), grounded=_row(skin.grounded), direct=_row(skin.direct), why_nan=list(skin.why_nan)
            ),
            coupling=[list(legs) for legs in matrices.coupling],
        )
    )


def _decoded(packed: bytes, section: CrossSection) -> SectionMatrices | str:
    """The figures of a section.

    Raises: KeyError where they are none, as if they were not kept.
    """
    try:
        kept = _DECODER.decode(packed)
        if isinstance(kept, str):
            return kept
        legs, skin = len(section.signals), kept.skin
        if not _fits(kept, section):
            raise KeyError(section.id)
        return SectionMatrices(
            C=_square(kept.C, legs),
            L=_square(kept.L, legs),
            loss=_square(kept.loss, legs),
            diff=kept.diff,
            common=kept.common,
            delay=kept.delay,
            skin=None
            if skin is None
            else SkinIntegrals(
                legs=_square(skin.legs, 2),
                grounded=_square(skin.grounded, 2),
                direct=np.array(skin.direct).reshape(2),
                why_nan=tuple(skin.why_nan),
            ),
            coupling=tuple(tuple(row) for row in kept.coupling),
        )
    except ValueError as error:
        raise KeyError(section.id) from error


def _fits(kept: _Solved, section: CrossSection) -> bool:
    """Whether the figures are of as many legs and neighbours as the section has."""
    legs = len(section.signals)
    others = len(section.conductors) - legs
    both = [kept.diff is not None, kept.common is not None, kept.skin is not None]
    return both == [legs == 2] * 3 and [len(row) for row in kept.coupling] == [legs] * others


def _row(matrix: Floats) -> list[float]:
    found: list[float] = matrix.ravel().tolist()
    return found


def _square(row: list[float], size: int) -> Floats:
    return np.array(row, dtype=np.float64).reshape(size, size)
