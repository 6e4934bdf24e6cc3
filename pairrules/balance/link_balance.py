"""The balance of one link at each frequency, by cause: what a result shows, with the complex numbers behind it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from pairrules.balance.conversion import decibel, response_by_cause
from pairrules.balance.networks import Element


@dataclass(frozen=True, slots=True, kw_only=True)
class LinkBalance:
    """One frequency. Ratios in dB; `None` where the link has no element of that cause, or there is no finite answer.

    Parameters
    ----------
    conversion, gain: complex, as `conversion.Response`. contributions: cause to complex conversion.
    rejection_db: of the whole link, the receiver's own included where it is known.
    """

    frequency_hz: float
    source_db: float | None
    trace_db: float | None
    cable_db: float | None
    load_db: float | None
    total_db: float | None
    rejection_db: float | None
    conversion: complex
    gain: complex
    contributions: Mapping[str, complex]


def balance_points(
    link: Sequence[Element],
    frequencies: npt.ArrayLike,
    receiver_rejection: npt.ArrayLike | None = None,
) -> tuple[LinkBalance, ...]:
    """The balance of a link: elements of source, cable, trace and load in the order the signal passes them.

    Parameters
    ----------
    link: each element tagged with its cause; cables may stand between traces.
    frequencies: (F,) [Hz].
    receiver_rejection: one figure or (F,) [dB], positive, the receiver's own; None where not known.

    Returns
    -------
    One record a frequency, in the order given. rejection = −20 log(|conversion|/|A_d| + 10^(−R/20)).
    """
    at = np.atleast_1d(np.asarray(frequencies, dtype=np.float64))
    response, causes = response_by_cause(link, at)
    with np.errstate(divide="ignore", invalid="ignore"):
        referred = np.abs(response.conversion) / np.abs(response.gain)
    if receiver_rejection is not None:
        referred = referred + 10 ** (-np.asarray(receiver_rejection, dtype=np.float64) / 20)
    return tuple(
        LinkBalance(
            frequency_hz=float(at[i]),
            **{f"{cause}_db": _db(causes[cause][i]) if cause in causes else None for cause in _SHOWN},
            total_db=_db(response.conversion[i]),
            rejection_db=None if (found := _db(referred[i])) is None else -found,
            conversion=complex(response.conversion[i]),
            gain=complex(response.gain[i]),
            contributions={cause: complex(value[i]) for cause, value in causes.items()},
        )
        for i in range(len(at))
    )


_SHOWN = ("source", "trace", "cable", "load")


def _db(ratio: complex) -> float | None:
    return float(decibel(ratio)) if np.isfinite(ratio) else None
