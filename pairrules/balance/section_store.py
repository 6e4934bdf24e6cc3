"""Cross-sections solved once: the store that every pair of a board shares."""

from __future__ import annotations

from collections.abc import MutableMapping

from pairrules.fields.cross_section import CrossSection
from pairrules.fields.solve import SectionSolution, solve_section

Store = MutableMapping[CrossSection, SectionSolution]
"""Section to solution; a plain dict will do, whoever hands it in decides where it lives."""


def solved(section: CrossSection, store: Store) -> SectionSolution:
    """The solution of a section, from the store where it is there.

    Raises: ValueError as `solve_section`.
    """
    found = store.get(section)
    if found is None:
        found = store[section] = solve_section(section)
    return found
