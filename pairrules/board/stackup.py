"""Copper layers and the stack of copper and dielectric, from top to bottom."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise


@dataclass(frozen=True, slots=True, kw_only=True)
class Layer:
    """One layer of the stack. `None` where the file does not say.

    Parameters
    ----------
    name: as in the file.
    kind: "copper" or "dielectric" (solder mask is a dielectric that lies outside the outermost copper).
    thickness_mm, permittivity, loss_tangent: of the material.
    """

    name: str
    kind: str
    thickness_mm: float | None = None
    permittivity: float | None = None
    loss_tangent: float | None = None

    def __post_init__(self) -> None:
        if self.kind not in {"copper", "dielectric"}:
            raise ValueError(f"layer kind {self.kind!r} is neither copper nor dielectric")


@dataclass(frozen=True, slots=True, kw_only=True)
class Stackup:
    """The layers from top to bottom. Where a file gives only copper, no dielectric stands between its layers."""

    layers: tuple[Layer, ...]

    @property
    def copper(self) -> tuple[str, ...]:
        """Names of the copper layers, top first."""
        return tuple(layer.name for layer in self.layers if layer.kind == "copper")

    def barrel_mm(self, first: int, last: int) -> float:
        """Distance [mm] from centre to centre of two copper layers (indices into `copper`); NaN where unknown."""
        if first == last:
            return 0.0
        first, last = sorted((first, last))
        places = [i for i, layer in enumerate(self.layers) if layer.kind == "copper"]
        span = self.layers[places[first] : places[last] + 1]
        # Copper on copper cannot be: the file leaves out what lies between, and with it the distance.
        if any(upper.kind == lower.kind == "copper" for upper, lower in pairwise(span)):
            return math.nan
        sizes = [math.nan if layer.thickness_mm is None else layer.thickness_mm for layer in span]
        return math.fsum(sizes) - (sizes[0] + sizes[-1]) / 2
