"""The stackup of a plain JSON board, and what it leaves open."""

from __future__ import annotations

from pairrules.board.stackup import Layer, Stackup
from pairrules.readers.json_paths import Ruler
from pairrules.readers.json_tree import Members

LAYER_KINDS = ("copper", "dielectric")
ALL_LAYERS = "all"
"""What a pin in a plated hole gives as its layer."""

_LAYER = frozenset({"name", "kind", "thickness", "permittivity", "loss_tangent"})


def read_stackup(board: Members, ruler: Ruler) -> Stackup:
    """The layers of a board, top to bottom.

    Raises: BoardError where one is wrong, two have one name, or none is copper.
    """
    document = board.document
    board.need("stackup", "give the layers from top to bottom")
    layers: list[Layer] = []
    names: set[str] = set()
    for path, entry in board.entries("stackup", "layers, top to bottom"):
        members = document.members(entry, path, _LAYER, "name and kind")
        name = members.text("name")
        if name == ALL_LAYERS or name in names:
            taken = "no layer may be called so" if name == ALL_LAYERS else "another layer has this name"
            raise document.fault((path, "name"), name, f"choose another; {taken}")
        names.add(name)
        layers.append(
            Layer(
                name=name,
                kind=members.choice("kind", LAYER_KINDS),
                thickness_mm=ruler.length(members, "thickness"),
                permittivity=members.number("permittivity", least=1.0, most=1e6, remedy="give a number of 1 or more"),
                loss_tangent=members.number("loss_tangent", least=0.0, most=0.9, remedy="give a number from 0 to 0.9"),
            )
        )
    stackup = Stackup(layers=tuple(layers))
    if not stackup.copper:
        raise document.fault((None, "stackup"), board.get("stackup"), 'give at least one layer of kind "copper"')
    return stackup


def stackup_gaps(stackup: Stackup) -> list[str]:
    """What the stackup leaves open, a sentence each."""
    if len(stackup.copper) > 1 and all(layer.kind == "copper" for layer in stackup.layers):
        return ["the stackup has no dielectric, so that barrels, delay and impedance are unknown"]
    open_ends = (
        ("thickness", "the barrels through it and impedance are unknown", stackup.layers, "thickness_mm"),
        ("permittivity", "delay and impedance are unknown there", _dielectrics(stackup), "permittivity"),
        ("loss tangent", "loss in the dielectric is unknown", _dielectrics(stackup), "loss_tangent"),
    )
    gaps = []
    for what, so, layers, column in open_ends:
        names = [layer.name for layer in layers if getattr(layer, column) is None]
        if names:
            gaps.append(f"the stackup has no {what} for {', '.join(names)}: {so}")
    return gaps


def _dielectrics(stackup: Stackup) -> tuple[Layer, ...]:
    return tuple(layer for layer in stackup.layers if layer.kind == "dielectric")
