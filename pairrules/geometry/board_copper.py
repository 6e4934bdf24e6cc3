"""A board's copper in the forms that measuring needs, each made once when it is first asked for."""

from __future__ import annotations

from collections.abc import Container, Iterable
from functools import cached_property

from pairrules.board.board import Board
from pairrules.geometry.area_polygons import AreaPolygons
from pairrules.geometry.copper_index import CopperIndex, index_copper
from pairrules.geometry.cross_cut import CrossCuts
from pairrules.geometry.foreign_copper import ForeignCopper
from pairrules.geometry.layer_index import LayerIndexes
from pairrules.geometry.reference_copper import ReferenceCopper


class BoardCopper:
    """One board, with its reference nets (indices into `Board.nets`), ready to be measured link after link."""

    def __init__(self, board: Board, reference: tuple[int, ...]) -> None:
        self.board = board
        self.reference_nets = tuple(sorted(set(reference)))

    def make_ready(self, layers: Iterable[int], *, beside: Container[int], cuts: bool, threads: int) -> None:
        """Make the copper of layers ready, some at a time: the geometry library lets other threads run meanwhile.

        Parameters: beside: layers whose reference copper is asked for. cuts: whether what cuts meet is, on all of them.
        """
        from concurrent.futures import ThreadPoolExecutor

        reference, indexes = self.reference, self.layers

        def ready(layer: int) -> None:
            if layer in beside and reference.known(layer):
                reference.layer(layer)
            if cuts:
                indexes.layer(layer)

        with ThreadPoolExecutor(threads) as pool:
            list(pool.map(ready, layers))

    @cached_property
    def index(self) -> CopperIndex:
        """Which copper belongs to which net."""
        return index_copper(self.board)

    @cached_property
    def areas(self) -> AreaPolygons:
        """Filled copper as polygons."""
        return AreaPolygons(self.board)

    @cached_property
    def layers(self) -> LayerIndexes:
        """What lies near a place, by layer."""
        return LayerIndexes(self.board, self.areas)

    @cached_property
    def reference(self) -> ReferenceCopper:
        """Copper of the reference nets, by layer."""
        return ReferenceCopper(self.board, self.reference_nets, self.areas)

    @cached_property
    def foreign(self) -> ForeignCopper:
        """Copper of all nets, among which neighbours are found."""
        return ForeignCopper(self.board, self.areas, self.layers)

    @cached_property
    def cuts(self) -> CrossCuts:
        """What a straight cut across the board meets."""
        return CrossCuts(self.board, self.layers)
