"""Pads and holes put together, parts and their pins, and the nets of copper that names none."""

from __future__ import annotations

import numpy as np
import pytest

from pairrules.board import Board
from tests.readers.ipc2581.documents import document, feature, hole, line, pad, read

ROUND = '<Circle diameter="1"/>'
AT = '<Location x="5" y="5"/>'

THREE = (
    '<Layer name="TOP" layerFunction="CONDUCTOR" side="TOP" polarity="POSITIVE"/>'
    '<Layer name="MID" layerFunction="CONDUCTOR" side="INTERNAL" polarity="POSITIVE"/>'
    '<Layer name="BOTTOM" layerFunction="CONDUCTOR" side="BOTTOM" polarity="POSITIVE"/>'
    '<Layer name="DRILL" layerFunction="DRILL" side="ALL" polarity="POSITIVE">'
    '<Span fromLayer="TOP" toLayer="MID"/></Layer>'
)
MID = '<LayerFeature layerRef="MID"><Set/></LayerFeature>'


def pin_rows(board: Board) -> list[tuple[str, str, str, int]]:
    p = board.pads
    return [
        (board.parts[part].ref if part >= 0 else "", pin, board.nets[net] if net >= 0 else "", layer)
        for part, pin, net, layer in zip(p.part.tolist(), p.pin, p.net.tolist(), p.layer.tolist(), strict=True)
    ]


def test_a_pin_in_a_plated_hole_is_one_row() -> None:
    both = pad(ROUND, before=AT, pin="J1.3")
    board = read(document(both, bottom=both, drill=hole(5, 5, diameter=0.6, plating="PLATED")))
    assert pin_rows(board) == [("J1", "3", "A", -1)]
    assert board.pads.drill.tolist() == [0.6]
    assert board.pads.shapes[board.pads.shape[0]].size == (1, 1)
    assert len(board.vias) == 0


def test_a_surface_pad_has_no_drill() -> None:
    board = read(document(pad(ROUND, before=AT, pin="J1.3"), drill=hole(9, 9)))
    assert pin_rows(board) == [("J1", "3", "A", 0)]
    assert np.isnan(board.pads.drill).all()


def test_a_plated_hole_of_another_net_is_not_the_pin_s() -> None:
    both = pad(ROUND, before=AT, pin="J1.3")
    board = read(document(both, bottom=both, drill=hole(5, 5, plating="PLATED", net="B")))
    assert [layer for *_, layer in pin_rows(board)] == [0, 1]
    assert len(board.vias) == 1


def test_a_via_takes_the_pads_at_its_place() -> None:
    small = pad(ROUND, before='<Location x="5.0004" y="5"/>', usage="VIA")
    large = pad('<Circle diameter="1.2"/>', before=AT, usage="VIA")
    board = read(document(small, bottom=large, drill=hole(5, 5)))
    assert len(board.pads) == 0
    assert (board.vias.pad[0], board.vias.drill[0]) == pytest.approx((1.2, 0.3))
    assert np.isnan(board.vias.antipad[0])
    assert (board.vias.first[0], board.vias.last[0]) == (0, 1)


def test_a_plated_hole_without_a_pin_is_a_via() -> None:
    board = read(document(feature(line((0, 0), (1, 0))), drill=hole(5, 5, plating="PLATED")))
    assert len(board.vias) == 1
    assert np.isnan(board.vias.pad[0])


def test_an_unplated_hole_is_no_copper() -> None:
    board = read(document(feature(line((0, 0), (1, 0))), drill=hole(5, 5, plating="NONPLATED")))
    assert len(board.vias) == 0


@pytest.mark.parametrize("plating", ["VIA", "VIA_CAPPED"])
def test_a_via_in_a_pad_leaves_the_pin_its_pad(plating: str) -> None:
    board = read(document(pad(ROUND, before=AT, pin="U1.1"), drill=hole(5, 5, plating=plating)))
    assert pin_rows(board) == [("U1", "1", "A", 0)]
    assert len(board.vias) == 1


def test_a_via_spans_its_drill_layer_or_its_own_span() -> None:
    own = hole(6, 5).replace("/></Set>", '><Span fromLayer="MID" toLayer="BOTTOM"/></Hole></Set>')
    board = read(document(feature(line((0, 0), (1, 0))), layers=THREE, more_features=MID, drill=hole(5, 5) + own))
    assert list(zip(board.vias.first.tolist(), board.vias.last.tolist(), strict=True)) == [(0, 1), (1, 2)]


