"""From the geometry of a pair to the figures the result carries; the electrical ones are added by later stages."""

from __future__ import annotations

from dataclasses import replace

from pairrules.balance.pair_electrical import PairElectrical
from pairrules.geometry.pair_geometry import LegRoute, PairGeometry
from pairrules.result import BalancePoint, Measures


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


def with_electrical(measures: Measures, figures: PairElectrical) -> Measures:
    """The figures with those that the electrical stage found."""
    plus, minus = figures.delay_plus_ps, figures.delay_minus_ps
    return replace(
        measures,
        delay_plus_ps=plus,
        delay_minus_ps=minus,
        delay_mismatch_ps=None if plus is None or minus is None else plus - minus,
        impedance_diff_ohm=figures.impedance_diff_ohm,
        impedance_common_ohm=figures.impedance_common_ohm,
        resistance_mismatch_ohm=figures.resistance_mismatch_ohm,
        capacitance_mismatch_pf=figures.capacitance_mismatch_pf,
        inductance_mismatch_nh=figures.inductance_mismatch_nh,
    )


def balance_figures(figures: PairElectrical, frequencies: tuple[float, ...]) -> tuple[BalancePoint, ...]:
    """The balance at the class's own frequencies, in their rising order."""
    return tuple(
        BalancePoint(
            frequency_hz=point.frequency_hz,
            source_db=point.source_db,
            trace_db=point.trace_db,
            cable_db=point.cable_db,
            load_db=point.load_db,
            total_db=point.total_db,
            rejection_db=point.rejection_db,
            worst_db=point.worst_db,
            bound_95_db=point.bound_db,
        )
        for point in figures.balance
        if point.frequency_hz in frequencies
    )


def _vias(leg: LegRoute | None) -> int | None:
    """Vias of the route; a pin's plated hole that it passes is none of them."""
    return None if leg is None else sum(use.via >= 0 for use in leg.vias)
