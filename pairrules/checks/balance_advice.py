"""What to do about a balance that misses its limit, in words: the values that `balance.remedies` found by solving."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

import numpy as np

from pairrules.balance.levers import SIZE, Amount
from pairrules.balance.pair_electrical import PairElectrical
from pairrules.balance.remedies import Mend, Remedies, remedies
from pairrules.board.columns import Floats
from pairrules.checks.electrical_figures import most_tilted
from pairrules.checks.leg_parts import spot_of
from pairrules.checks.rule import Subject
from pairrules.checks.wording import spot
from pairrules.result import Place

Advice = tuple[str, tuple[Place, ...]]

_LEAST_SIZE = 1e-3
"""A size that would have to come down to less than a thousandth is no advice."""

_PREFIXES = ("a", "f", "p", "n", "u", "m", "", "k", "M", "G", "T")


def solved_advice(
    subject: Subject, electrical: PairElectrical, asked_db: Mapping[float, float], *, figure: str, cause: str = ""
) -> Advice | None:
    """What would meet the limit, and the places it speaks of; `None` where the link is not at hand or nothing is found.

    Parameters: asked_db: least figure [dB] by frequency [Hz]. figure, cause: as of `remedies`.
    """
    link = electrical.link
    if link is None:
        return None
    asked = np.array([asked_db.get(float(frequency), -math.inf) for frequency in link.frequencies_hz])
    if not np.isfinite(asked).any():
        return None
    found = remedies(link, asked, figure=figure, cause=cause)
    ways = _ways(subject, found)
    if found.receiver_short:
        return _receiver(found, asked), ()
    if not ways:
        return None
    places: list[Place] = []
    parts = [part for mend in found.balance for part in _parts(electrical, mend)]
    if any(mend.lever.what == "tracks" for mend in found.balance):
        where = most_tilted(subject, electrical)
        places += [] if where is None else [where]
    places += [place for part in parts for place in spot_of(subject.board, part)]
    return "; or ".join(ways), tuple(places)


def _ways(subject: Subject, found: Remedies) -> list[str]:
    ways = [_mended(subject, mend) for mend in found.balance]
    if len(ways) > 1:
        ways = [f"to mend one imbalance is not enough: {', and '.join(ways)}"]
    ways += [_smaller(mend) for mend in found.sizes if mend.position >= _LEAST_SIZE]
    if found.receiver_db is not None and not found.receiver_short:
        ways.append(f"take a receiver that itself rejects {_up(found.receiver_db):.1f} dB")
    return ways


def _receiver(found: Remedies, asked: Floats) -> str:
    least = float(asked[np.isfinite(asked)].max())
    if found.receiver_db is None:
        return (
            f"balance alone cannot meet it, the receiver itself rejects less: take one of more than {least:.1f} dB, "
            "and then mend what converts most"
        )
    return (
        "balance alone cannot meet it, the receiver itself rejects less: "
        f"take one that rejects {_up(found.receiver_db):.1f} dB"
    )


def _up(ratio: float) -> float:
    """Up to the next tenth of a dB."""
    return math.ceil(ratio * 10 - 1e-6) / 10


def _mended(subject: Subject, mend: Mend) -> str:
    lever, electrical = mend.lever, subject.electrical
    if lever.what == "inputs":
        return "put a buffer before each input of the difference amplifier: its two inputs load the legs unequally"
    if lever.what == "tracks":
        return _tracks(subject, mend)
    if lever.what == "lengths":
        return _lengths(mend)
    if lever.what == "part":
        parts = [] if electrical is None else _parts(electrical, mend)
        refs = " and ".join(subject.board.parts[part].ref for part in parts) or f"series parts {lever.step + 1}"
        # A part that only one leg has is no matter of its value.
        if len(parts) == 1 or not mend.given:
            return f"give both legs the same part in series as {refs}"
        return f"match {refs} to {_apart(mend)}"
    if lever.what == "vias":
        return f"give both legs the same vias: their inductances may differ by {_apart(mend)}"
    if not mend.given or not mend.allowed:
        return f"give both legs the same {lever.what} to reference {_WHERE[lever.cause]}"
    if lever.cause == "cable":
        (given,), (allowed,) = mend.given, mend.allowed
        return f"take a cable of at most {_down(allowed)} of {lever.what} unbalance (it has {_value(given)})"
    return f"match {_NAMES.get((lever.cause, lever.what), f'the {lever.what}s of the {lever.cause}')} to {_apart(mend)}"


_WHERE = {"source": "at the source", "cable": "along the cable", "trace": "along the tracks", "load": "at the load"}

_NAMES = {
    ("source", "resistance"): "the source's legs",
    ("source", "capacitance"): "the source's capacitances to reference",
    ("trace", "resistance"): "the resistances that hang on the legs",
    ("trace", "capacitance"): "the capacitances that hang on the legs",
    ("load", "resistance"): "the load's resistances to reference",
    ("load", "capacitance"): "the load's capacitances to reference",
}


def _apart(mend: Mend) -> str:
    """How far apart the legs may be, and are."""
    given = max(mend.given, key=lambda amount: abs(amount.value))
    allowed = max(mend.allowed, key=lambda amount: abs(amount.value))
    return f"{_down(allowed)} ({'plus' if given.value > 0 else 'minus'} has {_value(given)} more)"


def _tracks(subject: Subject, mend: Mend) -> str:
    electrical = subject.electrical
    now = ", ".join(f"{'+' if one.value > 0 else '-'}{_value(one)}" for one in mend.given if abs(one.value) > _NOTHING)
    where = None if electrical is None else most_tilted(subject, electrical)
    said = "make the tracks alike in width, gap to other copper and reference"
    if where is not None:
        said += f", most of all from {spot(subject.board, where)} on"
    kept = _down(Amount(quantity="share", unit="1", value=mend.position))
    about = f" (plus less minus {now} in all)" if now else ""
    return f"{said}: {kept} of their differences{about} may stay"


_NOTHING = 1e-21
"""[F], [H]: differences below this are rounding of sums."""


def _lengths(mend: Mend) -> str:
    (given,), (allowed,) = mend.given, mend.allowed
    longer, shorter = ("plus", "minus") if given.value > 0 else ("minus", "plus")
    now, kept = abs(given.value) * 1e3, math.floor(abs(allowed.value) * 1e6 + 1e-6) / 1e3
    return (
        f"take {now - kept:.3f} mm out of {longer} or add it to {shorter}, which is up to {now:.3f} mm behind: "
        f"{kept:.3f} mm may stay"
    )


def _smaller(mend: Mend) -> str:
    (given,), (allowed,) = mend.given, mend.allowed
    if mend.lever.what == "length":
        return f"take a cable of at most {_down(allowed)} (it has {_value(given)})"
    verb, bound = ("lower", f"{_down(allowed)}") if mend.lever.acts == SIZE else ("raise", _over(allowed))
    return f"{verb} each leg's {mend.lever.what} to reference at the load from {_value(given)} to {bound}"


def _parts(electrical: PairElectrical, mend: Mend) -> list[int]:
    if mend.lever.what != "part":
        return []
    return list(dict.fromkeys(one.part for one in electrical.series if one.step == mend.lever.step))


def _value(amount: Amount) -> str:
    return _said(abs(amount.value), amount.unit, round)


def _down(amount: Amount) -> str:
    return _said(abs(amount.value), amount.unit, math.floor)


def _over(amount: Amount) -> str:
    return _said(abs(amount.value), amount.unit, math.ceil)


def _said(value: float, unit: str, rounded: Callable[[float], int]) -> str:
    """Three figures and the unit; rounded so that what is said still meets the limit."""
    value *= 100.0 if unit == "1" else 1.0
    if value == 0 or not math.isfinite(value):
        return f"{value:g} {'%' if unit == '1' else unit}"
    step = 10.0 ** (math.floor(math.log10(value)) - 2)
    exact = value / step
    near = round(exact)
    # What the search leaves of its own rounding is no further figure.
    value = (near if abs(exact - near) < 1e-6 else rounded(exact)) * step
    if unit == "1":
        return f"{value:.3g} %"
    power = 0 if unit == "m" else min(max(math.floor(math.log10(value) / 3 + 1e-9), -6), 4)
    # 0.4 ohm and 0.3 pF read better than 400 mohm and 300 fF.
    usual = {"ohm": 0, "F": -4, "F/m": -4}.get(unit)
    power = usual if usual is not None and usual - 1 == power else power
    return f"{value / 1000.0**power:.4g} {_PREFIXES[power + 6]}{unit}"
