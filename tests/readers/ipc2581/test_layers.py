"""Which layers are copper, in which order they lie, and what each revision says of their materials."""

from __future__ import annotations

import pytest

from pairrules.board import Board, Layer
from tests.readers.ipc2581.documents import LAYERS, box, document, feature, line, read

TRACK = feature(line((0, 0), (1, 0)))
FOUR = (
    '<Layer name="BOTTOM" layerFunction="SIGNAL" side="BOTTOM" polarity="POSITIVE"/>'
    '<Layer name="D1" layerFunction="DIELPREG" side="INTERNAL" polarity="POSITIVE">{more}</Layer>'
    '<Layer name="IN1" layerFunction="PLANE" side="INTERNAL" polarity="POSITIVE"/>'
    '<Layer name="IN2" layerFunction="MIXED" side="INTERNAL" polarity="POSITIVE"/>'
    '<Layer name="MASK" layerFunction="SOLDERMASK" side="TOP" polarity="POSITIVE"/>'
    '<Layer name="PASTE" layerFunction="SOLDERPASTE" side="TOP" polarity="POSITIVE"/>'
    '<Layer name="TOP" layerFunction="CONDFOIL" side="TOP" polarity="POSITIVE"/>'
)


def row(name: str, thickness: str, *, sequence: int | None = None, more: str = "") -> str:
    order = "" if sequence is None else f' sequence="{sequence}"'
    return f'<StackupLayer layerOrGroupRef="{name}" thickness="{thickness}"{order}>{more}</StackupLayer>'


def stack(*rows: str) -> str:
    group = f'<StackupGroup name="g" thickness="1" tolPlus="0" tolMinus="0">{"".join(rows)}</StackupGroup>'
    return f'<Stackup overallThickness="1" tolPlus="0" tolMinus="0" whereMeasured="METAL">{group}</Stackup>'


def four(stackup: str = "", specs: str = "", more: str = "", units: str = "MILLIMETER") -> Board:
    others = "".join(f'<LayerFeature layerRef="{name}"><Set/></LayerFeature>' for name in ("IN1", "IN2"))
    return read(
        document(TRACK, layers=FOUR.format(more=more), stackup=stackup, specs=specs, more_features=others, units=units)
    )


@pytest.mark.parametrize("function", ["CONDUCTOR", "SIGNAL", "PLANE", "MIXED", "CONDFILM", "CONDFOIL"])
def test_functions_that_carry_copper(function: str) -> None:
    layers = LAYERS.replace('"TOP" layerFunction="CONDUCTOR"', f'"TOP" layerFunction="{function}"')
    assert len(read(document(TRACK, layers=layers)).tracks) == 1


@pytest.mark.parametrize(
    "function",
    ["SILKSCREEN", "SOLDERMASK", "SOLDERPASTE", "PASTEMASK", "DOCUMENT", "ASSEMBLY", "DIELCORE", "LEGEND", "COURTYARD"],
)
def test_what_is_drawn_on_other_layers_is_no_copper(function: str) -> None:
    layers = LAYERS + f'<Layer name="X" layerFunction="{function}" side="TOP" polarity="POSITIVE"/>'
    drawn = f'<LayerFeature layerRef="X">{feature(line((0, 0), (5, 0)), net="B")}</LayerFeature>'
    board = read(document(TRACK, layers=layers, more_features=drawn))
    assert len(board.tracks) == 1
    assert board.nets == ("A",)
    assert board.copper == ("TOP", "BOTTOM")


def test_without_a_stackup_the_sides_order_the_layers() -> None:
    board = four()
    assert board.copper == ("TOP", "IN1", "IN2", "BOTTOM")
    assert all(layer.thickness_mm is None for layer in board.stackup.layers)
    assert board.missing == ("the file has no stackup: barrel lengths and impedances are unknown",)
    assert board.complete


