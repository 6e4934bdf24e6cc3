"""Small links for tests, one a function; the same numbers again and again, so that a difference stands out."""

from __future__ import annotations

import numpy as np

from pairrules.balance.networks import Line, Series, Shunt


def source(plus: float = 1000.0, minus: float = 1000.0) -> Series:
    return Series(cause="source", resistance=(plus, minus))


def coupled_track(length: float = 0.1, **changed: object) -> Line:
    fields: dict[str, object] = {
        "inductance": [[3.18e-7, 6.6e-8], [6.6e-8, 3.18e-7]],
        "capacitance": [[1.08e-10, -1.1e-11], [-1.1e-11, 1.08e-10]],
        "resistance": np.diag([2.2, 2.2]),
        "lengths": (length, length),
    }
    return Line(cause="trace", **(fields | changed))  # type: ignore[arg-type]


def lone_legs(plus: float, minus: float, *, impedance: float = 50.0, delay: float = 6.5e-9) -> Line:
    L, C = impedance * delay, delay / impedance
    return Line(cause="trace", inductance=np.diag([L, L]), capacitance=np.diag([C, C]), lengths=(plus, minus))


def cable(unbalance: float = 0.0) -> Line:
    return Line(
        cause="cable",
        inductance=np.diag([6e-7, 6e-7]),
        capacitance=[[1e-10, -4e-11], [-4e-11, 1e-10]],
        resistance=np.diag([0.09 * (1 + unbalance / 2), 0.09 * (1 - unbalance / 2)]),
        lengths=(3.0, 3.0),
    )


def load(resistance: tuple[float, float] = (1e6, 1e6), capacitance: tuple[float, float] = (1e-11, 1e-11)) -> Shunt:
    return Shunt(cause="load", resistance=resistance, capacitance=capacitance, across_resistance=2e4)
