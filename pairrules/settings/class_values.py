"""What a class of pairs ended up with after all files were merged, in words, each value with its file and line."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from pairrules.settings.limit import Limit, RuleForm, Timed
from pairrules.settings.network_models import (
    CABLE_FORM,
    LOAD_FORMS,
    SOURCE_FORMS,
    CableSpec,
    Curve,
    LoadSpec,
    PickupSpec,
    SourceSpec,
)
from pairrules.settings.pair_class import PairClass, PinLengths
from pairrules.settings.shapes import Quantity, Shape, Table
from pairrules.settings.written import written


@dataclass(frozen=True, slots=True, kw_only=True)
class ClassValue:
    """One value. `key`: of the settings ("source", "rise_time"). `says`: in words. `place`: file and line."""

    key: str
    says: str
    place: str


def class_values(one: PairClass) -> tuple[ClassValue, ...]:
    """Every value of a class but its limits, in the order in which a class is usually written."""
    return tuple(
        ClassValue(key=key, says=says, place=one.places.get(key, one.place)) for key, says in _said(one) if says
    )


def limit_amounts(limit: Limit, form: RuleForm) -> Mapping[str, str]:
    """A limit's quantities as settings say them, in the rule's own order: {"spread": "20 %", "for": "5 mm"}."""
    amounts = {key: written(value, form.quantities[key]) for key, value in limit.quantities.items()}
    amounts |= {key: time.said for key, time in limit.timed.items()}
    return {key: amounts[key] for key in form.quantities if key in amounts}


def limit_in_words(limit: Limit, form: RuleForm) -> str:
    """The same in one text: "spread 20 %, for 5 mm"; "on" where the limit has no quantities."""
    return ", ".join(f"{key} {amount}" for key, amount in limit_amounts(limit, form).items()) or "on"


def pins_in_words(pins: PinLengths) -> str:
    """Lengths of pins: "U1 A1 3.2 mm, A2 20 ps; J1 1 0.5 mm"."""
    return "; ".join(
        f"{part} " + ", ".join(f"{pin} {_length(of[pin])}" for pin in sorted(of)) for part, of in sorted(pins.items())
    )


def _length(value: float | Timed) -> str:
    return value.said if isinstance(value, Timed) else written(value, "length")


def _said(one: PairClass) -> Iterator[tuple[str, str]]:
    yield "like", one.like
    yield "match", ", ".join(one.match)
    yield "source", "" if one.source is None else _source(one.source)
    yield "cable", "" if one.cable is None else _cable(one.cable)
    yield "load", "" if one.load is None else _load(one.load)
    yield "frequencies", ", ".join(written(value, "frequency") for value in one.frequencies)
    for key, value, dimension in (
        ("reach", one.reach_mm, "length"),
        ("breakout", one.breakout_mm, "length"),
        ("rise_time", one.rise_time_ps, "time"),
        ("unit_interval", one.unit_interval_ps, "time"),
    ):
        yield key, "" if value is None else written(value, dimension)
    yield "pickup", "" if one.pickup is None else _pickup(one.pickup)
    yield "mask", _curve(one.mask)
    yield "pin_lengths", pins_in_words(one.pin_lengths)
    yield "expects_pin_lengths", ", ".join(one.expects_pin_lengths)


def _source(spec: SourceSpec) -> str:
    return _kind(spec.kind, _values(spec.values, SOURCE_FORMS[spec.kind]))


def _load(spec: LoadSpec) -> str:
    said = _values(spec.values, LOAD_FORMS[spec.kind])
    if spec.rejection:
        said = [*said, f"rejection {_curve(spec.rejection)}"]
    return _kind(spec.kind, said)


def _cable(spec: CableSpec) -> str:
    said = _values(spec.values, CABLE_FORM)
    for word, flag in (("twisted", spec.twisted), ("screened", spec.screened)):
        if flag is not None:
            said.append(word if flag else f"not {word}")
    return ", ".join(said)


def _pickup(spec: PickupSpec) -> str:
    said = []
    if spec.flux_density_t is not None:
        said.append(f"flux {written(spec.flux_density_t, 'flux density')}")
    if spec.frequency_hz is not None:
        said.append(f"frequency {written(spec.frequency_hz, 'frequency')}")
    if spec.direction is not None:
        said.append("direction " + " ".join(f"{part:.4g}" for part in spec.direction))
    for one in spec.aggressors:
        swing, rise = written(one.swing_v, "voltage"), written(one.rise_time_s * 1e12, "time")
        said.append(f"aggressor {one.net} with {swing} in {rise}")
    return ", ".join(said)


def _kind(kind: str, said: list[str]) -> str:
    return f"{kind}: {', '.join(said)}" if said else kind


def _curve(points: Curve) -> str:
    if len(points) == 1 and points[0][0] == 0:
        return written(points[0][1], "ratio")
    return ", ".join(f"{written(value, 'ratio')} at {written(frequency, 'frequency')}" for frequency, value in points)


def _values(values: Mapping[str, float], form: Table) -> list[str]:
    """Values in the order of the form; those of a leg joined by a dot there and by a blank here."""
    order = list(_quantities(form, ""))
    return [
        f"{key.replace('.', ' ')} {written(values[key] / shape.scale, shape.dimension)}"
        for key, shape in order
        if key in values
    ]


def _quantities(form: Table, before: str) -> Iterator[tuple[str, Quantity]]:
    for key, shape in form.keys.items():
        found: Shape = shape
        if isinstance(found, Quantity):
            yield f"{before}{key}", found
        elif isinstance(found, Table):
            yield from _quantities(found, f"{before}{key}.")
