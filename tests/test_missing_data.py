"""Data that is missing never makes a pair good: no cut turns `flag` or `undecided` into `pass`.

What is cut, at random, from valid boards with one fault each:

* of the stackup: a layer's thickness, permittivity, loss tangent; a dielectric layer; all that is drawn on a copper
  layer;
* of parts: a whole part, a pin, a pin's net, pad or drill, a part's value, package, side;
* of what the file says beside copper: the outline, kinds of nets, declared pairs, their ends and classes;
* of reference copper: an area of a reference net; of vias: their pad and antipad.

What is not cut, since without it there is another board that may well be good: copper that itself is the fault or
bears witness of it, which is the legs' own tracks and vias (without its stub a leg has no stub) and foreign copper on
their layer (without the neighbour nothing tilts the pair), and the openings of planes. Nor is a copper layer taken out
of drawing and stackup alike: what a file nowhere speaks of, nobody can miss. A cut that leaves no board (a layer that
other things name) ends in an error, which is no pass. A pair is known again by its nets: after the cut,
no pair that shares a net with one that was not good may pass.
"""

from __future__ import annotations

import copy
import json
from collections.abc import Callable, Iterator
from pathlib import Path
from random import Random
from typing import Any

import pytest

from fixtures import boards
from pairrules.errors import BoardError
from pairrules.pipeline import check
from pairrules.result import PairResult

Tree = dict[str, Any]
Cut = tuple[str | int, ...]

BASE = """extends: [base]
limits:
  neighbour-tilt: {gap: 0.2 mm, for: 4 mm, severity: note}
"""
"""For boards without settings of their own; the tilt of a neighbour is a matter of classes, not of the base set."""

SETTINGS = """
extends: [base]
classes:
  sensor:
    match: ["*"]
    source: {kind: impedance, plus: 350 ohm, minus: 351 ohm}
    load:
      kind: impedance
      plus: {resistance: 1 Mohm, capacitance: 10 pF}
      minus: {resistance: 1 Mohm, capacitance: 12 pF}
      across: {resistance: 10 kohm}
    frequencies: [1 kHz]
    limits: LIMITS
"""
IMPEDANCE = SETTINGS.replace("LIMITS", "{pair-impedance: {least: 180 ohm, most: 220 ohm}}")
REJECTION = SETTINGS.replace("LIMITS", "{link-rejection: {least: 140 dB}}")
DELAY = SETTINGS.replace("LIMITS", "{leg-length: off, leg-delay: {most: 1 ps}}")


def unlike_capacitors() -> Tree:
    tree = boards.series_capacitors().board
    tree["parts"][2]["value"] = "100n"
    tree["parts"][3]["value"] = "47n"
    return tree


def capacitor_out_of_place() -> Tree:
    """C2 stands 6 mm nearer to the source than C1, so that the parts do not lie side by side."""
    tree = boards.series_capacitors().board
    for pin in tree["parts"][3]["pins"]:
        pin["at"][0] -= 6
    for track in tree["tracks"]:
        if track["net"].startswith("IN_N"):
            track["points"] = [[x - 6 if x in {9.5, 10.5} else x, y] for x, y in track["points"]]
    return tree


def near_the_plane_s_edge() -> Tree:
    tree = boards.straight_pair().board
    for area in tree["areas"]:
        area["outline"] = [[-10, -0.28], [30, -0.28], [30, 30], [-10, 30]]
    return tree


def without_reference_below() -> Tree:
    tree = boards.straight_pair().board
    tree["areas"][0]["outline"] = [[-10, -10], [8, -10], [8, 30], [-10, 30]]
    return tree


def beside_a_neighbour() -> Tree:
    tree = boards.straight_pair().board
    tree["tracks"].append({"net": "CLK", "layer": "TOP", "width": 0.2, "points": [[0, 0.5], [20, 0.5]]})
    return tree


def _plain(make: Callable[[], boards.Known]) -> Callable[[], Tree]:
    return lambda: make().board


FAULTY: dict[str, tuple[Callable[[], Tree], str]] = {
    "serpentine": (_plain(boards.serpentine_leg), ""),
    "crossing legs": (_plain(boards.crossing_legs), ""),
    "vias without a way back": (_plain(boards.via_pair), ""),
    "stub": (_plain(boards.stub_on_plus), ""),
    "series capacitors": (_plain(boards.series_capacitors), ""),
    "broken leg": (_plain(boards.broken_leg), ""),
    "unequal width": (_plain(boards.unequal_width), ""),
    "one leg dives": (_plain(boards.layer_mismatch), ""),
    "slot in the plane": (_plain(boards.plane_slot), ""),
    "unlike capacitors": (unlike_capacitors, ""),
    "a capacitor out of place": (capacitor_out_of_place, ""),
    "near the plane's edge": (near_the_plane_s_edge, ""),
    "no reference below": (without_reference_below, ""),
    "beside a neighbour": (beside_a_neighbour, ""),
    "wrong impedance": (_plain(boards.straight_pair), IMPEDANCE),
    "too little rejection": (_plain(boards.straight_pair), REJECTION),
    "unequal delay": (_plain(boards.concentric_bend), DELAY),
}
"""Boards with one fault each, and their settings."""

