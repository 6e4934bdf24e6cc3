"""The canvas of a picture, and what is set on it beside copper: numbered places, and the scale bar."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from pairrules.drawing import Point

_RADIUS = 10.0
_AWAY = 26.0
_TURNS = 16
_TOGETHER = 6.0
"""Places nearer than this on the picture share one mark."""
_MOST_SCALE = 400.0


@dataclass(frozen=True, slots=True)
class Canvas:
    """A window of the board [mm], y upward, on a picture, y downward. `scale`: picture units a millimetre."""

    window: tuple[float, float, float, float]
    left: float
    top: float
    scale: float
    width: float
    height: float

    @classmethod
    def fitted(
        cls, window: tuple[float, float, float, float], *, left: float, top: float, width: float, tallest: float
    ) -> Canvas:
        """The window as large as fits, in the middle of `width`. Beyond it no copper is known, so no more is shown."""
        wide, tall = window[2] - window[0], window[3] - window[1]
        scale = min(width / max(wide, 1e-9), tallest / max(tall, 1e-9), _MOST_SCALE)
        return cls(window, left + (width - wide * scale) / 2, top, scale, wide * scale, tall * scale)

    def xy(self, at: Point) -> tuple[float, float]:
        """The place on the picture."""
        return self.left + (at[0] - self.window[0]) * self.scale, self.top + (self.window[3] - at[1]) * self.scale

    def at(self, at: Point) -> str:
        """The place as path coordinates."""
        x, y = self.xy(at)
        return f"{x:.2f} {y:.2f}"


def markers(
    canvas: Canvas, places: tuple[tuple[int, Point], ...], *, clear_of: Sequence[tuple[float, float]] = ()
) -> str:
    """A numbered disc beside each place with a line to it.

    Discs keep clear of each other, of the edge and, where there is room, of the picture's points `clear_of`.
    """
    spots: list[tuple[float, float, list[int]]] = []
    for number, at in places:
        x, y = canvas.xy(at)
        near = next((spot for spot in spots if math.hypot(spot[0] - x, spot[1] - y) < _TOGETHER), None)
        if near is None:
            spots.append((x, y, [number]))
        elif number not in near[2]:
            near[2].append(number)
    out: list[str] = []
    taken = [(x, y, 4.0) for x, y, _ in spots] + [(x, y, 4.0) for x, y in clear_of]
    for x, y, numbers in spots:
        label = ",".join(str(number) for number in numbers)
        half = _RADIUS + 3.5 * (len(label) - 1)
        cx, cy = _free(canvas, x, y, half, taken)
        taken.append((cx, cy, half))
        out.append(
            f'<line x1="{x:.1f}" y1="{y:.1f}" x2="{cx:.1f}" y2="{cy:.1f}" stroke="#ffffff" stroke-width="3.5"/>'
            f'<line x1="{x:.1f}" y1="{y:.1f}" x2="{cx:.1f}" y2="{cy:.1f}" stroke="#000000" stroke-width="1.5"/>'
            f'<circle cx="{x:.1f}" cy="{y:.1f}" r="3.5" fill="#f0e442" stroke="#000000" stroke-width="1.2"/>'
            f'<rect x="{cx - half:.1f}" y="{cy - _RADIUS:.1f}" width="{2 * half:.1f}" height="{2 * _RADIUS:.1f}" '
            f'rx="{_RADIUS}" fill="#f0e442" stroke="#000000" stroke-width="1.2"/>'
            f'<text x="{cx:.1f}" y="{cy + 4.5:.1f}" text-anchor="middle" font-weight="bold">{label}</text>\n'
        )
    return "".join(out)


def _free(
    canvas: Canvas, x: float, y: float, half: float, taken: list[tuple[float, float, float]]
) -> tuple[float, float]:
    """The place around (x, y) that is clearest of what is taken, the first of equals; begun at the upper right."""
    best, clear = (x, y), -math.inf
    for ring in (1.0, 1.7, 2.4):
        for turn in range(_TURNS):
            angle = -math.pi / 4 + turn * 2 * math.pi / _TURNS
            cx, cy = x + ring * _AWAY * math.cos(angle), y + ring * _AWAY * math.sin(angle)
            inside = (
                canvas.left + half <= cx <= canvas.left + canvas.width - half
                and canvas.top + _RADIUS <= cy <= canvas.top + canvas.height - _RADIUS
            )
            room = min((math.hypot(cx - ox, cy - oy) - half - other for ox, oy, other in taken), default=0.0)
            if inside and min(room, 4.0) > clear:
                best, clear = (cx, cy), min(room, 4.0)
    return best


def scale_bar(canvas: Canvas) -> str:
    """A bar of a round length, about a fifth of the picture, below its right end."""
    wanted = canvas.width / canvas.scale / 5
    power = 10 ** math.floor(math.log10(wanted))
    length = max(step * power for step in (1, 2, 5) if step * power <= wanted * (1 + 1e-9))
    right, y = canvas.left + canvas.width, canvas.top + canvas.height + 12
    left = right - length * canvas.scale
    return (
        f'<path d="M{left:.1f} {y - 4:.1f}v8M{left:.1f} {y:.1f}H{right:.1f}M{right:.1f} {y - 4:.1f}v8" '
        f'fill="none" stroke="#000000" stroke-width="1.5"/>'
        f'<text x="{left - 6:.1f}" y="{y + 4.5:.1f}" text-anchor="end">{length:g} mm</text>\n'
    )
