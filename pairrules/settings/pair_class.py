"""A class of pairs: whom it holds for, its limits, and the networks at its ends."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from fnmatch import fnmatchcase

from pairrules.settings.limit import Limit, Timed
from pairrules.settings.network_models import CableSpec, Curve, LoadSpec, PickupSpec, SourceSpec

PinLengths = Mapping[str, Mapping[str, float | Timed]]
"""What pins add: part to pin to length [mm] or time."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PairClass:
    """One class of pairs. `None` and empty: not said.

    Parameters
    ----------
    name: the user's own. place: file and line. like: the class it takes all from that it does not say itself, "" none.
    match: patterns of pair or net names; empty for a template, which holds only where it is named.
    source, cable, load: networks. frequencies: [Hz], rising, for the balance.
    limits: by rule. off: rules that do not hold for it.
    reach_mm: how far apart legs still count as coupled. breakout_mm: stretch at each end that geometry rules exempt.
    rise_time_ps, unit_interval_ps: of its signal.
    pickup: fields and neighbours it has to bear. mask: least conversion loss as (frequency [Hz], ratio [dB]).
    pin_lengths: what pins add to its legs. expects_pin_lengths: patterns of parts of which every pin ought to have one.
    places: key of the settings ("source", "rise_time", "limits.gap-band") to file and line it was read at.
    """

    name: str
    place: str
    like: str = ""
    match: tuple[str, ...] = ()
    source: SourceSpec | None = None
    cable: CableSpec | None = None
    load: LoadSpec | None = None
    frequencies: tuple[float, ...] = ()
    limits: Mapping[str, Limit] = field(default_factory=dict)
    off: tuple[str, ...] = ()
    reach_mm: float | None = None
    breakout_mm: float | None = None
    rise_time_ps: float | None = None
    unit_interval_ps: float | None = None
    pickup: PickupSpec | None = None
    mask: Curve = ()
    pin_lengths: PinLengths = field(default_factory=dict)
    expects_pin_lengths: tuple[str, ...] = ()
    places: Mapping[str, str] = field(default_factory=dict)

    def holds_for(self, names: Iterable[str]) -> bool:
        """Whether a pattern fits one of the names. Case counts; a pattern that is the name itself always fits."""
        return any(name == pattern or fnmatchcase(name, pattern) for name in names for pattern in self.match)


_SAID_ONCE = (
    "source",
    "cable",
    "load",
    "frequencies",
    "reach_mm",
    "breakout_mm",
    "rise_time_ps",
    "unit_interval_ps",
    "pickup",
    "mask",
    "expects_pin_lengths",
)


def laid_over(upper: PairClass, lower: PairClass) -> PairClass:
    """`upper`, completed by what only `lower` says; name, place, `match` and `like` stay the upper's."""
    said = {name: getattr(upper, name) or getattr(lower, name) for name in _SAID_ONCE}
    for name in ("reach_mm", "breakout_mm", "rise_time_ps", "unit_interval_ps"):
        said[name] = getattr(lower, name) if getattr(upper, name) is None else getattr(upper, name)
    limits, off = limits_over((upper.limits, upper.off), (lower.limits, lower.off))
    pins = pins_over(upper.pin_lengths, lower.pin_lengths)
    places = {**lower.places, **upper.places}
    return replace(upper, limits=limits, off=off, pin_lengths=pins, places=places, **said)


def pins_over(upper: PinLengths, lower: PinLengths) -> PinLengths:
    """Lengths of pins, the upper's before the lower's, pin by pin."""
    parts = sorted({*upper, *lower})
    return {part: {**lower.get(part, {}), **upper.get(part, {})} for part in parts}


LimitsAndOff = tuple[Mapping[str, Limit], tuple[str, ...]]


def limits_over(upper: LimitsAndOff, lower: LimitsAndOff) -> LimitsAndOff:
    """Limits and switched-off rules, the upper's before the lower's, rule by rule.

    A limit's quantities are never mixed from two files; only a severity that the upper leaves open is the lower's.
    """
    limits = {rule: limit for rule, limit in lower[0].items() if rule not in upper[1]}
    for rule, limit in upper[0].items():
        below = limits.get(rule)
        if below and not limit.severity:
            where = below.severity_place or below.place
            limits[rule] = replace(limit, severity=below.severity, severity_place=where)
        else:
            limits[rule] = limit
    off = {*upper[1], *lower[1]} - upper[0].keys()
    return dict(sorted(limits.items())), tuple(sorted(off))


def unreachable(classes: Iterable[PairClass]) -> tuple[tuple[PairClass, str], ...]:
    """Classes none of whose patterns can ever be the first to fit, each with an earlier class that takes them."""
    earlier: list[tuple[str, str]] = []
    found: list[tuple[PairClass, str]] = []
    for one in classes:
        takers = [next((name for before, name in earlier if _covers(before, own)), "") for own in one.match]
        if takers and all(takers):
            found.append((one, takers[0]))
        earlier += [(pattern, one.name) for pattern in one.match]
    return tuple(found)


def _covers(wide: str, narrow: str) -> bool:
    """Whether every name that fits `narrow` fits `wide`; False where it is not plain to see.

    With `*` as the only wild mark in `wide`, `narrow` itself fits as a text just when all it stands for does: its own
    marks can only have been taken by a `*`. Sets in brackets break that argument and are left alone.
    """
    if wide == narrow:
        return True
    return not any(mark in wide for mark in "?[") and "[" not in narrow and fnmatchcase(narrow, wide)