def test_with_a_stackup_its_sequence_orders_them() -> None:
    board = four(
        stack(row("BOTTOM", "0.04", sequence=4), row("TOP", "0.03", sequence=1), row("IN2", "0.02", sequence=2))
    )
    assert board.copper == ("TOP", "IN2", "BOTTOM", "IN1")
    assert "copper layer IN1 is not in the file's stackup; its height is unknown" in board.missing


def test_a_stackup_told_from_below_is_turned_over() -> None:
    rows = (row("BOTTOM", "0.04"), row("IN2", "0.02"), row("D1", "0.3"), row("IN1", "0.02"), row("TOP", "0.03"))
    board = four(stack(*rows))
    assert [layer.name for layer in board.stackup.layers] == ["TOP", "IN1", "D1", "IN2", "BOTTOM"]


def test_masks_are_dielectrics_and_paste_is_nothing() -> None:
    rows = ("MASK", "PASTE", "TOP", "IN1", "D1", "IN2", "BOTTOM")
    board = four(stack(*(row(name, "0.1") for name in rows)))
    kinds = {layer.name: layer.kind for layer in board.stackup.layers}
    assert kinds == {name: "dielectric" if name in {"MASK", "D1"} else "copper" for name in rows if name != "PASTE"}


def test_thickness_is_in_the_header_s_unit() -> None:
    rows = [row(name, "0.001") for name in ("TOP", "IN1", "D1", "IN2", "BOTTOM")]
    board = four(stack(*rows), units="INCH")
    assert {layer.thickness_mm for layer in board.stackup.layers} == {0.0254}


SPEC = (
    '<Spec name="m"><General type="MATERIAL"><Property text="laminate"/></General>'
    '<Dielectric type="DIELECTRIC_CONSTANT"><Property value="4.1" refUnit="Hz" refValue="1e9"/></Dielectric>'
    '<Dielectric type="LOSS_TANGENT"><Property text="0.011"/></Dielectric>'
    '<Dielectric type="THICKNESS"><Property value="8" unit="MIL"/></Dielectric></Spec>'
)


@pytest.mark.parametrize("place", ["stackup", "layer"])
def test_materials_come_from_specs_named_by_the_stackup_or_by_the_layer(place: str) -> None:
    named = '<SpecRef id="m"/>'
    rows = [row(name, "0.1") for name in ("TOP", "IN1")]
    rows += [row("D1", "0.25", more=named if place == "stackup" else ""), row("IN2", "0.1"), row("BOTTOM", "0.1")]
    board = four(stack(*rows), specs=SPEC, more=named if place == "layer" else "")
    (core,) = (layer for layer in board.stackup.layers if layer.name == "D1")
    assert core == Layer(name="D1", kind="dielectric", thickness_mm=0.25, permittivity=4.1, loss_tangent=0.011)


def test_a_thickness_of_nothing_is_taken_from_the_spec_in_its_own_unit() -> None:
    named = '<SpecRef id="m"/>'
    board = four(stack(row("TOP", "0.1"), row("D1", "0", more=named), row("BOTTOM", "0.1")), specs=SPEC)
    (core,) = (layer for layer in board.stackup.layers if layer.name == "D1")
    assert core.thickness_mm == pytest.approx(8 * 0.0254)


def test_a_height_of_copper_is_taken_from_its_spec() -> None:
    specs = '<Spec name="c"><Conductor type="FINISHED_HEIGHT"><Property value="18" unit="MICRON"/></Conductor></Spec>'
    board = four(stack(row("TOP", "0", more='<SpecRef id="c"/>'), row("BOTTOM", "0.1")), specs=specs)
    assert board.stackup.layers[0].thickness_mm == pytest.approx(0.018)


def test_gaps_in_the_stackup_are_said() -> None:
    board = four(stack(row("TOP", "0"), row("IN1", "0.1"), row("D1", "0.2"), row("IN2", "0.1"), row("BOTTOM", "0.1")))
    assert board.missing == (
        "the stackup gives no thickness for TOP",
        "the stackup gives no permittivity for D1",
    )


