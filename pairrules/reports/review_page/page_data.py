"""What the page is drawn from: one short record of every pair, and the details of each apart, read only when asked for.

Names keep their own text where a waiver has to match it (`key`); what is shown is made safe first.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from pairrules.board.coordinates import coordinates, decimals, unit_name
from pairrules.board.units import LENGTH_MM
from pairrules.drawing import DrawnPiece
from pairrules.reports.figures import FIGURES, value
from pairrules.reports.review_page.along_rows import difference_rows, short, spacing_rows
from pairrules.reports.review_page.paths import micrometres, ring_path, route_paths, shapes_path
from pairrules.reports.safe_text import safe
from pairrules.result import SEVERITIES, Finding, HeldLimit, PairResult, Place, Result
from pairrules.schemas.glossary import MODELS

Plain = dict[str, Any]

LimitText = tuple[str, str, str, str, str]
"""What a limit says: rule, severity, its quantities in words, unit, source."""

_VERDICTS = ("flag", "undecided", "waived", "pass")


def in_order(result: Result) -> tuple[PairResult, ...]:
    """The pairs as the page lists them: flagged ones worst first, then undecided, waived, passed."""
    return tuple(sorted(result.pairs, key=_rank))


def board_record(result: Result, pairs: Sequence[PairResult], limits: Sequence[LimitText]) -> Plain:
    """What the page needs at once: the board, its edge, and every pair's findings and lines.

    `limits`: all of `limit_texts`.
    """
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
        "figures": [[figure.label, figure.unit] for figure in FIGURES],
        "limits": [list(limit) for limit in limits],
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


def limit_texts(pairs: Sequence[PairResult]) -> list[LimitText]:
    """What the limits of all pairs say, each once: most pairs share theirs."""
    return sorted({_text(limit) for pair in pairs for limit in pair.limits})


def pair_record(pair: PairResult, limits: Sequence[LimitText]) -> Plain:
    """The details of one pair: figures, limits, what they rest on, its drawing and curves.

    `limits`: all of `limit_texts`.
    """
    return {
        "foundBy": safe(pair.found_by),
        "nets": {"plus": [safe(net) for net in pair.nets_plus], "minus": [safe(net) for net in pair.nets_minus]},
        "ends": [safe(pair.source), safe(pair.load)],
        "series": [[safe(part.ref), safe(part.value), part.leg] for part in pair.series],
        "lines": [pair.line_plus, pair.line_minus],
        "figures": [value(pair.measures, figure) for figure in FIGURES],
        "limits": [
            [
                limits.index(_text(limit)),
                limit.outcome,
                short(limit.measured, 4),
                short(limit.limit, 4),
                safe(limit.missing),
            ]
            for limit in pair.limits
        ],
        "balance": [
            {key: short(getattr(point, key), 2) for key in type(point).__dataclass_fields__} for point in pair.balance
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
        "measured": short(finding.measured, 4),
        "limit": short(finding.limit, 4),
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


def _text(limit: HeldLimit) -> LimitText:
    return limit.rule, limit.severity, limit.says, limit.unit, safe(limit.source)


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
        "spacing": spacing_rows(drawing.spacing_plus),
        "difference": difference_rows(drawing.difference),
        "impedance": [
            [
                one.leg,
                one.layer,
                short(one.plus_from_mm, 4),
                short(one.plus_to_mm, 4),
                short(one.minus_from_mm, 4),
                short(one.minus_to_mm, 4),
                short(one.diff_ohm, 3),
                short(one.common_ohm, 3),
                short(one.capacitance_tilt, 6),
                *micrometres(one.start),
                *micrometres(one.end),
            ]
            for one in drawing.impedance
        ],
        "conversion": None
        if drawing.conversion is None
        else {
            "frequency": list(drawing.conversion.frequency_hz),
            "curves": {curve.figure: [short(v, 2) for v in curve.values] for curve in drawing.conversion.curves},
            "upTo": drawing.conversion.quasi_static_hz,
        },
        "limits": [
            {
                "rule": limit.rule,
                "severity": limit.severity,
                "figure": limit.figure,
                "least": short(limit.least, 4),
                "most": short(limit.most, 4),
                "over": [list(point) for point in limit.over],
                "side": limit.side,
            }
            for limit in drawing.limits
        ],
        "missing": [safe(text) for text in drawing.missing],
    }
    record["nets"] = list(nets)
    return record


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
