"""The drawing of a board and of each of its pairs, gathered from the records of the stages."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.checks.rule import Rule, Subject
from pairrules.drawing import Drawing, DrawnPad, DrawnPart, DrawnPlace, PairDrawing
from pairrules.drawn.along_pair import drawn_pieces, impedance_along, running_difference, spacing
from pairrules.drawn.conversion_curves import conversion_curves
from pairrules.drawn.drawn_limits import drawn_limits
from pairrules.drawn.part_outlines import part_outlines
from pairrules.drawn.plain_shapes import plain_shapes, point, ring
from pairrules.drawn.window_copper import DrawnBoard, Roles, Window, drawn_copper, drawn_openings, drawn_vias
from pairrules.geometry.curves import Curves, chords
from pairrules.geometry.pad_outlines import pad_outline
from pairrules.geometry.pair_geometry import LegRoute
from pairrules.pairing.link import Hop, Link
from pairrules.result import Finding
from pairrules.settings.limit import Limit

MARGIN_MM = 1.5
"""Shown around the pair at least, so that neighbours and edges of the reference near it are seen."""
_MARGIN_SHARE = 0.06


def board_drawing(board: Board) -> Drawing:
    """The board's edge, layers and extent."""
    points = [np.empty((0, 2)), board.tracks.start, board.tracks.end, board.pads.at, board.vias.at]
    points += [area.outline for area in board.areas]
    if board.outline is not None:
        points.append(board.outline)
    every = np.concatenate(points)
    extent = None
    if len(every):
        low, high = point(every.min(axis=0)), point(every.max(axis=0))
        extent = (*low, *high)
    outline = () if board.outline is None else ring(board.outline)
    return Drawing(layers=board.copper, outline=outline, extent=extent, units=board.units, parts=part_outlines(board))


def pair_drawing(
    subject: Subject,
    findings: Sequence[Finding],
    limits: Mapping[str, Limit],
    rules: Mapping[str, Rule],
    *,
    drawn: DrawnBoard,
) -> PairDrawing | None:
    """What is drawn of one pair; `None` where none of its copper is known. `drawn`: the board's, for all its pairs."""
    board, link, geometry, electrical = subject.board, subject.link, subject.geometry, subject.electrical
    window = _window(board, link, geometry.plus, geometry.minus)
    if window is None:
        return None
    layers = _layers(board, link, geometry.plus, geometry.minus)
    roles = Roles(_nets(link.plus, link.hops_plus), _nets(link.minus, link.hops_minus), subject.reference)
    openings, unknown = drawn_openings(drawn, layers, window)
    legs = [leg for leg in (geometry.plus, geometry.minus) if leg is not None]
    used = frozenset(via.via for leg in legs for via in leg.vias)
    conversion = conversion_curves(subject)
    missing = [conversion] if isinstance(conversion, str) else []
    if electrical is not None and "sections" in electrical.missing:
        missing.append(electrical.missing["sections"])
    if not subject.reference:
        missing.append("no net is known as reference, so no openings are drawn")
    return PairDrawing(
        window=window,
        plus=() if geometry.plus is None else drawn_pieces(geometry.plus.pieces),
        minus=() if geometry.minus is None else drawn_pieces(geometry.minus.pieces),
        copper=drawn_copper(drawn, roles, layers, window),
        openings=openings,
        unknown_layers=unknown,
        vias=drawn_vias(board, roles, used, window),
        parts=_parts(board, link, roles, window),
        places=_places(board, findings),
        spacing_plus=() if geometry.profile_plus is None else spacing(geometry.profile_plus),
        spacing_minus=() if geometry.profile_minus is None else spacing(geometry.profile_minus),
        difference=running_difference(geometry.plus, geometry.minus, geometry.profile_plus)
        if geometry.plus is not None and geometry.minus is not None and geometry.profile_plus is not None
        else (),
        impedance=() if electrical is None else impedance_along(electrical.sections),
        conversion=None if isinstance(conversion, str) else conversion,
        limits=drawn_limits(subject, limits, rules),
        missing=tuple(dict.fromkeys(missing)),
    )


