"""Many legs laid one after another, since a pass over a thousand pieces takes hardly longer than one over ten."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from itertools import pairwise

import numpy as np

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.curves import Curves
from pairrules.geometry.pair_geometry import TRACK, Pieces


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Legs:
    """The pieces of m legs in one.

    Parameters: pieces: of all. first: (m + 1,) the row each leg begins at, and the end of the last. leg: (k,) of each
    piece.
    """

    pieces: Pieces
    first: Ints
    leg: Ints

    def before(self, length: Floats) -> Floats:
        """The sum of `length` (k,) over the rows before each, within its leg.

        Summed leg by leg, so that no leg's figures hang on the legs it was laid among.
        """
        found = np.zeros(len(length))
        for begin, end in pairwise(self.first.tolist()):
            if end > begin:
                np.cumsum(length[begin : end - 1], out=found[begin + 1 : end])
        return found

    def spans(self, piece: Ints) -> list[tuple[int, int]]:
        """Where each leg's rows begin and end in a column that is sorted by `piece`."""
        cuts = np.searchsorted(piece, self.first).tolist()
        return list(pairwise(cuts))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LegTracks:
    """The tracks among the pieces of legs, those of no length left out.

    row: (k,) of the pieces. curves, length, layer, leg: theirs. before: [mm] of track before each on its leg.
    """

    row: Ints
    curves: Curves
    length: Floats
    layer: Ints
    leg: Ints
    before: Floats


def tracks_of(legs: Legs) -> LegTracks:
    """The tracks of legs."""
    pieces = legs.pieces
    is_track = (pieces.kind == TRACK) & (pieces.length > 0)
    row = np.flatnonzero(is_track)
    return LegTracks(
        row=row,
        curves=Curves(start=pieces.start, end=pieces.end, centre=pieces.centre, sweep=pieces.sweep).take(row),
        length=pieces.length[row],
        layer=pieces.layer[row],
        leg=legs.leg[row],
        before=legs.before(np.where(is_track, pieces.length, 0.0))[row],
    )


def laid_out(legs: Sequence[Pieces]) -> Legs:
    """The legs, one after another."""
    counts = np.array([len(leg) for leg in legs], dtype=np.int64)
    if len(legs) == 1:
        whole = legs[0]
    else:
        columns = {one.name: np.concatenate([getattr(leg, one.name) for leg in legs]) for one in fields(Pieces)}
        whole = Pieces(**columns)
    first = np.concatenate([np.zeros(1, dtype=np.int64), np.cumsum(counts)])
    return Legs(pieces=whole, first=first, leg=np.repeat(np.arange(len(legs)), counts))
