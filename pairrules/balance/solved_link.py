"""A pair's link as it was solved, kept so that it can be solved again with something changed."""

from __future__ import annotations

from dataclasses import dataclass

from pairrules.balance.networks import Element, Floats


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SolvedLink:
    """A link.

    Parameters
    ----------
    elements: source first; values that depend on frequency hold at `frequencies_hz` (F,) alone.
    own_rejection_db: of the receiver itself (F,); `None` where it is not known.
    """

    elements: tuple[Element, ...]
    frequencies_hz: Floats
    own_rejection_db: Floats | None = None
