"""Benchmark of the field solution: time, unknowns and error for every kind of section; finite elements for comparison.

    OPENBLAS_NUM_THREADS=1 python -m tests.bench.bench_section             boundary elements on all sections
    OPENBLAS_NUM_THREADS=1 python -m tests.bench.bench_section --compare   and finite elements (scikit-fem) on some

The time is the least of several runs on one core, meshing included. The error is max |C_ij − ref_ij| / √(ref_ii ref_jj)
against the same section with three times the cells. Finite elements are given the coarsest grid on which they come
within 0.1 % of their own finest one, found beforehand and not counted. Nothing is asserted.
"""

from __future__ import annotations

import argparse
import time
from collections.abc import Callable

import numpy as np
import numpy.typing as npt

from pairrules.fields.solve import solve_section
from tests.fields import finite_elements
from tests.fields.sections import all_sections

Floats = npt.NDArray[np.float64]

COMPARED = ("unequal strips", "trapezoids", "mask one leg", "pour one side", "plane ends", "contract")


def least_ms(run: Callable[[], object], times: int) -> float:
    spent = []
    for _ in range(times):
        begun = time.perf_counter()
        run()
        spent.append(time.perf_counter() - begun)
    return 1e3 * min(spent)


def error(found: Floats, reference: Floats) -> float:
    own = np.sqrt(np.diag(reference))
    return float(np.max(np.abs(found - reference) / np.outer(own, own)))


def main() -> None:
    parser = argparse.ArgumentParser(description="time the field solution of cross-sections")
    parser.add_argument("--compare", action="store_true", help="time finite elements on some sections too")
    compare = parser.parse_args().compare
    spent = []
    print(f"{'section':24s} {'unknowns':>8s} {'ms':>8s} {'error %':>8s}")
    for name, section in all_sections().items():
        solved = solve_section(section)
        fine = solve_section(section, refine=3.0)
        ms = least_ms(lambda section=section: solve_section(section), 20)  # type: ignore[misc]
        spent.append(ms)
        print(f"{name:24s} {solved.unknowns:8d} {ms:8.2f} {100 * error(solved.C, fine.C):8.4f}")
    print(f"median {np.median(spent):.2f} ms, worst {max(spent):.2f} ms")
    if not compare:
        return
    print(f"\n{'section':24s} {'depth':>8s} {'FEM ms':>8s} {'ratio':>8s}")
    for name in COMPARED:
        section = all_sections()[name]
        finest = finite_elements.at_depth(section, 12)
        depth = next(d for d in range(2, 13) if error(finite_elements.at_depth(section, d), finest) < 1e-3)
        slow = least_ms(lambda section=section, depth=depth: finite_elements.at_depth(section, depth), 3)  # type: ignore[misc]
        quick = least_ms(lambda section=section: solve_section(section), 20)  # type: ignore[misc]
        print(f"{name:24s} {depth:8d} {slow:8.1f} {slow / quick:8.1f}")


if __name__ == "__main__":
    main()
