"""The board: everything later stages may know of a file."""

from __future__ import annotations

from dataclasses import dataclass, field

from pairrules.board.areas import Area
from pairrules.board.columns import Floats
from pairrules.board.pads import Pads, Part
from pairrules.board.stackup import Stackup
from pairrules.board.tracks import Tracks
from pairrules.board.vias import Vias


@dataclass(frozen=True, slots=True, kw_only=True)
class DeclaredPair:
    """A pair the file itself names. `name` and `klass` are "" where it gives none; `source`, `load` name end parts."""

    plus: str
    minus: str
    name: str = ""
    klass: str = ""
    source: str = ""
    load: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Board:
    """One board. Lengths in mm whatever the file's units.

    Parameters
    ----------
    name: the board's own name. format: "IPC-2581" or "plain JSON". revision: of the format.
    units: the file's, as written.
    stackup: top to bottom; its copper names are `copper`.
    nets: net names, sorted; records refer to them by index. net_kinds: "ground", "power", "signal" or "" for each.
    net_lines: for each net the line of the file where its copper first stands, 0 where unknown.
    outline: (n, 2) of the board's edge, arcs flattened; `None` where absent.
    missing: what the file lacked or what was not understood, one sentence each.
    complete: false where copper known to exist is not in the file.
    """

    name: str
    format: str
    revision: str
    units: str
    stackup: Stackup
    nets: tuple[str, ...]
    parts: tuple[Part, ...]
    pads: Pads
    tracks: Tracks
    vias: Vias
    areas: tuple[Area, ...]
    pairs: tuple[DeclaredPair, ...] = ()
    net_kinds: tuple[str, ...] = ()
    net_lines: tuple[int, ...] = ()
    outline: Floats | None = None
    missing: tuple[str, ...] = ()
    complete: bool = True
    copper: tuple[str, ...] = field(init=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "copper", self.stackup.copper)
        for name, default in (("net_kinds", ""), ("net_lines", 0)):
            if not getattr(self, name):
                object.__setattr__(self, name, (default,) * len(self.nets))
            elif len(getattr(self, name)) != len(self.nets):
                raise ValueError(f"Board.{name} has {len(getattr(self, name))} rows, {len(self.nets)} are needed")