CUTS = 500


def cuts(tree: Tree) -> Iterator[Cut]:
    """Every cut that counts; see above."""
    for key in ("outline", "nets", "pairs"):
        yield (key,)
    for number, layer in enumerate(tree["stackup"]):
        yield from (("stackup", number, key) for key in ("thickness", "permittivity", "loss_tangent") if key in layer)
        yield ("drawn on", layer["name"]) if layer["kind"] == "copper" else ("stackup", number)
    for number, part in enumerate(tree["parts"]):
        yield ("parts", number)
        yield from (("parts", number, key) for key in ("value", "package", "side"))
        for pin, _ in enumerate(part["pins"]):
            yield ("parts", number, "pins", pin)
            yield from (("parts", number, "pins", pin, key) for key in ("net", "pad", "drill"))
    for number, _ in enumerate(tree["pairs"]):
        yield from (("pairs", number, key) for key in ("source", "load", "name"))
    for number, area in enumerate(tree["areas"]):
        if area["net"] == "GND":
            yield ("areas", number)
    for number, _ in enumerate(tree["vias"]):
        yield from (("vias", number, key) for key in ("pad", "antipad"))


def without(tree: Tree, *gone: Cut) -> Tree:
    """The board without what is named."""
    left = copy.deepcopy(tree)
    for cut in sorted(gone, key=repr, reverse=True):
        holder: Any = left
        for step in cut[:-1]:
            holder = (
                holder[step]
                if isinstance(holder, list) and step < len(holder)
                # type: ignore[operator]
                else (holder.get(step, {}) if isinstance(holder, dict) else {})
            )
        if cut[0] == "drawn on":
            _strip(left, str(cut[1]))
        elif isinstance(holder, list) and int(cut[-1]) < len(holder):
            del holder[int(cut[-1])]
        elif isinstance(holder, dict):
            holder.pop(cut[-1], None)
    return left


def _strip(tree: Tree, layer: str) -> None:
    for key in ("tracks", "areas"):
        tree[key] = [one for one in tree.get(key, []) if one["layer"] != layer]
    tree["vias"] = [via for via in tree.get("vias", []) if layer not in {via["from"], via["to"]}]
    for part in tree.get("parts", []):
        part["pins"] = [pin for pin in part.get("pins", []) if pin.get("layer") != layer]


def pairs_of(folder: Path, tree: Tree, settings: str) -> tuple[PairResult, ...]:
    (folder / "board.json").write_text(json.dumps(tree), encoding="utf-8")
    (folder / "pairrules.yaml").write_text(settings or BASE, encoding="utf-8")
    try:
        return check(folder / "board.json").pairs
    except BoardError:
        return ()


def nets_of(pair: PairResult) -> set[str]:
    return {pair.plus, pair.minus, *pair.nets_plus, *pair.nets_minus}


@pytest.mark.parametrize("name", FAULTY)
def test_no_cut_makes_a_pair_good(tmp_path: Path, name: str) -> None:
    make, settings = FAULTY[name]
    tree = make()
    bad = [pair for pair in pairs_of(tmp_path, tree, settings) if pair.verdict != "pass"]
    assert bad, "the board has no fault to lose"
    random = Random(name)
    every = list(cuts(tree))
    kept = set()
    for _ in range(-(-CUTS // len(FAULTY))):
        gone = tuple(random.sample(every, random.choice((1, 1, 1, 2, 3))))
        if gone in kept:
            continue
        kept.add(gone)
        for pair in pairs_of(tmp_path, without(tree, *gone), settings):
            if any(nets_of(pair) & nets_of(before) for before in bad):
                assert pair.verdict != "pass", f"{gone} makes {pair.name} good"


def test_a_cut_that_takes_the_fault_itself_may_make_a_pair_good(tmp_path: Path) -> None:
    """The judge above can fail: without its stub the leg is sound."""
    tree = boards.stub_on_plus().board
    (before,) = pairs_of(tmp_path, tree, "")
    (after,) = pairs_of(tmp_path, without(tree, ("tracks", 2)), "")
    assert (before.verdict, after.verdict) == ("flag", "pass")
