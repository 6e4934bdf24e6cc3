"""What a pair picks up between its legs: from a magnetic field through its loop, from a neighbour's swing. SI units."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from pairrules.fields.chain_matrix import Complexes

MU_0 = 1.25663706127e-6
"""Magnetic constant [H/m]. Source: CODATA 2022."""


def flux_density(field: float) -> float:
    """Flux density [T] of a field [A/m] in air: 1 A/m is 1.257 µT."""
    return MU_0 * field


def magnetic_pickup(
    density: float,
    area: Sequence[float],
    frequencies: npt.ArrayLike,
    *,
    direction: Sequence[float] | None = None,
) -> npt.NDArray[np.float64]:
    """Voltage [V] around the pair's loop from a uniform alternating field.

    Parameters
    ----------
    density: [T], r.m.s. or peak; the voltage is the same of the two.
    area: vector area of the closed path (x, y, z) [m²]; lobes of crossing legs cancel in it.
    direction: of the field, (x, y, z) of any length; None for the worst one, along the area.

    Returns
    -------
    (F,): 2πf B A cos θ. Source: Ott, "Electromagnetic Compatibility Engineering", ch. 2 (from memory). Holds while the
    loop is much smaller than a wavelength and its impedance much larger than its reactance.
    """
    vector = np.asarray(area, dtype=np.float64)
    if direction is None:
        linked = float(np.linalg.norm(vector))
    else:
        along = np.asarray(direction, dtype=np.float64)
        size = float(np.linalg.norm(along))
        if size == 0:
            raise ValueError("a field's direction has a length")
        linked = abs(float(vector @ along)) / size
    return 2 * np.pi * np.atleast_1d(np.asarray(frequencies, dtype=np.float64)) * density * linked


def electric_pickup(
    swing: float,
    capacitance: tuple[float, float],
    resistance: tuple[float, float],
    frequencies: npt.ArrayLike,
) -> Complexes:
    """Voltage [V] between the legs from a neighbour's alternating swing [V].

    Parameters: capacitance (plus, minus) [F] from the neighbour to each leg; resistance (plus, minus) [ohm] that each
    leg has to reference, all of the link in parallel.
    Returns: (F,) complex. Each leg is an RC divider jωCR/(1 + jωCR); for small ωRC this is jω V (C₁R₁ − C₂R₂) (Ott,
    ch. 2, from memory).
    """
    omega = 2 * np.pi * np.atleast_1d(np.asarray(frequencies, dtype=np.float64))
    x, y = (1j * omega * C * R for C, R in zip(capacitance, resistance, strict=True))
    # The difference of the two dividers, written so that equal legs give exactly nothing.
    rates = 1j * omega * (capacitance[0] * resistance[0] - capacitance[1] * resistance[1])
    return np.asarray(swing * rates / ((1 + x) * (1 + y)), dtype=np.complex128)


def edge_pickup(
    swing: float, rise_time: float, capacitance: tuple[float, float], resistance: tuple[float, float]
) -> float:
    """Greatest voltage [V] between the legs when a neighbour swings [V] evenly within its rise time [s].

    Each leg answers a ramp with τ dV/dt (1 − e^(−t/τ)), τ = RC, and falls with e^(−t/τ) after its end. The difference
    grows until the end and somewhat beyond, as the faster leg falls first. With τ far below the rise time this is
    ΔC R dV/dt.
    Source: ramp response of an RC high-pass (elementary circuit theory); limit as in Ott, ch. 2 (from memory).
    """
    fast, slow = sorted(C * R for C, R in zip(capacitance, resistance, strict=True))
    reached = [-np.expm1(-rise_time / tau) if tau else 1.0 for tau in (fast, slow)]
    beyond = 0.0 if fast in (0.0, slow) else float(np.log(reached[0] / reached[1]) / (1 / fast - 1 / slow))
    legs = [tau * part * np.exp(-beyond / tau) if tau else 0.0 for tau, part in zip((fast, slow), reached, strict=True)]
    return float(abs(swing) / rise_time * (legs[1] - legs[0]))
