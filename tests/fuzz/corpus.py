"""The valid files that are changed: small boards in both formats, settings that make every stage work."""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import cache
from random import Random
from typing import Any

import yaml

from fixtures.boards import BOARDS
from fixtures.ipc2581_writer import to_ipc2581
from tests.fuzz.mutations import mutated_json, mutated_xml, mutated_yaml, packed

FORMATS = ("json", "json", "json", "listing", "csv")

SETTINGS: dict[str, Any] = yaml.safe_load("""
extends: [base]
reference_nets: [GND, "AGND*"]
pairs:
  - {name: IN, plus: IN_P, minus: IN_N}
  - {plus: "*_DP", minus: "*_DM"}
  - {ignore: ["RESET_N"]}
classes:
  bridge:
    match: ["IN*"]
    source: {kind: impedance, plus: 350 ohm, minus: 351 ohm}
    cable: {length: 3 m, resistance: 0.09 ohm/m, capacitance: 60 pF/m, inductance: 0.6 uH/m, resistance_unbalance: 2 %}
    load:
      kind: impedance
      plus: {resistance: 1 Mohm, capacitance: 10 pF}
      minus: {resistance: 1 Mohm, capacitance: 12 pF}
      across: {resistance: 10 kohm}
      rejection: 100 dB
    frequencies: [50 Hz, 1 MHz]
    limits:
      leg-length: {most: 0.5 mm, severity: review}
      link-rejection: {least: 80 dB, severity: blocker}
      trace-balance: {least: 60 dB}
      leg-delay: {most: 10 ps}
waivers: pairrules-waivers.yaml
""")
"""Settings with a class that fits the pair of every small board, so that the electrical stage has all to do."""

STACKUP: dict[str, Any] = yaml.safe_load("""
stackup:
  - {name: TOP, kind: copper, thickness: 35 um}
  - {name: D1, kind: dielectric, thickness: 0.2 mm, permittivity: 4.2, loss_tangent: 0.02}
  - {name: GND, kind: copper, thickness: 35 um}
  - {name: D2, kind: dielectric, thickness: 1 mm, permittivity: 4.2}
  - {name: GND2, kind: copper, thickness: 35 um}
  - {name: D3, kind: dielectric, thickness: 0.2 mm, permittivity: 4.2}
  - {name: BOTTOM, kind: copper, thickness: 35 um}
""")


WAIVERS: list[dict[str, Any]] = yaml.safe_load("""
- rule: leg-length
  pair: IN
  reason: the serpentine is wanted
  who: the designer
  until: "2999-12-31"
  fingerprint: "1:0123456789abcdef"
- rule: link-rejection
  pair: [IN_P, IN_N]
  reason: measured on the first board
  until: "2000-01-01"
  fingerprint: "1:0123-4567-89ab"
""")
"""Waivers that mean the pair of the small boards, one of them expired."""


@dataclass(frozen=True)
class Input:
    """One case: bytes of the board, the settings (`None`: the base set), the waivers (`None`: none), and the report."""

    board: bytes
    settings: bytes | None
    form: str
    waivers: bytes | None = None


def drawn(random: Random) -> Input:
    """A case drawn at random: mostly a changed board, one time in ten a sound board under changed settings."""
    known, other = random.choice(BOARDS)().board, random.choice(BOARDS)().board
    form = random.choice(FORMATS)
    if random.random() < 0.1:
        sound = json.dumps(known).encode()
        if random.random() < 0.3:
            return Input(sound, _settings(), form, mutated_yaml(WAIVERS, WAIVERS, random))
        settings = random.choice((SETTINGS, SETTINGS | STACKUP, STACKUP))
        return Input(sound, mutated_yaml(settings, SETTINGS, random), form)
    if random.random() < 0.4:
        data = mutated_json(known, other, random)
    else:
        revision = random.choice(("A", "B", "C"))
        data = mutated_xml(written(known, revision), written(other, revision), random)
    if random.random() < 0.03:
        data = packed(data, random)
    return Input(data, random.choice((None, None, None, None, _settings())), form)


def written(board: dict[str, Any], revision: str) -> bytes:
    """The board as IPC-2581."""
    return _written(json.dumps(board), revision)


@cache
def _written(board: str, revision: str) -> bytes:
    return to_ipc2581(json.loads(board), revision=revision)


@cache
def _settings() -> bytes:
    return yaml.safe_dump(SETTINGS, sort_keys=False).encode()
