"""From the geometry of a pair to the figures the result carries; the electrical ones are added by later stages."""

from __future__ import annotations

from pairrules.geometry.pair_geometry import LegRoute, PairGeometry
from pairrules.result import Measures


def geometric_measures(geometry: PairGeometry) -> Measures:
    """The figures that copper alone gives. Where a leg is broken the lengths are `None`, its own other figures too."""
    plus, minus = geometry.plus, geometry.minus
    both = plus is not None and minus is not None
    return Measures(
        length_plus_mm=plus.length_mm if plus and both else None,
        length_minus_mm=minus.length_mm if minus and both else None,
        length_mismatch_mm=plus.length_mm - minus.length_mm if plus and minus else None,
        gap_min_mm=geometry.gap_min_mm if both else None,
        gap_median_mm=geometry.gap_median_mm if both else None,
        gap_max_mm=geometry.gap_max_mm if both else None,
        coupled_mm=geometry.coupled_mm if both else None,
        apart_mm=geometry.apart_mm if both else None,
        loop_area_mm2=geometry.loop_area_mm2 if both else None,
        net_loop_area_mm2=geometry.net_loop_area_mm2 if both else None,
        width_plus_mm=plus.width_mm if plus else None,
        width_minus_mm=minus.width_mm if minus else None,
        vias_plus=_vias(plus),
        vias_minus=_vias(minus),
        stub_plus_mm=plus.stub_mm if plus else None,
        stub_minus_mm=minus.stub_mm if minus else None,
        reference_uncovered_mm=geometry.reference_uncovered_mm,
    )


def _vias(leg: LegRoute | None) -> int | None:
    return None if leg is None else len(leg.vias)
