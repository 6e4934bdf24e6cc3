"""Negative features and negative layers: copper that is what is left when something is taken away.

A negative set or feature removes copper drawn before it on its layer, in document order. A negative layer is the
board's profile less what is drawn on it; what negative sets draw on such a layer is put back. Both are from memory of
the standard.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import shapely
from shapely.strtree import STRtree

from pairrules.board.knots import MOST_MEETINGS, crowded, meetings
from pairrules.errors import BoardError
from pairrules.readers.ipc2581.copper import Copper, Erasure, FillRow, HoleRow
from pairrules.readers.ipc2581.drawing import Fill, Item, fills
from pairrules.readers.ipc2581.layers import FileLayer
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import Plane

MOST_CUTS = 200_000
"""Cuts on one layer: a plane has ten thousands of clearances, each of which cuts it once."""

_FEW_CUTS = 10

SLIVER_MM2 = 1e-9
"""Areas below this are rounding of the cutting."""


def negative_layers(copper: Copper, layers: list[FileLayer], remarks: Remarks) -> list[str]:
    """The layers to be read as negative: those that say so, and planes that hold nothing but clearances.

    A plane flagged positive without any area or line, whose pads are thermals or marked as plane openings, is one.
    """
    found = []
    for layer in layers:
        if layer.name not in copper.drawn_layers:
            continue
        if layer.negative:
            found.append(layer.name)
            remarks.count(f"layer {layer.name} is negative: its copper is read as the outline less what is drawn on it")
        elif layer.function == "PLANE" and _only_clearances(copper, layer.name):
            found.append(layer.name)
            remarks.count(f"plane {layer.name} holds only clearances: its copper is read as the outline less those")
    return found


def _only_clearances(copper: Copper, layer: str) -> bool:
    if any(row.layer == layer for row in copper.tracks) or any(row.layer == layer for row in copper.areas):
        return False
    pads = [row for row in copper.pads if row.layer == layer]
    return bool(pads) and all(row.clearance for row in pads)


def invert(copper: Copper, negatives: list[str], profile: Plane | None, remarks: Remarks) -> None:
    """Put areas in the place of what is drawn on negative layers."""
    for layer in negatives:
        drawn = _drawn(copper, layer)
        copper.tracks = [row for row in copper.tracks if row.layer != layer]
        copper.areas = [row for row in copper.areas if row.layer != layer]
        copper.pads = [row for row in copper.pads if row.layer != layer]
        copper.erasures = [row for row in copper.erasures if row.layer != layer]
        if profile is None:
            remarks.count(f"negative layer {layer} has no board outline to be cut from and is left out")
            continue
        left: Any = Fill(profile).region()
        for run, erase in _runs(drawn):
            regions = [item.region() for item in run]
            _refuse_crowds(regions, layer)
            region = shapely.union_all(regions)
            left = left.union(region.intersection(Fill(profile).region())) if erase else left.difference(region)
        order = copper.next()
        for piece in fills(left):
            if piece.region().area > SLIVER_MM2:
                net = _net_of(piece, copper.holes, layer, remarks)
                copper.areas.append(FillRow(piece, layer, net, order))


def _drawn(copper: Copper, layer: str) -> list[tuple[int, Item, bool]]:
    rows: list[tuple[int, Item, bool]] = [
        (row.order, row.stroke(), False) for row in copper.tracks if row.layer == layer
    ]
    rows += [(row.order, row.fill, False) for row in copper.areas if row.layer == layer]
    rows += [(row.order, item, False) for row in copper.pads if row.layer == layer for item in row.items()]
    rows += [(row.order, row.item, True) for row in copper.erasures if row.layer == layer]
    rows.sort(key=lambda row: row[0])
    return rows


def _runs(rows: list[tuple[int, Item, bool]]) -> list[tuple[list[Item], bool]]:
    """Neighbours of one polarity together, so that few cuts do for many features."""
    runs: list[tuple[list[Item], bool]] = []
    for _, item, erase in rows:
        if runs and runs[-1][1] == erase:
            runs[-1][0].append(item)
        else:
            runs.append(([item], erase))
    return runs


def _net_of(piece: Fill, holes: list[HoleRow], layer: str, remarks: Remarks) -> str:
    """The net of a piece of a negative plane: that of the plated holes that end in its copper without a clearance."""
    region = piece.region()
    shapely.prepare(region)
    plated = [hole for hole in holes if hole.plating != "NONPLATED" and hole.net]
    inside = shapely.contains_xy(region, [hole.at.real for hole in plated], [hole.at.imag for hole in plated])
    nets = sorted({hole.net for hole, held in zip(plated, inside, strict=True) if held})
    if len(nets) == 1:
        remarks.count(f"copper of negative layer {layer} is given net {nets[0]}, whose plated holes end in it")
        return nets[0]
    remarks.count(f"{{n}} piece{{s}} of negative layer {layer} {{are}} of no net that the file tells")
    return ""


def erase(copper: Copper, remarks: Remarks) -> None:
    """Cut what negative features remove out of the areas drawn before them; tracks and pads wholly removed go."""
    for layer in dict.fromkeys(row.layer for row in copper.erasures):
        _erase_layer(copper, layer, remarks)
    copper.erasures = []


@dataclass(slots=True)
class _Cuts:
    """How often something was cut so far; a small file of negative features all upon one another is refused."""

    made: int = 0

    def later(self, tree: STRtree, erasures: list[Erasure], region: Any, order: int, *, weight: int = 1) -> list[int]:
        """The erasures that come after a feature and meet it. Raises: BoardError where there are too many.

        weight: of each beyond the first few. A plane has thousands of clearances; a track or pad that meets more than
        a few is strange.
        """
        touched = tree.query(region, predicate="intersects").tolist()
        self.made += weight * max(0, len(touched) - _FEW_CUTS)
        if self.made > MOST_CUTS:
            raise BoardError(
                f"negative features cut copper more than {MOST_CUTS} times", remedy="export the file again"
            )
        return sorted(i for i in touched if erasures[i].order > order)


def _refuse_crowds(regions: list[Any], layer: str) -> None:
    """Raises: BoardError where what cuts a layer lies upon itself so often that its union would take minutes."""
    if crowded(regions):
        raise BoardError(
            f"what is cut out of layer {layer} lies upon itself more than {MOST_MEETINGS} times",
            remedy="export the file again",
        )


def _erase_layer(copper: Copper, layer: str, remarks: Remarks) -> None:
    erasures = [row for row in copper.erasures if row.layer == layer]
    regions = [row.item.region() for row in erasures]
    _refuse_crowds(regions, layer)
    tree, cuts = STRtree(regions), _Cuts()
    kept: list[FillRow] = []
    # Cuts that lie upon one another take as much longer to unite.
    upon = 1 + meetings(regions, MOST_CUTS) // len(regions) // 10
    laters = [
        cuts.later(tree, erasures, row.fill.region(), row.order, weight=upon) if row.layer == layer else []
        for row in copper.areas
    ]
    for row, later in zip(copper.areas, laters, strict=True):
        if not later:
            kept.append(row)
            continue
        left = row.fill.region().difference(shapely.union_all([regions[i] for i in later]))
        kept += [
            FillRow(replace(piece, hatched=row.fill.hatched), layer, row.net, row.order)
            for piece in fills(left)
            if piece.region().area > SLIVER_MM2
        ]
    copper.areas = kept
    gone: set[int] = set()
    pieces: list[tuple[int, int, Any, bool]] = [
        (id(row), row.order, row.stroke().region(), False) for row in copper.tracks if row.layer == layer
    ]
    pieces += [
        (id(row), row.order, shapely.union_all([item.region() for item in row.items()]), bool(row.pin))
        for row in copper.pads
        if row.layer == layer and row.shape is not None
    ]
    # All are counted before any is cut, which takes a thousand times as long.
    met = [cuts.later(tree, erasures, region, order, weight=20) for _, order, region, _ in pieces]
    for (key, _, region, held), later in zip(pieces, met, strict=True):
        cut = shapely.union_all([regions[i] for i in later])
        if not later or region.intersection(cut).area <= SLIVER_MM2:
            continue
        if not held and region.difference(cut).area <= SLIVER_MM2:
            gone.add(key)
        else:
            remarks.count(
                f"{{n}} track{{s}} or pad{{s}} on {layer} {{are}} cut by negative features and {{are}} read whole"
            )
    remarks.count(f"{{n}} track{{s}} or pad{{s}} on {layer} {{are}} wholly removed by negative features", len(gone))
    copper.tracks = [row for row in copper.tracks if id(row) not in gone]
    copper.pads = [row for row in copper.pads if id(row) not in gone]
