"""Small IPC-2581 documents in revision C's way, from the pieces a test is about."""

from __future__ import annotations

from pathlib import Path

from pairrules.board import Board
from pairrules.readers.ipc2581 import READER

PROFILE = (
    '<Profile><Polygon><PolyBegin x="0" y="0"/><PolyStepSegment x="20" y="0"/><PolyStepSegment x="20" y="10"/>'
    '<PolyStepSegment x="0" y="10"/></Polygon></Profile>'
)
LAYERS = (
    '<Layer name="TOP" layerFunction="CONDUCTOR" side="TOP" polarity="POSITIVE"/>'
    '<Layer name="BOTTOM" layerFunction="CONDUCTOR" side="BOTTOM" polarity="POSITIVE"/>'
    '<Layer name="DRILL" layerFunction="DRILL" side="ALL" polarity="POSITIVE">'
    '<Span fromLayer="TOP" toLayer="BOTTOM"/></Layer>'
)
CONSORTIUM = Path(__file__).resolve().parents[3] / ".." / "shared" / "boards"
"""The consortium's test files beside the checkout; tests that use them are skipped where they are absent."""


def document(
    sets: str = "",
    *,
    layer: str = "TOP",
    bottom: str = "<Set/>",
    drill: str = "",
    layers: str = LAYERS,
    stackup: str = "",
    specs: str = "",
    step: str = "",
    profile: str = PROFILE,
    dictionaries: str = "",
    units: str = "MILLIMETER",
    content: str = "",
    bom: str = "",
    more_steps: str = "",
    more_features: str = "",
) -> bytes:
    """A document whose step "board" draws `sets` on `layer`, and `bottom` on BOTTOM."""
    others = f'<LayerFeature layerRef="BOTTOM">{bottom}</LayerFeature>' if bottom else ""
    others += f'<LayerFeature layerRef="DRILL">{drill}</LayerFeature>' if drill else ""
    return (
        '<?xml version="1.0" encoding="UTF-8"?>\n<IPC-2581 revision="C" xmlns="http://webstds.ipc.org/2581">\n'
        f"<Content>{content}{dictionaries}</Content>{bom}\n"
        f'<Ecad name="e"><CadHeader units="{units}">{specs}</CadHeader>\n<CadData>{layers}{stackup}\n'
        f'<Step name="board">{profile}{step}\n'
        f'<LayerFeature layerRef="{layer}">\n{sets}\n</LayerFeature>{others}{more_features}</Step>{more_steps}\n'
        "</CadData></Ecad></IPC-2581>\n"
    ).encode()


def read(data: bytes, step: str = "") -> Board:
    """The board in a document."""
    return READER.read(data, "board.xml", step)


def line(*points: tuple[float, float], width: float = 0.2) -> str:
    """A polyline with its width given in place."""
    begin, *rest = points
    steps = "".join(f'<PolyStepSegment x="{x}" y="{y}"/>' for x, y in rest)
    style = f'<LineDesc lineEnd="ROUND" lineWidth="{width}"/>'
    return f'<Polyline><PolyBegin x="{begin[0]}" y="{begin[1]}"/>{steps}{style}</Polyline>'


def box(x0: float, y0: float, x1: float, y1: float, tag: str = "Polygon") -> str:
    """A rectangle as a closed outline."""
    corners = ((x1, y0), (x1, y1), (x0, y1), (x0, y0))
    steps = "".join(f'<PolyStepSegment x="{x}" y="{y}"/>' for x, y in corners)
    return f'<{tag}><PolyBegin x="{x0}" y="{y0}"/>{steps}</{tag}>'


def feature(drawn: str, net: str = "A", before: str = "", attributes: str = "") -> str:
    """A set with one feature. before: its Xform and Locations."""
    return f'<Set net="{net}" {attributes}><Features>{before}{drawn}</Features></Set>'


def pad(shape: str, before: str = '<Location x="0" y="0"/>', pin: str = "", net: str = "A", usage: str = "") -> str:
    """A set with one pad. pin: "U1.3"."""
    ref, _, number = pin.partition(".")
    owner = f'<PinRef componentRef="{ref}" pin="{number}"/>' if pin else ""
    use = f' padUsage="{usage}"' if usage else ""
    return f'<Set net="{net}"{use}><Pad>{before}{shape}{owner}</Pad></Set>'


def hole(x: float, y: float, *, diameter: float = 0.3, plating: str = "VIA", net: str = "A", more: str = "") -> str:
    """A set with one hole."""
    size = f'name="H" diameter="{diameter}" platingStatus="{plating}" plusTol="0" minusTol="0"'
    return f'<Set net="{net}" {more}><Hole {size} x="{x}" y="{y}"/></Set>'
