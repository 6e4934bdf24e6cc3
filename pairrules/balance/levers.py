"""What of a link can be changed to mend its balance, and what the link is with that changed.

A lever has a position u from 0 to 1: at 1 the link is as given, at 0 what the lever moves is gone. A difference between
the legs lies at mean + u (given − mean), its mean that of the element's symmetrised form; at −u the legs have changed
places. A size (a cable's length, a load's admittance to reference) lies at u times what is given.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from pairrules.balance.networks import DifferenceInput, Element, Floats, Line, Series, Shunt

DIFFERENCE, EQUAL, SIZE, INVERSE_SIZE = "difference", "equal", "size", "inverse size"
"""How a lever acts: on a difference; the same without a value between; on a size; on a size through its inverse."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Amount:
    """What a lever's position comes to, plus less minus for a difference. unit: SI; "1" for a share."""

    quantity: str
    unit: str
    value: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Lever:
    """One thing that can be changed.

    Parameters
    ----------
    cause: of `networks.CAUSES`. what: name within the cause, such as "resistance". acts: one of the four above.
    fields: places in the link: index of the element, name of its field. step: which series part it is, −1 for none.
    """

    cause: str
    what: str
    acts: str
    fields: tuple[tuple[int, str], ...]
    step: int = -1

    def moved(self, link: Sequence[Element], position: Floats) -> list[Element]:
        """The link with the lever at positions (S,); its elements get a leading axis of samples."""
        changed = list(link)
        for index, name in self.fields:
            element: Any = changed[index]
            if self.acts == EQUAL:
                changed[index] = element.symmetrised()
            else:
                changed[index] = replace(element, **{name: self._value(element, name, position)})
        return changed

    def amounts(self, link: Sequence[Element]) -> tuple[Amount, ...]:
        """What it comes to in a link; empty where no number says it."""
        if self.acts in {SIZE, INVERSE_SIZE}:
            return _sizes(self, link)
        return () if self.acts == EQUAL else _MEASURED[self.what](self, link)

    def _value(self, element: Any, name: str, position: Floats) -> Floats:
        given = np.asarray(getattr(element, name), dtype=np.float64)
        trailing = 2 if isinstance(element, Line) and name != "lengths" else 1
        # Samples come first, then frequencies.
        u = position.reshape(-1, 1, *([1] * trailing))
        with np.errstate(divide="ignore", invalid="ignore"):
            if self.acts == SIZE:
                return given * u
            if self.acts == INVERSE_SIZE:
                return np.asarray(np.where(np.isinf(given), given, given / u))
            mean = np.asarray(getattr(element.symmetrised(), name), dtype=np.float64)
            if np.isinf(given).any():
                return np.asarray(1 / (1 / mean + u * (1 / given - 1 / mean)))
            return np.asarray(mean + u * (given - mean))


def differences(link: Sequence[Element], cause: str = "") -> tuple[Lever, ...]:
    """Every difference between the legs that a link of a board has; of one cause only where that is named."""
    fields: dict[tuple[str, str, str, int], list[tuple[int, str]]] = {}
    step = 0
    for index, element in enumerate(link):
        part = -1
        if isinstance(element, Series) and element.cause == "trace" and not is_via(element):
            part, step = step, step + 1
        if cause and element.cause != cause:
            continue
        for name, what in _names(element):
            if name == "equal" or _differs(element, name):
                acts = EQUAL if name == "equal" else DIFFERENCE
                fields.setdefault((element.cause, what, acts, part if what == "part" else -1), []).append((index, name))
    return tuple(
        Lever(cause=own, what=what, acts=acts, fields=tuple(places), step=part)
        for (own, what, acts, part), places in sorted(fields.items())
    )


def sizes(link: Sequence[Element]) -> tuple[Lever, ...]:
    """What can be made smaller as a whole: a cable's length, the load's admittances from the legs to reference."""
    cable = tuple((i, "lengths") for i, one in enumerate(link) if isinstance(one, Line) and one.cause == "cable")
    shunts = [(i, one) for i, one in enumerate(link) if isinstance(one, Shunt) and one.cause == "load"]
    resistance = tuple((i, "resistance") for i, one in shunts if np.isfinite(np.asarray(one.resistance)).any())
    capacitance = tuple((i, "capacitance") for i, one in shunts if np.any(np.asarray(one.capacitance)))
    found = (
        Lever(cause="cable", what="length", acts=SIZE, fields=cable),
        Lever(cause="load", what="resistance", acts=INVERSE_SIZE, fields=resistance),
        Lever(cause="load", what="capacitance", acts=SIZE, fields=capacitance),
    )
    return tuple(lever for lever in found if lever.fields)


def is_via(element: Series) -> bool:
    """Whether it has nothing but inductance: barrels of vias do, and parts of the board have a resistance or more."""
    bare = not np.any(np.asarray(element.resistance)) and np.all(np.isinf(np.asarray(element.capacitance)))
    return bool(bare and np.any(np.asarray(element.inductance)))


def _names(element: Element) -> tuple[tuple[str, str], ...]:
    """Fields of an element that may differ from leg to leg, each with the name of its lever."""
    if isinstance(element, DifferenceInput):
        return () if element.equal else (("equal", "inputs"),)
    if isinstance(element, Shunt):
        return (("resistance", "resistance"), ("capacitance", "capacitance"))
    if isinstance(element, Series):
        if element.cause == "trace":
            what = "vias" if is_via(element) else "part"
            return (("resistance", what), ("inductance", what), ("capacitance", what))
        return (("resistance", "resistance"), ("inductance", "inductance"), ("capacitance", "series capacitance"))
    if isinstance(element, Line):
        matrices = ("inductance", "capacitance", "resistance", "conductance")
        along = [(name, name if element.cause == "cable" else "tracks") for name in matrices]
        return (*along, ("lengths", "lengths"))
    return ()


