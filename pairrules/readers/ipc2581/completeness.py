"""Whether copper that is known to exist is not in the file, and the words for it."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from pairrules.readers.ipc2581.layers import (
    DRILLED,
    FileLayer,
    LayerTable,
    StackedLayer,
    inner_rows,
    undeclared_stack_names,
)
from pairrules.readers.ipc2581.remarks import Remarks

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.file_content import FileContent, Step

_RANGE = re.compile(r"(?<!\d)(\d{1,3})\s*[-_:]\s*(\d{1,3})(?!\d)")
"""The numbers of the first and last copper layer in a drill layer's name (a usual way of naming, no source)."""


def complete(content: FileContent, step: Step, names: tuple[str, ...], remarks: Remarks) -> bool:
    """Whether all copper the file speaks of is in it. names: the copper layers read, top first."""
    absent = _drilled_but_absent(content.table, remarks)
    absent = _counted_but_absent(content, names, remarks) or absent
    absent = _named_but_absent(content.table, remarks) or absent
    for name in dict.fromkeys(content.listed):
        if name and name not in content.table.layers:
            remarks.count(f"the list of contents names layer {name}, which is not in the file")
    absent = _declared_but_bare(step, names, remarks) or absent
    absent = bool(step.copper.undeclared) or absent  # what kind of layer it was drawn on, nobody knows
    if "ASSEMBLY" in content.modes:
        remarks.count("the file was written for assembly, which may leave inner copper layers out")
    return not absent


def _drill_layers(table: LayerTable) -> list[FileLayer]:
    return [layer for layer in table.layers.values() if layer.function in DRILLED]


def _drilled_but_absent(table: LayerTable, remarks: Remarks) -> bool:
    ends = {name for layer in _drill_layers(table) for name in layer.span if name}
    absent = sorted(name for name in ends if name not in table.layers)
    for name in absent:
        remarks.count(f"holes are drilled to copper layer {name}, which is not in the file")
    return bool(absent)


def _counted_but_absent(content: FileContent, names: tuple[str, ...], remarks: Remarks) -> bool:
    """Holes through more layers than are there: told by a drill layer's name, believed where no stackup contradicts."""
    if content.table.groups:
        return False
    for layer in _drill_layers(content.table):
        found = _RANGE.search(layer.name)
        ends = [name for name in layer.span if name in names]
        if found is None or len(ends) != 2 or names.index(ends[0]) >= names.index(ends[1]):
            continue
        drilled = int(found[2]) - int(found[1]) + 1
        held = names.index(ends[1]) - names.index(ends[0]) + 1
        if drilled <= held:
            continue
        if held == 2:
            remarks.count(
                f"no copper layer between {ends[0]} and {ends[1]} is in the file, "
                f"yet {drilled} copper layers are drilled through"
            )
        else:
            remarks.count(
                f"only {held} copper layers from {ends[0]} to {ends[1]} are in the file, "
                f"yet {drilled} are drilled through"
            )
        return True
    return False


def _named_but_absent(table: LayerTable, remarks: Remarks) -> bool:
    absent = undeclared_stack_names(table)
    for name in absent:
        remarks.count(f"the stackup names layer {name}, which is not in the file")
    inner = inner_rows(table)
    gone = set(absent)
    return any(
        _may_be_copper(table, row, inside=place in inner) for place, row in enumerate(table.rows) if row.name in gone
    )


def _may_be_copper(table: LayerTable, row: StackedLayer, *, inside: bool) -> bool:
    """Whether a row is told to be copper, or lies between copper and is told to be nothing at all."""
    materials = [table.specs[spec] for spec in row.specs if spec in table.specs]
    if "copper" in row.described or any(material.conductor for material in materials):
        return True
    told = row.described or any(one.permittivity is not None for one in (row.material, *materials))
    return inside and not told


def _declared_but_bare(step: Step, names: tuple[str, ...], remarks: Remarks) -> bool:
    bare = [name for name in names if name not in step.copper.drawn_layers]
    for name in bare:
        remarks.count(f"copper layer {name} is declared, yet the file holds nothing of it")
    return bool(bare)
