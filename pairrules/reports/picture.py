"""One pair as a picture for a document or a ticket: an SVG that stands alone, without script or anything fetched.

The legs differ in colour and in pattern. Source of the colours: Okabe and Ito, Color Universal Design, 2008 (from
memory), chosen to be told apart by colour-blind people.
"""

from __future__ import annotations

import hashlib
import math
import textwrap
from collections.abc import Iterable
from html import escape
from pathlib import PurePath

from pairrules.drawing import DrawnPiece, DrawnShape, PairDrawing, Point, Ring
from pairrules.reports.cautions import CAUTIONS
from pairrules.reports.figures import FIGURES, value
from pairrules.reports.picture_marks import Canvas, markers, scale_bar
from pairrules.reports.safe_text import safe
from pairrules.result import PairResult, Result

PLUS, MINUS = "#0072b2", "#d55e00"
_BLACK, _GREY, _PALE = "#000000", "#8c8c8c", "#d9d9d9"
_WIDTH, _MARGIN, _TALLEST = 1000, 20, 620
_LINE, _CHARACTERS, _CHARACTER = 17, 125, 7.8
"""A line's height, the characters on it, and the width of one, generously: what a viewer's font has is not known."""

_FIGURES = (
    "length_plus_mm",
    "length_minus_mm",
    "length_mismatch_mm",
    "gap_median_mm",
    "apart_mm",
    "loop_area_mm2",
    "reference_uncovered_mm",
    "impedance_diff_ohm",
    "delay_mismatch_ps",
)


def render(result: Result, pair: PairResult) -> str:
    """The picture as SVG text.

    Raises: ValueError where the result carries no drawing of the pair.
    """
    drawing, board = pair.drawing, result.drawing
    if drawing is None or board is None:
        raise ValueError(f"the result carries no drawing of {pair.name!r}")
    picture = _Picture(pair, drawing, board.layers)
    body, top = picture.copper(), picture.bottom
    legend, top = picture.legend(top + 2 * _LINE)
    caption, height = _caption(result, pair, top + _LINE)
    label = _text(f"Pair {pair.name}: {pair.plus} and {pair.minus}")
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{_WIDTH}" height="{height}" '
        f'viewBox="0 0 {_WIDTH} {height}" role="img" font-family="sans-serif" font-size="13">\n'
        f"<title>{label}</title>\n"
        f"{picture.patterns()}"
        f'<rect width="{_WIDTH}" height="{height}" fill="#ffffff"/>\n'
        f'<text x="{_MARGIN}" y="26" font-size="17" font-weight="bold">{label}</text>\n'
        f"{body}{legend}{caption}</svg>\n"
    )


