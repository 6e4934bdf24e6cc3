"""What the page is drawn from: one short record of every pair, and the details of each apart, read only when asked for.

Names keep their own text where a waiver has to match it (`key`); what is shown is made safe first.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from pairrules.board.coordinates import coordinates, decimals, unit_name
from pairrules.board.units import LENGTH_MM
from pairrules.drawing import DrawnPiece, RunningDifference, SpacingStretch
from pairrules.reports.figures import FIGURES, value
from pairrules.reports.review_page.paths import micrometres, ring_path, route_paths, shapes_path
from pairrules.reports.safe_text import safe
from pairrules.result import SEVERITIES, Finding, HeldLimit, PairResult, Place, Result
from pairrules.schemas.glossary import MODELS

Plain = dict[str, Any]

_SAME_MM = 0.0005
"""Half a micrometre, the rounding of the page's drawing units."""

_VERDICTS = ("flag", "undecided", "waived", "pass")


def in_order(result: Result) -> tuple[PairResult, ...]:
    """The pairs as the page lists them: flagged ones worst first, then undecided, waived, passed."""
    return tuple(sorted(result.pairs, key=_rank))


def board_record(result: Result, pairs: Sequence[PairResult]) -> Plain:
    """What the page needs at once: the board, its edge, and every pair's findings and lines."""
    board, drawing = result.board, result.drawing
    unit = unit_name(board.units)
    used = {rule.rule for pair in pairs for rule in pair.limits}
    return {
        "file": safe(board.file),
        "sha256": board.sha256,
        "name": safe(board.name),
        "version": result.version,
        "unit": {"name": unit, "mm": LENGTH_MM[unit], "decimals": decimals(unit)},
        "layers": [] if drawing is None else [safe(layer) for layer in drawing.layers],
        "outline": "" if drawing is None else ring_path(drawing.outline),
        "extent": _box(None if drawing is None else drawing.extent),
        "parts": [] if drawing is None else [[safe(part.ref), ring_path(part.outline)] for part in drawing.parts],
        "rules": [
            {
                "name": rule.name,
                "summary": safe(rule.summary),
                "help": [[safe(title), safe(text)] for title, text in rule.help],
            }
            for rule in result.rules
            if rule.name in used
        ],
        "models": [safe(model.brief) for model in MODELS.values()],
        "waivers": [
            {
                "rule": waiver.rule,
                "pair": waiver.pair,
                "state": waiver.state,
                "reason": waiver.reason,
                "who": waiver.who,
                "until": waiver.until,
                "fingerprint": waiver.fingerprint,
            }
            for waiver in result.waivers
        ],
        "pairs": [_pair(result, pair) for pair in pairs],
    }


def pair_record(pair: PairResult) -> Plain:
    """The details of one pair: figures, limits, what they rest on, its drawing and curves."""
    return {
        "foundBy": safe(pair.found_by),
        "nets": {"plus": [safe(net) for net in pair.nets_plus], "minus": [safe(net) for net in pair.nets_minus]},
        "ends": [safe(pair.source), safe(pair.load)],
        "series": [[safe(part.ref), safe(part.value), part.leg] for part in pair.series],
        "lines": [pair.line_plus, pair.line_minus],
        "figures": [[figure.label, value(pair.measures, figure), figure.unit] for figure in FIGURES],
        "limits": [_limit(limit) for limit in pair.limits],
        "balance": [
            {key: _short(getattr(point, key), 2) for key in type(point).__dataclass_fields__} for point in pair.balance
        ],
        "unjudged": [[rule.rule, safe(rule.missing)] for rule in pair.unjudged],
        "missing": [safe(text) for text in pair.missing],
        "assumed": [safe(text) for text in pair.assumed],
        "drawing": _drawing(pair),
    }


def _rank(pair: PairResult) -> tuple[int, int, int, str]:
    standing = [finding for finding in pair.findings if not finding.waived]
    worst = min((SEVERITIES.index(finding.severity) for finding in standing), default=0)
    return _VERDICTS.index(pair.verdict), worst, -len(standing), pair.name


