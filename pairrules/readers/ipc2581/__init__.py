"""IPC-2581, revisions A to C: XML that carries a board's copper, stackup, parts and nets.

Source: IPC-2581, Generic Requirements for Printed Board Assembly Products Manufacturing Description Data and Transfer
Methodology. Where elements stand was read in its published revision A schema; what later revisions changed is from
memory.
"""

from __future__ import annotations

from pairrules.board.board import Board
from pairrules.errors import BoardError
from pairrules.readers.ipc2581.prolog import doctype_line, root_name
from pairrules.readers.long_file import Sliced
from pairrules.readers.reader import Reader
from pairrules.readers.uncollected import uncollected


def recognises(data: Sliced) -> bool:
    """Whether the root element is IPC-2581's, with or without a namespace prefix."""
    return root_name(data) == "IPC-2581"


def read(data: Sliced, name: str, step: str) -> Board:
    """The board in an IPC-2581 file. step: the wanted board's name, "" where the file holds just one.

    Raises: BoardError where the file is malformed, holds no board copper, or several boards of which none is chosen.
    """
    from pairrules.readers.ipc2581.assembly import assemble
    from pairrules.readers.ipc2581.file_content import read_content

    refused = doctype_line(data)
    if refused:
        found = "the file has a DOCTYPE, which a board file does not need"
        raise BoardError(found, file=name, place=f"line {refused}", remedy="remove the DOCTYPE")
    try:
        with uncollected():
            return assemble(read_content(data), step)
    except BoardError as error:
        raise BoardError(error.found, file=name, place=error.place, remedy=error.remedy) from None


READER = Reader(summary="IPC-2581 XML, revisions A to C", recognises=recognises, read=read, piecewise=True)