class _Picture:
    """One drawing on its canvas. Lives only while the picture is made."""

    def __init__(self, pair: PairResult, drawing: PairDrawing, layers: tuple[str, ...]) -> None:
        self.pair, self.drawing, self.layers = pair, drawing, layers
        x0, y0, x1, y1 = drawing.window
        self.canvas = Canvas.fitted(
            (x0, y0, x1, y1), left=_MARGIN, top=40, width=_WIDTH - 2 * _MARGIN, tallest=_TALLEST
        )
        self.bottom = self.canvas.top + self.canvas.height
        # Several pictures may stand in one page, where an identifier counts for all of them.
        self.mark = "p" + hashlib.sha256(pair.name.encode("utf-8", "surrogatepass")).hexdigest()[:8]
        pieces = (*drawing.plus, *drawing.minus)
        legs = {one.layer for one in drawing.copper if one.role in {"plus", "minus"}}
        self.on = tuple(sorted({p.layer for p in pieces if p.kind == "track"} or legs))

    def patterns(self) -> str:
        """Fills: minus's stripes, two hatchings for openings, dots for reference copper beside the legs."""
        mark, canvas = self.mark, self.canvas

        def pattern(name: str, size: int, turn: int, inside: str) -> str:
            return (
                f'<pattern id="{mark}-{name}" width="{size}" height="{size}" patternUnits="userSpaceOnUse" '
                f'patternTransform="rotate({turn})">{inside}</pattern>\n'
            )

        stripe = f'<rect width="6" height="6" fill="{MINUS}"/><rect width="2" height="6" fill="#ffffff"/>'
        hatch = '<rect width="1.2" height="9" fill="#b8b8b8"/>'
        dots = f'<rect width="6" height="6" fill="#f0f0f0"/><circle cx="2" cy="2" r="1" fill="{_GREY}"/>'
        return (
            "<defs>\n"
            + pattern("minus", 6, 45, stripe)
            + pattern("open0", 9, 45, hatch)
            + pattern("open1", 9, -45, hatch)
            + pattern("reference", 6, 0, dots)
            + f'<clipPath id="{mark}-window"><rect x="{canvas.left:.2f}" y="{canvas.top}" '
            f'width="{canvas.width:.2f}" height="{canvas.height:.2f}"/></clipPath>\n</defs>\n'
        )

    def copper(self) -> str:
        """Openings, then layer by layer from the bottom neighbours and legs, vias, parts, routes, places."""
        drawing, canvas = self.drawing, self.canvas
        out = [f'<g clip-path="url(#{self.mark}-window)">\n']
        for number, opening in enumerate(drawing.openings):
            out.append(self._filled(opening.shapes, f"url(#{self.mark}-open{number % 2})", edge=_GREY, dash="4 3"))
        for layer in sorted(self.on, reverse=True):
            opacity = 1.0 if layer == self.on[0] else 0.55
            for role, fill in (("reference", f"url(#{self.mark}-reference)"), ("neighbour", _PALE)):
                out += [
                    self._filled(one.shapes, fill, edge=_GREY, opacity=opacity)
                    for one in drawing.copper
                    if one.layer == layer and one.role == role
                ]
            for role, fill, edge in (("plus", PLUS, PLUS), ("minus", f"url(#{self.mark}-minus)", MINUS)):
                out += [
                    self._filled(one.shapes, fill, edge=edge, opacity=opacity)
                    for one in drawing.copper
                    if one.layer == layer and one.role == role
                ]
        for via in drawing.vias:
            if via.drill_mm is not None or via.pad_mm is not None:
                out.append(self._hole(via.at, via.drill_mm or (via.pad_mm or 0.0) / 2, used=via.used))
        for leg, dash in ((drawing.plus, ""), (drawing.minus, ' stroke-dasharray="7 3"')):
            way = self._route(leg)
            if way:
                out.append(f'<path d="{way}" fill="none" stroke="{_BLACK}" stroke-width="1.2"{dash}/>\n')
        out += self._parts()
        out.append("</g>\n")
        out.append(
            f'<rect x="{canvas.left:.2f}" y="{canvas.top}" width="{canvas.width:.2f}" height="{canvas.height:.2f}" '
            f'fill="none" stroke="{_BLACK}"/>\n'
        )
        ways = [xy for piece in (*drawing.plus, *drawing.minus) for xy in self._samples(piece)]
        out.append(markers(canvas, tuple((place.number, place.at) for place in drawing.places), clear_of=ways))
        out.append(scale_bar(canvas))
        return "".join(out)

    def legend(self, top: float) -> tuple[str, float]:
        """What each fill means, one box and text after the other, wrapped; and where it ends."""
        drawing, mark = self.drawing, self.mark
        shown = [(PLUS, PLUS, f"plus, {self.pair.plus} (route: line)")]
        shown.append((f"url(#{mark}-minus)", MINUS, f"minus, {self.pair.minus} (route: dashes)"))
        roles = {one.role for one in drawing.copper if one.layer in self.on}
        if "neighbour" in roles:
            shown.append((_PALE, _GREY, "copper of other nets"))
        if "reference" in roles:
            shown.append((f"url(#{mark}-reference)", _GREY, "reference copper on the legs' layer"))
        for number, opening in enumerate(drawing.openings):
            name = self.layers[opening.layer]
            shown.append((f"url(#{mark}-open{number % 2})", _GREY, f"no reference copper on {name}"))
        out, x, y = [], float(_MARGIN), top
        for fill, edge, text in shown:
            words = _short(text, 70)
            width = 44 + _CHARACTER * len(words)
            if x + width > _WIDTH - _MARGIN and x > _MARGIN:
                x, y = float(_MARGIN), y + _LINE + 4
            out.append(
                f'<rect x="{x:.1f}" y="{y - 11:.1f}" width="20" height="13" fill="{fill}" stroke="{edge}"/>'
                f'<text x="{x + 26:.1f}" y="{y:.1f}">{_text(words)}</text>\n'
            )
            x += width
        if len(self.on) > 1:
            y += _LINE + 4
            lower = ", ".join(self.layers[layer] for layer in self.on[1:])
            note = f"Full tone: {self.layers[self.on[0]]}; pale: {lower}. Seen from the top side."
            out.append(f'<text x="{_MARGIN}" y="{y:.1f}">{_text(note)}</text>\n')
        elif self.on:
            y += _LINE + 4
            out.append(f'<text x="{_MARGIN}" y="{y:.1f}">{_text(f"Layer {self.layers[self.on[0]]}")}, ')
            out.append("seen from the top side.</text>\n")
        return "".join(out), y

    def _filled(
        self, shapes: Iterable[DrawnShape], fill: str, *, edge: str, dash: str = "", opacity: float = 1.0
    ) -> str:
        ways = "".join(self._ring(ring) for shape in shapes for ring in (shape.outline, *shape.holes))
        dashes = f' stroke-dasharray="{dash}"' if dash else ""
        faded = f' opacity="{opacity}"' if opacity < 1 else ""
        return (
            f'<path d="{ways}" fill="{fill}" fill-rule="evenodd" stroke="{edge}" stroke-width="0.8"{dashes}{faded}/>\n'
        )

    def _ring(self, ring: Ring) -> str:
        return "M" + "L".join(self.canvas.at(xy) for xy in ring) + "Z"

    def _hole(self, at: Point, drill_mm: float, *, used: bool) -> str:
        x, y = self.canvas.xy(at)
        radius = max(drill_mm / 2 * self.canvas.scale, 1.0)
        width = 2 if used else 1
        return (
            f'<circle cx="{x:.2f}" cy="{y:.2f}" r="{radius:.2f}" fill="#ffffff" stroke="{_BLACK}" '
            f'stroke-width="{width}"/>\n'
        )

    def _route(self, pieces: tuple[DrawnPiece, ...]) -> str:
        """The centre line; parts in series and barrels are no line."""
        out, last = [], ""
        for piece in pieces:
            if piece.kind not in {"track", "join"}:
                continue
            start = self.canvas.at(piece.start)
            if start != last:
                out.append(f"M{start}")
            out.append(self._step(piece))
            last = self.canvas.at(piece.end)
        return "".join(out)

    def _samples(self, piece: DrawnPiece) -> list[tuple[float, float]]:
        """Points along a piece's chord, near enough that no disc fits between two."""
        (x0, y0), (x1, y1) = self.canvas.xy(piece.start), self.canvas.xy(piece.end)
        steps = min(max(math.ceil(math.hypot(x1 - x0, y1 - y0) / 8), 1), 200)
        return [(x0 + (x1 - x0) * i / steps, y0 + (y1 - y0) * i / steps) for i in range(steps + 1)]

    def _step(self, piece: DrawnPiece) -> str:
        if piece.centre is None:
            return f"L{self.canvas.at(piece.end)}"
        cx, cy = piece.centre
        radius = math.hypot(piece.start[0] - cx, piece.start[1] - cy)
        drawn, way = radius * self.canvas.scale, 0 if piece.sweep_rad > 0 else 1
        # Two halves, since an arc whose ends are one place would be nothing.
        angle = math.atan2(piece.start[1] - cy, piece.start[0] - cx) + piece.sweep_rad / 2
        middle = (cx + radius * math.cos(angle), cy + radius * math.sin(angle))
        return "".join(f"A{drawn:.2f} {drawn:.2f} 0 0 {way} {self.canvas.at(to)}" for to in (middle, piece.end))

    def _parts(self) -> list[str]:
        out = []
        for part in self.drawing.parts:
            if not part.outline:
                continue
            points = [self.canvas.xy(xy) for xy in part.outline]
            xs, ys = [x for x, _ in points], [y for _, y in points]
            out.append(
                f'<rect x="{min(xs) - 4:.1f}" y="{min(ys) - 4:.1f}" width="{max(xs) - min(xs) + 8:.1f}" '
                f'height="{max(ys) - min(ys) + 8:.1f}" fill="none" stroke="{_BLACK}" stroke-dasharray="2 2"/>\n'
            )
            ends = {"source": " (source)", "load": " (load)"}
            words = _short(f"{part.ref}{ends.get(part.role, '')}", 30)
            half = _CHARACTER / 2 * len(words)
            x = min(max((min(xs) + max(xs)) / 2, self.canvas.left + half), self.canvas.left + self.canvas.width - half)
            top, bottom = self.canvas.top, self.bottom
            y = min(ys) - 8 if min(ys) - 20 > top else max(ys) + 18 if max(ys) + 22 < bottom else top + 14
            out.append(
                f'<text x="{x:.1f}" y="{y:.1f}" text-anchor="middle" stroke="#ffffff" stroke-width="3" '
                f'paint-order="stroke" fill="{_BLACK}">{_text(words)}</text>\n'
            )
        return out


