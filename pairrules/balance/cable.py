"""The cable of a link as one uniform line over its screen or reference.

What is not given is left out of the model: no inductance, no capacitance. `inductance` is each leg's own, like
`resistance` and `capacitance`; the legs have no mutual inductance. Whether the pair is twisted or screened changes
what it picks up, not what it converts, and does not enter here.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from pairrules.balance.networks import Element, Line
from pairrules.balance.unequal_legs import apart, need


def cable_elements(values: Mapping[str, float]) -> tuple[Element, ...]:
    """A cable as elements of a link.

    Parameters
    ----------
    values: `length` [m]; per leg `resistance` [ohm/m], `capacitance` to reference [F/m], `inductance` [H/m];
        `capacitance_between` the legs [F/m]; `resistance_unbalance` u: R(1 ± u/2), plus the greater;
        `capacitance_unbalance` [F/m]: plus has that much more to reference than minus, half of it above the mean.

    Raises: ValueError where the length is missing, or the unbalance is more than the legs have.
    """
    length = need(values, "length", "a cable")
    resistance = apart(values.get("resistance", 0.0), values.get("resistance_unbalance", 0.0))
    to_reference, between = values.get("capacitance", 0.0), values.get("capacitance_between", 0.0)
    difference = values.get("capacitance_unbalance", 0.0)
    if abs(difference) > 2 * to_reference or min(resistance) < 0:
        raise ValueError("a cable's unbalance is more than its legs have")
    plus, minus = to_reference + difference / 2, to_reference - difference / 2
    return (
        Line(
            cause="cable",
            inductance=np.diag([values.get("inductance", 0.0)] * 2),
            capacitance=[[plus + between, -between], [-between, minus + between]],
            resistance=np.diag(resistance),
            lengths=(length, length),
        ),
    )
