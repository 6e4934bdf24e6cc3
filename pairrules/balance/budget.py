"""How much imbalance a link may have before it no longer rejects what is wanted, without any board.

Each kind of imbalance is put into the link alone and raised, on either leg, until the wanted rejection is missed at one
of the frequencies; the same is done on top of what the link has already. Every trial is a full solution of the link.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from pairrules.balance.conversion import solve
from pairrules.balance.load_models import LoadModel, resistor_conversion
from pairrules.balance.networks import DifferenceInput, Element, Floats, Line, Series, Shunt

SPEED_OF_LIGHT = 299_792_458.0
"""[m/s], exact (SI)."""

_DECADE = 64
"""Trials a decade of the coarse search; the first miss is then refined."""

_REFINEMENTS = 5


@dataclass(frozen=True, slots=True, kw_only=True)
class Wanted:
    """A rejection [dB] that the link has to have at a frequency [Hz]."""

    frequency_hz: float
    rejection_db: float


@dataclass(frozen=True, slots=True, kw_only=True)
class TraceLeg:
    """One leg of a track on its own: characteristic impedance [ohm] and effective permittivity."""

    impedance_ohm: float
    permittivity: float

    @property
    def delay(self) -> float:
        """[s/m]."""
        return float(np.sqrt(self.permittivity)) / SPEED_OF_LIGHT


@dataclass(frozen=True, slots=True, kw_only=True)
class Allowance:
    """What one kind of imbalance may come to.

    Parameters
    ----------
    name, unit: of the imbalance. most: the greatest searched, in `unit`.
    alone: all else equal. remaining: on top of what the link has; both in `unit`. `None`: the wanted rejection holds
        up to `most`; 0: it is missed without any.
    decided_by_hz: frequency that limits `alone`, `None` where nothing does.
    """

    name: str
    unit: str
    most: float
    alone: float | None
    remaining: float | None
    decided_by_hz: float | None


@dataclass(frozen=True, slots=True)
class _Imbalance:
    """A kind: `put` adds amounts (S,) to one leg of a link (0 plus), `inside` gives what the load's stage converts."""

    name: str
    unit: str
    least: float
    most: float
    put: Callable[[Sequence[Element], Floats, int], list[Element]]
    inside: Callable[[Floats], Floats]


def budget(
    source: Sequence[Element],
    between: Sequence[Element],
    load: LoadModel,
    wanted: Sequence[Wanted],
    *,
    leg: TraceLeg | None = None,
) -> tuple[Allowance, ...]:
    """Allowances of a link for each kind of imbalance that it can have.

    Parameters
    ----------
    source: elements before the pair. between: cable and whatever else lies between. load: its last network.
    wanted: at least one. leg: what a difference in length consists of; without it length is not judged.

    Returns
    -------
    `source resistance` [ohm] more on one leg; `load resistance` [1] mismatch m (±m/2 on each leg); `resistor tolerance`
    [1] of a difference amplifier's four resistors; `capacitance` [F] more from one leg to reference, at the load;
    `leg length` [m] more on one leg, at the load. A load whose stage converts by resistors is judged with those equal
    for `alone`.

    Raises: ValueError where nothing is wanted.
    """
    if not wanted:
        raise ValueError("a budget needs a wanted rejection")
    at = np.array([one.frequency_hz for one in wanted])
    least = np.array([one.rejection_db for one in wanted])
    given = [*source, *between, *load.elements]
    split = len(source) + len(between)
    alike = [element.symmetrised() for element in given]
    ideal = replace(load, stage_conversion=0.0)
    found = []
    for kind in _imbalances(split, load, leg):
        alone, where = _greatest(kind, alike, ideal, at, least)
        remaining, _ = _greatest(kind, given, load, at, least)
        found.append(
            Allowance(
                name=kind.name,
                unit=kind.unit,
                most=kind.most,
                alone=alone,
                remaining=remaining,
                decided_by_hz=where,
            )
        )
    return tuple(found)


