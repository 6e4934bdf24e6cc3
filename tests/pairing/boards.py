"""Boards of nothing but pads, for the tests of pairing: parts and the nets of their pins, in a few words."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

import numpy as np

from pairrules.board import Area, Board, DeclaredPair, Layer, Pads, Part, Stackup, Tracks, Vias


def board(
    parts: Mapping[str, Iterable[str]],
    *,
    extra: Iterable[str] = (),
    tracks: Iterable[str] = (),
    kinds: Mapping[str, str] | None = None,
    pairs: tuple[DeclaredPair, ...] = (),
    areas: Mapping[str, float] | None = None,
    at: Mapping[str, tuple[float, float]] | None = None,
) -> Board:
    """A board of one layer.

    `parts`: designator to the nets of its pins 1, 2, ... ("" for none). `extra`: nets with nothing on them.
    `tracks`: nets with a track only. `areas`: net to the side of a square of its copper [mm]. `at`: where pin 1 of a
    part lies; pins follow 1 mm apart in x. Parts not named there stand in rows 10 mm apart.
    """
    pins = {ref: list(nets) for ref, nets in parts.items()}
    names = {net for nets in pins.values() for net in nets if net} | {*extra, *tracks, *(areas or {})}
    nets = sorted(names | set(kinds or {}))
    index = {name: place for place, name in enumerate(nets)}
    rows = [
        (number, place + 1, net, *_at(ref, number, place, at or {}))
        for number, (ref, nets_of) in enumerate(pins.items())
        for place, net in enumerate(nets_of)
    ]
    drawn = [index[name] for name in tracks]
    return Board(
        name="test",
        format="plain JSON",
        revision="1",
        units="mm",
        stackup=Stackup(layers=(Layer(name="TOP", kind="copper", thickness_mm=0.035),)),
        nets=tuple(nets),
        parts=tuple(Part(ref=ref) for ref in pins),
        pads=Pads(
            at=np.array([row[3:] for row in rows], dtype=float).reshape(-1, 2),
            layer=np.zeros(len(rows), dtype=np.int64),
            net=np.array([index[row[2]] if row[2] else -1 for row in rows]),
            part=np.array([row[0] for row in rows]),
            pin=tuple(str(row[1]) for row in rows),
            shape=np.full(len(rows), -1),
            rotation=np.zeros(len(rows)),
            mirror=np.zeros(len(rows), dtype=bool),
            drill=np.full(len(rows), np.nan),
            shapes=(),
        ),
        tracks=Tracks(
            start=np.zeros((len(drawn), 2)),
            end=np.ones((len(drawn), 2)),
            centre=np.full((len(drawn), 2), np.nan),
            sweep=np.zeros(len(drawn)),
            width=np.full(len(drawn), 0.2),
            layer=np.zeros(len(drawn), dtype=np.int64),
            net=np.array(drawn),
        ),
        vias=Vias(at=[], first=[], last=[], drill=[], pad=[], antipad=[], net=[]),  # type: ignore[arg-type]
        areas=tuple(
            Area(net=index[name], layer=0, outline=np.array([[0, 0], [side, 0], [side, side], [0, side]], dtype=float))
            for name, side in (areas or {}).items()
        ),
        pairs=pairs,
        net_kinds=tuple((kinds or {}).get(name, "") for name in nets),
    )


def _at(ref: str, number: int, place: int, given: Mapping[str, tuple[float, float]]) -> tuple[float, float]:
    x, y = given.get(ref, (0.0, 10.0 * number))
    return x + place, y


def padded(nets: Iterable[str], pins: int = 3) -> list[str]:
    """Pins of a part with at least so many, the rest without a net."""
    given = list(nets)
    return given + [""] * (pins - len(given))
