"""The parts of a pair leg against leg: which part of plus answers which of minus, and how findings speak of parts."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from pairrules.board.board import Board
from pairrules.checks.wording import place
from pairrules.pairing.link import HungPart, Link
from pairrules.result import Place

_LETTERS = re.compile(r"[A-Za-z]*")
_ON_ONE_LEG = ("to reference", "to net")


@dataclass(frozen=True, slots=True, kw_only=True)
class PartPair:
    """A part of each leg in the same place of the link; −1 where that leg has none.

    Parameters
    ----------
    plus, minus: indices into `Board.parts`. hung: whether they hang on the legs rather than stand in series.
    step: which series step, or how many of them lie before the parts that hang.
    """

    plus: int
    minus: int
    hung: bool
    step: int

    @property
    def whole(self) -> bool:
        """Whether both legs have a part here."""
        return self.plus >= 0 and self.minus >= 0


def part_pairs(board: Board, link: Link) -> tuple[PartPair, ...]:
    """Parts in series, then those that hang on one leg, each with its partner on the other leg.

    A choke, which is one part for both legs, is left out; so are parts across the legs and taps. Of several hanging
    parts of one step those are partners that are most alike: by what they lead to, kind, value and package.
    """
    found = [
        PartPair(plus=step.plus, minus=step.minus, hung=False, step=number)
        for number, step in enumerate(link.series)
        if step.plus != step.minus
    ]
    for step in sorted({one.step for one in link.hung}):
        legs = {
            leg: [one for one in link.hung if (one.step, one.leg) == (step, leg) and one.kind in _ON_ONE_LEG]
            for leg in ("plus", "minus")
        }
        found += [PartPair(plus=plus, minus=minus, hung=True, step=step) for plus, minus in _partners(board, **legs)]
    return tuple(found)


def letters(board: Board, part: int) -> str:
    """The letters of a designator, which say what kind of part it is."""
    found = _LETTERS.match(board.parts[part].ref)
    return found[0].upper() if found else ""


def told(board: Board, part: int) -> str:
    """A part in words: "C1 (100n, C0402)"."""
    of = board.parts[part]
    about = ", ".join(text for text in (of.value, of.package) if text)
    return f"{of.ref} ({about})" if about else of.ref


def spot_of(board: Board, part: int) -> tuple[Place, ...]:
    """The middle of a part's pads; nothing where the file has none."""
    rows = np.flatnonzero(board.pads.part == part)
    if not len(rows):
        return ()
    x, y = board.pads.at[rows].mean(axis=0)
    return (place(board, int(board.pads.layer[rows[0]]), x, y),)


def _partners(board: Board, plus: list[HungPart], minus: list[HungPart]) -> list[tuple[int, int]]:
    left, right = list(plus), list(minus)
    found = []
    for alike in (_same_far_side, _same_part, _same_kind):
        for one in tuple(left):
            other = next((two for two in right if alike(board, one, two)), None)
            if other is not None:
                found.append((one.part, other.part))
                left.remove(one)
                right.remove(other)
    return found + [(one.part, -1) for one in left] + [(-1, one.part) for one in right]


def _same_far_side(board: Board, one: HungPart, two: HungPart) -> bool:
    return (one.kind, one.other) == (two.kind, two.other) and _same_part(board, one, two)


def _same_part(board: Board, one: HungPart, two: HungPart) -> bool:
    a, b = board.parts[one.part], board.parts[two.part]
    return (a.value, a.package) == (b.value, b.package) and _same_kind(board, one, two)


def _same_kind(board: Board, one: HungPart, two: HungPart) -> bool:
    return letters(board, one.part) == letters(board, two.part)