def _pair(result: Result, pair: PairResult) -> Plain:
    drawing = pair.drawing
    shown = safe(pair.name)
    record: Plain = {
        "name": shown,
        "plus": safe(pair.plus),
        "minus": safe(pair.minus),
        "class": safe(pair.klass or ""),
        "verdict": pair.verdict,
        "routed": pair.routed,
        "findings": [_finding(result, finding) for finding in pair.findings],
        "layers": [],
        "lines": [],
        "box": None,
    }
    if shown != pair.name:
        record["key"] = pair.name
    if drawing is not None:
        lines = [_line(drawing.plus), _line(drawing.minus)]
        record["lines"] = lines
        record["box"] = _box(drawing.window)
        layers = {layer for line in lines for layer, _, _ in line}
        if not drawing.plus or not drawing.minus:
            # Without a route from end to end all copper of the pair's nets stands for it.
            record["copper"] = [
                [copper.layer, shapes_path(copper.shapes)]
                for copper in drawing.copper
                if copper.role in {"plus", "minus"}
            ]
            layers |= {layer for layer, _ in record["copper"]}
        record["layers"] = sorted(layers)
    return record


def _line(pieces: Sequence[DrawnPiece]) -> list[list[Any]]:
    return [[layer, round(width * 1000), path] for layer, width, path in route_paths(pieces)]


def _finding(result: Result, finding: Finding) -> Plain:
    return {
        "rule": finding.rule,
        "severity": finding.severity,
        "waived": finding.waived,
        "print": finding.fingerprint,
        "measured": _short(finding.measured, 4),
        "limit": _short(finding.limit, 4),
        "unit": finding.unit,
        "message": safe(finding.message),
        "advice": safe(finding.advice),
        "source": safe(finding.source),
        "at": [_place(result, place) for place in finding.at],
    }


def _place(result: Result, place: Place) -> list[Any]:
    """Layer name, coordinates in the file's units as text, and the place in the page's drawing units."""
    return [
        safe(place.layer),
        coordinates(place.x_mm, place.y_mm, result.board.units),
        *micrometres((place.x_mm, place.y_mm)),
    ]


def _limit(limit: HeldLimit) -> Plain:
    return {
        "rule": limit.rule,
        "severity": limit.severity,
        "says": limit.says,
        "outcome": limit.outcome,
        "measured": _short(limit.measured, 4),
        "limit": _short(limit.limit, 4),
        "unit": limit.unit,
        "missing": safe(limit.missing),
        "source": safe(limit.source),
    }


def _drawing(pair: PairResult) -> Plain | None:
    drawing = pair.drawing
    if drawing is None:
        return None
    nets: dict[str, int] = {}

    def net(name: str) -> int:
        return nets.setdefault(safe(name), len(nets))

    record: Plain = {
        "box": _box(drawing.window),
        "copper": [[one.layer, one.role, net(one.net), shapes_path(one.shapes)] for one in drawing.copper],
        "openings": [[one.layer, list(one.of), shapes_path(one.shapes)] for one in drawing.openings],
        "unknown": list(drawing.unknown_layers),
        "legs": [_line(drawing.plus), _line(drawing.minus)],
        "ends": [_ends(drawing.plus), _ends(drawing.minus)],
        "vias": [
            [
                *micrometres(via.at),
                via.first,
                via.last,
                round((via.pad_mm or 0.0) * 1000),
                round((via.drill_mm or 0.0) * 1000),
                net(via.net),
                via.role,
                int(via.used),
            ]
            for via in drawing.vias
        ],
        "parts": [
            {
                "ref": safe(part.ref),
                "value": safe(part.value),
                "role": part.role,
                "side": part.side,
                "outline": ring_path(part.outline),
                "at": _middle([micrometres(at) for at in part.outline] or [micrometres(pad.at) for pad in part.pads]),
                "pads": [
                    [safe(pad.pin), net(pad.net), pad.leg, pad.layer, *micrometres(pad.at), shapes_path(pad.shapes)]
                    for pad in part.pads
                    # Others are seen in the copper, and a great connector has hundreds of them.
                    if pad.leg
                ],
            }
            for part in drawing.parts
        ],
        "places": [[place.number, place.layer, *micrometres(place.at)] for place in drawing.places],
        "spacing": _spacing(drawing.spacing_plus),
        "difference": [
            [_short(one.along_mm, 3), _short(one.difference_mm, 4), one.layer, *micrometres(one.at)]
            for one in _bends(drawing.difference)
        ],
        "impedance": [
            [
                one.leg,
                one.layer,
                _short(one.plus_from_mm, 4),
                _short(one.plus_to_mm, 4),
                _short(one.minus_from_mm, 4),
                _short(one.minus_to_mm, 4),
                _short(one.diff_ohm, 3),
                _short(one.common_ohm, 3),
                _short(one.capacitance_tilt, 6),
                *micrometres(one.start),
                *micrometres(one.end),
            ]
            for one in drawing.impedance
        ],
        "conversion": None
        if drawing.conversion is None
        else {
            "frequency": list(drawing.conversion.frequency_hz),
            "curves": {curve.figure: [_short(v, 2) for v in curve.values] for curve in drawing.conversion.curves},
            "upTo": drawing.conversion.quasi_static_hz,
        },
        "limits": [
            {
                "rule": limit.rule,
                "severity": limit.severity,
                "figure": limit.figure,
                "least": _short(limit.least, 4),
                "most": _short(limit.most, 4),
                "over": [list(point) for point in limit.over],
                "side": limit.side,
            }
            for limit in drawing.limits
        ],
        "missing": [safe(text) for text in drawing.missing],
    }
    record["nets"] = list(nets)
    return record