def _caption(result: Result, pair: PairResult, top: float) -> tuple[str, int]:
    """Verdict and figures, the findings by number, what the picture stands on; and the height of the whole."""
    verdict = {"flag": "flagged", "pass": "passed"}.get(pair.verdict, pair.verdict)
    lines = [f"{verdict}{f', class {pair.klass}' if pair.klass else ''}"]
    known = [figure for figure in FIGURES if figure.key in _FIGURES and getattr(pair.measures, figure.key) is not None]
    told = (f"{figure.label}: {value(pair.measures, figure)} {figure.unit}" for figure in known)
    # A figure is not parted from its label at the end of a line.
    lines += ["; ".join(one.replace(" ", "\u00a0") for one in told)]
    rejections = [(p.rejection_db, p.frequency_hz) for p in pair.balance if p.rejection_db is not None]
    if rejections:
        least, at = min(rejections)
        lines.append(f"least rejection of the link: {least:.1f} dB, at {_hertz(at)}")
    for number, finding in enumerate(pair.findings, start=1):
        waived = " (waived)" if finding.waived else ""
        lines.append(f"{number}  {finding.severity}{waived} {finding.rule}: {finding.message}")
    lines += [f"undecided {one.rule}: {one.missing}" for one in pair.unjudged]
    if pair.drawing is not None and pair.drawing.unknown_layers:
        lines.append("not all copper next to the legs' layers is in the file: where the reference is open is not known")
    lines += [
        f"{PurePath(result.board.file).name}, SHA-256 {result.board.sha256[:16]}…, pairrules {result.version}",
        CAUTIONS,
    ]
    out, y = [], top
    for line in lines:
        for i, part in enumerate(textwrap.wrap(safe(line), _CHARACTERS) or [""]):
            out.append(f'<text x="{_MARGIN + (18 if i else 0)}" y="{y:.1f}">{_text(part)}</text>\n')
            y += _LINE
    return "".join(out), math.ceil(y)


def _text(text: str) -> str:
    return escape(safe(text))


def _short(text: str, most: int) -> str:
    clean = safe(text)
    return clean if len(clean) <= most else f"{clean[: most - 1]}…"


def _hertz(frequency: float) -> str:
    for size, unit in ((1e9, "GHz"), (1e6, "MHz"), (1e3, "kHz")):
        if frequency >= size:
            return f"{frequency / size:.4g} {unit}"
    return f"{frequency:.4g} Hz"
