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
    """Greatest voltage [V] between the legs while a neighbour swings [V] evenly within its rise time [s].

    Each leg answers a ramp with R C dV/dt (1 − e^(−t/RC)), greatest at the ramp's end; ΔC R dV/dt for RC far below the
    rise time. The difference is greatest at the ramp's end or where both legs' slopes are equal.
    Source: step response of an RC high-pass (elementary circuit theory); limit as in Ott, ch. 2 (from memory).
    """
    slope = swing / rise_time
    tau = [C * R for C, R in zip(capacitance, resistance, strict=True)]
    times = [rise_time]
    if min(tau) > 0 and tau[0] != tau[1]:
        times.append(min(rise_time, float(np.log(tau[0] / tau[1]) / (1 / tau[1] - 1 / tau[0]))))
    answers = [
        sum(sign * t * -np.expm1(-time / t) for sign, t in zip((1, -1), tau, strict=True) if t) for time in times
    ]
    return float(max(abs(slope * answer) for answer in answers))
