"""Loads of a link, reduced to plain networks and to a rejection of their own.

One function a kind. Values are SI with the keys of the settings; a mismatch m stands for x(1 ± m/2), plus the greater.

| kind | network |
| --- | --- |
| `impedance` | `plus`, `minus`: resistance ∥ capacitance to reference; `across` the same between the legs |
| `difference-amplifier` | inputs that load the legs unequally; resistors off by ±tolerance convert inside the stage |
| `instrumentation-amplifier` | `resistance` ∥ `capacitance` from each leg to reference, each with its mismatch |
| `transformer` | `resistance` across, `winding_capacitance` from each leg to reference |
| `line-receiver` | `resistance` from each leg to reference, `across` between the legs |
| `adc` | `resistance` ∥ `capacitance` from each leg to reference, one mismatch for both |
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
import numpy.typing as npt

from pairrules.balance.networks import DifferenceInput, Element, Shunt
from pairrules.balance.unequal_legs import apart, need

Values = Mapping[str, float]
Curve = tuple[tuple[float, float], ...]
"""(frequency [Hz], ratio [dB]) by rising frequency; one point holds everywhere; empty: not known."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadModel:
    """A load.

    Parameters
    ----------
    elements: from the pair's last copper to the nodes at which the signal is taken.
    rejection: of what follows those nodes. stage_conversion: what the resistors of the stage turn of common mode into
        difference, referred to its input, at worst; 0 where there are none, or their tolerance is not said.
    """

    elements: tuple[Element, ...]
    rejection: Curve = ()
    stage_conversion: float = 0.0

    def own_rejection(self, frequencies: npt.ArrayLike) -> npt.NDArray[np.float64] | None:
        """The load's own rejection [dB] at each frequency (F,), None where nothing is known of it.

        What the resistors and what the amplifier convert adds in the worst case. Source: Pallàs-Areny & Webster,
        "Common mode rejection ratio in differential amplifiers", IEEE Trans. IM 40 (1991) 669 (from memory).
        """
        if not self.rejection and not self.stage_conversion:
            return None
        own = 10 ** (-rejection_at(self.rejection, frequencies) / 20) if self.rejection else 0.0
        where = np.zeros(np.shape(np.atleast_1d(np.asarray(frequencies))))
        return np.asarray(-20 * np.log10(own + self.stage_conversion + where), dtype=np.float64)


def load_model(kind: str, values: Values, rejection: Curve = ()) -> LoadModel:
    """The network of a load.

    Raises: ValueError where the kind is unknown, or the values lack what it needs.
    """
    if kind not in _KINDS:
        raise ValueError(f"{kind!r} is no kind of load; known are {', '.join(sorted(_KINDS))}")
    return _KINDS[kind](values, rejection)


def rejection_at(points: Curve, frequencies: npt.ArrayLike) -> npt.NDArray[np.float64]:
    """A curve of ratios [dB] at frequencies (F,) [Hz]: straight over log frequency, held beyond its ends."""
    known = np.array(points, dtype=np.float64)
    at = np.atleast_1d(np.asarray(frequencies, dtype=np.float64))
    if len(known) == 1:
        return np.full(at.shape, known[0, 1])
    logs = np.log(np.maximum(at, known[0, 0]))
    return np.asarray(np.interp(logs, np.log(known[:, 0]), known[:, 1]), dtype=np.float64)


def resistor_conversion(r1: float, r2: float, tolerance: float) -> float:
    """What four resistors off by ±tolerance convert in a difference stage of gain K = R2/R1, at worst, at its input.

    1/CMRR = 4ε/(1 + K). Source: Sedra & Smith, "Microelectronic Circuits", difference amplifier (formula from memory).
    """
    return 4 * tolerance / (1 + r2 / r1)


def _impedance(values: Values, rejection: Curve) -> LoadModel:
    def legs(quantity: str, absent: float) -> tuple[float, float]:
        return (values.get(f"plus.{quantity}", absent), values.get(f"minus.{quantity}", absent))

    network = Shunt(
        cause="load",
        resistance=legs("resistance", np.inf),
        capacitance=legs("capacitance", 0.0),
        across_resistance=values.get("across.resistance", np.inf),
        across_capacitance=values.get("across.capacitance", 0.0),
    )
    return LoadModel(elements=(network,), rejection=rejection)


def _difference_amplifier(values: Values, rejection: Curve) -> LoadModel:
    r1, r2 = (need(values, key, "a difference amplifier") for key in ("r1", "r2"))
    return LoadModel(
        elements=(DifferenceInput(cause="load", r1=r1, r2=r2),),
        rejection=rejection,
        stage_conversion=resistor_conversion(r1, r2, values.get("tolerance", 0.0)),
    )


def _per_leg(values: Values, rejection: Curve, *, resistance_mismatch: str, capacitance_mismatch: str) -> LoadModel:
    network = Shunt(
        cause="load",
        resistance=apart(values.get("resistance", np.inf), values.get(resistance_mismatch, 0.0)),
        capacitance=apart(values.get("capacitance", 0.0), values.get(capacitance_mismatch, 0.0)),
        across_resistance=values.get("across", np.inf),
    )
    return LoadModel(elements=(network,), rejection=rejection)


def _instrumentation_amplifier(values: Values, rejection: Curve) -> LoadModel:
    return _per_leg(
        values,
        rejection,
        resistance_mismatch="resistance_mismatch",
        capacitance_mismatch="capacitance_mismatch",
    )


def _one_mismatch(values: Values, rejection: Curve) -> LoadModel:
    return _per_leg(values, rejection, resistance_mismatch="mismatch", capacitance_mismatch="mismatch")


def _transformer(values: Values, rejection: Curve) -> LoadModel:
    windings = apart(values.get("winding_capacitance", 0.0), values.get("winding_capacitance_mismatch", 0.0))
    across = need(values, "resistance", "a transformer")
    return LoadModel(
        elements=(Shunt(cause="load", capacitance=windings, across_resistance=across),), rejection=rejection
    )


_KINDS: Mapping[str, Callable[[Values, Curve], LoadModel]] = MappingProxyType(
    {
        "impedance": _impedance,
        "difference-amplifier": _difference_amplifier,
        "instrumentation-amplifier": _instrumentation_amplifier,
        "transformer": _transformer,
        "line-receiver": _one_mismatch,
        "adc": _one_mismatch,
    }
)
