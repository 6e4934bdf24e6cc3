"""The figures of a pair in the order of the result, each with a short name, its unit and the decimals shown."""

from __future__ import annotations

from dataclasses import dataclass

from pairrules.result import Measures


@dataclass(frozen=True, slots=True, kw_only=True)
class Figure:
    """A figure: `key` in `Measures`, `label` for people, `unit`, `digits` shown after the point."""

    key: str
    label: str
    unit: str
    digits: int


FIGURES = tuple(
    Figure(key=key, label=label, unit=unit, digits=digits)
    for key, label, unit, digits in (
        ("length_plus_mm", "length plus", "mm", 3),
        ("length_minus_mm", "length minus", "mm", 3),
        ("length_mismatch_mm", "length, plus less minus", "mm", 3),
        ("delay_plus_ps", "delay plus", "ps", 2),
        ("delay_minus_ps", "delay minus", "ps", 2),
        ("delay_mismatch_ps", "delay, plus less minus", "ps", 2),
        ("gap_min_mm", "gap, least", "mm", 3),
        ("gap_median_mm", "gap, median", "mm", 3),
        ("gap_max_mm", "gap, greatest", "mm", 3),
        ("coupled_mm", "length side by side", "mm", 3),
        ("apart_mm", "length apart", "mm", 3),
        ("loop_area_mm2", "loop area", "mm²", 3),
        ("net_loop_area_mm2", "loop area with sign", "mm²", 3),
        ("width_plus_mm", "width plus", "mm", 3),
        ("width_minus_mm", "width minus", "mm", 3),
        ("vias_plus", "vias plus", "", 0),
        ("vias_minus", "vias minus", "", 0),
        ("stub_plus_mm", "stubs plus", "mm", 3),
        ("stub_minus_mm", "stubs minus", "mm", 3),
        ("reference_uncovered_mm", "track without reference", "mm", 3),
        ("impedance_diff_ohm", "impedance, differential", "ohm", 2),
        ("impedance_common_ohm", "impedance, common", "ohm", 2),
        ("resistance_mismatch_ohm", "resistance difference", "ohm", 5),
        ("capacitance_mismatch_pf", "capacitance difference", "pF", 4),
        ("inductance_mismatch_nh", "inductance difference", "nH", 4),
    )
)


def value(measures: Measures, figure: Figure) -> str:
    """The figure as text without unit, "?" where it is not known."""
    number = getattr(measures, figure.key)
    if number is None:
        return "?"
    text = f"{number:.{figure.digits}f}"
    return text.removeprefix("-") if float(text) == 0 else text