def _nets(named: int, hops: tuple[Hop, ...]) -> frozenset[int]:
    return frozenset({named, *(hop.net for hop in hops)})


def _own(link: Link) -> list[int]:
    return sorted(_nets(link.plus, link.hops_plus) | _nets(link.minus, link.hops_minus))


def _window(board: Board, link: Link, plus: LegRoute | None, minus: LegRoute | None) -> Window | None:
    """The box about both routes; about all copper of the pair's nets where one is broken."""
    points: list[Floats] = [np.empty((0, 2))]
    if plus is not None and minus is not None and (len(plus.pieces) or len(minus.pieces)):
        for leg in (plus, minus):
            pieces = leg.pieces
            curves = Curves(start=pieces.start, end=pieces.end, centre=pieces.centre, sweep=pieces.sweep)
            points += [pieces.start, pieces.end, chords(curves, within=0.01)[0]]
    else:
        nets = _own(link)
        tracks, pads, vias = board.tracks, board.pads, board.vias
        on = np.isin(tracks.net, nets)
        points += [tracks.start[on], tracks.end[on], pads.at[np.isin(pads.net, nets)], vias.at[np.isin(vias.net, nets)]]
        points += [area.outline for area in board.areas if area.net in nets]
    every = np.concatenate(points)
    if not len(every):
        return None
    low, high = every.min(axis=0), every.max(axis=0)
    margin = max(MARGIN_MM, _MARGIN_SHARE * float((high - low).max()))
    return (*point(low - margin), *point(high + margin))


def _layers(board: Board, link: Link, plus: LegRoute | None, minus: LegRoute | None) -> tuple[int, ...]:
    """Layers that the legs run on, top first; of a broken pair all that its nets have tracks or pads on."""
    if plus is not None and minus is not None:
        found = {layer for leg in (plus, minus) for layer in leg.pieces.layer.tolist()}
    else:
        nets = _own(link)
        found = {*board.tracks.layer[np.isin(board.tracks.net, nets)].tolist()}
        found |= {*board.pads.layer[np.isin(board.pads.net, nets)].tolist()}
    return tuple(sorted(layer for layer in found if layer >= 0))


def _parts(board: Board, link: Link, roles: Roles, window: Window) -> tuple[DrawnPart, ...]:
    wanted = [(link.source, "source"), (link.load, "load")]
    wanted += [(part, "series") for step in link.series for part in (step.plus, step.minus)]
    wanted += [(hung.part, "hung") for hung in link.hung]
    box, found, seen = shapely.box(*window), [], set[int]()
    for part, role in wanted:
        if part < 0 or part in seen:
            continue
        seen.add(part)
        pads: list[DrawnPad] = []
        outlines: list[shapely.Geometry] = []
        for row in np.flatnonzero(board.pads.part == part).tolist():
            outline = pad_outline(board.pads, row)
            net = int(board.pads.net[row])
            leg = roles.of(net) if roles.of(net) in {"plus", "minus"} else ""
            if not leg and not shapely.intersects(outline, box):
                continue
            outlines.append(outline)
            pads.append(
                DrawnPad(
                    pin=board.pads.pin[row],
                    net=board.nets[net] if net >= 0 else "",
                    leg=leg,
                    layer=int(board.pads.layer[row]),
                    at=point(board.pads.at[row]),
                    shapes=plain_shapes(outline),
                )
            )
        hull = shapely.convex_hull(shapely.union_all(outlines))
        own = board.parts[part]
        around = ring(shapely.get_coordinates(hull)) if hull.geom_type == "Polygon" and outlines else ()
        found.append(
            DrawnPart(ref=own.ref, value=own.value, role=role, side=own.side, outline=around, pads=tuple(pads))
        )
    return tuple(found)


def _places(board: Board, findings: Sequence[Finding]) -> tuple[DrawnPlace, ...]:
    index = {name: layer for layer, name in enumerate(board.copper)}

    return tuple(
        DrawnPlace(number=number, layer=index.get(place.layer, -1), at=point((place.x_mm, place.y_mm)))
        for number, finding in enumerate(findings, start=1)
        for place in finding.at
        if math.isfinite(place.x_mm) and math.isfinite(place.y_mm)
    )