def _differs(element: Element, name: str) -> bool:
    value = np.asarray(getattr(element, name), dtype=np.float64)
    if isinstance(element, Line) and name != "lengths":
        return bool((value[..., 0, 0] != value[..., 1, 1]).any())
    return bool((value[..., 0] != value[..., 1]).any())


def _legs(lever: Lever, link: Sequence[Element]) -> Floats:
    """Sum over the lever's elements of each leg's value (2,), the first sample and frequency of each."""
    total = np.zeros(2)
    for index, name in lever.fields:
        value = np.asarray(getattr(link[index], name), dtype=np.float64)
        if isinstance(link[index], Line) and name != "lengths":
            value = value.diagonal(axis1=-2, axis2=-1)
        total += value.reshape(-1, 2)[0]
    return total


def _sum(quantity: str, unit: str) -> Callable[[Lever, Sequence[Element]], tuple[Amount, ...]]:
    def measured(lever: Lever, link: Sequence[Element]) -> tuple[Amount, ...]:
        plus, minus = _legs(lever, link)
        return (Amount(quantity=quantity, unit=unit, value=float(plus - minus)),) if np.isfinite(plus - minus) else ()

    return measured


def _resistance(lever: Lever, link: Sequence[Element]) -> tuple[Amount, ...]:
    """In series [ohm]; to reference, where all elements lie in parallel, as a share of the mean."""
    if not isinstance(link[lever.fields[0][0]], Shunt):
        if lever.cause == "cable":
            return _share("resistance", _legs(lever, link))
        return _sum("resistance", "ohm")(lever, link)
    conductance = np.zeros(2)
    for element in link:
        if isinstance(element, Shunt) and element.cause == lever.cause:
            conductance += 1 / np.asarray(element.resistance, dtype=np.float64).reshape(-1, 2)[0]
    with np.errstate(divide="ignore"):
        return _share("resistance", 1 / conductance)


def _capacitance(lever: Lever, link: Sequence[Element]) -> tuple[Amount, ...]:
    return _sum("capacitance", "F/m" if lever.cause == "cable" else "F")(lever, link)


def _part(lever: Lever, link: Sequence[Element]) -> tuple[Amount, ...]:
    return tuple(
        amount
        for index, name in lever.fields
        for amount in _share(name, np.asarray(getattr(link[index], name), dtype=np.float64).reshape(-1, 2)[0])
    )


def _share(quantity: str, legs: Floats) -> tuple[Amount, ...]:
    mean = float(legs.mean())
    if not np.isfinite(mean) or mean == 0:
        return ()
    return (Amount(quantity=quantity, unit="1", value=float(legs[0] - legs[1]) / mean),)


def _lengths(lever: Lever, link: Sequence[Element]) -> tuple[Amount, ...]:
    """The running difference of the legs' lengths where it is greatest: it may have gone again at the end [m]."""
    steps = [np.asarray(getattr(link[i], name), dtype=np.float64).reshape(-1, 2)[0] for i, name in lever.fields]
    running = np.cumsum([plus - minus for plus, minus in steps])
    return (Amount(quantity="lengths", unit="m", value=float(running[int(np.argmax(np.abs(running)))])),)


def _tracks(lever: Lever, link: Sequence[Element]) -> tuple[Amount, ...]:
    """The sections' differences in all, each with its sign; those of the lines that the lever moves."""
    found = []
    for quantity, unit in (("capacitance", "F"), ("inductance", "H")):
        total = 0.0
        for index in sorted({index for index, _ in lever.fields}):
            line: Any = link[index]
            matrix = np.asarray(getattr(line, quantity), dtype=np.float64).reshape(-1, 2, 2)[0]
            own = matrix.diagonal() * np.asarray(line.lengths, dtype=np.float64).reshape(-1, 2)[0]
            total += float(own[0] - own[1])
        found.append(Amount(quantity=quantity, unit=unit, value=total))
    return tuple(found)


def _sizes(lever: Lever, link: Sequence[Element]) -> tuple[Amount, ...]:
    """Length of all cable [m]; of the legs to reference the least resistance [ohm], the greatest capacitance [F]."""
    if lever.what == "length":
        return (Amount(quantity="length", unit="m", value=float(_legs(lever, link)[0])),)
    if lever.what == "capacitance":
        return (Amount(quantity="capacitance", unit="F", value=float(_legs(lever, link).max())),)
    conductance = np.zeros(2)
    for index, name in lever.fields:
        conductance += 1 / np.asarray(getattr(link[index], name), dtype=np.float64).reshape(-1, 2)[0]
    with np.errstate(divide="ignore"):
        return (Amount(quantity="resistance", unit="ohm", value=float(1 / conductance.max())),)


_MEASURED: dict[str, Callable[[Lever, Sequence[Element]], tuple[Amount, ...]]] = {
    "resistance": _resistance,
    "capacitance": _capacitance,
    "inductance": _sum("inductance", "H"),
    "conductance": _sum("conductance", "S"),
    "series capacitance": _sum("capacitance", "F"),
    "part": _part,
    "vias": _sum("inductance", "H"),
    "tracks": _tracks,
    "lengths": _lengths,
}
