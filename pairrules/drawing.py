"""What pictures and pages draw: plain numbers, so that no report ever sees a board. Lengths in mm, y upward.

Layers are indices into `Drawing.layers`. Records are made only where they are asked for, and travel in the `Result`.
"""

from __future__ import annotations

from dataclasses import dataclass

Point = tuple[float, float]
"""x, y [mm], y upward, seen from the top side."""

Ring = tuple[Point, ...]
"""A closed outline [mm]; the last point is not the first again."""


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnShape:
    """A filled polygon. `outline` runs counter-clockwise, each of `holes` clockwise."""

    outline: Ring
    holes: tuple[Ring, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnPiece:
    """One piece of a leg's route, in the order from source to load.

    Parameters
    ----------
    kind: "track", "join" (a straight way inside a pad or an area), "barrel" (of a via; starts and ends at one place)
        or "series" (a part in series).
    centre, sweep_rad: of an arc, positive counter-clockwise; `None` and 0 where straight.
    width_mm: of a track, else `None`. layer: index into `Drawing.layers`; of a barrel the layer it leaves by.
    length_mm: what it adds to the leg; `None` for a barrel of unknown height. along_mm: the leg's length before it,
        barrels of unknown height left out.
    """

    kind: str
    start: Point
    end: Point
    centre: Point | None
    sweep_rad: float
    width_mm: float | None
    layer: int
    length_mm: float | None
    along_mm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnCopper:
    """Copper of one net on one layer within the window: tracks, areas, pads and vias as one, clipped.

    Parameters
    ----------
    layer: index into `Drawing.layers`. net: "" for copper of no net.
    role: "plus", "minus" (all copper of that leg's nets), "reference" or "neighbour".
    """

    layer: int
    net: str
    role: str
    shapes: tuple[DrawnShape, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnOpening:
    """Where a layer next to one of the legs' own has no reference copper within the window, as one clipped shape each.

    `layer`: the layer that is open; `of`: the legs' layers that it lies next to. Indices into `Drawing.layers`.
    """

    layer: int
    of: tuple[int, ...]
    shapes: tuple[DrawnShape, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnVia:
    """A via or a pin's plated hole within the window.

    Parameters
    ----------
    first, last: layers its barrel joins, first ≤ last. pad_mm, drill_mm: diameters, `None` where the file has none.
    role: "plus", "minus", "reference" or "neighbour". used: whether a leg's route passes it.
    """

    at: Point
    first: int
    last: int
    pad_mm: float | None
    drill_mm: float | None
    net: str
    role: str
    used: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnPad:
    """A pad of a part of the pair. `layer` is −1 for all layers. `leg`: "plus", "minus", or "" for another net's."""

    pin: str
    net: str
    leg: str
    layer: int
    at: Point
    shapes: tuple[DrawnShape, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnPart:
    """A part of the pair. `role`: "source", "load", "series" or "hung". `side`: "top", "bottom" or "" where unknown.

    `outline`: convex hull of its pads; of a large part only those near the pair are drawn, () where none is.
    """

    ref: str
    value: str
    role: str
    side: str
    outline: Ring
    pads: tuple[DrawnPad, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnPlace:
    """A place of a finding.

    `number` counts the pair's findings from 1 in their order in `PairResult.findings`; `layer` is −1 where the place is
    on none in particular.
    """

    number: int
    layer: int
    at: Point


@dataclass(frozen=True, slots=True, kw_only=True)
class SpacingStretch:
    """The edge-to-edge distance to the other leg along one leg; straight through both ends and the middle.

    Parameters
    ----------
    from_mm, to_mm: track length from the source end (barrels, joins and parts in series take none).
    gap_from_mm, gap_mid_mm, gap_to_mm: `None` where the other leg has no track on this layer.
    coupled: whether the legs count as running side by side. layer: index into `Drawing.layers`.
    start, end: its ends on the board.
    """

    from_mm: float
    to_mm: float
    gap_from_mm: float | None
    gap_mid_mm: float | None
    gap_to_mm: float | None
    coupled: bool
    layer: int
    start: Point
    end: Point


@dataclass(frozen=True, slots=True, kw_only=True)
class RunningDifference:
    """Length of plus less that of minus from the source end up to where they face each other.

    `along_mm`: length of plus up to there, barrels of known height counted; `at` lies on plus.
    """

    along_mm: float
    difference_mm: float
    layer: int
    at: Point


@dataclass(frozen=True, slots=True, kw_only=True)
class ImpedanceStretch:
    """A solved section along the pair.

    Parameters
    ----------
    leg: "both" where the legs run side by side, else the leg that is alone here.
    plus_from_mm, plus_to_mm, minus_from_mm, minus_to_mm: track length from each leg's source end.
    diff_ohm, common_ohm: of the pair; `None` for one leg alone.
    capacitance_tilt: (C11 − C22)/(C11 + C22), plus first: how unlike the legs' surroundings are; 0 for one leg.
    start, end: on plus, or on the leg that is alone.
    """

    leg: str
    layer: int
    plus_from_mm: float
    plus_to_mm: float
    minus_from_mm: float
    minus_to_mm: float
    diff_ohm: float | None
    common_ohm: float | None
    gap_mm: float | None
    width_plus_mm: float | None
    width_minus_mm: float | None
    capacitance_tilt: float
    start: Point
    end: Point


@dataclass(frozen=True, slots=True, kw_only=True)
class Curve:
    """A figure against frequency, on `ConversionCurves.frequency_hz`; `None` where it is not known there.

    `figure`: "source_db", "trace_db", "cable_db", "load_db", "total_db" (conversion, negative is better),
    "rejection_db" or "conversion_loss_db" (positive is better).
    """

    figure: str
    values: tuple[float | None, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnLimit:
    """A limit that a drawn figure is held against.

    Parameters
    ----------
    figure: of a `Curve`, or "gap_mm", "impedance_diff_ohm", "length_mismatch_mm" (both signs).
    least, most: flat bounds in the figure's unit, `None` where there is none on that side.
    over: (frequency [Hz], bound) points of a mask, straight over the frequency's logarithm between them; () where flat.
        `side` says which bound the points are: "least" or "most"; "" where flat.
    """

    rule: str
    severity: str
    figure: str
    least: float | None = None
    most: float | None = None
    over: tuple[tuple[float, float], ...] = ()
    side: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class ConversionCurves:
    """The balance over a row of frequencies, rising; those of the pair's class are `PairResult.balance`.

    `quasi_static_hz`: above it the cross-sections' fields no longer hold, `None` where unknown.
    """

    frequency_hz: tuple[float, ...]
    curves: tuple[Curve, ...]
    quasi_static_hz: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class PairDrawing:
    """What a picture or page draws of one pair, in plain numbers.

    Parameters
    ----------
    window: x_min, y_min, x_max, y_max [mm] around the pair; all copper is clipped to it.
    plus, minus: the routes, source first; () where the leg is not routed from end to end.
    copper: of all nets on the legs' layers, and reference copper on the layers next to them, sorted by layer, role
        and net.
    openings: where the layers next to the legs' have no reference copper; a layer that is not in the file is named in
        `unknown_layers` instead.
    spacing_plus, spacing_minus: along each leg. difference: along plus. impedance: from source to load.
    conversion: `None` where the balance is not modelled; `missing` says why.
    """

    window: tuple[float, float, float, float]
    plus: tuple[DrawnPiece, ...]
    minus: tuple[DrawnPiece, ...]
    copper: tuple[DrawnCopper, ...]
    openings: tuple[DrawnOpening, ...]
    unknown_layers: tuple[int, ...]
    vias: tuple[DrawnVia, ...]
    parts: tuple[DrawnPart, ...]
    places: tuple[DrawnPlace, ...]
    spacing_plus: tuple[SpacingStretch, ...] = ()
    spacing_minus: tuple[SpacingStretch, ...] = ()
    difference: tuple[RunningDifference, ...] = ()
    impedance: tuple[ImpedanceStretch, ...] = ()
    conversion: ConversionCurves | None = None
    limits: tuple[DrawnLimit, ...] = ()
    missing: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class DrawnOutline:
    """A part of the board: the convex hull of its pads. `side`: "top", "bottom" or "" where unknown."""

    ref: str
    side: str
    outline: Ring


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawing:
    """What a picture or page draws of the whole board.

    Parameters
    ----------
    layers: names of the copper layers, top first; drawn records refer to them by index.
    outline: the board's edge, () where the file has none. extent: x_min, y_min, x_max, y_max [mm] of outline and
        copper, `None` for an empty board.
    units: the file's, as written. parts: all parts whose pads are known.
    """

    layers: tuple[str, ...]
    outline: Ring
    extent: tuple[float, float, float, float] | None
    units: str
    parts: tuple[DrawnOutline, ...] = ()
