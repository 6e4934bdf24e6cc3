"""The elements a link is made of, from the source's e.m.f. to the load's nodes, each tagged with its cause.

SI units. Per-leg values have a last axis of two (plus, minus); matrices end in (2, 2). Axes before those broadcast
against the frequencies (F,): a value may be one number, one a frequency (F, 2), or one a sample (S, 1, 2).

`symmetrised()` is the element with each pair of unequal values replaced by their mean. Where one of the two is absent
(an open shunt, no capacitor in series) a mean of the values does not exist; then what they add is averaged, the
conductance of the shunt or the elastance of the capacitor, which keeps the link's common mode.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any, Protocol, Self, TypeAlias, runtime_checkable

import numpy as np
import numpy.typing as npt

from pairrules.fields import chain_matrix
from pairrules.fields.chain_matrix import Complexes

Floats: TypeAlias = npt.NDArray[np.float64]

CAUSES = ("source", "cable", "trace", "load")
"""What a conversion can be put down to."""


@runtime_checkable
class Element(Protocol):
    """One step of a link."""

    @property
    def cause(self) -> str:
        """One of `CAUSES`."""

    def chain(self, omega: Floats) -> Complexes:
        """Chain matrices (…, F, 4, 4) at angular frequencies omega (F,) [rad/s], in modes."""

    def symmetrised(self) -> Self:
        """The same with equal legs."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Series:
    """Impedance in series with each leg: resistance + inductance + capacitor, and the mutual inductance of a choke.

    Parameters
    ----------
    resistance (…, 2) [ohm]; inductance (…, 2) [H]; mutual (…) [H], positive where common-mode current finds more
    inductance; capacitance (…, 2) [F], infinite where there is no capacitor. At 0 Hz a capacitor in series has no
    finite answer.
    """

    cause: str
    resistance: npt.ArrayLike = (0.0, 0.0)
    inductance: npt.ArrayLike = (0.0, 0.0)
    mutual: npt.ArrayLike = 0.0
    capacitance: npt.ArrayLike = (np.inf, np.inf)

    def __post_init__(self) -> None:
        _freeze(self)

    def chain(self, omega: Floats) -> Complexes:
        """Chain matrices (…, F, 4, 4)."""
        return chain_matrix.series(self.impedance(omega))

    def impedance(self, omega: Floats) -> Complexes:
        """Series impedance (…, F, 2, 2) [ohm] in modes."""
        R, L, C = _array(self.resistance), _array(self.inductance), _array(self.capacitance)
        with np.errstate(divide="ignore", invalid="ignore"):
            capacitor = np.where(np.isinf(C), 0.0, 1.0 / (omega[:, None] * C))
        plus, minus = (R[..., leg] + 1j * (omega * L[..., leg] - capacitor[..., leg]) for leg in (0, 1))
        return chain_matrix.series_modes(plus, minus, 1j * omega * _array(self.mutual))

    def symmetrised(self) -> Series:
        """The same with equal legs."""
        return replace(
            self,
            resistance=_mean(self.resistance),
            inductance=_mean(self.inductance),
            capacitance=_mean_or_of_inverse(self.capacitance),
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Shunt:
    """Resistance and capacitance from each leg to reference, and between the legs.

    Parameters
    ----------
    resistance (…, 2) [ohm], infinite where there is none; capacitance (…, 2) [F]; across_resistance (…) [ohm];
    across_capacitance (…) [F].
    """

    cause: str
    resistance: npt.ArrayLike = (np.inf, np.inf)
    capacitance: npt.ArrayLike = (0.0, 0.0)
    across_resistance: npt.ArrayLike = np.inf
    across_capacitance: npt.ArrayLike = 0.0

    def __post_init__(self) -> None:
        _freeze(self)

    def chain(self, omega: Floats) -> Complexes:
        """Chain matrices (…, F, 4, 4)."""
        return chain_matrix.shunt(self.admittance(omega))

    def admittance(self, omega: Floats) -> Complexes:
        """Shunt admittance (…, F, 2, 2) [S] in modes."""
        R, C = _array(self.resistance), _array(self.capacitance)
        plus, minus = (1 / R[..., leg] + 1j * omega * C[..., leg] for leg in (0, 1))
        between = 1 / _array(self.across_resistance) + 1j * omega * _array(self.across_capacitance)
        return chain_matrix.shunt_modes(plus, minus, between)

    def symmetrised(self) -> Shunt:
        """The same with equal legs."""
        return replace(self, resistance=_mean_or_of_inverse(self.resistance), capacitance=_mean(self.capacitance))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Line:
    """A stretch of the pair as a uniform line over the reference.

    Parameters
    ----------
    inductance [H/m], capacitance [F/m, Maxwell: off-diagonal ≤ 0], resistance [ohm/m], conductance [S/m, Maxwell]:
    (…, 2, 2). lengths (…, 2) [m]: may differ only where the legs have no coupling.

    Raises: ValueError where coupled legs are given unequal lengths.
    """

    cause: str
    inductance: npt.ArrayLike
    capacitance: npt.ArrayLike
    lengths: npt.ArrayLike
    resistance: npt.ArrayLike = ((0.0, 0.0), (0.0, 0.0))
    conductance: npt.ArrayLike = ((0.0, 0.0), (0.0, 0.0))

    def __post_init__(self) -> None:
        matrices = ("inductance", "capacitance", "resistance", "conductance")
        _freeze(self)
        length = _array(self.lengths)
        unequal = length[..., 0] != length[..., 1]
        if unequal.any() and any((unequal & (_array(getattr(self, name))[..., 0, 1] != 0)).any() for name in matrices):
            raise ValueError("legs that are coupled have one length")

    def chain(self, omega: Floats) -> Complexes:
        """Chain matrices (…, F, 4, 4)."""
        plus, minus = (_array(self.lengths)[..., leg] for leg in (0, 1))
        R, L, G, C = (_array(m) for m in (self.resistance, self.inductance, self.conductance, self.capacitance))
        Z = [
            (R[..., i, k] + 1j * omega * L[..., i, k]) * length
            for i, k, length in ((0, 0, plus), (1, 1, minus), (0, 1, plus))
        ]
        # Each leg's own share to reference is its row sum; the coupling stays apart (see `shunt_modes`).
        Y = [
            (own(G, leg) + 1j * omega * own(C, leg)) * length
            for own, leg, length in ((_row_sum, 0, plus), (_row_sum, 1, minus), (_between, 0, plus))
        ]
        return chain_matrix.line(chain_matrix.series_modes(*Z), chain_matrix.shunt_modes(*Y))

    def symmetrised(self) -> Line:
        """The same with equal legs."""
        return replace(
            self,
            inductance=_mean_diagonal(self.inductance),
            capacitance=_mean_diagonal(self.capacitance),
            resistance=_mean_diagonal(self.resistance),
            conductance=_mean_diagonal(self.conductance),
            lengths=_mean(self.lengths),
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DifferenceInput:
    """The two inputs of a one-amplifier difference stage with R1, R2 [ohm] on both sides, an ideal amplifier.

    The plus leg sees R1 + R2. The minus leg sees R1 toward the amplifier's input node, which the plus leg holds at
    V_plus R2/(R1 + R2). Driven alone it is therefore loaded by R1 only, in common mode both carry V/(R1 + R2): equal
    source resistances convert nothing, unequal ones see an input that is not symmetric.

    Source: nodal analysis; the same figures in FACTS of difference amplifiers in any textbook (from memory).
    """

    cause: str
    r1: npt.ArrayLike
    r2: npt.ArrayLike
    equal: bool = False

    def __post_init__(self) -> None:
        _freeze(self)

    def chain(self, omega: Floats) -> Complexes:
        """Chain matrices (…, F, 4, 4)."""
        r1, r2 = _array(self.r1) + 0 * omega, _array(self.r2) + 0 * omega
        k = r2 / r1
        whole = 1 / (r1 + r2)
        # Y in legs is [[w, 0], [−kw, (1 + k)w]]; in modes, written out so that nothing cancels:
        Y = chain_matrix.shunt_modes(whole, whole)
        Y[..., 0, 0] = whole * (1 + k) / 2
        Y[..., 1, 0] = 0.0 if self.equal else -k * whole
        return chain_matrix.shunt(Y)

    def symmetrised(self) -> DifferenceInput:
        """Own admittances and transfer admittances at their means: common current no longer meets a difference."""
        return replace(self, equal=True)


def via(inductance: npt.ArrayLike, capacitance: npt.ArrayLike, *, cause: str = "trace") -> tuple[Element, ...]:
    """A via on each leg as a lumped step: half its capacitance to reference, its inductance, the other half.

    Parameters: inductance (…, 2) [H], capacitance (…, 2) [F]; 0 on a leg without a via.
    """
    half = Shunt(cause=cause, capacitance=_array(capacitance) / 2)
    return (half, Series(cause=cause, inductance=inductance), half)


def chains_of(link: Sequence[Element], omega: Floats) -> tuple[Complexes, Complexes]:
    """Chain matrices (elements, F, 4, 4) of a link as given, and with equal legs; no value has an axis of samples.

    Elements of one kind are worked out as one element with a first axis: a link has many, and each is small.
    """
    given = np.empty((len(link), len(omega), 4, 4), dtype=np.complex128)
    equal = np.empty_like(given)
    rows: dict[type, list[int]] = {}
    for place, element in enumerate(link):
        rows.setdefault(type(element), []).append(place)
    for kind, places in rows.items():
        if kind in {Series, Shunt, Line}:
            both = _together([link[place] for place in places], len(omega))
            found = both.chain(omega)
            given[places], equal[places] = found[: len(places)], found[len(places) :]
            continue
        for place in places:
            given[place], equal[place] = link[place].chain(omega), link[place].symmetrised().chain(omega)
    return given, equal


def _together(elements: Sequence[Element], frequencies: int) -> Element:
    """Elements of one kind as one with a first axis: all as given, then all with equal legs."""
    first: Any = elements[0]
    values: dict[str, Floats] = {}
    for name, trailing in _TRAILING[type(first).__name__].items():
        arrays = [getattr(element, name) for element in elements]
        varies = any(array.ndim > len(trailing) for array in arrays)
        shape = (frequencies if varies else 1, *trailing)
        stacked = np.empty((len(arrays), *shape))
        for row, array in zip(stacked, arrays, strict=True):
            row[...] = array
        values[name] = stacked
    given = replace(first, **values)
    equal = given.symmetrised()
    both = {name: np.concatenate([value, getattr(equal, name)]) for name, value in values.items()}
    found: Element = replace(first, **both)
    return found


def _array(value: npt.ArrayLike) -> Floats:
    return np.asarray(value, dtype=np.float64)


def _row_sum(matrix: Floats, leg: int) -> Floats:
    total: Floats = matrix[..., leg, leg] + matrix[..., 0, 1]
    return total


def _between(matrix: Floats, _leg: int) -> Floats:
    coupling: Floats = -matrix[..., 0, 1]
    return coupling


def _mean(values: npt.ArrayLike) -> Floats:
    legs = _array(values)
    return np.repeat(legs.mean(axis=-1, keepdims=True), 2, axis=-1)


def _mean_or_of_inverse(values: npt.ArrayLike) -> Floats:
    legs = _array(values)
    with np.errstate(divide="ignore"):
        of_inverse = 1 / _mean(1 / legs)
    return np.where(np.isinf(legs).any(axis=-1, keepdims=True), of_inverse, _mean(legs))


def _mean_diagonal(matrix: npt.ArrayLike) -> Floats:
    legs = _array(matrix).copy()
    legs[..., 0, 0] = legs[..., 1, 1] = (legs[..., 0, 0] + legs[..., 1, 1]) / 2
    return legs


_TRAILING: dict[str, dict[str, tuple[int, ...]]] = {
    "Series": {"resistance": (2,), "inductance": (2,), "mutual": (), "capacitance": (2,)},
    "Shunt": {"resistance": (2,), "capacitance": (2,), "across_resistance": (), "across_capacitance": ()},
    "Line": {
        "inductance": (2, 2),
        "capacitance": (2, 2),
        "lengths": (2,),
        "resistance": (2, 2),
        "conductance": (2, 2),
    },
    "DifferenceInput": {"r1": (), "r2": ()},
}
"""The last axes of every value of each kind of element."""


def _freeze(element: object) -> None:
    """Replace each value by a read-only copy, after checking its last axes."""
    if getattr(element, "cause") not in CAUSES:  # noqa: B009 (the elements share no base)
        raise ValueError(f"cause is one of {', '.join(CAUSES)}")
    for name, trailing in _TRAILING[type(element).__name__].items():
        array = np.array(getattr(element, name), dtype=np.float64)
        if trailing and array.shape[-len(trailing) :] != trailing:
            raise ValueError(f"{type(element).__name__}.{name} has shape {array.shape}; it must end in {trailing}")
        if np.isnan(array).any():
            raise ValueError(f"{type(element).__name__}.{name} is not a number")
        array.flags.writeable = False
        object.__setattr__(element, name, array)