def _spacing(stretches: Sequence[SpacingStretch]) -> list[list[Any]]:
    """Stretches in order; those of one gap that go straight on are joined, as most of a profile is."""
    joined: list[SpacingStretch] = []
    for one in stretches:
        last = joined[-1] if joined else None
        if last is not None and _goes_on(last, one):
            joined[-1] = replace(last, to_mm=one.to_mm, end=one.end, gap_to_mm=one.gap_to_mm)
        else:
            joined.append(one)
    return [
        [
            _short(one.from_mm, 3),
            _short(one.to_mm, 3),
            _short(one.gap_from_mm, 4),
            _short(one.gap_mid_mm, 4),
            _short(one.gap_to_mm, 4),
            int(one.coupled),
            one.layer,
            *micrometres(one.end),
            # Only where it is not the end of the one before.
            *(micrometres(one.start) if i == 0 or joined[i - 1].end != one.start else ()),
        ]
        for i, one in enumerate(joined)
    ]


def _goes_on(last: SpacingStretch, one: SpacingStretch) -> bool:
    if last.coupled != one.coupled or last.layer != one.layer or last.end != one.start:
        return False
    gaps = (last.gap_from_mm, last.gap_mid_mm, last.gap_to_mm, one.gap_from_mm, one.gap_mid_mm, one.gap_to_mm)
    if one.coupled:
        # Where the legs are not side by side no gap is drawn, so that it need not be one.
        known = [gap for gap in gaps if gap is not None]
        if len(known) < len(gaps) or max(known) - min(known) > _SAME_MM:
            return False
    (ax, ay), (bx, by), (cx, cy) = last.start, one.start, one.end
    aside = abs((bx - ax) * (cy - ay) - (by - ay) * (cx - ax))
    return aside <= _SAME_MM * math.hypot(cx - ax, cy - ay)


def _bends(points: Sequence[RunningDifference]) -> list[RunningDifference]:
    """The points without those that lie straight between the ones before and after, on the board and in the curve."""
    found = list(points[:1])
    for i in range(1, len(points) - 1):
        before, here, after = found[-1], points[i], points[i + 1]
        span = after.along_mm - before.along_mm
        share = (here.along_mm - before.along_mm) / span if span > 0 else math.inf
        between = (
            (before.difference_mm, here.difference_mm, after.difference_mm),
            (before.at[0], here.at[0], after.at[0]),
            (before.at[1], here.at[1], after.at[1]),
        )
        # A quarter of what is shown, so that what is left out in a row does not add up to something that is.
        straight = share <= 1 and all(abs(a + share * (b - a) - x) <= _SAME_MM / 4 for a, x, b in between)
        if not straight or not before.layer == here.layer == after.layer:
            found.append(here)
    return [*found, *points[-1:]] if len(points) > 1 else found


def _ends(pieces: Sequence[DrawnPiece]) -> list[list[int]]:
    return [list(micrometres(pieces[0].start)), list(micrometres(pieces[-1].end))] if pieces else []


def _middle(points: Sequence[tuple[int, int]]) -> list[int] | None:
    if not points:
        return None
    xs, ys = [x for x, _ in points], [y for _, y in points]
    return [(min(xs) + max(xs)) // 2, (min(ys) + max(ys)) // 2]


def _box(extent: tuple[float, float, float, float] | None) -> list[int] | None:
    """x, y, width, height in the page's drawing units."""
    if extent is None:
        return None
    x_min, y_min, x_max, y_max = extent
    left, top = micrometres((x_min, y_max))
    right, bottom = micrometres((x_max, y_min))
    return [left, top, max(right - left, 1), max(bottom - top, 1)]


def _short(number: float | None, digits: int) -> float | int | None:
    """Rounded for the page, whole numbers without a point; −0 is 0."""
    if number is None:
        return None
    rounded = round(float(number), digits) + 0.0
    return int(rounded) if rounded.is_integer() else rounded
