"""Chain matrices of two conductors over a reference, in differential and common coordinates.

Strategy. A state is (V_d, V_c, I_d, I_c) with V_d = V_1 − V_2, V_c = (V_1 + V_2)/2, I_d = (I_1 − I_2)/2, I_c = I_1 +
I_2; power is V_d I_d* + V_c I_c*, as in leg coordinates. A chain matrix F (…, 4, 4) gives the state at the source side
from the state at the load side, both currents toward the load, so that a cascade is the product from source to load. In
these coordinates everything symmetric is block diagonal to the last bit, and a small difference between the legs stands
alone in the off-diagonal places instead of being the difference of two large numbers: conversions keep their digits far
below −200 dB. Any leading axes broadcast (frequency last among them).

Source of the modes: Bockelman & Eisenstadt, "Combined differential and common-mode scattering parameters", IEEE Trans.
MTT 43 (1995) 1530; of the line: Paul, "Analysis of Multiconductor Transmission Lines", chain parameter matrix (both
from memory).
"""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
import numpy.typing as npt

Complexes: TypeAlias = npt.NDArray[np.complex128]
Scalars: TypeAlias = npt.ArrayLike

_TERMS = 10
"""Terms of the power series: with |P| ≤ 1 the first one left out is 1/21! = 2e-20 of the sum."""

_MOST_DOUBLINGS = 40
"""A line of more than 2^40 radians has no phase left in double precision."""


class RangeError(ValueError):
    """A line's figures leave the range of numbers."""


def series_modes(plus: Scalars, minus: Scalars, mutual: Scalars = 0.0) -> Complexes:
    """Series impedances of the legs and the mutual one [ohm], as a (…, 2, 2) matrix Z: V_dc = Z I_dc."""
    p, n, m = (np.asarray(value, dtype=np.complex128) for value in (plus, minus, mutual))
    return _matrix(p + n - 2 * m, (p - n) / 2, (p - n) / 2, (p + n + 2 * m) / 4)


def shunt_modes(plus: Scalars, minus: Scalars, between: Scalars = 0.0) -> Complexes:
    """Admittances [S] from each leg to reference and between the legs, as a (…, 2, 2) matrix I_dc = Y V_dc.

    `between` is kept apart rather than added to both legs first: a small leakage to reference beside a large one across
    would be lost in the sum.
    """
    p, n, b = (np.asarray(value, dtype=np.complex128) for value in (plus, minus, between))
    return _matrix((p + n) / 4 + b, (p - n) / 2, (p - n) / 2, p + n)


def series(Z: Complexes) -> Complexes:
    """Chain matrix (…, 4, 4) of a series impedance Z (…, 2, 2) in modes."""
    return _blocks(None, Z, None, None)


def shunt(Y: Complexes) -> Complexes:
    """Chain matrix (…, 4, 4) of a shunt admittance Y (…, 2, 2) in modes; Y need not be symmetric (active inputs)."""
    return _blocks(None, None, Y, None)


def line(Z: Complexes, Y: Complexes) -> Complexes:
    """Chain matrix of a uniform two-conductor line.

    Parameters
    ----------
    Z, Y: (…, 2, 2) series impedance [ohm] and shunt admittance [S] in modes of the line's whole length, symmetric. Legs
        without coupling may have each its own length, since only the product with the length counts.

    Returns
    -------
    (…, 4, 4): [[cosh √P, (sinh √P/√P) Z], [Y sinh √P/√P, (cosh √P)ᵀ]] with P = ZY.

    Both functions are entire in P, so they are summed as power series of P/4ⁿ and brought back by the double-argument
    formulas. No eigenvector is formed: equal or nearly equal modes, f → 0 and a leg without any length are nothing
    special, and a symmetric line stays exactly symmetric.

    Raises: RangeError where the line is too long for double precision (2^40 radians) or not finite.
    """
    with np.errstate(over="ignore", invalid="ignore"):  # what leaves the range of numbers is refused next
        product = Z @ Y
    cosh, sinhc = _cosh_and_sinhc(product)
    return _blocks(cosh, sinhc @ Z, Y @ sinhc, np.swapaxes(cosh, -1, -2))


def cascade(*chains: Complexes) -> Complexes:
    """Product of chain matrices, source side first."""
    total: Complexes = np.eye(4, dtype=np.complex128)
    for chain in reversed(chains):
        total = chain @ total
    return total


def to_legs(F: Complexes) -> Complexes:
    """The same chain matrix for the state (V_1, V_2, I_1, I_2) of the legs."""
    voltage = np.array([[0.5, 1.0], [-0.5, 1.0]])
    current = np.array([[1.0, 0.5], [-1.0, 0.5]])
    out = np.zeros((4, 4))
    out[:2, :2], out[2:, 2:] = voltage, current
    return np.asarray(out @ F @ np.linalg.inv(out), dtype=np.complex128)


def _cosh_and_sinhc(P: Complexes) -> tuple[Complexes, Complexes]:
    size = np.abs(P).sum(axis=-1).max(axis=-1) if P.size else np.zeros(P.shape[:-2])
    if not np.isfinite(size).all():
        raise RangeError("a line's impedance times admittance is not finite")
    doublings = np.maximum(np.ceil(np.log2(np.maximum(size, 1.0)) / 2), 0).astype(np.int64)
    most = int(doublings.max(initial=0))
    if most > _MOST_DOUBLINGS:
        raise RangeError("a line is longer than 2^40 radians, too long to compute")
    part = P * (0.25**doublings)[..., None, None]
    one = np.eye(2)
    cosh: Complexes = np.zeros_like(part)
    sinhc: Complexes = np.zeros_like(part)
    for k in range(_TERMS, 0, -1):
        cosh = part @ (one + cosh) / ((2 * k - 1) * (2 * k))
        sinhc = part @ (one + sinhc) / ((2 * k) * (2 * k + 1))
    cosh, sinhc = one + cosh, one + sinhc
    for step in range(most):
        active = (doublings > step)[..., None, None]
        # cosh 2x = 1 + 2 sinh² x and sinh 2x = 2 sinh x cosh x; without cosh² no error grows fourfold.
        with np.errstate(over="ignore", invalid="ignore"):
            doubled_cosh = one + 2 * part @ sinhc @ sinhc
            doubled_sinhc = sinhc @ cosh
        cosh, sinhc = np.where(active, doubled_cosh, cosh), np.where(active, doubled_sinhc, sinhc)
        part = np.where(active, 4 * part, part)
    return cosh, sinhc


def _matrix(dd: Complexes, dc: Complexes, cd: Complexes, cc: Complexes) -> Complexes:
    dd, dc, cd, cc = np.broadcast_arrays(dd, dc, cd, cc)
    return np.stack([np.stack([dd, dc], axis=-1), np.stack([cd, cc], axis=-1)], axis=-2)


def _blocks(A: Complexes | None, B: Complexes | None, C: Complexes | None, D: Complexes | None) -> Complexes:
    shape = np.broadcast_shapes(*(block.shape[:-2] for block in (A, B, C, D) if block is not None))
    out = np.zeros((*shape, 4, 4), dtype=np.complex128)
    out[..., :2, :2] = np.eye(2) if A is None else A
    out[..., 2:, 2:] = np.eye(2) if D is None else D
    if B is not None:
        out[..., :2, 2:] = B
    if C is not None:
        out[..., 2:, :2] = C
    return out
