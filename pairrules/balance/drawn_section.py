"""A cross-section drawn from what a cut across the board met: the legs, copper beside them, planes, dielectrics."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache

from pairrules.balance.stack_heights import Heights, Mask
from pairrules.fields.cross_section import Conductor, CrossSection, Layer, Patch, Plane, Role

Span = tuple[float, float]
"""From and to [mm] across the pair."""

GRID_MM = 0.0001
"""Dimensions are rounded to this, so that the same section is solved once."""

PLANE_HEIGHTS = 6.5
"""A plane's edge farther from the legs than this many heights counts as nowhere."""

NEAR_HEIGHTS = 4.0
"""Copper beside the legs is drawn up to this many heights (to the nearest plane) away, and this wide at most."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Leg:
    """A leg in the cut: its name, the place of its centre and its width [mm]."""

    name: str
    centre: float
    width: float

    @property
    def span(self) -> Span:
        """Its edges."""
        return self.centre - self.width / 2, self.centre + self.width / 2


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Drawing:
    """What a section was drawn from, so that it can be drawn again with something changed; as of `draw`."""

    heights: Heights
    layer: int
    legs: tuple[Leg, ...]
    beside: tuple[Span, ...]
    planes: tuple[tuple[int, tuple[Span, ...]], ...]

    def section(self) -> CrossSection:
        """The section."""
        return draw(self.heights, self.layer, self.legs, self.beside, dict(self.planes))


def draw(
    heights: Heights,
    layer: int,
    legs: tuple[Leg, ...],
    beside: tuple[Span, ...],
    planes: dict[int, tuple[Span, ...]],
) -> CrossSection:
    """The section.

    Parameters
    ----------
    layer: index of the copper layer the legs run on. beside: foreign copper on it. planes: copper at 0 V by copper
        layer, as stretches across the cut; (−inf, inf) for a whole plane.

    Notes
    -----
    A plane stands as a sheet on the face that looks to the legs. Foreign copper on the legs' layer is at 0 V: a
    neighbour net is taken as quiet and of low impedance. Mask lies in one thickness over laminate and copper.
    """
    return draw_steps(
        heights,
        layer,
        tuple((leg.name, _steps(leg.span[0]), _steps(leg.span[1])) for leg in legs),
        beside_steps(beside),
        tuple(sorted(planes.items())),
    )


def beside_steps(beside: tuple[Span, ...]) -> tuple[tuple[int, int], ...]:
    """Copper beside the legs in steps of `GRID_MM`.

    Slivers below a step, which a cut near a corner leaves, carry no field worth the name.
    """
    steps = [(_steps(low), _steps(high)) for low, high in beside]
    return tuple(span for span in steps if span[0] < span[1])


@lru_cache(maxsize=8192)
def draw_steps(
    heights: Heights,
    layer: int,
    legs: tuple[tuple[str, int, int], ...],
    beside: tuple[tuple[int, int], ...],
    planes: tuple[tuple[int, tuple[Span, ...]], ...],
) -> CrossSection:
    """As `draw`, of dimensions in steps of `GRID_MM`: each leg's name and edges, copper beside, planes by layer.

    Cuts that come to the same steps, most of a board's, share one section.
    """
    low, high = heights.copper[layer]
    drawn = [
        Plane(
            y=_grid(heights.copper[k][0] if k < layer else heights.copper[k][1]),
            intervals=None if spans == ((-math.inf, math.inf),) else spans,
        )
        for k, spans in reversed(planes)
    ]
    copper = [
        *(_conductor(name, "signal", (x0, x1), low, high) for name, x0, x1 in legs),
        *(_conductor(f"beside {i + 1}", "grounded", span, low, high) for i, span in enumerate(beside)),
    ]
    layers, masks = _dielectrics(heights)
    patches: list[Patch] = []
    for mask, outer, upward in masks:
        if layer == outer:
            base = heights.copper[outer][0 if upward else 1]
            far = (high if upward else low) + (mask.thickness if upward else -mask.thickness)
            for conductor in copper:
                x0, x1 = conductor.x_range
                box = _box(_grid(x0 - mask.thickness), _grid(x1 + mask.thickness), *sorted((base, far)))
                patches.append(Patch(polygon=box, er=mask.er, loss_tangent=mask.loss_tangent))
    return CrossSection(conductors=tuple(copper), layers=layers, patches=tuple(patches), planes=tuple(drawn))


@lru_cache(maxsize=8)
def _dielectrics(heights: Heights) -> tuple[tuple[Layer, ...], tuple[tuple[Mask, int, bool], ...]]:
    """Slabs and masks as layers; and each mask, with the copper layer it lies on and whether it lies above it."""
    layers = [_rounded(slab) for slab in heights.slabs]
    masks = []
    for mask, outer, upward in ((heights.top, 0, True), (heights.bottom, len(heights.copper) - 1, False)):
        if mask is None:
            continue
        base = heights.copper[outer][0 if upward else 1]
        y0, y1 = sorted((base, base + (mask.thickness if upward else -mask.thickness)))
        layers.append(Layer(y0=_grid(y0), y1=_grid(y1), er=mask.er, loss_tangent=mask.loss_tangent))
        masks.append((mask, outer, upward))
    return tuple(layers), tuple(masks)


def _conductor(name: str, role: Role, steps: tuple[int, int], low: float, high: float) -> Conductor:
    x0 = steps[0] * GRID_MM + 0.0
    x1 = max(steps[1] * GRID_MM + 0.0, x0 + GRID_MM)
    if _grid(high) <= _grid(low):
        return Conductor(name=name, role=role, strip=(x0, x1, _grid(low)))
    return Conductor(name=name, role=role, polygon=_box(_grid(x0), _grid(x1), low, high))


def _box(x0: float, x1: float, low: float, high: float) -> tuple[tuple[float, float], ...]:
    y0, y1 = _grid(low), _grid(high)
    return ((x0, y0), (x1, y0), (x1, y1), (x0, y1))


def _rounded(slab: Layer) -> Layer:
    return Layer(y0=_grid(slab.y0), y1=_grid(slab.y1), er=slab.er, loss_tangent=slab.loss_tangent)


def _grid(value: float) -> float:
    return _steps(value) * GRID_MM + 0.0


def _steps(value: float) -> int:
    return round(value / GRID_MM)
