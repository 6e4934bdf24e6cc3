"""What pins add to the legs' lengths and delays, in packages and connectors, as the settings' `pin_lengths` say.

A leg passes the pins at its two ends and those of its parts in series. A length given for a pin counts as a delay, and
a delay as a length, by the pair's own mean delay per length: what fills a package is not known.
Source: ℓ = v Δt (textbook). That a length inside a package passes at the board's velocity is an assumption, no source.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from fnmatch import fnmatchcase

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.geometry.pair_geometry import SERIES, LegRoute, PairGeometry
from pairrules.pairing.link import Hop, Link
from pairrules.settings.limit import Timed
from pairrules.settings.pair_class import PinLengths


@dataclass(frozen=True, slots=True, kw_only=True)
class PinExtra:
    """What the pins of a pair add. `None` where it needs the pair's velocity and that is unknown.

    Parameters
    ----------
    plus_mm, minus_mm: to each leg's length. plus_ps, minus_ps: to each leg's delay.
    missing: expected parts whose pins on the pair have no length, in one sentence; "" where none lacks.
    """

    plus_mm: float | None = 0.0
    minus_mm: float | None = 0.0
    plus_ps: float | None = 0.0
    minus_ps: float | None = 0.0
    missing: str = ""

    @property
    def any(self) -> bool:
        """Whether a pin adds anything."""
        return any(value != 0 for value in (self.plus_mm, self.minus_mm, self.plus_ps, self.minus_ps))

    def difference(self, unit: str) -> float | None:
        """Plus less minus in "mm" or "ps"."""
        plus, minus = (self.plus_mm, self.minus_mm) if unit == "mm" else (self.plus_ps, self.minus_ps)
        return None if plus is None or minus is None else plus - minus

    def told(self, unit: str) -> str:
        """The end of a finding's message that says what pins add; "" where they add nothing."""
        if not self.any:
            return ""
        plus, minus = (self.plus_mm, self.minus_mm) if unit == "mm" else (self.plus_ps, self.minus_ps)
        return f" (pins add {plus or 0.0:.2f} {unit} to plus and {minus or 0.0:.2f} {unit} to minus)"


NOTHING = PinExtra()


def pin_extra(
    board: Board,
    link: Link,
    geometry: PairGeometry,
    *,
    lengths: PinLengths,
    expected: tuple[str, ...],
    slowness: float | None,
) -> PinExtra:
    """What the pins that a pair passes add to it.

    Parameters
    ----------
    lengths: part to pin to length [mm] or time. expected: patterns of parts that ought to have them all.
    slowness: the pair's mean delay per length [ps/mm], `None` where unknown.
    """
    if not lengths and not expected:
        return NOTHING
    found: dict[str, float | None] = {}
    bare: dict[str, list[str]] = {}
    for name, hops, leg in (
        ("plus", link.hops_plus, geometry.plus),
        ("minus", link.hops_minus, geometry.minus),
    ):
        given = []
        for part, pin in _passed(board, hops, leg):
            length = lengths.get(part, {}).get(pin)
            if length is not None:
                given.append(length)
            elif any(fnmatchcase(part, pattern) for pattern in expected):
                bare.setdefault(part, []).append(pin)
        found |= _sums(name, given, slowness)
    return PinExtra(**found, missing=_unsaid(bare))


def _sums(leg: str, given: list[float | Timed], slowness: float | None) -> Mapping[str, float | None]:
    mm = math.fsum(one for one in given if not isinstance(one, Timed))
    ps = math.fsum(one.amount for one in given if isinstance(one, Timed))
    as_mm = ps / slowness if slowness else (None if ps else 0.0)
    as_ps = mm * slowness if slowness else (None if mm else 0.0)
    return {
        f"{leg}_mm": None if as_mm is None else mm + as_mm,
        f"{leg}_ps": None if as_ps is None else ps + as_ps,
    }


def _unsaid(bare: Mapping[str, list[str]]) -> str:
    if not bare:
        return ""
    pins = "; ".join(f"{part} {', '.join(dict.fromkeys(names))}" for part, names in sorted(bare.items()))
    return f"the class expects lengths of pins that pin_lengths in the settings does not give: {pins}"


def _passed(board: Board, hops: tuple[Hop, ...], leg: LegRoute | None) -> Iterator[tuple[str, str]]:
    """Part and pin of every pad that the leg goes through, source first, each once."""
    seen = set()
    for number, hop in enumerate(hops):
        for rows, outermost, at in ((hop.start, number == 0, 0), (hop.end, number == len(hops) - 1, -1)):
            row = _nearest(board, rows, leg, at if outermost else None)
            if row is None or board.pads.part[row] < 0:
                continue
            pin = board.parts[int(board.pads.part[row])].ref, board.pads.pin[row]
            if pin not in seen:
                seen.add(pin)
                yield pin


def _nearest(board: Board, rows: tuple[int, ...], leg: LegRoute | None, end: int | None) -> int | None:
    """Of several pads at which the leg may end, the one where it does. `end`: 0 or −1 of the route, `None` inside."""
    if len(rows) < 2 or leg is None or not len(leg.pieces):
        return rows[0] if rows else None
    pieces = leg.pieces
    if end is None:
        series = pieces.kind == SERIES
        ends: Floats = np.concatenate([pieces.start[series], pieces.end[series]])
    else:
        ends = (pieces.start[:1], pieces.end[-1:])[end]
    if not len(ends):
        return rows[0]
    apart = np.hypot(*(board.pads.at[list(rows)][:, None] - ends[None]).transpose(2, 0, 1)).min(axis=1)
    return rows[int(np.argmin(apart))]
