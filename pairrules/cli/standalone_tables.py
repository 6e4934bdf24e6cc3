"""The answers to sections and links on their own as tables for terminals."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from typing import Any

from pairrules.cli.standalone import LINK
from pairrules.reports.safe_text import safe

_LINK_COLUMNS = (
    ("conversion", "conversion_db"),
    ("source", "source_db"),
    ("trace", "trace_db"),
    ("load", "load_db"),
    ("gain", "differential_gain_db"),
    ("rejection", "rejection_db"),
)

_PAIR_MATRICES = (
    ("pair C", "C_pF_per_m", "pF/m"),
    ("pair C of air", "Cair_pF_per_m", "pF/m"),
    ("pair L", "L_nH_per_m", "nH/m"),
)


def as_tables(kinds: Sequence[str], found: Sequence[Mapping[str, Any]]) -> str:
    """One table an answer, an empty line between them."""
    return "\n".join(
        link_table(one) if kind == LINK else section_table(one) for kind, one in zip(kinds, found, strict=True)
    )


def link_table(found: Mapping[str, Any]) -> str:
    """The answer to a link, ratios in dB."""
    given = found["id"]
    name = given if isinstance(given, str) else "" if given is None else json.dumps(given)
    lines = [safe(f"link {name}".rstrip())]
    lines.append(f"{'frequency':>12}" + "".join(f"{head:>12}" for head, _ in _LINK_COLUMNS))
    lines.append(f"{'Hz':>12}" + f"{'dB':>12}" * len(_LINK_COLUMNS))
    for result in found["results"]:
        figures = "".join(f"{result[name]:>12.2f}" for _, name in _LINK_COLUMNS)
        lines.append(f"{result['frequency_hz']:>12g}{figures}")
    return "\n".join(lines) + "\n"


def section_table(found: Mapping[str, Any]) -> str:
    """The answer to a section: its matrices, then its impedances."""
    lines = [safe(f"section {found['id']}".rstrip())]
    lines += _matrix("C", "pF/m", found["C_pF_per_m"], found["conductors"])
    pair = found["pair"]
    for head, name, unit in _PAIR_MATRICES if pair is not None else ():
        if pair[name] is not None:
            lines += _matrix(head, unit, pair[name], ("plus", "minus"))
    for head, name in (("differential impedance", "impedance_diff_ohm"), ("common impedance", "impedance_common_ohm")):
        shown = "unknown" if found[name] is None else f"{found[name]:.3f} ohm"
        lines.append(f"  {head:<24}{shown}")
    lines.append(f"  {'unknowns':<24}{found['unknowns']}")
    lines += [f"  {safe(name)} is unknown: {safe(why)}" for name, why in sorted(found.get("why_null", {}).items())]
    return "\n".join(lines) + "\n"


def _matrix(head: str, unit: str, rows: Sequence[Sequence[float]], names: Sequence[str]) -> list[str]:
    label = f"{head} [{unit}]"
    lines = []
    for i, (name, row) in enumerate(zip(names, rows, strict=True)):
        figures = "".join(f"{value:>12.4f}" for value in row)
        lines.append(f"  {label if i == 0 else '':<22}{safe(name)[:12]:<12}{figures}")
    return lines
