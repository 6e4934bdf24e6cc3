"""A pair drawn in a case file, made into what a rule judges. Cases say of each leg only its tracks and its two ends."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

import yaml

from pairrules.checks.measures import geometric_measures
from pairrules.checks.rule import Rule, Subject
from pairrules.geometry.measure import measure_link
from pairrules.pairing.link import Hop, Link
from pairrules.settings.limit import Limit
from pairrules.settings.read_settings import read_settings
from tests.checks.electrical_cases import electrical, hung, klass, series, with_parts
from tests.geometry.small_boards import board, pads_of, pin, track

NETS = {"plus": "A_P", "minus": "A_N"}
BARE_STACK = [{"name": "TOP", "kind": "copper"}, {"name": "BOT", "kind": "copper"}]


def subject(case: Mapping[str, Any]) -> Subject:
    """The pair of a case, measured."""
    tracks, parts = [], []
    for leg, net in NETS.items():
        drawn = [one if isinstance(one, dict) else {"points": one} for one in case.get(leg, [])]
        tracks += [
            track(net, *one["points"], width=one.get("width", 0.2), layer=one.get("layer", "TOP")) for one in drawn
        ]
        ends = case.get(f"ends_{leg}") or [drawn[0]["points"][0], drawn[-1]["points"][-1]]
        layers = [drawn[0].get("layer", "TOP"), drawn[-1].get("layer", "TOP")] if drawn else ["TOP", "TOP"]
        for part, at, layer in zip(("U1", "J1"), ends, layers, strict=True):
            parts.append(pin(part, "1" if leg == "plus" else "2", net, *at, layer=layer))
    vias = [{"drill": 0.3, "pad": 0.6, "from": "TOP", "to": "BOT"} | via for via in case.get("vias", [])]
    more = {"stackup": BARE_STACK} if case.get("stack") == "bare" else {}
    tracks += [track(one["net"], *one["points"], layer=one.get("layer", "TOP")) for one in case.get("tracks", [])]
    areas = [{"layer": "IN1"} | area for area in case.get("areas", [])]
    on = board(tracks=tracks, parts=parts, vias=vias, areas=areas, units=case.get("units", "mm"), **more)
    on = with_parts(on, case.get("parts", {}))
    if "lacks" in case:
        on = replace(on, complete=False, missing=(case["lacks"],))
    hops = {}
    for leg, net in NETS.items():
        first, last = pads_of(on, net)
        hops[leg] = Hop(net=on.nets.index(net), start=(first,), end=() if case.get("no_load") else (last,))
    link = Link(
        name="A",
        plus=hops["plus"].net,
        minus=hops["minus"].net,
        klass="",
        found_by="net name",
        hops_plus=(hops["plus"],),
        hops_minus=(hops["minus"],),
        series=series(on, case),
        hung=hung(on, case),
        source=0,
        load=1,
        missing=("no part at the load end was found",) if case.get("no_load") else (),
    )
    reference = tuple(on.nets.index(net) for net in case.get("reference", []))
    geometry = measure_link(
        on, link, reach_mm=case.get("reach_mm"), reference=reference, beside=case.get("beside", False)
    )
    figures = electrical(on, case)
    measures = geometric_measures(geometry)
    return Subject(
        board=on,
        link=link,
        geometry=geometry,
        measures=replace(measures, **case.get("measures", {})),
        breakout_mm=case.get("breakout_mm", 0.0),
        electrical=figures,
        klass=klass(case),
        reference=reference,
    )


def limit(name: str, rule: Rule, written: Mapping[str, Any]) -> Limit:
    """A limit as settings give it."""
    said = {name: {**written, "severity": "review", "source": "this test"}}
    text = yaml.safe_dump({"extends": [], "limits": said})
    return read_settings(Path("case.yaml"), forms={name: rule.form}, text=text).limits[name]
