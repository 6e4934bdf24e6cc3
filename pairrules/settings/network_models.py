"""What settings may say of the networks at the ends of a link, the cable between, and what disturbs it; SI units.

The tables `SOURCE_FORMS`, `CABLE_FORM` and `LOAD_FORMS` are the one place where kinds and keys are listed. A kind says
what it is; `pairrules.balance` reduces it to a network. Mismatches are fractions of the mean, positive where plus is
the greater: x_plus = x(1 + m/2), x_minus = x(1 − m/2).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from pairrules.settings.faults import Faults
from pairrules.settings.read_shape import Entry
from pairrules.settings.shapes import Either, Flag, Kinds, ListOf, Number, Quantity, Table, Text

_OHM = Quantity(dimension="resistance")
_FARAD = Quantity(dimension="capacitance")
_SHARE = Quantity(dimension="share", below=1.0)
_MISMATCH = Quantity(dimension="share", signed=True, below=2.0)
# A load of 0 ohm would short the pair.
_LOAD_OHM = Quantity(dimension="resistance", positive=True)
_DB = Quantity(dimension="ratio", signed=True)
FREQUENCY = Quantity(dimension="frequency", positive=True)

CURVE = ListOf(of=Table(keys={"frequency": FREQUENCY, "value": _DB}, required=("frequency", "value")))
"""A ratio against frequency: a list of {frequency, value}."""

_REJECTION = Either(scalar=_DB, nested=CURVE)

SOURCE_FORMS: Mapping[str, Table] = {
    # plus, minus: each leg's resistance. With plus alone both legs have it, apart by the mismatch.
    "impedance": Table(
        keys={"plus": _OHM, "minus": _OHM, "mismatch": _MISMATCH, "tolerance": _SHARE},
        required=("plus",),
        not_both=(("minus", "mismatch"),),
    ),
    # resistance: of one arm; each output leg's source resistance is half of it.
    "bridge": Table(keys={"resistance": _OHM, "mismatch": _MISMATCH, "tolerance": _SHARE}, required=("resistance",)),
    # resistance: of one leg.
    "line-driver": Table(
        keys={"resistance": _OHM, "mismatch": _MISMATCH, "tolerance": _SHARE}, required=("resistance",)
    ),
    "amplifier": Table(keys={"resistance": _OHM, "mismatch": _MISMATCH, "tolerance": _SHARE}, required=("resistance",)),
    "microphone": Table(
        keys={"resistance": _OHM, "mismatch": _MISMATCH, "tolerance": _SHARE}, required=("resistance",)
    ),
    # winding_capacitance: from the other winding to each half of this one.
    "transformer": Table(
        keys={
            "resistance": _OHM,
            "mismatch": _MISMATCH,
            "winding_capacitance": _FARAD,
            "winding_capacitance_mismatch": _MISMATCH,
            "tolerance": _SHARE,
        },
        required=("resistance",),
    ),
}

_LEG = Table(keys={"resistance": _LOAD_OHM, "capacitance": _FARAD}, any_of=("resistance", "capacitance"))

LOAD_FORMS: Mapping[str, Table] = {
    "impedance": Table(
        keys={"plus": _LEG, "minus": _LEG, "across": _LEG, "rejection": _REJECTION, "tolerance": _SHARE},
        any_of=("plus", "minus", "across"),
    ),
    # r1 from each leg to the amplifier, r2 the feedback and its twin to reference; tolerance: of each of the four.
    "difference-amplifier": Table(
        keys={"r1": _LOAD_OHM, "r2": _LOAD_OHM, "tolerance": _SHARE, "rejection": _REJECTION}, required=("r1", "r2")
    ),
    # resistance, capacitance: from each leg to reference.
    "instrumentation-amplifier": Table(
        keys={
            "resistance": _LOAD_OHM,
            "capacitance": _FARAD,
            "resistance_mismatch": _MISMATCH,
            "capacitance_mismatch": _MISMATCH,
            "rejection": _REJECTION,
            "tolerance": _SHARE,
        },
        required=("resistance",),
    ),
    # resistance: across the winding, as the far side reflects it.
    "transformer": Table(
        keys={
            "resistance": _LOAD_OHM,
            "winding_capacitance": _FARAD,
            "winding_capacitance_mismatch": _MISMATCH,
            "rejection": _REJECTION,
            "tolerance": _SHARE,
        },
        required=("resistance",),
    ),
    # resistance: from each leg to reference; across: the termination.
    "line-receiver": Table(
        keys={
            "resistance": _LOAD_OHM,
            "mismatch": _MISMATCH,
            "across": _LOAD_OHM,
            "rejection": _REJECTION,
            "tolerance": _SHARE,
        },
        any_of=("resistance", "across"),
        needs={"mismatch": "resistance"},
    ),
    "adc": Table(
        keys={
            "resistance": _LOAD_OHM,
            "capacitance": _FARAD,
            "mismatch": _MISMATCH,
            "rejection": _REJECTION,
            "tolerance": _SHARE,
        },
        any_of=("resistance", "capacitance"),
    ),
}

CABLE_FORM = Table(
    keys={
        "length": Quantity(dimension="length", scale=1e-3, positive=True),
        "resistance": Quantity(dimension="resistance per length"),
        "capacitance": Quantity(dimension="capacitance per length"),
        "capacitance_between": Quantity(dimension="capacitance per length"),
        "inductance": Quantity(dimension="inductance per length"),
        "resistance_unbalance": _MISMATCH,
        "capacitance_unbalance": Quantity(dimension="capacitance per length", signed=True),
        "twisted": Flag(),
        "screened": Flag(),
    },
    required=("length",),
)

PICKUP_FORM = Table(
    keys={
        "field": Quantity(dimension="field"),
        "flux": Quantity(dimension="flux density"),
        "frequency": FREQUENCY,
        "direction": ListOf(of=Number(), least=3, most=3),
        "aggressors": ListOf(
            of=Table(
                keys={
                    "net": Text(),
                    "swing": Quantity(dimension="voltage", positive=True),
                    "rise_time": Quantity(dimension="time", scale=1e-12, positive=True),
                },
                required=("net", "swing", "rise_time"),
            )
        ),
    },
    any_of=("field", "flux", "aggressors"),
    not_both=(("field", "flux"),),
    needs={"field": "frequency", "flux": "frequency"},
)

SOURCE_SHAPE = Kinds(kinds=SOURCE_FORMS)
LOAD_SHAPE = Kinds(kinds=LOAD_FORMS)

_MU0 = 4e-7 * math.pi
"""Tesla for one A/m. Source: magnetic constant, 1.25663706e-6 H/m (SI, 2019; 4π·10⁻⁷ to 1e-9)."""

Curve = tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceSpec:
    """The source network. `values`: keys of `SOURCE_FORMS[kind]` that were given, ohm, farad, fractions."""

    kind: str
    values: Mapping[str, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class CableSpec:
    """The cable. `values`: keys of `CABLE_FORM` that were given, m, ohm/m, F/m, H/m, fractions; `None`: not said."""

    values: Mapping[str, float]
    twisted: bool | None = None
    screened: bool | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadSpec:
    """The load network.

    Parameters
    ----------
    values: keys of `LOAD_FORMS[kind]` that were given; those of a leg joined by a dot ("plus.resistance"); ohm, farad,
        fractions.
    rejection: the receiver's own, as (frequency [Hz], ratio [dB]) with rising frequency; one point at 0 Hz where one
        figure holds everywhere; empty where not given.
    """

    kind: str
    values: Mapping[str, float]
    rejection: Curve = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Aggressor:
    """Foreign nets that swing near the pair. `net`: a pattern. `swing_v` [V], `rise_time_s` [s]."""

    net: str
    swing_v: float
    rise_time_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class PickupSpec:
    """What the pair has to bear.

    Parameters
    ----------
    flux_density_t: of a uniform magnetic field [T], r.m.s. or peak as the user means it; None where none is asked for.
    frequency_hz: of that field. direction: (x, y, z) of length 1, None for the worst.
    aggressors: swinging neighbours.
    """

    flux_density_t: float | None = None
    frequency_hz: float | None = None
    direction: tuple[float, float, float] | None = None
    aggressors: tuple[Aggressor, ...] = ()


def source_spec(entry: Entry) -> SourceSpec:
    """The source of a read `SOURCE_SHAPE`."""
    return SourceSpec(kind=entry.values["kind"], values=_numbers(entry))


def cable_spec(entry: Entry, faults: Faults) -> CableSpec:
    """The cable of a read `CABLE_FORM`."""
    unbalance, capacitance = entry.get("capacitance_unbalance"), entry.get("capacitance")
    if unbalance is not None and abs(unbalance) > 2 * (capacitance or 0.0):
        faults.add(
            f"{entry.path}.capacitance_unbalance is more than both legs' capacitance to reference",
            "give the capacitance of a leg, or less unbalance",
            entry.nodes["capacitance_unbalance"],
        )
    return CableSpec(values=_numbers(entry), twisted=entry.get("twisted"), screened=entry.get("screened"))


def load_spec(entry: Entry, faults: Faults) -> LoadSpec:
    """The load of a read `LOAD_SHAPE`."""
    rejection = entry.get("rejection")
    if isinstance(rejection, float):
        points: Curve = ((0.0, rejection),)
    else:
        points = curve(rejection or (), faults)
    return LoadSpec(kind=entry.values["kind"], values=_numbers(entry), rejection=points)


def pickup_spec(entry: Entry, faults: Faults) -> PickupSpec:
    """What a read `PICKUP_FORM` asks for."""
    flux = entry.get("flux")
    if entry.get("field") is not None:
        flux = entry.values["field"] * _MU0
    direction = entry.get("direction")
    if direction is not None and len(direction) == 3:
        size = math.hypot(*direction)
        if size == 0:
            faults.add(f"{entry.path}.direction has no length", "give the field's x, y and z", entry.nodes["direction"])
            direction = None
        else:
            direction = tuple(part / size for part in direction)
    aggressors = tuple(
        Aggressor(net=one.values["net"], swing_v=one.values["swing"], rise_time_s=one.values["rise_time"])
        for one in entry.get("aggressors") or ()
        if {"net", "swing", "rise_time"} <= one.values.keys()
    )
    return PickupSpec(
        flux_density_t=flux, frequency_hz=entry.get("frequency"), direction=direction, aggressors=aggressors
    )


def curve(entries: tuple[Entry, ...], faults: Faults) -> Curve:
    """The points of a read `CURVE`, by rising frequency; a fault where one frequency stands twice."""
    points: dict[float, float] = {}
    for entry in entries:
        frequency, value = entry.get("frequency"), entry.get("value")
        if frequency is None or value is None:
            continue
        if frequency in points:
            faults.add(f"{entry.path} gives a frequency a second value", "keep one of them", entry.nodes["frequency"])
        points[frequency] = value
    return tuple(sorted(points.items()))


def _numbers(entry: Entry, prefix: str = "") -> dict[str, float]:
    found: dict[str, float] = {}
    for key, value in sorted(entry.values.items()):
        if isinstance(value, Entry):
            found |= _numbers(value, f"{prefix}{key}.")
        elif isinstance(value, float) and key != "rejection":
            found[prefix + key] = value
    return found
