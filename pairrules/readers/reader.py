"""What a reader is, and which one understands a file's bytes."""

from __future__ import annotations

import importlib
import pkgutil
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from pairrules.board.board import Board
from pairrules.errors import BoardError
from pairrules.readers.long_file import Sliced


@dataclass(frozen=True, slots=True, kw_only=True)
class Reader:
    """A reader: set as `READER` in a module or package of this folder.

    Parameters
    ----------
    summary: the format in a few words.
    recognises: whether the (unpacked) bytes are of this format; looks at the beginning only, never raises.
    read: bytes, the file's name for messages, and the wanted board's name ("" where the file must hold just one), to
        `Board`.
    piecewise: whether `read` only slices its bytes, so that they may be those of a `LongFile`.
    """

    summary: str
    recognises: Callable[[Sliced], bool]
    read: Callable[[Any, str, str], Board]
    piecewise: bool = False


def read_board(data: Sliced, name: str, *, step: str = "") -> Board:
    """The board in `data`, whichever format and packing it has.

    Parameters: data: the file's bytes, or a `LongFile`. name: the file's name for messages. step: which board, where
    there are several.
    Raises: BoardError where no reader understands the bytes, or the one that does finds them wrong.
    """
    from pairrules.readers.packing import unpack

    plain, label = unpack(data, name)
    package = importlib.import_module("pairrules.readers")
    for module in sorted(pkgutil.iter_modules(package.__path__), key=lambda m: m.name):
        reader = getattr(importlib.import_module(f"pairrules.readers.{module.name}"), "READER", None)
        if isinstance(reader, Reader) and reader.recognises(plain):
            return reader.read(plain if reader.piecewise else plain[:], label, step)
    raise BoardError(
        "this is no board file",
        file=label,
        remedy="give an IPC-2581 XML file or a plain JSON board (see `pairrules schema board`)",
    )
