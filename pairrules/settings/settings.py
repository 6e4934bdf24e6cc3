"""Everything a project asks for, read from its settings and the rule sets these build on."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from pathlib import Path

from pairrules.board.stackup import Layer
from pairrules.settings.limit import Limit
from pairrules.settings.pair_class import PairClass, PinLengths, pins_over


@dataclass(frozen=True, slots=True, kw_only=True)
class ListedPair:
    """A listed pair: net names, or patterns whose stars stand for the same text. `name` is "" where not given."""

    plus: str
    minus: str
    name: str
    place: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Settings:
    """One project's settings, all files of the chain merged.

    Parameters
    ----------
    stackup: layers top first, None where the settings give none.
    reference_nets: patterns, None where the settings give none.
    pairs, ignore: listed pairs, and patterns of nets that are in no pair, the project's own first.
    classes: the project's own first; the first that holds counts.
    limits: hold for every pair unless its class says otherwise.
    part_values: designator to what is written on the part, where the board file says it wrongly or not at all.
    pin_lengths: what pins add, for every class that does not say otherwise.
    waivers: the waiver file, None where none is named.
    files: every file read, as named, the deepest base first.
    """

    stackup: tuple[Layer, ...] | None = None
    reference_nets: tuple[str, ...] | None = None
    pairs: tuple[ListedPair, ...] = ()
    ignore: tuple[str, ...] = ()
    classes: tuple[PairClass, ...] = ()
    limits: Mapping[str, Limit] = field(default_factory=dict)
    part_values: Mapping[str, str] = field(default_factory=dict)
    pin_lengths: PinLengths = field(default_factory=dict)
    waivers: Path | None = None
    files: tuple[str, ...] = ()

    def class_of(self, pair_name: str, nets: Iterable[str], declared: str = "") -> PairClass | None:
        """The class of a pair: the one the board file declares, if the settings know it; else the first that fits."""
        names = (pair_name, *nets)
        for one in self.classes:
            if declared and one.name == declared:
                return one
        return next((one for one in self.classes if one.holds_for(names)), None)

    def limits_for(self, klass: PairClass | None) -> Mapping[str, Limit]:
        """The limits that hold for a pair of this class (None: for one without), by rule."""
        if klass is None:
            return self.limits
        kept = {rule: limit for rule, limit in self.limits.items() if rule not in klass.off}
        return dict(sorted({**kept, **klass.limits}.items()))

    def pin_lengths_for(self, klass: PairClass | None) -> PinLengths:
        """What pins add to a pair of this class (None: to one without)."""
        return self.pin_lengths if klass is None else pins_over(klass.pin_lengths, self.pin_lengths)
