"""Capacitance of a cross-section by finite elements, as a second opinion on the boundary elements.

Quadrilaterals of second order on a tensor grid whose lines pass through every edge of copper and dielectric and
crowd toward them geometrically; copper is left out or held at its potential; C follows from the energy, so it falls
toward its limit as the grid is refined. Open space ends in a remote box. Three depths of grading are extrapolated
(Aitken): the error at a corner falls by one factor with each layer. The assembly and elements are those of scikit-fem
(T. Gustafsson, G. D. McBain, scikit-fem: a Python package for finite element assembly, JOSS 5 (2020) 2369).
"""

from __future__ import annotations

import itertools

import numpy as np
import numpy.typing as npt
import scipy.sparse.linalg  # type: ignore[import-untyped]
import skfem  # type: ignore[import-untyped]
from skfem.helpers import dot, grad  # type: ignore[import-untyped]

from pairrules.fields.cross_section import CrossSection

Floats = npt.NDArray[np.float64]

EPSILON_0 = 8.8541878128e-12


def capacitance(
    section: CrossSection, *, depths: tuple[int, int, int] = (8, 10, 12), air: bool = False
) -> tuple[Floats, float]:
    """Maxwell matrix [F/m] in the order of the conductors, and how far extrapolation still moves it, relatively."""
    a, b, c = (at_depth(section, depth, air=air) for depth in depths)
    scale = np.sqrt(np.outer(np.diag(c), np.diag(c)))
    with np.errstate(divide="ignore", invalid="ignore"):
        step = (c - b) ** 2 / ((b - a) - (c - b))
    extrapolated = c + np.where(np.isfinite(step) & (np.abs(c - b) < np.abs(b - a)), step, 0.0)
    return (extrapolated + extrapolated.T) / 2, float(np.max(np.abs(extrapolated - c) / scale))


def at_depth(section: CrossSection, depth: int, *, air: bool = False) -> Floats:
    """Maxwell matrix [F/m] on a grid that halves `depth` times toward each edge; not extrapolated."""
    xs, ys = _lines(section)
    whole = [plane.y for plane in section.planes if plane.infinite]
    low = min(whole) if whole else None
    high = max(whole) if len(whole) > 1 else None
    span = max(xs[-1] - xs[0], ys[-1] - ys[0])
    x = _graded(
        xs, depth, before=4000 * span if not whole else 200 * span, after=4000 * span if not whole else 200 * span
    )
    inner = [y for y in ys if (low is None or y >= low) and (high is None or y <= high)]
    far = 4000 * span if not whole else 200 * span
    y = _graded(inner, depth, before=far if low is None else 0.0, after=far if high is None else 0.0)
    mesh = skfem.MeshQuad.init_tensor(x, y)
    centres = mesh.p[:, mesh.t].mean(axis=1)
    owner = np.full(centres.shape[1], -1)
    for place, conductor in enumerate(section.conductors):
        if conductor.polygon is not None:
            (x0, x1), (y0, y1) = conductor.x_range, conductor.y_range
            inside = (centres[0] > x0) & (centres[0] < x1) & (centres[1] > y0) & (centres[1] < y1)
            owner[inside] = place
    epsilon = np.ones(centres.shape[1])
    if not air:
        for layer in section.layers:
            epsilon[(centres[1] > layer.y0) & (centres[1] < layer.y1)] = layer.er
        for patch in section.patches:
            (x0, x1), (y0, y1) = ((min(v), max(v)) for v in zip(*patch.polygon, strict=True))
            epsilon[(centres[0] > x0) & (centres[0] < x1) & (centres[1] > y0) & (centres[1] < y1)] = patch.er
    mesh = skfem.MeshQuad(_leaning(mesh.p, section), mesh.t)
    basis = skfem.Basis(mesh, skfem.ElementQuad2(), intorder=4)
    weight = skfem.Basis(mesh, skfem.ElementQuad0(), intorder=4, quadrature=basis.quadrature).interpolate(epsilon)

    @skfem.BilinearForm
    def energy(u, v, w):  # type: ignore[no-untyped-def]
        return w.epsilon * dot(grad(u), grad(v))

    stiffness = energy.assemble(basis, epsilon=weight).tocsc()
    potential = np.full((basis.N, len(section.conductors)), np.nan)
    location = skfem.MeshQuad.init_tensor(x, y)  # where each degree of freedom was before the legs were leant
    upright = skfem.Basis(location, skfem.ElementQuad2(), intorder=4).doflocs
    tiny = 1e-9 * span
    for plane in section.planes:
        for start, end in plane.intervals or ((-np.inf, np.inf),):
            on = (np.abs(upright[1] - plane.y) < tiny) & (upright[0] > start - tiny) & (upright[0] < end + tiny)
            potential[on] = 0.0
    for place, conductor in enumerate(section.conductors):
        (x0, x1), (y0, y1) = conductor.x_range, conductor.y_range
        on = (upright[0] > x0 - tiny) & (upright[0] < x1 + tiny) & (upright[1] > y0 - tiny) & (upright[1] < y1 + tiny)
        potential[on] = 0.0
        potential[on, place] = 1.0
    held = ~np.isnan(potential[:, 0])
    free = np.nonzero(~held)[0]
    fixed = np.nonzero(held)[0]
    factor = scipy.sparse.linalg.splu(
        stiffness[np.ix_(free, free)].tocsc(), permc_spec="MMD_AT_PLUS_A", options={"SymmetricMode": True}
    )
    potential[free] = factor.solve(np.asarray(-(stiffness[np.ix_(free, fixed)] @ potential[fixed])))
    return np.asarray(EPSILON_0 * potential.T @ (stiffness @ potential))