def rejection(
    link: Sequence[Element], load: LoadModel, frequencies: npt.ArrayLike, *, more: npt.ArrayLike = 0.0
) -> Floats:
    """Rejection [dB] (…, F) of the whole link, its load's own and a further conversion `more` inside it included."""
    response = solve(link, frequencies)
    own = load.own_rejection(frequencies)
    inside = (0.0 if own is None else 10 ** (-own / 20)) + np.asarray(more)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(-20 * np.log10(np.abs(response.conversion / response.gain) + inside), dtype=np.float64)


def _imbalances(split: int, load: LoadModel, leg: TraceLeg | None) -> list[_Imbalance]:
    def nothing(amount: Floats) -> Floats:
        return 0 * amount

    def insert(element: Callable[[Floats], Element]) -> Callable[[Sequence[Element], Floats, int], list[Element]]:
        return lambda link, amount, side: [*link[:split], element(_on(side, amount)), *link[split:]]

    kinds = [
        _Imbalance(
            "source resistance",
            "ohm",
            1e-6,
            1e6,
            lambda link, amount, side: [Series(cause="source", resistance=_on(side, amount)), *link],
            nothing,
        )
    ]
    inputs = load.elements[-1] if load.elements else None
    if isinstance(inputs, Shunt) and bool(np.isfinite(np.asarray(inputs.resistance)).all()):
        kinds.append(_Imbalance("load resistance", "1", 1e-9, 1.0, _load_apart, nothing))
    if isinstance(inputs, DifferenceInput):
        r1, r2 = float(np.asarray(inputs.r1)), float(np.asarray(inputs.r2))
        kinds.append(
            _Imbalance(
                "resistor tolerance",
                "1",
                1e-9,
                0.5,
                lambda link, _amount, _side: list(link),
                lambda amount: np.asarray(amount * resistor_conversion(r1, r2, 1.0)),
            )
        )
    kinds.append(
        _Imbalance(
            "capacitance", "F", 1e-18, 1e-6, insert(lambda legs: Shunt(cause="trace", capacitance=legs)), nothing
        )
    )
    if leg is not None:
        own = leg.impedance_ohm * leg.delay * np.eye(2), leg.delay / leg.impedance_ohm * np.eye(2)
        extra = insert(lambda legs: Line(cause="trace", inductance=own[0], capacitance=own[1], lengths=legs))
        kinds.append(_Imbalance("leg length", "m", 1e-9, 100.0, extra, nothing))
    return kinds


def _on(side: int, amount: Floats) -> Floats:
    """(S, 1, 2) with the amounts on one leg."""
    legs = np.zeros((len(amount), 1, 2))
    legs[:, 0, side] = amount
    return legs


def _load_apart(link: Sequence[Element], amount: Floats, side: int) -> list[Element]:
    inputs = link[-1]
    assert isinstance(inputs, Shunt)
    factor = 1 + (_on(side, amount) - _on(1 - side, amount)) / 2
    return [*link[:-1], replace(inputs, resistance=np.asarray(inputs.resistance) * factor)]


def _greatest(
    kind: _Imbalance, link: Sequence[Element], load: LoadModel, at: Floats, least: Floats
) -> tuple[float | None, float | None]:
    """The amount up to which the rejection holds, and the frequency that ends it."""

    def margins(amount: Floats) -> Floats:
        more = kind.inside(amount)[:, None]
        both = [rejection(kind.put(link, amount, side), load, at, more=more) for side in (0, 1)]
        return np.asarray(np.minimum(both[0], both[1]) - least, dtype=np.float64)

    bare = margins(np.zeros(1))[0]
    if not bool((bare >= 0).all()):
        return 0.0, float(at[int(np.argmin(bare))])
    low, high = 0.0, kind.most
    steps = int(np.ceil(_DECADE * np.log10(kind.most / kind.least)))
    tried = np.geomspace(kind.least, kind.most, steps)
    for _ in range(_REFINEMENTS):
        held = (margins(tried) >= 0).all(axis=1)
        if held.all():
            if high == kind.most:
                return None, None
            low = float(tried[-1])
        else:
            first = int(np.argmin(held))
            low = float(tried[first - 1]) if first else low
            high = float(tried[first])
        tried = np.linspace(low, high, 34)[1:]
    return low, float(at[int(np.argmin(margins(np.array([high]))[0]))])
