"""How much of a common e.m.f. becomes a difference at the load, and which cause does it.

One e.m.f. V_c, the same on both legs against the load's reference, acts in front of the first element; the last
element leaves the load's two nodes open, since the load's own impedances are elements of the link. With the cascade's
upper left block A the e.m.f. is E = A V_load, so that V_d for E = (0, 1) and for E = (1, 0) are the conversion and the
differential gain.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from pairrules.balance.networks import CAUSES, Element, chains_of
from pairrules.fields.chain_matrix import Complexes

FLOOR_DB = -400.0
"""What an exact zero is written as: a file of numbers has no −∞. Nothing computed in double precision means less."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Response:
    """What arrives between the load's nodes, complex, shape (…, F).

    Parameters
    ----------
    conversion: V_plus − V_minus [V] for 1 V on both legs.
    gain: V_plus − V_minus [V] for +½ V behind plus and −½ V behind minus.
    """

    conversion: Complexes
    gain: Complexes


def solve(link: Sequence[Element], frequencies: npt.ArrayLike) -> Response:
    """The link's response.

    Parameters: link: elements, source first. frequencies (F,) [Hz].
    Returns: arrays (…, F); not finite where a line attenuates beyond the range of numbers (about 3000 dB), or where a
    capacitor in series is asked about at 0 Hz.
    """
    omega = _omega(frequencies)
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        return response([element.chain(omega) for element in link], omega)


def _omega(frequencies: npt.ArrayLike) -> npt.NDArray[np.float64]:
    return 2 * np.pi * np.atleast_1d(np.asarray(frequencies, dtype=np.float64))


def response(chains: Sequence[Complexes], omega: npt.NDArray[np.float64]) -> Response:
    """As `solve`, of elements that are chain matrices (…, F, 4, 4) already; omega (F,) [rad/s]."""
    state: Complexes = np.zeros((*omega.shape, 4, 2), dtype=np.complex128)
    state[..., :2, :] = np.eye(2)
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        for chain in reversed(chains):
            state = chain @ state
        dd, dc, cd, cc = state[..., 0, 0], state[..., 0, 1], state[..., 1, 0], state[..., 1, 1]
        determinant = dd * cc - dc * cd
        return Response(conversion=-dc / determinant, gain=cc / determinant)


def by_cause(link: Sequence[Element], frequencies: npt.ArrayLike) -> Mapping[str, Complexes]:
    """Conversion put down to each cause: all elements of every other cause with equal legs. (…, F), complex.

    Only causes that the link has elements of are there. While all are small they add up, with phase, to the whole.
    """
    return response_by_cause(link, frequencies)[1]


def response_by_cause(link: Sequence[Element], frequencies: npt.ArrayLike) -> tuple[Response, Mapping[str, Complexes]]:
    """As `solve` and `by_cause`, at the cost of one; no value of the link has an axis of samples."""
    causes = [element.cause for element in link]
    present = [cause for cause in CAUSES if cause in causes]
    omega = _omega(frequencies)
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        given, equal = chains_of(link, omega)
    # The whole link comes first, then one variant a cause.
    own = np.array([[True] * len(link), *([one == cause for one in causes] for cause in present)])
    chosen = own.T[:, :, None, None, None]
    found = response([np.where(*each) for each in zip(chosen, given, equal, strict=True)], omega)
    whole = Response(conversion=found.conversion[0], gain=found.gain[0])
    return whole, dict(zip(present, found.conversion[1:], strict=True))


def decibel(ratio: npt.ArrayLike) -> npt.NDArray[np.float64]:
    """20 log |ratio|, never below `FLOOR_DB`."""
    size: npt.NDArray[np.float64] = np.maximum(np.abs(np.asarray(ratio)), 10 ** (FLOOR_DB / 20))
    return 20 * np.log10(size)