def _lines(section: CrossSection) -> tuple[list[float], list[float]]:
    xs: set[float] = set()
    ys: set[float] = {plane.y for plane in section.planes}
    for conductor in section.conductors:
        xs.update(conductor.x_range)
        ys.update(conductor.y_range)
    for plane in section.planes:
        for stretch in plane.intervals or ():
            xs.update(edge for edge in stretch if np.isfinite(edge))
    for layer in section.layers:
        ys.update((layer.y0, layer.y1))
    for patch in section.patches:
        for x, y in patch.polygon:
            xs.add(x)
            ys.add(y)
    return _distinct(xs), _distinct(ys)


def _distinct(values: set[float]) -> list[float]:
    ordered = sorted(values)
    return [ordered[0], *(b for a, b in itertools.pairwise(ordered) if b - a > 1e-9)]


def _graded(edges: list[float], depth: int, *, before: float, after: float) -> Floats:
    """Grid lines: at every edge, crowding toward it by halves, and outward to the box by doubles."""
    steps = 0.5 * 0.5 ** np.arange(depth - 1, -1, -1.0)
    points = [np.array(edges)]
    for a, b in itertools.pairwise(edges):
        points += [a + (b - a) * steps, b - (b - a) * steps]
    for edge, reach, sign in ((edges[0], before, -1.0), (edges[-1], after, 1.0)):
        if reach:
            step = min(b - a for a, b in itertools.pairwise(edges)) * 0.5**depth
            count = int(np.ceil(np.log2(reach / step)))
            points.append(edge + sign * step * 2.0 ** np.arange(count + 1))
    joined = np.unique(np.concatenate(points))
    keep = np.concatenate(([True], np.diff(joined) > 1e-12))
    return np.asarray(joined[keep])


def _leaning(points: Floats, section: CrossSection) -> Floats:
    """Move the grid so that the sides of trapezoids become grid lines; nothing moves at the edges of other things."""
    moved = points.copy()
    _, ys = _lines(section)
    for conductor in section.conductors:
        if conductor.polygon is None or len(conductor.polygon) != 4:
            continue
        (x0, x1), (y0, y1) = conductor.x_range, conductor.y_range
        lean = sorted(x for x, y in conductor.polygon if y == y1)[0] - x0
        if lean == 0.0:
            continue
        above = min([y for y in ys if y > y1 + 1e-9], default=y1 + 4 * (y1 - y0))
        share = np.interp(points[1], [y0, y1, above], [0.0, 1.0, 0.0])
        xs, _ = _lines(section)
        left = max([x for x in xs if x < x0 - 1e-9], default=x0 - (x1 - x0))
        right = min([x for x in xs if x > x1 + 1e-9], default=x1 + (x1 - x0))
        moved[0] += share * np.interp(points[0], [left, x0, x1, right], [0.0, lean, -lean, 0.0])
    return moved