def test_a_blind_plated_hole_does_not_make_a_pin_go_through() -> None:
    both = pad(ROUND, before=AT, pin="J1.3")
    board = read(document(both, bottom=both, layers=THREE, more_features=MID, drill=hole(5, 5, plating="PLATED")))
    assert [layer for *_, layer in pin_rows(board)] == [0, 2]
    assert len(board.vias) == 1


def test_the_same_hole_on_two_drill_layers_is_one_via() -> None:
    again = '<LayerFeature layerRef="DRILL">' + hole(5, 5) + "</LayerFeature>"
    assert len(read(document(feature(line((0, 0), (1, 0))), drill=hole(5, 5), more_features=again)).vias) == 1


def test_a_pad_stack_definition_gives_pad_and_antipad() -> None:
    def use(kind: str, diameter: float) -> str:
        drawn = f'<Location x="0" y="0"/><Circle diameter="{diameter}"/>'
        return f'<PadstackPadDef layerRef="TOP" padUse="{kind}">{drawn}</PadstackPadDef>'

    definition = f'<PadStackDef name="v1">{use("REGULAR", 0.6)}{use("ANTIPAD", 1.0)}{use("THERMAL", 2.0)}</PadStackDef>'
    drilled = hole(5, 5, more='geometry="v1"')
    board = read(document(feature(line((0, 0), (1, 0))), step=definition, drill=drilled))
    assert (board.vias.pad[0], board.vias.antipad[0]) == pytest.approx((0.6, 1.0))


def test_a_pad_without_a_shape_takes_its_definition_s() -> None:
    drawn = '<Location x="0" y="0"/><Circle diameter="0.6"/>'
    definition = (
        f'<PadStackDef name="v1"><PadstackPadDef layerRef="TOP" padUse="REGULAR">{drawn}</PadstackPadDef></PadStackDef>'
    )
    bare = '<Set net="A"><Pad padstackDefRef="v1"><Location x="1" y="1"/></Pad><Pad><Location x="2" y="1"/></Pad></Set>'
    board = read(document(bare, step=definition))
    assert board.pads.shape.tolist() == [0, -1]
    assert board.pads.shapes[0].size == (0.6, 0.6)


def test_via_pads_without_a_hole_are_a_via_with_unknown_drill() -> None:
    both = pad(ROUND, before=AT, usage="VIA")
    board = read(document(both, bottom=both))
    assert len(board.vias) == 1
    assert np.isnan(board.vias.drill[0])
    assert "1 via was found by pads alone; no hole is drilled there in the file" in board.missing


def test_a_pad_without_extent_is_no_shape() -> None:
    both = pad('<Circle diameter="0"/>', before=AT, usage="VIA")
    board = read(document(both + pad('<Circle diameter="0"/>', pin="U1.1"), drill=hole(5, 5)))
    assert board.pads.shape.tolist() == [-1]
    assert np.isnan(board.vias.pad[0])


def test_slots_are_holes_of_their_width() -> None:
    size = 'name="S" platingStatus="PLATED" plusTol="0" minusTol="0"'
    slot = f'<Set net="A"><SlotCavity {size}><Xform rotation="90"/><Location x="5" y="5"/><Oval width="3" height="1"/></SlotCavity></Set>'  # noqa: E501
    both = pad(ROUND, before=AT, pin="J1.1")
    board = read(document(both, bottom=both, drill=slot))
    assert pin_rows(board) == [("J1", "1", "A", -1)]
    assert board.pads.drill[0] == pytest.approx(1.0)


def test_fiducials_are_loose_pads() -> None:
    mark = '<Set><GlobalFiducial><Location x="2" y="2"/><Circle diameter="1"/></GlobalFiducial></Set>'
    assert pin_rows(read(document(mark))) == [("", "", "", 0)]


# -- parts ------------------------------------------------------------------------------------------------------------

PACKAGE = (
    '<Package name="SO2" type="SOIC"><Pin number="1" name="IN" type="SURFACE"><Location x="2" y="1"/>{shape}</Pin>'
    '<Pin number="2" type="SURFACE"><Location x="-2" y="1"/>{shape}</Pin></Package>'
).format(shape='<RectCenter width="0.6" height="0.4"/>')


def component(ref: str, layer: str, before: str, more: str = "") -> str:
    named = f'refDes="{ref}" packageRef="SO2" part="p" layerRef="{layer}" mountType="SMT"'
    return f"<Component {named}>{more}{before}</Component>"


def logical(net: str, *pins: str, attributes: str = "") -> str:
    held = "".join(f'<PinRef componentRef="{p.split(".")[0]}" pin="{p.split(".")[1]}"/>' for p in pins)
    return f'<LogicalNet name="{net}" {attributes}>{held}</LogicalNet>'


