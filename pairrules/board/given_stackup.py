"""A stackup that the project gives, put where the board file lacks it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Ints
from pairrules.board.stackup import Layer, Stackup

_MATERIAL = ("thickness_mm", "permittivity", "loss_tangent")


def with_stackup(board: Board, layers: tuple[Layer, ...]) -> Board:
    """The board with what `layers` (top to bottom) say and its own file does not. What the file says stays.

    Where the file has no dielectric at all, `layers` become the stack; they may then hold copper layers that the file
    lacks. Otherwise layers of the same name are completed.

    Raises: ValueError, with a sentence, where the copper layers of both are not the same ones in the same order.
    """
    if any(layer.kind == "dielectric" for layer in board.stackup.layers):
        given = {(layer.kind, layer.name): layer for layer in layers}
        own = tuple(_completed(layer, given.get((layer.kind, layer.name))) for layer in board.stackup.layers)
        return replace(board, stackup=Stackup(layers=own))
    stack = Stackup(layers=layers)
    places = {name: index for index, name in enumerate(stack.copper)}
    rows = [places.get(name, -1) for name in board.copper]
    if -1 in rows:
        lost = board.copper[rows.index(-1)]
        raise ValueError(f"the stackup has no copper layer {lost!r}, which the board has")
    if rows != sorted(set(rows)):
        raise ValueError(
            f"the stackup has the copper layers in another order than the board ({', '.join(board.copper)})"
        )
    own_layers = {layer.name: layer for layer in board.stackup.layers}
    stack = Stackup(
        layers=tuple(
            _completed(own_layers[layer.name], layer) if layer.kind == "copper" and layer.name in own_layers else layer
            for layer in layers
        )
    )
    # One more entry, for −1: "all layers" stays "all layers".
    moved = np.array([*rows, -1], dtype=np.int64)

    def move(column: Ints) -> Ints:
        return moved[column]

    return replace(
        board,
        stackup=stack,
        tracks=replace(board.tracks, layer=move(board.tracks.layer)),
        pads=replace(board.pads, layer=move(board.pads.layer)),
        vias=replace(board.vias, first=move(board.vias.first), last=move(board.vias.last)),
        areas=tuple(replace(area, layer=int(moved[area.layer])) for area in board.areas),
    )


def _completed(own: Layer, given: Layer | None) -> Layer:
    if given is None:
        return own
    return replace(own, **{key: getattr(given, key) for key in _MATERIAL if getattr(own, key) is None})
