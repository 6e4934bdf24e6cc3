"""Files that the standard allows and few expect: read for what they are, or named in `missing`, never passed over."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from fixtures.boards import straight_pair, via_pair
from fixtures.ipc2581_writer import to_ipc2581
from pairrules import check
from pairrules.board import Board
from tests.readers.ipc2581.documents import LAYERS, box, document, feature, hole, line, pad, read
from tests.readers.ipc2581.test_layers import FOUR, row, stack

TRACK = feature(line((0, 0), (1, 0)))
CIRCLE = '<Circle diameter="0.6"/>'


def nets_of_tracks(board: Board) -> list[str]:
    return [board.nets[net] if net >= 0 else "" for net in board.tracks.net.tolist()]


# -- nets and pins ----------------------------------------------------------------------------------------------------


def test_nets_without_a_name_are_no_nets() -> None:
    sets = feature(line((0, 0), (1, 0)), net="") + f"<Set><Features>{line((0, 1), (1, 1))}</Features></Set>"
    board = read(document(sets, step='<LogicalNet name=""><PinRef componentRef="U1" pin="1"/></LogicalNet>'))
    assert nets_of_tracks(board) == ["", ""]
    assert board.nets == ()


def test_a_net_that_stands_twice_is_one_net_with_the_pins_of_both() -> None:
    nets = "".join(
        f'<LogicalNet name="A" netClass="SIGNAL"><PinRef componentRef="U1" pin="{pin}"/></LogicalNet>' for pin in "12"
    )
    pads = pad(CIRCLE, pin="U1.1", net="") + pad(CIRCLE, before='<Location x="3" y="0"/>', pin="U1.2", net="")
    board = read(document(TRACK + pads, step=nets))
    assert board.nets == ("A",)
    assert board.pads.net.tolist() == [0, 0]


def test_pins_on_no_net_and_parts_without_a_package() -> None:
    part = '<Component refDes="U1" layerRef="TOP"><Location x="0" y="0"/></Component>'
    board = read(document(TRACK + pad(CIRCLE, pin="U1.1", net=""), step=part))
    assert [(one.ref, one.package) for one in board.parts] == [("U1", "")]
    assert (board.pads.net.tolist(), board.pads.pin) == ([-1], ("1",))


def test_a_pad_without_a_shape_is_a_pad_of_unknown_size() -> None:
    board = read(document(TRACK + pad("", pin="U1.1")))
    assert board.pads.shape.tolist() == [-1]


# -- layers -----------------------------------------------------------------------------------------------------------


def test_thousands_of_layers() -> None:
    names = [f"L{i}" for i in range(3000)]
    layers = "".join(f'<Layer name="{name}" layerFunction="SIGNAL" side="INTERNAL"/>' for name in names)
    board = read(document(TRACK, layers=LAYERS + layers, stackup=stack(*(row(name, "0.1") for name in names))))
    assert len(board.copper) == 3002
    assert len(board.missing) < 600
    assert not board.complete  # nothing is drawn on them


def test_a_layer_that_is_declared_after_it_is_drawn_on() -> None:
    """The step stands before the layers; the file is read once more."""
    late = document(TRACK, layers=LAYERS.replace("BOTTOM", "LOWER"), bottom="", drill=hole(0, 0))
    text = late.decode()
    step = text[text.index("<Step ") : text.index("</Step>") + len("</Step>")]
    moved = text.replace(step, "", 1).replace("<CadData>", f"<CadData>{step}", 1)
    assert moved != text
    board, expected = read(moved.encode()), read(late)
    assert len(board.tracks) == len(expected.tracks) == 1
    assert len(board.vias) == len(expected.vias) == 1
    assert board.missing == expected.missing


def test_a_dictionary_that_stands_after_its_use() -> None:
    styled = feature(
        '<Line startX="0" startY="0" endX="1" endY="0"><LineDescRef id="w"/></Line><StandardPrimitiveRef id="s"/>'
    )
    held = (
        '<DictionaryLineDesc units="MILLIMETER"><EntryLineDesc id="w"><LineDesc lineWidth="0.3"/></EntryLineDesc>'
        '</DictionaryLineDesc><DictionaryStandard units="MILLIMETER"><EntryStandard id="s"><Circle diameter="2"/>'
        "</EntryStandard></DictionaryStandard>"
    )
    text = document(styled, dictionaries=held).decode()
    board = read(text.replace(held, "", 1).replace("</Ecad>", f"</Ecad>{held}", 1).encode())
    assert board.tracks.width.tolist() == [0.3]
    assert len(board.areas) == 1


def test_copper_on_a_layer_that_is_never_declared_may_be_any_copper() -> None:
    board = read(document(TRACK, more_features=f'<LayerFeature layerRef="GHOST">{TRACK}</LayerFeature>'))
    assert not board.complete


def test_elements_and_attributes_of_other_revisions_are_left_out_and_counted() -> None:
    sets = '<Set net="A" futureFlag="7"><Features><Line9 x="1"/></Features><Quux/><Quux/></Set>'
    board = read(document(TRACK + sets))
    assert len(board.tracks) == 1
    assert "1 element Line9 in layer features was not understood and is left out" in board.missing
    assert "2 elements Quux in layer features were not understood and are left out" in board.missing


# -- stackups ---------------------------------------------------------------------------------------------------------

STIFF = stack(row("TOP", "0.03"), row("D1", "0.2"), row("IN1", "0.02"), row("BOTTOM", "0.03"))
FLEX = stack(row("TOP", "0.03"), row("D1", "0.05"), row("IN1", "0.02"))


def test_zones_of_several_stackups_leave_heights_unknown() -> None:
    board = read(document(TRACK, layers=FOUR.format(more=""), stackup=STIFF + FLEX))
    assert all(layer.thickness_mm is None for layer in board.stackup.layers)
    assert (
        "the file has several stackups, and which holds where is not read: thicknesses and permittivities are unknown "
        "unless the settings give them" in board.missing
    )


def test_a_stackup_told_twice_is_one() -> None:
    board = read(document(TRACK, layers=FOUR.format(more=""), stackup=STIFF + STIFF))
    assert {layer.name: layer.thickness_mm for layer in board.stackup.layers}["D1"] == 0.2


def test_what_keeps_copper_apart_counts_whatever_it_is_called() -> None:
    """Adhesive of a flexible board; a row that is declared nowhere."""
    glue = FOUR.format(more="") + '<Layer name="GLUE" layerFunction="GLUE" side="INTERNAL"/>'
    rows = (row("TOP", "0.03"), row("GLUE", "0.01"), row("IN1", "0.02"), row("GONE", "0.5"), row("BOTTOM", "0.03"))
    board = read(document(TRACK, layers=glue, stackup=stack(*rows)))
    assert board.stackup.barrel_mm(0, 1) == pytest.approx(0.015 + 0.01 + 0.01)
    assert board.stackup.barrel_mm(1, 2) == pytest.approx(0.01 + 0.5 + 0.015)
    assert not board.complete  # GONE may have been copper


def test_copper_upon_copper_leaves_the_distance_unknown() -> None:
    board = read(document(TRACK, layers=FOUR.format(more=""), stackup=stack(row("TOP", "0.03"), row("IN1", "0.02"))))
    assert np.isnan(board.stackup.barrel_mm(0, 1))


def test_figures_that_no_material_has_are_unknown() -> None:
    spec = '<Spec name="m"><Dielectric type="DIELECTRIC_CONSTANT"><Property value="0.4"/></Dielectric></Spec>'
    rows = (row("TOP", "0.03"), row("D1", "0.2", more='<SpecRef id="m"/>'), row("IN1", "500"))
    board = read(document(TRACK, layers=FOUR.format(more=""), stackup=stack(*rows), specs=spec))
    of = {layer.name: layer for layer in board.stackup.layers}
    assert (of["D1"].permittivity, of["IN1"].thickness_mm) == (None, None)
    assert "1 permittivity that no material has is left out" in board.missing


# -- holes ------------------------------------------------------------------------------------------------------------

SPANS = LAYERS + (
    '<Layer name="IN1" layerFunction="SIGNAL" side="INTERNAL"/>'
    '<Layer name="IN2" layerFunction="SIGNAL" side="INTERNAL"/>'
    '<Layer name="MICRO" layerFunction="DRILL"><Span fromLayer="TOP" toLayer="IN1"/></Layer>'
    '<Layer name="BURIED" layerFunction="DRILL"><Span fromLayer="IN1" toLayer="IN2"/></Layer>'
    '<Layer name="BACK" layerFunction="DRILL"><Span fromLayer="BOTTOM" toLayer="IN2"/></Layer>'
)


def drilled(**layers: str) -> Board:
    """Holes by drill layer on a board of TOP, IN1, IN2, BOTTOM."""
    features = "".join(f'<LayerFeature layerRef="{name}">{sets}</LayerFeature>' for name, sets in layers.items())
    return read(document(TRACK, layers=SPANS, more_features=features))


@pytest.mark.parametrize(("layer", "span"), [("DRILL", (0, 3)), ("MICRO", (0, 1)), ("BURIED", (1, 2))])
def test_blind_buried_and_micro_vias_join_their_layers_alone(layer: str, span: tuple[int, int]) -> None:
    board = drilled(**{layer: hole(1, 1)})
    assert board.copper == ("TOP", "IN1", "IN2", "BOTTOM")
    assert (int(board.vias.first[0]), int(board.vias.last[0])) == span


def test_of_a_back_drilled_hole_the_barrel_remains_that_was_not_drilled_away() -> None:
    board = drilled(DRILL=hole(1, 1), BACK=hole(1, 1, diameter=0.6, plating="NONPLATED", net=""))
    assert (board.vias.first.tolist(), board.vias.last.tolist()) == ([0], [1])
    assert "1 plated hole is shortened by back-drilling" in board.missing


def test_a_back_drilled_pin_touches_what_remains_of_its_hole() -> None:
    pin = pad(CIRCLE, before='<Location x="1" y="1"/>', pin="J1.1")
    whole = read(document(TRACK + pin, layers=SPANS, drill=hole(1, 1, plating="PLATED")))
    assert whole.pads.layer.tolist() == [-1]
    back = f'<LayerFeature layerRef="BACK">{hole(1, 1, diameter=0.9, plating="NONPLATED", net="")}</LayerFeature>'
    board = read(document(TRACK + pin, layers=SPANS, drill=hole(1, 1, plating="PLATED"), more_features=back))
    assert board.pads.layer.tolist() == [0]
    assert (board.vias.first.tolist(), board.vias.last.tolist()) == ([0], [1])


def test_a_hole_without_plating_elsewhere_or_through_all_shortens_nothing() -> None:
    board = drilled(
        DRILL=hole(1, 1) + hole(1, 1, diameter=0.6, plating="NONPLATED", net=""),
        BACK=hole(3, 1, diameter=0.6, plating="NONPLATED", net=""),
    )
    assert (board.vias.first.tolist(), board.vias.last.tolist()) == ([0], [3])


def test_a_leg_through_the_part_that_is_drilled_away_is_broken(tmp_path: Path) -> None:
    """Minus leaves its via on BOTTOM, where the barrel is gone."""
    text = to_ipc2581(via_pair().board).decode()
    layer = '<Layer name="BACK" layerFunction="DRILL"><Span fromLayer="BOTTOM" toLayer="GND2"/></Layer>'
    drill = f'<LayerFeature layerRef="BACK">{hole(10, -0.4, diameter=0.6, plating="NONPLATED", net="")}</LayerFeature>'
    path = tmp_path / "board.xml"
    path.write_text(text.replace("<Stackup ", f"{layer}<Stackup ", 1).replace("</Step>", f"{drill}</Step>", 1))
    (pair,) = check(path, "").pairs
    assert (pair.routed, pair.verdict) == ("partial", "flag")
    assert any(said.startswith("minus is not routed from end to end") for said in pair.missing)


def test_a_castellated_hole_is_a_hole() -> None:
    """Its centre lies on the board's edge, x = 0."""
    board = drilled(DRILL=hole(0, 5, plating="PLATED"))
    assert board.vias.at.tolist() == [[0, 5]]