@pytest.mark.parametrize(
    ("layer", "before", "expected"),
    [
        ("TOP", '<Location x="10" y="5"/>', (12, 6)),
        ("TOP", '<Xform rotation="90"/><Location x="10" y="5"/>', (9, 7)),
        ("BOTTOM", '<Xform mirror="true"/><Location x="10" y="5"/>', (8, 6)),
        # Mirrored first to (-2, 1), then turned to (-1, -2).
        ("BOTTOM", '<Xform rotation="90" mirror="true"/><Location x="10" y="5"/>', (9, 3)),
    ],
)
def test_pins_without_pads_lie_where_package_and_placement_say(
    layer: str, before: str, expected: tuple[float, float]
) -> None:
    step = PACKAGE + component("U1", layer, before) + logical("A", "U1.1")
    board = read(document(feature(line((0, 0), (1, 0))), step=step))
    assert pin_rows(board) == [("U1", "1", "A", 0 if layer == "TOP" else 1)]
    assert board.pads.at[0] == pytest.approx(expected)
    assert board.pads.shapes[board.pads.shape[0]].size == (0.6, 0.4)


def test_pins_may_be_called_by_name() -> None:
    step = PACKAGE + component("U1", "TOP", AT) + logical("A", "U1.IN")
    assert pin_rows(read(document(feature(line((0, 0), (1, 0))), step=step))) == [("U1", "IN", "A", 0)]


def test_pads_that_name_no_pin_are_given_the_pin_at_their_place() -> None:
    step = PACKAGE + component("U1", "TOP", AT)
    sets = pad(ROUND, before='<Location x="7" y="6"/>') + pad(ROUND, before='<Location x="3" y="6"/>', net="")
    assert pin_rows(read(document(sets, step=step))) == [("U1", "1", "A", 0), ("U1", "2", "", 0)]


def test_pads_of_no_net_take_the_net_of_their_pin() -> None:
    step = PACKAGE + component("U1", "TOP", AT) + logical("A", "U1.1")
    sets = pad(ROUND, before='<Location x="7" y="6"/>', pin="U1.1", net="")
    assert pin_rows(read(document(sets, step=step))) == [("U1", "1", "A", 0)]


def test_pads_show_whether_parts_are_turned_before_they_are_mirrored() -> None:
    before = '<Xform rotation="90" mirror="true"/><Location x="10" y="5"/>'
    step = PACKAGE + component("U1", "BOTTOM", before) + component("U2", "BOTTOM", before.replace("10", "15"))
    step += logical("A", "U1.1", "U2.1")
    # Turned first to (-1, 2), then mirrored to (1, 2).
    shown = pad(ROUND, before='<Location x="11" y="7"/>', pin="U1.1")
    board = read(document(feature(line((0, 0), (1, 0))), bottom=shown, step=step))
    assert board.pads.at[1] == pytest.approx((16, 7))
    assert (
        "mirrored parts are read as turned first and then mirrored, as the places of their pads show" in board.missing
    )


def test_parts_and_their_values() -> None:
    told = '<NonstandardAttribute name="VALUE" value="10k" type="STRING"/>'
    step = PACKAGE + component("R1", "TOP", AT, told) + component("R2", "BOTTOM", AT) + component("R3", "TOP", AT)
    items = (
        '<BomItem OEMDesignNumberRef="i" quantity="2"><RefDes name="R1"/><RefDes name="R2"/>'
        '<Characteristics category="ELECTRICAL">'
        '<Textual textualCharacteristicName="TYPE" textualCharacteristicValue="film"/>'
        '<Textual textualCharacteristicName="VALUE" textualCharacteristicValue="22k"/></Characteristics></BomItem>'
        '<BomItem OEMDesignNumberRef="k" quantity="1"><RefDes name="R3"/><Characteristics category="ELECTRICAL">'
        "<Measured "
        'measuredCharacteristicName="RESISTANCE" measuredCharacteristicValue="47" engineeringUnitOfMeasure="kohm"/>'
        "</Characteristics></BomItem>"
    )
    sets = pad(ROUND, pin="TP1.1")
    board = read(document(sets, step=step, bom=f'<Bom name="b">{items}</Bom>'))
    rows = [(part.ref, part.value, part.package, part.side) for part in board.parts]
    assert rows == [
        ("R1", "10k", "SO2", "top"),
        ("R2", "22k", "SO2", "bottom"),
        ("R3", "47 kohm", "SO2", "top"),
        ("TP1", "", "", ""),
    ]


def test_a_reference_used_twice_is_left_out_and_said() -> None:
    step = PACKAGE + component("U1", "TOP", AT) + component("U1", "BOTTOM", AT)
    board = read(document(pad(ROUND, pin="U1.1"), step=step))
    assert [part.side for part in board.parts] == ["top"]
    assert "1 component with a reference used before is left out" in board.missing


