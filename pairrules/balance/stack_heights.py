"""Where each copper layer lies in height, and what dielectric lies where, for drawing cross-sections of a board."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise

from pairrules.board.stackup import Layer, Stackup
from pairrules.fields import cross_section

THINNEST_MM, THICKEST_MM = 0.001, 100.0
"""Thicknesses a layer can have, ten times the grid that sections are drawn on at least; another is a slip of the file,
and as good as none. Common practice, no source: foils begin at 1.5 µm, laminates at 5 µm."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Mask:
    """Solder mask over an outermost copper layer. thickness [mm]."""

    thickness: float
    er: float
    loss_tangent: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Heights:
    """A stack as heights [mm], 0 at the lower face of the lowest laminate or copper, upward.

    Parameters
    ----------
    copper: (lower, upper) face of each copper layer, in the order of `Stackup.copper`.
    slabs: dielectrics between the outermost copper layers, and what fills inner copper layers between tracks.
    top, bottom: mask over the outermost copper, `None` where the stack has none.
    assumed: what the stack left open and how it was taken.
    """

    copper: tuple[tuple[float, float], ...]
    slabs: tuple[cross_section.Layer, ...]
    top: Mask | None
    bottom: Mask | None
    assumed: tuple[str, ...]


def lacking(stackup: Stackup) -> tuple[str, ...]:
    """What a cross-section would need that the stack does not have, as "thickness of D1"; empty where nothing is."""
    inner = _between_outer_copper(stackup)
    found = [
        f"thickness of {layer.name}"
        for layer in stackup.layers
        if layer.thickness_mm is None or not THINNEST_MM <= layer.thickness_mm <= THICKEST_MM
    ]
    found += [
        f"dielectric between {upper.name} and {lower.name}"
        for upper, lower in pairwise(inner)
        if upper.kind == lower.kind == "copper"
    ]
    found += [
        f"permittivity of {layer.name}"
        for layer in stackup.layers
        if layer.kind == "dielectric" and layer.permittivity is None
    ]
    return tuple(found)


@lru_cache(maxsize=8)
def heights_of(stackup: Stackup) -> Heights:
    """The stack in heights; one record for the same stack.

    Raises: ValueError where `lacking` names something.
    """
    if missing := lacking(stackup):
        raise ValueError(f"the stackup lacks the {missing[0]}")
    inner = _between_outer_copper(stackup)
    y = sum(_thickness(layer) for layer in inner)
    copper: list[tuple[float, float]] = []
    slabs: list[cross_section.Layer] = []
    for place, layer in enumerate(inner):
        low = y - _thickness(layer)
        low = 0.0 if place == len(inner) - 1 else low
        if layer.kind == "copper":
            copper.append((low, y))
            filling = _filling(inner, place)
        else:
            filling = layer
        if filling is not None and low < y:
            slabs.append(_slab(low, y, filling))
        y = low
    lossless = [layer.name for layer in stackup.layers if layer.kind == "dielectric" and layer.loss_tangent is None]
    return Heights(
        copper=tuple(copper),
        slabs=tuple(slabs),
        top=_mask(stackup.layers[: _first(stackup)]),
        bottom=_mask(stackup.layers[_last(stackup) + 1 :]),
        assumed=(f"no loss tangent is known for {', '.join(lossless)}: taken as lossless",) if lossless else (),
    )


def _first(stackup: Stackup) -> int:
    return next(i for i, layer in enumerate(stackup.layers) if layer.kind == "copper")


def _last(stackup: Stackup) -> int:
    return max(i for i, layer in enumerate(stackup.layers) if layer.kind == "copper")


def _between_outer_copper(stackup: Stackup) -> tuple[Layer, ...]:
    return stackup.layers[_first(stackup) : _last(stackup) + 1]


def _thickness(layer: Layer) -> float:
    return layer.thickness_mm or 0.0


def _filling(inner: tuple[Layer, ...], place: int) -> Layer | None:
    """What lies between the tracks of an inner copper layer: resin of the softer neighbour, the lower permittivity.

    Outer copper stands in air or mask. Common practice, no source: pressed resin has less glass in it.
    """
    if place in {0, len(inner) - 1}:
        return None
    beside = [layer for layer in (inner[place - 1], inner[place + 1]) if layer.kind == "dielectric"]
    return min(beside, key=lambda layer: layer.permittivity or 1.0) if beside else None


def _slab(low: float, high: float, of: Layer) -> cross_section.Layer:
    return cross_section.Layer(y0=low, y1=high, er=of.permittivity or 1.0, loss_tangent=of.loss_tangent or 0.0)


def _mask(outside: tuple[Layer, ...]) -> Mask | None:
    """Dielectric outside the outermost copper; several layers count as one, its figures weighted by thickness."""
    layers = [layer for layer in outside if layer.kind == "dielectric" and layer.thickness_mm]
    total = sum(_thickness(layer) for layer in layers)
    if not total:
        return None

    def mean(values: list[float]) -> float:
        return sum(v * _thickness(layer) for v, layer in zip(values, layers, strict=True)) / total

    return Mask(
        thickness=total,
        er=mean([layer.permittivity or 1.0 for layer in layers]),
        loss_tangent=mean([layer.loss_tangent or 0.0 for layer in layers]),
    )
