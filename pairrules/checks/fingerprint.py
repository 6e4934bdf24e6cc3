"""A finding's fingerprint: the same as long as the copper of its pair is the same, wherever on the board it lies."""

from __future__ import annotations

import hashlib

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.pairing.link import Link

GRID_MM = 0.001
"""Coordinates are rounded to this: finer than any copper is made, coarser than rounding of sums."""

_SHIFT_MM = 0.00013717
"""Added before rounding. Boards are drawn on grids (0.1 mil, 1 µm, 0.5 µm); without it their points would lie on the
very edge between two rounded values, and moving the board would tip them over."""


def copper_digest(board: Board, link: Link) -> str:
    """SHA-256 over the tracks, vias, pads and areas of the link's nets, relative to the pair's own lower left corner.

    Independent of the drawing order and of the place on the board; layers count by name, nets by name.
    """
    nets = sorted({hop.net for hop in (*link.hops_plus, *link.hops_minus)} | {link.plus, link.minus})
    tracks, vias, pads = board.tracks, board.vias, board.pads
    on_track, on_via, on_pad = (np.flatnonzero(np.isin(columns.net, nets)) for columns in (tracks, vias, pads))
    areas = [area for area in board.areas if area.net in nets]
    points = [tracks.start[on_track], tracks.end[on_track], vias.at[on_via], pads.at[on_pad]]
    points += [area.outline for area in areas]
    corner = np.concatenate([np.zeros((0, 2)), *points])
    origin = corner.min(axis=0) if len(corner) else np.zeros(2)

    def grid(xy: Floats) -> list[list[int]]:
        rounded: list[list[int]] = np.rint((xy - origin + _SHIFT_MM) / GRID_MM).astype(np.int64).tolist()
        return rounded

    def name(layer: int) -> str:
        return board.copper[layer] if layer >= 0 else "all"

    lines = [f"net {board.nets[net]!r}" for net in nets]
    for row, start, end in zip(on_track, grid(tracks.start[on_track]), grid(tracks.end[on_track]), strict=True):
        bent = tracks.sweep[row]
        ends = sorted([start, end])
        # A piece drawn backwards is the same copper.
        turn = round(float(bent if ends[0] == start else -bent), 4) + 0.0
        width = round(float(tracks.width[row]), 4)
        lines.append(f"track {tracks.net[row]} {name(int(tracks.layer[row]))!r} {ends} {turn} {width}")
    for row, at in zip(on_via, grid(vias.at[on_via]), strict=True):
        lines.append(f"via {vias.net[row]} {name(int(vias.first[row]))!r} {name(int(vias.last[row]))!r} {at}")
    for row, at in zip(on_pad, grid(pads.at[on_pad]), strict=True):
        lines.append(f"pad {pads.net[row]} {name(int(pads.layer[row]))!r} {at}")
    lines += [f"area {area.net} {name(area.layer)!r} {sorted(grid(area.outline))}" for area in areas]
    return hashlib.sha256("\n".join(sorted(set(lines))).encode("utf-8", "backslashreplace")).hexdigest()


def fingerprint(rule: str, digest: str) -> str:
    """The fingerprint of a rule's finding on the copper with this digest."""
    return hashlib.sha256(f"{rule} {digest}".encode()).hexdigest()[:32]
