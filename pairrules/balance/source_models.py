"""Sources of a link, reduced to plain networks: what stands between the e.m.f. and the pair's first copper.

One function a kind. Values are SI with the keys of the settings; a mismatch m stands for x(1 ± m/2), plus the greater.

| kind | `resistance` is | network |
| --- | --- | --- |
| `impedance` | `plus`, `minus`: of each leg | as given; `plus` alone holds for both |
| `bridge` | of one arm | a leg is fed through two arms in parallel: half of it |
| `line-driver`, `amplifier`, `microphone` | of one leg | in series |
| `transformer` | of one leg, end to centre | then `winding_capacitance` from each leg to reference |

Source: Thévenin's theorem; the transformer's winding: Ott, "Electromagnetic Compatibility Engineering" (from memory).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType

from pairrules.balance.networks import Element, Floats, Series, Shunt
from pairrules.balance.unequal_legs import apart, need

Values = Mapping[str, float]


def source_elements(kind: str, values: Values) -> tuple[Element, ...]:
    """The network of a source.

    Raises: ValueError where the kind is unknown, or the values lack what it needs.
    """
    if kind not in _KINDS:
        raise ValueError(f"{kind!r} is no kind of source; known are {', '.join(sorted(_KINDS))}")
    return _KINDS[kind](values)


def _impedance(values: Values) -> tuple[Element, ...]:
    plus = need(values, "plus", "an impedance source")
    if "minus" in values:
        return _in_series((plus, values["minus"]))
    return _in_series(apart(plus, values.get("mismatch", 0.0)))


def _bridge(values: Values) -> tuple[Element, ...]:
    arm = need(values, "resistance", "a bridge")
    return _in_series(apart(arm / 2, values.get("mismatch", 0.0)))


def _one_leg(values: Values) -> tuple[Element, ...]:
    return _in_series(apart(need(values, "resistance", "this source"), values.get("mismatch", 0.0)))


def _transformer(values: Values) -> tuple[Element, ...]:
    if "winding_capacitance" not in values:
        return _one_leg(values)
    windings = apart(values["winding_capacitance"], values.get("winding_capacitance_mismatch", 0.0))
    return (*_one_leg(values), Shunt(cause="source", capacitance=windings))


def _in_series(legs: tuple[float, float] | Floats) -> tuple[Element, ...]:
    return (Series(cause="source", resistance=legs),)


_KINDS: Mapping[str, Callable[[Values], tuple[Element, ...]]] = MappingProxyType(
    {
        "impedance": _impedance,
        "bridge": _bridge,
        "line-driver": _one_leg,
        "amplifier": _one_leg,
        "microphone": _one_leg,
        "transformer": _transformer,
    }
)