def test_revision_a_s_free_attributes_are_read_and_said() -> None:
    told = (
        '<DoubleAttribute name="layer_dielectric" value="4.3"/>'
        '<NonstandardAttribute name="LOSS_TANGENT" type="DOUBLE" value="0.02"/>'
    )
    board = four(
        stack(
            row("TOP", "0.1"), row("IN1", "0.1"), row("D1", "0.2", more=told), row("IN2", "0.1"), row("BOTTOM", "0.1")
        )
    )
    (core,) = (layer for layer in board.stackup.layers if layer.name == "D1")
    assert (core.permittivity, core.loss_tangent) == (4.3, 0.02)
    said = "layer_dielectric, which revision A does not define, is read as the relative permittivity"
    assert board.missing == (said,)


# -- what is known to exist and is not there --------------------------------------------------------------------------


def test_holes_to_a_layer_that_is_not_there() -> None:
    layers = LAYERS.replace('toLayer="BOTTOM"', 'toLayer="IN7"')
    board = read(document(TRACK, layers=layers))
    assert not board.complete
    assert "holes are drilled to copper layer IN7, which is not in the file" in board.missing


def test_a_drill_layer_s_name_that_counts_more_layers_is_believed_without_a_stackup() -> None:
    board = read(document(TRACK, layers=LAYERS.replace('name="DRILL"', 'name="DRILL_1-6"')))
    assert not board.complete
    said = "no copper layer between TOP and BOTTOM is in the file, yet 6 copper layers are drilled through"
    assert said in board.missing


def test_a_drill_layer_s_name_is_not_believed_against_a_stackup() -> None:
    layers = LAYERS.replace('name="DRILL"', 'name="DRILL_1-6"')
    board = read(document(TRACK, layers=layers, stackup=stack(row("TOP", "0.1"), row("BOTTOM", "0.1"))))
    assert board.complete


@pytest.mark.parametrize(("material", "complete"), [("copper foil", False), ("prepreg", True)])
def test_a_stackup_row_that_is_not_in_the_file(material: str, *, complete: bool) -> None:
    gone = row("IN3", "0.1").replace("<StackupLayer ", f'<StackupLayer materialType="{material}" ')
    board = read(document(TRACK, stackup=stack(row("TOP", "0.1"), gone, row("BOTTOM", "0.1"))))
    assert "the stackup names layer IN3, which is not in the file" in board.missing
    assert board.complete is complete


def test_a_declared_copper_layer_of_which_nothing_is_there() -> None:
    board = read(document(TRACK, bottom=""))
    assert not board.complete
    assert "copper layer BOTTOM is declared, yet the file holds nothing of it" in board.missing


def test_an_assembly_file_and_its_contents_are_told() -> None:
    board = read(document(TRACK, content='<FunctionMode mode="ASSEMBLY"/><LayerRef name="IN1"/><LayerRef name="TOP"/>'))
    assert board.missing[1:] == (
        "the list of contents names layer IN1, which is not in the file",
        "the file was written for assembly, which may leave inner copper layers out",
    )
    assert board.complete  # neither hint is knowledge


def test_features_on_an_undeclared_layer_are_left_out_and_said() -> None:
    board = read(document(TRACK, more_features=f'<LayerFeature layerRef="GHOST">{TRACK}{TRACK}</LayerFeature>'))
    assert len(board.tracks) == 1
    assert "2 sets on layer GHOST, which the file does not declare, are left out" in board.missing


def test_the_outline_is_the_profile_s() -> None:
    board = read(document(TRACK, profile=f"<Profile>{box(1, 2, 5, 4)}{box(2, 2.5, 3, 3, tag='Cutout')}</Profile>"))
    assert board.outline is not None
    assert sorted(map(tuple, board.outline.tolist())) == [(1, 2), (1, 4), (5, 2), (5, 4)]
    assert read(document(TRACK, profile="")).outline is None
