"""The balance of a pair over many frequencies, for drawing it as curves."""

from __future__ import annotations

import math

import numpy as np

from pairrules.balance.board_link import NoModelError, board_link
from pairrules.balance.link_balance import LinkBalance, balance_points
from pairrules.board.columns import Floats
from pairrules.checks.rule import Subject
from pairrules.drawing import ConversionCurves, Curve

PER_DECADE = 12
_BESIDE = 3.0
"""The curves go this factor beyond the lowest and the highest frequency of the class."""
_MOST = 240
_CONVERSIONS = ("source_db", "trace_db", "cable_db", "load_db", "total_db", "rejection_db")


def conversion_curves(subject: Subject) -> ConversionCurves | str:
    """The curves; or why there are none, in one sentence.

    The frequencies are evenly spaced by their logarithm about those of the class, which are among them exactly.
    """
    klass, electrical, geometry = subject.klass, subject.electrical, subject.geometry
    plus, minus = geometry.plus, geometry.minus
    if electrical is None or plus is None or minus is None:
        return "a leg is not routed from end to end"
    if klass is None or "balance" in electrical.missing:
        return electrical.missing.get("balance", "the pair has no class with source, load and frequencies")
    own = sorted({*klass.frequencies, *(frequency for frequency, _ in klass.mask)})
    at = _frequencies(own)
    reference = frozenset(subject.reference)
    try:
        link = board_link(
            subject.board, subject.link, klass, electrical.sections, (plus, minus), at, reference=reference
        )
    except NoModelError as error:
        return str(error)
    points = balance_points(link.elements, at, link.load.own_rejection(at))
    curves = [Curve(figure=name, values=tuple(getattr(point, name) for point in points)) for name in _CONVERSIONS]
    curves.append(Curve(figure="conversion_loss_db", values=tuple(_loss(point) for point in points)))
    known = tuple(curve for curve in curves if any(value is not None for value in curve.values))
    return ConversionCurves(
        frequency_hz=tuple(float(f) for f in at), curves=known, quasi_static_hz=electrical.quasi_static_hz
    )


def _frequencies(own: list[float]) -> Floats:
    low, high = math.log10(own[0] / _BESIDE), math.log10(own[-1] * _BESIDE)
    count = min(math.ceil((high - low) * PER_DECADE) + 1, _MOST)
    return np.unique(np.concatenate([np.logspace(low, high, count), own]))


def _loss(point: LinkBalance) -> float | None:
    """−20 log(|conversion| / |gain|); `None` where either is 0."""
    size, gain = abs(point.conversion), abs(point.gain)
    return 20 * math.log10(gain / size) if size > 0 and gain > 0 else None
