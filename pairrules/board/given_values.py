"""Values of parts that the project gives, put over those of the board file."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from pairrules.board.board import Board


def with_part_values(board: Board, values: Mapping[str, str]) -> Board:
    """The board with these values written on its parts, by designator; unknown ones are named in `missing`."""
    if not values:
        return board
    known = {part.ref for part in board.parts}
    strange = tuple(
        f"the settings give a value of {ref}, which the board does not have" for ref in sorted(values.keys() - known)
    )
    parts = tuple(replace(part, value=values.get(part.ref, part.value)) for part in board.parts)
    return replace(board, parts=parts, missing=(*board.missing, *strange))
