"""Whether the file's mirrored parts are mirrored first and then turned, or the other way: asked of their pads.

The standard is read as mirrored first (see `transform`); exporters differ, and for a part turned by a right angle the
two readings lie upside down to each other. Pads that name their pins show which one the exporter meant.
"""

from __future__ import annotations

from dataclasses import replace

from pairrules.readers.ipc2581.copper import Copper
from pairrules.readers.ipc2581.parts import Parts
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import Transform

CLOSE_MM = 0.05
"""A pin this near to its pad's centre lies on it."""


def settle(copper: Copper, parts: Parts, remarks: Remarks) -> None:
    """Turn mirrored parts and pads the other way where more pins then come to lie on their pads."""
    doubtful = {ref: part for ref, part in parts.components.items() if _ambiguous(part.by)}
    if not doubtful:
        return
    first_mirrored = first_turned = 0
    for pad in copper.pads:
        held = parts.pin_of(pad.ref, pad.pin) if pad.ref in doubtful else None
        if held is None:
            continue
        component, pin = held
        first_mirrored += abs(pin.by.then(component.by).shift - pad.at) < CLOSE_MM
        first_turned += abs(pin.by.then(_other(component.by)).shift - pad.at) < CLOSE_MM
    if first_turned > first_mirrored:
        remarks.count("mirrored parts are read as turned first and then mirrored, as the places of their pads show")
        for ref, part in doubtful.items():
            parts.components[ref] = replace(part, by=_other(part.by))
        for pad in copper.pads:
            if pad.way.flip:
                pad.way = _other(pad.way)
    elif not first_mirrored:
        remarks.count("{n} mirrored and turned part{s} {are} read as mirrored first; no pad shows which", len(doubtful))


def _ambiguous(by: Transform) -> bool:
    return by.flip and abs(by.turn.imag) > 1e-9 * abs(by.turn)


def _other(by: Transform) -> Transform:
    """The same turn taken before the mirror: −conj(t·z) = conj(t)·(−conj z)."""
    return Transform(by.turn.conjugate(), by.flip, by.shift)
