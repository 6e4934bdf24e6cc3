"""What every figure of a result means: its definition, the model it rests on, where that holds, what it leaves out.

Definitions are the descriptions in `result.schema.json`, so that there is one text for both; models stand here. Rules
name the models they rest on, and `pairrules explain` and `check --explain` print both.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache

from pairrules.schemas import schema_text

_CROSS_SECTION = "up to the frequency at which the section spans a tenth of a wavelength (common practice, no source)"


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """A model that figures and rules rest on.

    Parameters
    ----------
    brief: what it is, in a few words. text: how it works.
    valid: where it holds, in a few words. leaves_out: what it does not know of.
    assumes: values it takes where none is given; a pair's own `assumed` names those that were.
    source: where it comes from. electrical: whether what a pair's electrical figures assume counts for it.
    """

    name: str
    brief: str
    text: str
    valid: str
    leaves_out: str
    assumes: str
    source: str
    electrical: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """A figure. `unit`: "" for a count. `model`: a key of `MODELS`."""

    name: str
    unit: str
    definition: str
    model: str


MODELS: Mapping[str, Model] = {
    model.name: model
    for model in (
        Model(
            name="routes",
            brief="routes rebuilt from copper that touches, measured along centre lines",
            text="Copper of one net that touches is connected, in whatever order and pieces it was drawn. Of "
            "several ways from pad to pad the shortest is the route, the rest are stubs. Tracks count along "
            "their centre line, arcs exactly; inside pads and areas the way is straight; a via adds its "
            "barrel between the layers used; a part in series adds nothing.",
            valid="exact for the copper as drawn",
            leaves_out="That current takes the inner side of a bend, and what lies inside packages and connectors "
            "unless pin_lengths in the settings says it. Barrels of unknown height are left out, and the pair "
            "says so.",
            assumes="Nothing: where an end or a layer is unknown, so is the figure.",
            source="shortest way: E. W. Dijkstra, Numerische Mathematik 1 (1959) 269 (from memory)",
        ),
        Model(
            name="spacing",
            brief="distance from track edge to track edge as a profile along each leg",
            text="For every point of a leg's tracks the nearest track of the other leg on the same layer. The legs "
            "run beside one another where that is within reach (four times the pair's usual gap and at least "
            "0.3 mm, or what the class says) and their directions differ by less than 30 degrees.",
            valid="exact for the tracks as drawn; reach and 30 degrees are common practice, no source",
            leaves_out="Pads, via pads and poured areas of the legs, and coupling between layers.",
            assumes="A reach of four times the pair's usual gap, where the class says none.",
            source="elementary geometry",
        ),
        Model(
            name="loop-area",
            brief="area between the legs' centre lines seen from above",
            text="The closed path along one leg and back along the other, straight across both ends and through "
            "parts in series; lobes of crossing legs are added without sign, or cancel in the figure with "
            "sign.",
            valid="exact for the copper as drawn",
            leaves_out="The heights of the layers, and the loops that the source and the load make beyond their pads.",
            assumes="Nothing.",
            source="Green's theorem (textbook)",
        ),
        Model(
            name="reference-cover",
            brief="copper of reference nets on the next copper layers above and below each leg, seen from above",
            text="Each leg's centre line is cut where it enters or leaves copper of a reference net on the next "
            "copper layer above or below. Which nets are reference the settings say (reference_nets), else "
            "their kinds and names in the file.",
            valid="exact for the copper as drawn; unknown where a layer is not in the file",
            leaves_out="Copper farther away than the next layer, and how the return current spreads.",
            assumes="Nothing: without a known reference net the figure is unknown.",
            source="common practice, no source",
        ),
        Model(
            name="neighbours",
            brief="nearest foreign copper beside each leg, on the leg's own layer",
            text="Square to the track, the first copper of another net on each side, with its net and its gap from "
            "edge to edge.",
            valid="gaps to 5 % or 1 micrometre along a stretch",
            leaves_out="Copper on other layers.",
            assumes="Nothing.",
            source="elementary geometry",
        ),
        Model(
            name="sections",
            brief="two-dimensional quasi-static field of each cross-section, solved with boundary elements",
            text="The pair is cut where its cross-section changes. Each section is solved once for the "
            "capacitances of both legs with and without dielectrics; inductance follows from the capacitance "
            "in air, delay is that of the odd mode. Figures of the pair are its sections', weighted by "
            "length. Copper of reference nets next to the legs is a sheet at 0 V; foreign copper beside them "
            "is taken as quiet.",
            valid=_CROSS_SECTION,
            leaves_out="Radiation, fields along the pair at bends and vias, roughness, the frequency dependence of "
            "the permittivity. The reference conductor is ideal. Delays add barrels at the "
            "mean permittivity of the stack. Resistance differences are those at direct current.",
            assumes="Copper of 1.7241e-8 ohm m (IEC 60028, 20 °C; recalled, not re-read). Dielectrics without a loss "
            "tangent are lossless. Between the tracks of an inner layer stands the one of its two dielectrics "
            "that has the lower permittivity. Sections are looked for every millimetre. Up to a twentieth of "
            "a route that cannot be solved takes over the section beside it.",
            source="R. F. Harrington, Field Computation by Moment Methods (1968), and Wei, Harrington, Mautz and "
            "Sarkar, IEEE Trans. MTT 32 (1984) 439 (from memory)",
            electrical=True,
        ),
        Model(
            name="balance",
            brief="one common e.m.f. through source, cable, sections, vias, series parts and load as chain matrices",
            text="The same e.m.f. acts on both legs behind the source impedances against an ideal reference. What "
            "then stands between the load's nodes is the conversion. Each cause alone is found by making all "
            "others symmetric; the total keeps their phases. Tracks are the solved sections, a via an "
            "inductance, a part what its written value says. The rejection refers the total to the link's "
            "input and adds the receiver's own.",
            valid="the sections' range, "
            + _CROSS_SECTION
            + "; source, cable and load as far as the settings' values hold",
            leaves_out="Radiation, common-mode current on screens, ground potential differences along the reference. "
            "What the class does not say (a cable, an imbalance, a tolerance) is taken as absent, not as "
            "typical.",
            assumes="Chokes and beads are shorts, parts without a written value are left out. A barrel has L = 5.08 h "
            "(ln(4h/d) + 1) nH, h and d in inch (Johnson and Graham, 1993; recalled, not re-read).",
            source="C. R. Paul, Analysis of Multiconductor Transmission Lines; H. W. Ott, Electromagnetic "
            "Compatibility Engineering (2009), chapter 4; Pallàs-Areny and Webster, IEEE Trans. IM 40 (1991) "
            "669 (from memory)",
            electrical=True,
        ),
        Model(
            name="magnetic-pickup",
            brief="a uniform alternating field through the legs' loop in space, V = 2π f B A cos θ",
            text="The vector area of the closed path along both legs, the heights of their layers included; along "
            "the field, or its whole amount where the class gives no direction.",
            valid="while the loop is much smaller than a wavelength and its load much above its reactance",
            leaves_out="Shielding by planes and parts, fields that are not uniform over the pair, the loops beyond its "
            "pads.",
            assumes="The worst direction of the field, where the class gives none.",
            source="H. W. Ott, Electromagnetic Compatibility Engineering (2009), chapter 2 (from memory)",
        ),
        Model(
            name="electric-pickup",
            brief="ramp of a swinging neighbour through its capacitances to the two legs",
            text="The capacitances of a neighbour on the legs' own layer come from the solved sections. Each leg "
            "answers the ramp as a capacitor into the resistance that the leg has to reference; the "
            "difference is picked up.",
            valid=_CROSS_SECTION + ", and where the legs are electrically short",
            leaves_out="Inductive coupling, neighbours on other layers, reflections, several neighbours at a time.",
            assumes="The source resistances are all that the legs have to reference.",
            source="H. W. Ott, Electromagnetic Compatibility Engineering (2009), chapter 2 (from memory)",
            electrical=True,
        ),
        Model(
            name="parts",
            brief="parts as the board file names, values and connects them",
            text="Which part stands in series, hangs on a leg or ends the pair follows from the nets; its kind "
            "from the letters of its designator, its value from the text beside it.",
            valid="as far as the values in the file are those that are fitted",
            leaves_out="Parasitics, and whether a part is fitted at all.",
            assumes="Nothing: a value that is not written is unknown.",
            source="common practice, no source",
        ),
    )
}
"""Every model by name, in the order of the line from copper to signal."""

_OF_MEASURES = {
    "length": "routes",
    "width": "routes",
    "vias": "routes",
    "stub": "routes",
    "gap": "spacing",
    "coupled": "spacing",
    "apart": "spacing",
    "loop": "loop-area",
    "net": "loop-area",
    "reference": "reference-cover",
    "delay": "sections",
    "impedance": "sections",
    "resistance": "sections",
    "capacitance": "sections",
    "inductance": "sections",
}
"""First word of a figure's name to its model."""

_UNITS = {"mm": "mm", "mm2": "mm²", "ps": "ps", "ohm": "ohm", "pf": "pF", "nh": "nH", "db": "dB", "hz": "Hz"}


@cache
def glossary() -> Mapping[str, Entry]:
    """Every figure of a pair and of its balance, by name, in the order of the result."""
    definitions = json.loads(schema_text("result"))["$defs"]
    found = {}
    for group in ("measures", "balance"):
        for name, figure in definitions[group]["properties"].items():
            words = name.split("_")
            model = "balance" if group == "balance" else _OF_MEASURES[words[0]]
            unit = _UNITS.get(words[-1], "")
            found[name] = Entry(name=name, unit=unit, definition=figure["description"], model=model)
    return found
