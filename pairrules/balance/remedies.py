"""What would mend a link that misses a limit on its balance: which value, and how far it has to change.

Nothing is estimated from how much is lacking: the link is solved anew with the value changed, until the limit is just
met at every frequency. What is said holds up to the value: with less of the difference, on either leg, it is met too.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from pairrules.balance.conversion import response
from pairrules.balance.levers import DIFFERENCE, Amount, Lever, differences, sizes
from pairrules.balance.networks import Element, Floats
from pairrules.balance.solved_link import SolvedLink

CONVERSION, LOSS, REJECTION = "conversion", "conversion loss", "rejection"
"""What a limit is on: −20 log |V_d/V_c|; the same below the link's gain; with the receiver's own added."""

_LEAST = 1e-6
"""Positions of a lever below this are looked for evenly, above it by ratio."""

_COARSE, _FINE, _PASSES = 33, 13, 4
"""Positions tried at first, in each later pass, and those passes: the position comes out to 2e-5 of itself."""

MOST_ELEMENTS = 120
"""Every trial solves all elements anew, and there are thousands of trials. A link of more, such as a pair along
hundreds of bends of unlike gap, would keep a check busy for many seconds; it goes without this advice."""

_SIGNED = 4
"""Of so many levers that move together each is tried with either leg the greater."""

_ROUNDING = 1e-9
"""[dB] of rounding that a limit forgives."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Mend:
    """A lever and how far it has to move.

    Parameters
    ----------
    position: from 0 (gone) to 1 (as given), the greatest with which the limit is met. given, allowed: what it comes to
        now and there, amount by amount; empty where no number says it.
    """

    lever: Lever
    position: float
    given: tuple[Amount, ...]
    allowed: tuple[Amount, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Remedies:
    """What would mend a link.

    Parameters
    ----------
    balance: differences between the legs that have to shrink, all of them, the most effective first; empty where even
        equal legs miss the limit. More than one only where no single one suffices.
    sizes: each of which suffices alone with all else as given.
    receiver_db: rejection of its own that a receiver would need with the link as given, at the frequency that asks
        most; `None` where the receiver's own does not count, is not known, or could be no end of rejection.
    receiver_short: whether the receiver's own rejection alone lies below what is asked.
    """

    balance: tuple[Mend, ...]
    sizes: tuple[Mend, ...]
    receiver_db: float | None = None
    receiver_short: bool = False


def remedies(link: SolvedLink, asked_db: npt.ArrayLike, *, figure: str, cause: str = "") -> Remedies:
    """What would make the figure at least `asked_db` at every frequency.

    Parameters
    ----------
    asked_db: (F,) at the link's own frequencies, −inf where nothing is asked. figure: one of the three above.
    cause: what counts alone, all other causes being made equal; "" for all of them together.

    Returns: nothing at all for a link of more than `MOST_ELEMENTS`.
    """
    if len(link.elements) > MOST_ELEMENTS:
        return Remedies(balance=(), sizes=())
    given = [one if cause in {"", one.cause} else one.symmetrised() for one in link.elements]
    trial = _Trial(link, given, np.asarray(asked_db, dtype=np.float64), figure)
    receiver, short = trial.receiver() if figure == REJECTION else (None, False)
    return Remedies(
        balance=() if short else _balance(trial, differences(given, cause)),
        sizes=tuple(mend for lever in sizes(given) for mend in _together(trial, [lever])),
        receiver_db=receiver,
        receiver_short=short,
    )


class _Trial:
    """One link tried with levers moved; elements that no lever moves are turned into matrices once."""

    def __init__(self, link: SolvedLink, given: Sequence[Element], asked: Floats, figure: str) -> None:
        self.given, self._asked, self._figure = list(given), asked, figure
        self._omega = 2 * np.pi * np.asarray(link.frequencies_hz, dtype=np.float64)
        self._own = link.own_rejection_db
        with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
            self._known = [element.chain(self._omega) for element in given]

    def holds(self, levers: Sequence[Lever], positions: Floats) -> npt.NDArray[np.bool_]:
        """Whether what is asked is met with all levers at each of the positions (S,), whichever leg has more."""
        return np.asarray(self.margin(levers, positions) >= -_ROUNDING)

    def margin(self, levers: Sequence[Lever], positions: Floats) -> Floats:
        """Least margin [dB] over the frequencies at each of the positions (S,)."""
        figures = np.min([self._figures(levers, positions, signs) for signs in _signs(levers)], axis=0)
        wanted = np.isfinite(self._asked)
        return np.asarray((figures[:, wanted] - self._asked[wanted]).min(axis=-1), dtype=np.float64)

    def receiver(self) -> tuple[float | None, bool]:
        """What the receiver itself would have to reject [dB], and whether what it does is too little by itself."""
        if self._own is None:
            return None, False
        short = bool((self._own < self._asked - _ROUNDING).any())
        converted = 10 ** (-self._ratio(self.given) / 20)
        room = (10 ** (-self._asked / 20) - converted)[np.isfinite(self._asked)]
        return (float(-20 * np.log10(room.min())) if (room > 0).all() else None), short

    def _figures(self, levers: Sequence[Lever], positions: Floats, signs: Sequence[int]) -> Floats:
        ratio = self._ratio(_at(levers, self.given, positions, signs))
        if self._figure == REJECTION and self._own is not None:
            with np.errstate(divide="ignore"):
                ratio = -20 * np.log10(10 ** (-ratio / 20) + 10 ** (-self._own / 20))
        # Where a line attenuates beyond all numbers nothing is known, and nothing is met.
        return np.broadcast_to(np.where(np.isnan(ratio), -np.inf, ratio), (len(positions), len(self._omega)))

    def _ratio(self, link: Sequence[Element]) -> Floats:
        with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
            chains = [
                known if element is before else element.chain(self._omega)
                for element, before, known in zip(link, self.given, self._known, strict=True)
            ]
            found = response(chains, self._omega)
            against = 1.0 if self._figure == CONVERSION else found.gain
            return np.asarray(-20 * np.log10(np.abs(found.conversion / against)), dtype=np.float64)


def _balance(trial: _Trial, levers: Sequence[Lever]) -> tuple[Mend, ...]:
    """The fewest levers that suffice, taken by what each adds, and how far they move together."""
    gone = np.zeros(1)
    chosen: list[Lever] = []
    rest = list(levers)
    while rest:
        best = max(rest, key=lambda lever: float(trial.margin([*chosen, lever], gone)[0]))
        chosen.append(best)
        rest.remove(best)
        if found := _together(trial, chosen):
            return found
    return ()


def _together(trial: _Trial, levers: Sequence[Lever]) -> tuple[Mend, ...]:
    """How far the levers have to move, all to one position; empty where not even gone they suffice."""
    position = _greatest(lambda tried: trial.holds(levers, tried))
    if position is None:
        return ()
    after = _at(levers, trial.given, position)
    return tuple(
        Mend(lever=one, position=position, given=one.amounts(trial.given), allowed=one.amounts(after)) for one in levers
    )


def _signs(levers: Sequence[Lever]) -> list[tuple[int, ...]]:
    """Which leg has more, by lever: every combination of up to `_SIGNED` levers, else all one way or the other."""
    either = [(1, -1) if lever.acts == DIFFERENCE else (1,) for lever in levers]
    if len(levers) > _SIGNED:
        return [tuple(signs[0] for signs in either), tuple(signs[-1] for signs in either)]
    return list(itertools.product(*either))


def _at(
    levers: Sequence[Lever], link: Sequence[Element], position: Floats | float, signs: Sequence[int] = ()
) -> list[Element]:
    changed, position = list(link), np.atleast_1d(np.asarray(position, dtype=np.float64))
    for lever, sign in zip(levers, signs or [1] * len(levers), strict=True):
        changed = lever.moved(changed, sign * position)
    return changed


def _greatest(holds: Callable[[Floats], npt.NDArray[np.bool_]]) -> float | None:
    """The greatest position up to which it holds, from 0 on; `None` where it does not hold at 0."""
    low, tried = 0.0, np.concatenate([[0.0], np.geomspace(_LEAST, 1.0, _COARSE)])
    held = holds(tried)
    if not held[0]:
        return None
    for _ in range(_PASSES):
        if held.all():
            return 1.0
        first = int(np.argmin(held))
        low = float(tried[first - 1]) if first else low
        tried = np.linspace(low, float(tried[first]), _FINE)[1:]
        held = holds(tried)
    return float(tried[int(np.argmin(held)) - 1]) if held[0] else low
