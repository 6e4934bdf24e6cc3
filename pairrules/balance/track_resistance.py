"""Resistance of a track on its own against frequency."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

from pairrules.board.columns import Floats
from pairrules.fields.loss import COPPER_OHM_M

MU_0 = 4e-7 * math.pi


def track_resistance(
    direct: npt.ArrayLike, widths_mm: npt.ArrayLike, thickness_mm: npt.ArrayLike, frequencies: Floats
) -> Floats:
    """Resistance per metre (F, legs) [ohm/m].

    √(Rdc² + Rs²): Rs lets the current flow in one skin depth along the circumference 2(w + t), evenly. The two
    regimes meet near δ = t/2. Crowding at the edges and loss of the planes are left out; together they raise Rs
    by a quarter to a half on common cross-sections (common practice, no source): attenuation, not balance.

    Parameters: direct: (legs,) [ohm/m] at d.c. widths_mm, thickness_mm: of each leg. frequencies: (F,) [Hz].
    Source: skin depth δ = √(ρ/(π f µ0)) (textbook).
    """
    dc = np.asarray(direct, dtype=np.float64)
    around = 2e-3 * (np.asarray(widths_mm, dtype=np.float64) + np.asarray(thickness_mm, dtype=np.float64))
    surface = np.sqrt(COPPER_OHM_M * math.pi * frequencies * MU_0)
    found: Floats = np.hypot(dc, surface[:, None] / around)
    return found
