"""Pieces of a centre line against straight edges, pair by pair: where they cross, and where they come nearest.

Pieces are `Curves` (k rows), edges (k, 2, 2) [mm], row against row. Arcs are never replaced by chords.
Source: elementary geometry throughout.
"""

from __future__ import annotations

import numpy as np

from pairrules.board.columns import Floats
from pairrules.geometry.curves import Curves, nearest


def crossings(curves: Curves, edges: Floats) -> tuple[Floats, Floats, Floats]:
    """Parameters at which each curve meets its edge: once a line, twice at most an arc; NaN where not."""
    along = edges[:, 1] - edges[:, 0]
    offset = edges[:, 0] - curves.start
    chord = curves.end - curves.start
    turn = _cross(chord, along)
    turn = np.where((turn == 0) | (curves.sweep != 0), np.nan, turn)
    line, u = _cross(offset, along) / turn, _cross(offset, chord) / turn
    line = np.where((u > -1e-9) & (u < 1 + 1e-9), line, np.nan)

    square = (along * along).sum(axis=1)
    spoke = edges[:, 0] - curves.centre
    foot = -(spoke * along).sum(axis=1) / square
    radius = _radius(curves)
    within = (radius**2 - _cross(spoke, along) ** 2 / square) / square
    reach = np.sqrt(np.where(within >= 0, within, np.nan))
    arcs = []
    for u_arc in (foot - reach, foot + reach):
        at = spoke + u_arc[:, None] * along
        arcs.append(np.where((u_arc > -1e-9) & (u_arc < 1 + 1e-9), arc_parameter(curves, at), np.nan))
    return line, arcs[0], arcs[1]


def nearest_to_edges(curves: Curves, edges: Floats) -> tuple[Floats, Floats]:
    """Where each curve comes nearest to its edge: parameter and distance.

    Either an end of one is nearest to the other, or an arc is nearest where it runs along the edge's direction.
    """
    along = edges[:, 1] - edges[:, 0]
    square = (along * along).sum(axis=1)

    def to_edge(at: Floats) -> Floats:
        u = np.clip(((at - edges[:, 0]) * along).sum(axis=1) / square, 0.0, 1.0)
        away = at - edges[:, 0] - u[:, None] * along
        far: Floats = np.hypot(away[:, 0], away[:, 1])
        return far

    zero, one = np.zeros(len(edges)), np.ones(len(edges))
    choices = [(zero, to_edge(curves.start)), (one, to_edge(curves.end))]
    choices += [nearest(curves, edges[:, end]) for end in (0, 1)]
    normal = np.column_stack([-along[:, 1], along[:, 0]]) / np.sqrt(square)[:, None]
    for side in (1.0, -1.0):
        radial = side * normal * _radius(curves)[:, None]
        t = arc_parameter(curves, radial)
        on = (t >= 0) & (t <= 1)
        choices.append((np.where(on, t, 0.0), np.where(on, to_edge(curves.centre + radial), np.inf)))
    t_all, apart = np.stack([t for t, _ in choices]), np.stack([far for _, far in choices])
    best, rows = np.argmin(apart, axis=0), np.arange(len(edges))
    return t_all[best, rows], apart[best, rows]


def arc_parameter(curves: Curves, radial: Floats) -> Floats:
    """Parameter at which an arc reaches the direction `radial` (k, 2), > 1 beyond its end; NaN for a line."""
    first = curves.start - curves.centre
    turn = np.arctan2(_cross(first, radial), (first * radial).sum(axis=1)) * np.sign(curves.sweep)
    sweep = np.where(curves.sweep == 0, np.nan, np.abs(curves.sweep))
    parameter: Floats = np.where(turn < 0, turn + 2 * np.pi, turn) / sweep
    return parameter


def _radius(curves: Curves) -> Floats:
    first, last = curves.start - curves.centre, curves.end - curves.centre
    mean: Floats = (np.hypot(first[:, 0], first[:, 1]) + np.hypot(last[:, 0], last[:, 1])) / 2
    return mean


def _cross(one: Floats, two: Floats) -> Floats:
    product: Floats = one[:, 0] * two[:, 1] - one[:, 1] * two[:, 0]
    return product
