"""A link: a pair followed from its source end to its load end, through the parts in series with it."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Hop:
    """One net of a leg, to be routed from a pad to a pad.

    Parameters
    ----------
    net: index into `Board.nets`.
    start, end: rows of `Board.pads`. More than one row where a part has several pins on this net (any of them is the
        end; the route takes the nearest); empty where nothing is known there, so that the leg is broken.
    """

    net: int
    start: tuple[int, ...]
    end: tuple[int, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class SeriesStep:
    """Parts in series, one step from source to load. For a choke both are the same part; −1 where one leg has none."""

    plus: int
    minus: int


@dataclass(frozen=True, slots=True, kw_only=True)
class HungPart:
    """A part that hangs on the pair without carrying it on.

    Parameters
    ----------
    part: index into `Board.parts`.
    kind: "across" (joins the legs), "to reference" (one leg to a reference net), "to net" (one leg to another net),
        "tap" (a further part with pins on both legs that is no end: a protection array, a further bus node).
    leg: "plus", "minus" or "both".
    pads: rows of `Board.pads` on the pair's nets. step: how many series steps lie between the source and it.
    other: index of the net at its far side, −1 where it has none or several.
    """

    part: int
    kind: str
    leg: str
    pads: tuple[int, ...]
    step: int
    other: int = -1


@dataclass(frozen=True, slots=True, kw_only=True)
class Link:
    """One pair as the trade means it: both legs from source to load.

    Parameters
    ----------
    name: declared, or what the two net names share. plus, minus: indices of the nets that gave the pair its name.
    klass: class the file declares, "" for none. found_by: in words ("net name", "declared in the file", ...).
    hops_plus, hops_minus: one net each, source first. series: the steps between them.
    source, load: index into `Board.parts` of the end parts, −1 where unknown.
    hung: parts hanging on it.
    missing: what was not found, one sentence each (an end without a part, a leg with fewer series parts).
    ends_known: whether both legs are known to run from a part to a part, the declared ones where the file declares
        them; where not, pads stand in for the ends, and the copper between them may not be all of the pair.
    """

    name: str
    plus: int
    minus: int
    klass: str
    found_by: str
    hops_plus: tuple[Hop, ...]
    hops_minus: tuple[Hop, ...]
    series: tuple[SeriesStep, ...]
    source: int
    load: int
    hung: tuple[HungPart, ...] = ()
    missing: tuple[str, ...] = ()
    ends_known: bool = True
