"""What the electrical stage finds out about one pair: its sections, delays, mismatches, balance, pickup, parts."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from pairrules.balance.drawn_section import Drawing
from pairrules.balance.solved_link import SolvedLink
from pairrules.board.columns import Floats
from pairrules.fields.loss import SkinIntegrals


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PairSection:
    """A stretch of the pair with one cross-section, or of one leg alone. SI units but for places and lengths [mm].

    Parameters
    ----------
    leg: "both" where the legs run beside each other, else the leg that is alone here.
    plus_mm, minus_mm: (from, to) in track length from the source end; of equal ends where that leg has no part in it.
    hop: how many parts in series lie between the source and it.
    layer: index into `Board.copper`. start, end: (x, y) [mm] on plus, or on the leg that is alone.
    width_plus_mm, width_minus_mm, gap_mm: NaN where they do not apply. thickness_mm: of the copper.
    C, L: per metre [F/m], [H/m], (2, 2) for both legs, (1, 1) for one. R: d.c. resistance per metre of each [ohm/m].
    skin: what gives the legs' resistance at any frequency; `None` for one leg.
    loss: conductance over angular frequency, like C [F/m].
    impedance_diff_ohm, impedance_common_ohm: of the pair; `None` for one leg.
    delay: of the odd mode, or of the leg alone [s/m].
    planes: copper layers whose copper bounds the section. neighbours: nets of copper beside it on its own layer, −1 for
        none. coupling: of each neighbour to each leg of the section [F/m].
    drawing: what its cross-section was drawn from.
    """

    leg: str
    plus_mm: tuple[float, float]
    minus_mm: tuple[float, float]
    hop: int
    layer: int
    start: tuple[float, float]
    end: tuple[float, float]
    width_plus_mm: float
    width_minus_mm: float
    gap_mm: float
    thickness_mm: float
    C: Floats
    L: Floats
    R: Floats
    loss: Floats
    skin: SkinIntegrals | None
    impedance_diff_ohm: float | None
    impedance_common_ohm: float | None
    delay: float
    planes: tuple[int, ...]
    neighbours: tuple[int, ...]
    coupling: tuple[tuple[float, ...], ...] = ()
    drawing: Drawing | None = None

    @property
    def widths_mm(self) -> tuple[float, ...]:
        """Width of each leg of the section."""
        return tuple(w for w in (self.width_plus_mm, self.width_minus_mm) if w == w)  # noqa: PLR0124 (NaN is absent)

    @property
    def capacitance_tilt(self) -> float:
        """(C11 − C22)/(C11 + C22), 0 for one leg."""
        return float((self.C[0, 0] - self.C[-1, -1]) / (self.C[0, 0] + self.C[-1, -1]))


@dataclass(frozen=True, slots=True, kw_only=True)
class BalanceAt:
    """The balance at one frequency; dB figures as in the glossary, `None` where that cause is not modelled.

    Parameters
    ----------
    conversion_loss_db: what the link alone rejects, −20 log(|conversion| / |A_d|), the receiver's own left out.
    worst_db, bound_db: conversion at worst over tolerances, and the bound that 95 % of drawn links keep; `None` where
        no tolerance is given.
    load_ohm: magnitude of one leg's load in common mode [ohm], the lesser of the two; inf where there is none.
    """

    frequency_hz: float
    source_db: float | None
    trace_db: float | None
    cable_db: float | None
    load_db: float | None
    total_db: float | None
    rejection_db: float | None
    conversion_loss_db: float | None
    worst_db: float | None
    bound_db: float | None
    load_ohm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Placed:
    """A two-pin part of a leg where it meets the route.

    Parameters
    ----------
    part: index into `Board.parts`. leg: "plus" or "minus". along_mm: track length from the source end to it.
    step: of the series parts, which; −1 for a part that hangs on the leg.
    """

    part: int
    leg: str
    along_mm: float
    step: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Termination:
    """A resistor, or a chain through a middle net, between the legs.

    Parameters
    ----------
    parts: indices into `Board.parts`. resistance: [ohm] in all, `None` where a value is not written.
    to_load_mm: greater track length of both legs from it to the load's pad. to_source_mm: likewise to the source's.
    """

    parts: tuple[int, ...]
    resistance: float | None
    to_load_mm: float
    to_source_mm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class BiasPath:
    """The direct-current path of one leg's load end behind its last series capacitor.

    Parameters
    ----------
    leg: "plus" or "minus". capacitor: index into `Board.parts` of that capacitor.
    resistance: [ohm] of all paths in parallel; inf where there is none; `None` where a value is not written.
    parts: resistors that make it (indices into `Board.parts`). by_load: whether the receiver itself gives a path.
    """

    leg: str
    capacitor: int
    resistance: float | None
    parts: tuple[int, ...]
    by_load: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class LayerChange:
    """A via of the route whose reference changes with the layer.

    Parameters
    ----------
    leg, x_mm, y_mm: where. enter, leave: copper layers of the route. before, after: copper layers that carry its
        reference on either side.
    return_mm: distance to the nearest via or plated hole of a reference net that joins the two; inf where none does.
    """

    leg: str
    x_mm: float
    y_mm: float
    enter: int
    leave: int
    before: tuple[int, ...]
    after: tuple[int, ...]
    return_mm: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PairElectrical:
    """One pair's electrical figures. `None` where unknown; `missing` then says why, one sentence each.

    Parameters
    ----------
    sections: in order along plus, stretches of a single leg between them.
    impedance_diff_ohm … inductance_mismatch_nh: as in the glossary.
    balance: one a frequency, ascending. mask_at: frequencies of the class's mask among them.
    source_ohm: each leg's source resistance (plus, minus) [ohm]; `None` where no source is given.
    magnetic_v: differential voltage from the class's field; electric_v: the greatest from its swinging neighbours, and
        `aggressor` the net it comes from. area_mm2: vector loop area (x, y, z).
    series, hung, terminations, bias, changes: parts and layer changes, for rules.
    link: what the balance was solved from; `None` where there is no balance.
    quasi_static_hz: up to where the cross-sections' quasi-static fields hold.
    assumed: what the figures rest on beside what is given, one sentence each.
    missing: figure group ("sections", "balance", "pickup" by a field, "electric" pickup) to why it is unknown.
    """

    sections: tuple[PairSection, ...] = ()
    impedance_diff_ohm: float | None = None
    impedance_common_ohm: float | None = None
    delay_plus_ps: float | None = None
    delay_minus_ps: float | None = None
    resistance_mismatch_ohm: float | None = None
    capacitance_mismatch_pf: float | None = None
    inductance_mismatch_nh: float | None = None
    balance: tuple[BalanceAt, ...] = ()
    source_ohm: tuple[float, float] | None = None
    magnetic_v: float | None = None
    electric_v: float | None = None
    aggressor: str = ""
    area_mm2: tuple[float, float, float] | None = None
    series: tuple[Placed, ...] = ()
    hung: tuple[Placed, ...] = ()
    terminations: tuple[Termination, ...] = ()
    bias: tuple[BiasPath, ...] = ()
    changes: tuple[LayerChange, ...] = ()
    link: SolvedLink | None = None
    quasi_static_hz: float | None = None
    assumed: tuple[str, ...] = ()
    missing: Mapping[str, str] = field(default_factory=dict)