# -- nets -------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["No Net", "NONE", "$NONE$", "N/C", "UNCONNECTED", "unconnected", ""])
def test_copper_of_no_net_is_foreign(name: str) -> None:
    board = read(document(feature(line((0, 0), (1, 0)), net=name) + pad(ROUND, net=name)))
    assert board.nets == ()
    assert board.tracks.net.tolist() == [-1]
    assert board.pads.net.tolist() == [-1]


def test_kinds_of_nets() -> None:
    step = "".join(
        logical(net, attributes=f'netClass="{kind}"') for net, kind in (("G", "GROUND"), ("P", "POWER"), ("S", "CLK"))
    )
    board = read(document(feature(line((0, 0), (1, 0)), net="A"), step=step))
    assert dict(zip(board.nets, board.net_kinds, strict=True)) == {"A": "", "G": "ground", "P": "power", "S": ""}


def test_a_net_stands_on_the_line_of_its_first_copper() -> None:
    sets = "\n".join(
        [feature(line((0, 0), (1, 0)), net="A"), feature(line((0, 1), (1, 1)), net="B"), pad(ROUND, net="A")]
    )
    data = document(sets)
    board = read(data)
    lines = data.decode().split("\n")
    for net, number in zip(board.nets, board.net_lines, strict=True):
        assert f'<Set net="{net}"' in lines[number - 1]


def test_physical_net_points_name_copper_that_names_none() -> None:
    points = "".join(
        f'<PhyNetPoint x="{x}" y="0" layerRef="TOP" netNode="END" exposure="EXPOSED"><Circle diameter="1"/>'
        "</PhyNetPoint>"
        for x in (0, 2)
    )
    step = f'<PhyNetGroup name="g"><PhyNet name="SIG">{points}</PhyNet></PhyNetGroup>'
    sets = feature(line((0, 0), (1, 0), (2, 0)), net="") + feature(line((0, 5), (1, 5)), net="") + pad(ROUND, net="")
    board = read(document(sets, step=step, drill=hole(2, 0, net="")))
    assert board.nets == ("SIG",)
    assert board.tracks.net.tolist() == [0, 0, -1]
    assert board.pads.net.tolist() == [0]
    assert board.vias.net.tolist() == [0]


@pytest.mark.parametrize(
    ("nets", "expected"),
    [
        (("D_P", "D_N"), ("D_P", "D_N")),
        (("USB_DM", "USB_DP"), ("USB_DP", "USB_DM")),
        (("LINE-", "LINE+"), ("LINE+", "LINE-")),
        (("LOOP_A", "LOOP_B"), ("LOOP_A", "LOOP_B")),
    ],
)
def test_a_pair_named_by_either_net_is_declared_once(nets: tuple[str, str], expected: tuple[str, str]) -> None:
    first, second = nets
    step = logical(first, attributes=f'netPair="{second}"') + logical(second, attributes=f'netPair="{first}"')
    (pair,) = read(document(feature(line((0, 0), (1, 0))), step=step)).pairs
    assert (pair.plus, pair.minus) == expected


def test_a_pair_may_be_declared_on_a_set() -> None:
    sets = feature(line((0, 0), (1, 0)), net="X1", attributes='netPair="X2"') + feature(line((0, 1), (1, 1)), net="X2")
    (pair,) = read(document(sets)).pairs
    assert (pair.plus, pair.minus) == ("X1", "X2")


def test_the_polarity_of_package_pins_says_which_is_plus() -> None:
    package = PACKAGE.replace('number="1"', 'number="1" pinPolarity="MINUS"').replace(
        'number="2"', 'number="2" pinPolarity="PLUS"'
    )
    step = (
        package + component("U1", "TOP", AT) + logical("L1", "U1.1", attributes='netPair="L2"') + logical("L2", "U1.2")
    )
    (pair,) = read(document(feature(line((0, 0), (1, 0))), step=step)).pairs
    assert (pair.plus, pair.minus) == ("L2", "L1")


def test_a_partner_that_is_not_on_the_board_makes_no_pair() -> None:
    board = read(document(feature(line((0, 0), (1, 0)), net="X1", attributes='netPair="X2"')))
    assert board.pairs == ()
    assert "net X1 is paired with X2, which is not on the board" in board.missing


def test_a_route_s_net_holds_for_its_sets() -> None:
    step = f'<Route net="R"><LayerFeature layerRef="TOP"><Set><Features>{line((0, 0), (1, 0))}</Features></Set></LayerFeature></Route>'  # noqa: E501
    assert read(document("<Set/>", step=step)).nets == ("R",)
