"""What tolerances make of a link's conversion: the worst case, and a bound that 95 of 100 links keep."""

from __future__ import annotations

import itertools
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import numpy.typing as npt

from pairrules.balance.conversion import response
from pairrules.balance.networks import Element, Floats, Series, Shunt, chains_of
from pairrules.fields.chain_matrix import Complexes, cascade

SEED = 20240229
"""Of the samples; the same link gives the same bound on every run."""

SAMPLES = 4000
"""With these the 95 % bound itself is known to ±0.35 % of probability (binomial, one sigma)."""

_MOST_CORNERS = 10
"""Up to so many values every combination of signs is tried (1024)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """One value of a link that may be off by ±share.

    Parameters: element: index into the link. field: its name there. at: index of its last axes, () for a single value.
    """

    element: int
    field: str
    at: tuple[int, ...]
    share: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Toleranced:
    """|V_d/V_c| at each frequency, (F,): as given; at worst; and not exceeded by 95 % of samples."""

    nominal: Floats
    worst: Floats
    bound_95: Floats


def spreads_of(link: Sequence[Element], share: float, *, cause: str) -> tuple[Spread, ...]:
    """A spread of ±share for every resistance, inductance and capacitance of the lumped elements of one cause."""
    found: list[Spread] = []
    for index, element in enumerate(link):
        if element.cause != cause:
            continue
        if isinstance(element, Series):
            names = [(name, leg) for name in ("resistance", "inductance", "capacitance") for leg in (0, 1)]
            found += _spreads(element, index, [(name, (leg,)) for name, leg in names], share)
        elif isinstance(element, Shunt):
            names = [(name, leg) for name in ("resistance", "capacitance") for leg in (0, 1)]
            single: list[tuple[str, tuple[int, ...]]] = [("across_resistance", ()), ("across_capacitance", ())]
            found += _spreads(element, index, [(name, (leg,)) for name, leg in names] + single, share)
    return tuple(found)


def tolerated(
    link: Sequence[Element],
    spreads: Sequence[Spread],
    frequencies: npt.ArrayLike,
    *,
    samples: int = SAMPLES,
    seed: int = SEED,
) -> Toleranced:
    """The conversion of a link whose values are spread.

    Worst case: the greatest of all combinations of extremes for up to ten values; for more, the nominal magnitude plus
    the sum of the magnitudes that each value adds alone (linearised). Bound: values drawn independently and evenly
    between their extremes, a common assumption for parts sold by tolerance, no source.
    """
    omega = 2 * np.pi * np.atleast_1d(np.asarray(frequencies, dtype=np.float64))
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        chains = chains_of(link, omega)[0]
        nominal = np.abs(response(list(chains), omega).conversion)
        if not spreads:
            return Toleranced(nominal=nominal, worst=nominal, bound_95=nominal)
        count = len(spreads)
        if count <= _MOST_CORNERS:
            corners = np.array(list(itertools.product((-1.0, 1.0), repeat=count)))
        else:
            corners = np.vstack([np.eye(count), -np.eye(count)])
        drawn = np.random.default_rng(seed).uniform(-1.0, 1.0, (samples, count))
        found = _conversion(link, chains, spreads, omega, np.vstack([corners, drawn]))
    extreme, usual = found[:, : len(corners)], np.abs(found[:, len(corners) :])
    if count <= _MOST_CORNERS:
        worst = np.abs(extreme).max(axis=-1)
    else:
        worst = nominal + np.abs(extreme[:, :count] - extreme[:, count:]).sum(axis=-1) / 2
    return Toleranced(nominal=nominal, worst=np.maximum(worst, nominal), bound_95=np.quantile(usual, 0.95, axis=-1))


def _conversion(
    link: Sequence[Element], chains: Complexes, spreads: Sequence[Spread], omega: Floats, deviations: Floats
) -> Complexes:
    """Conversions (F, S) with each spread's value off by deviation × share.

    Parameters: chains: of the link as given (elements, F, 4, 4). deviations: (S, spreads).

    Samples stand last: what lies between two spread elements is then one product of (4, 4) and (4, 2S) a frequency,
    and an element that is spread changes the state by its own few numbers, not by a matrix a sample.
    """
    changed = _spread_elements(link, spreads, deviations)
    state: Complexes = np.zeros((len(omega), 4, 2, 1), dtype=np.complex128)
    state[:, [0, 1], [0, 1]] = 1.0
    end = len(link)
    for place in (*sorted(changed, reverse=True), -1):
        if place + 1 < end:
            between = cascade(*chains[place + 1 : end])
            size = state.shape
            state = (between @ state.reshape(*size[:2], -1)).reshape(size)
        end = place
        if place < 0:
            break
        element = changed[place]
        state = np.broadcast_to(state, (*state.shape[:3], len(deviations))).copy()
        volts, amperes = state[:, :2], state[:, 2:]
        if isinstance(element, Series):
            volts += _times(element.impedance(omega), amperes)
        else:
            amperes += _times(element.admittance(omega), volts)
    (dd, dc), (cd, cc) = np.moveaxis(state[:, :2], 0, 2)
    found: Complexes = -dc / (dd * cc - dc * cd)
    return found


def _times(by: Complexes, state: Complexes) -> Complexes:
    """The product of matrices (S, F, 2, 2) and states (F, 2, 2, S)."""
    (a, b), (c, d) = np.ascontiguousarray(np.moveaxis(by, (0, 1), (3, 2)))[:, :, :, None]
    first, second = state[:, 0], state[:, 1]
    return np.stack([a * first + b * second, c * first + d * second], axis=1)


def _spread_elements(
    link: Sequence[Element], spreads: Sequence[Spread], deviations: Floats
) -> dict[int, Series | Shunt]:
    """The elements that have spread values, by their place, with a first axis of samples."""
    changed: dict[int, Series | Shunt] = {}
    for column, spread in enumerate(spreads):
        element: Any = changed.get(spread.element, link[spread.element])
        values = np.asarray(getattr(element, spread.field), dtype=np.float64)
        trailing = values.shape[values.ndim - len(spread.at) :]
        factor = np.ones((len(deviations), 1, *trailing))
        factor[_index(spread.at)] = 1 + spread.share * deviations[:, column, None]
        changed[spread.element] = replace(element, **{spread.field: values * factor})
    return changed


def _index(at: tuple[int, ...]) -> Any:
    """All samples and frequencies of one place in the last axes."""
    return (..., *at)


def _spreads(element: Element, index: int, places: Iterable[tuple[str, tuple[int, ...]]], share: float) -> list[Spread]:
    """Spreads of those values that are there: neither 0 nor infinite."""
    found = []
    for name, at in places:
        value = np.asarray(getattr(element, name))[_index(at)]
        if np.isfinite(value).all() and (value != 0).any():
            found.append(Spread(element=index, field=name, at=at, share=share))
    return found