# -- copper -----------------------------------------------------------------------------------------------------------

HATCH = f'<Contour>{box(0, 0, 9, 9)}<FillDesc fillProperty="HATCH"/></Contour>'


def test_a_hatched_plane_is_whole_for_cover_and_unknown_for_impedance(tmp_path: Path) -> None:
    board = read(document(TRACK + feature(HATCH)))
    assert [area.hatched for area in board.areas] == [True]
    assert any(said.startswith("1 hatched shape is read as solid copper, beside which no") for said in board.missing)
    text = to_ipc2581(straight_pair().board).decode()
    path = tmp_path / "board.xml"
    path.write_text(text.replace("</Contour>", '<FillDesc fillProperty="MESH"/></Contour>', 1))
    (pair,) = check(path, "").pairs
    assert pair.measures.reference_uncovered_mm == 0
    assert pair.measures.impedance_diff_ohm is None
    assert "copper on GND next to the legs is hatched, and how is not known" in pair.missing


def test_text_in_copper_is_left_out_and_said() -> None:
    board = read(document(TRACK + feature('<Text textString="R1" fontSize="1"/>', net="")))
    assert "1 element Text in layer features was not understood and is left out" in board.missing


def test_an_outline_that_crosses_itself_is_read_by_what_it_encloses_and_said() -> None:
    """A bow tie: two triangles of 1 mm² each."""
    bow = (
        '<Contour><Polygon><PolyBegin x="0" y="0"/><PolyStepSegment x="2" y="2"/><PolyStepSegment x="2" y="0"/>'
        '<PolyStepSegment x="0" y="2"/></Polygon></Contour>'
    )
    board = read(document(TRACK + feature(bow)))
    said = "1 outline whose lines cross or touch is read by what they enclose, the first on TOP at (1.000, 1.000) mm"
    assert said in board.missing


def test_holes_take_copper_away_wherever_they_lie() -> None:
    """A cutout half outside the outline adds no copper outside; shown by a negative set that forces the cutting."""
    shape = f"<Contour>{box(0, 0, 4, 4)}{box(3, 1, 6, 2, tag='Cutout')}</Contour>"
    cut = feature('<Circle diameter="0.01"/>', net="", attributes='polarity="NEGATIVE"')
    board = read(document(TRACK + feature(shape) + cut))
    assert max(float(area.outline[:, 0].max()) for area in board.areas) == 4.0
