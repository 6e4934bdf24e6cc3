"""Capacitance of a cross-section by boundary elements: charges on copper and on the interfaces of dielectrics.

Unknowns are the total charges q of straight cells (free and polarisation charge together), in free space or between
the images of the infinite planes. Copper cells demand that their mean potential is the conductor's; interface cells
that the flux of D through the whole cell is the same on both sides: with E the field of all other charges normal to
the cell, (ε_l + ε_r)/2 · q/ε0 + (ε_l − ε_r) ∫E = 0, which conserves charge. Testing by means over cells is Galerkin's
method on copper, so the error of C falls with the square of the charge's. Free charge on copper is ε of the dielectric
outside times the total charge; on a strip between unlike dielectrics (ε_l + ε_r)/2 · q + (ε_l − ε_r) ε0 ∫E.

Without an infinite plane, an unknown constant potential and a row that makes the total charge zero take its place.
Quasi-static, ideal conductors: right for capacitance as long as the section is small against the wavelength, and for
the external inductance µ0 ε0 Cair⁻¹ where the skin depth is small against the copper.
Source: R. F. Harrington, Field Computation by Moment Methods, 1968; C. Wei, R. F. Harrington, J. R. Mautz and
T. K. Sarkar, Multiconductor transmission lines in multilayered dielectric media, IEEE Transactions on Microwave Theory
and Techniques 32 (1984) 439–450 (both from memory).
"""

from __future__ import annotations

import functools
from dataclasses import dataclass

import numpy as np

from pairrules.fields.boundary import INTERFACE, PLANE, Complexes, Floats, Ints, Pieces, Region, pieces_of
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.grading import cells_of
from pairrules.fields.kernels import Surroundings, interaction
from pairrules.fields.mirror import cut_at, mirror_of
from pairrules.fields.reduction import Pair, pair_of
from pairrules.fields.regions import regions_of

MOST_CELLS = 5000
"""Memory grows with the square of the cells, time with the cube; usual sections take some hundreds."""

EPSILON_0 = 8.8541878128e-12
"""Electric constant [F/m]. Source: CODATA 2018."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class AirCharge:
    """Charge on the copper of one region in air, for loss figures.

    middle, way: cells' centres, and the ways from their starts to their ends [m], complex (n,). owner: place of the
    conductor, or −1 for a plane (n,). charge: charge of each cell [C/m], one column for 1 V on each conductor in turn,
    the others and the planes at 0 V (n, conductors). bottom, top: heights [m] of the region's infinite planes, `None`
    where none is.
    """

    middle: Complexes
    way: Complexes
    owner: Ints
    charge: Floats
    bottom: float | None
    top: float | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SectionSolution:
    """What a cross-section is worth, in SI units per metre.

    C, Cair: Maxwell capacitance matrices in the order of `section.conductors` [F/m], with the dielectrics and in air.
    G_per_omega: conductance over angular frequency [F/m] from the loss tangents (the negative imaginary part of the
    complex capacitance, to first order in them; taken as the same at all frequencies). pair: the legs, or `None` where
    the section has not two signals. unknowns: charges solved for. air: charges in air, region by region.
    joined: names of grounded conductors that touch one another or a plane; capacitance between copper that touches has
    no bound, so those entries are NaN (the legs' are not concerned).
    """

    section: CrossSection
    C: Floats
    Cair: Floats
    G_per_omega: Floats
    pair: Pair | None
    unknowns: int
    air: tuple[AirCharge, ...]
    joined: tuple[str, ...] = ()


def solve_section(section: CrossSection, *, refine: float = 1.0) -> SectionSolution:
    """Solve one cross-section.

    Parameters
    ----------
    section: lengths in mm.
    refine: multiplies the number of cells; 1 is meant to keep C within 0.1 %.

    Raises
    ------
    ValueError: where conductors overlap, touch, or reach through an infinite plane, or would take too many cells.
    """
    _keep_freed_memory()
    count = len(section.conductors)
    complex_c = np.zeros((count, count), dtype=np.complex128)
    cair = np.zeros((count, count))
    unknowns = 0
    air = []
    contacts: list[tuple[int, int]] = []
    for region in regions_of(section):
        found = _solve_region(region, refine)
        place = np.ix_(region.members, region.members)
        complex_c[place] = found.capacitance
        cair[place] = found.air_capacitance
        unknowns += found.unknowns
        contacts += found.contacts
        air.append(_air_charge(region, found, count))
    c, g = complex_c.real.copy(), -complex_c.imag
    groups = _joined(contacts)
    for group in groups:
        among = np.ix_(sorted(group - {PLANE}), sorted(group - {PLANE}))
        c[among] = cair[among] = g[among] = np.nan
    return SectionSolution(
        section=section,
        C=_frozen(c),
        Cair=_frozen(cair),
        G_per_omega=_frozen(g),
        pair=pair_of(section, c, cair),
        unknowns=unknowns,
        air=tuple(air),
        joined=tuple(section.conductors[place].name for place in sorted(set().union(*groups) - {PLANE})),
    )


@functools.cache
def _keep_freed_memory() -> None:
    """Have the C library keep blocks of some megabytes for the next section instead of handing them back.

    Fresh pages for every matrix take a fifth of a section's time. The GNU library raises its threshold to the greatest
    block freed so far, at most 32 MB; to others this is nothing.
    """
    np.empty(4_000_000)


def _joined(contacts: list[tuple[int, int]]) -> list[set[int]]:
    """Groups of what hangs together by contacts."""
    groups: list[set[int]] = []
    for pair in contacts:
        touched = [group for group in groups if group & set(pair)]
        groups = [group for group in groups if not group & set(pair)] + [set(pair).union(*touched)]
    return groups


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Found:
    capacitance: Complexes
    air_capacitance: Floats
    unknowns: int
    contacts: tuple[tuple[int, int], ...]
    start: Complexes
    end: Complexes
    owner: Ints
    air_charge: Floats


def _solve_region(region: Region, refine: float) -> _Found:
    pieces = pieces_of(region)
    if not np.any(pieces.owner != INTERFACE):
        return _nothing(len(region.members), pieces)
    mirror = mirror_of(pieces, len(region.section.conductors))
    axis = None if mirror is None else mirror.axis
    cells = cells_of(pieces if axis is None else cut_at(pieces, axis), region, refine=refine, left_of=axis)
    halves = 1 if mirror is None else 2
    if halves * len(cells.owner) > MOST_CELLS:
        raise ValueError(
            f"the section takes {halves * len(cells.owner)} cells, more than {MOST_CELLS}: its copper is wide for its "
            "height"
        )
    # copper first, then level interfaces, then others: blocks of rows alike are filled faster
    way = cells.end - cells.start
    order = np.argsort((cells.owner == INTERFACE) * (1 + (np.abs(way.imag) > 1e-9 * np.abs(way))), kind="stable")
    start, end, owner = cells.start[order], cells.end[order], cells.owner[order]
    left, right = cells.left[order], cells.right[order]
    copper = int(np.count_nonzero(owner != INTERFACE))
    between = np.nonzero((owner >= 0) & ~np.isnan(left) & ~np.isnan(right) & (left != right))[0]
    rows_flux = np.concatenate((np.arange(copper, len(owner)), between))
    centre, way, around = _placed(region, start, end)
    potential, flux = interaction(centre, way, copper, rows_flux, around, axis=axis)
    if region.bottom is None and region.top is not None:
        flux = -flux  # the region was turned over, and left and right with it
    members = np.array(region.members)
    owner = owner[:copper]
    volts = (owner[:, None] == members).astype(np.float64)
    open_below = not around.grounded
    if mirror is None:
        in_air, free = _charges(potential[0], flux[0], volts, left, right, between, open_below=open_below)
    else:
        start, end = (np.concatenate((one[:copper], 2.0 * mirror.axis - one[:copper].conj())) for one in (start, end))
        of_image = np.where(owner >= 0, mirror.image[owner], owner)
        volts_image = (of_image[:, None] == members).astype(np.float64)
        owner = np.concatenate((owner, of_image))
        even, odd = (
            _charges(
                potential[0] + sign * potential[1],
                flux[0] + sign * flux[1],
                (volts + sign * volts_image) / 2,
                left,
                right,
                between,
                open_below=open_below and sign > 0,  # odd charges sum up to zero anyhow
            )
            for sign in (1.0, -1.0)
        )
        in_air, free = (np.concatenate((one + other, one - other)) for one, other in zip(even, odd, strict=True))
        volts = np.concatenate((volts, volts_image))
    factor = 2.0 * np.pi * EPSILON_0
    capacitance, in_air_only = factor * (volts.T @ free), factor * (volts.T @ in_air)
    return _Found(
        capacitance=(capacitance + capacitance.T) / 2,
        air_capacitance=(in_air_only + in_air_only.T) / 2,
        unknowns=halves * len(cells.owner) + int(open_below),
        contacts=pieces.contacts,
        start=start[: len(owner)],
        end=end[: len(owner)],
        owner=owner,
        air_charge=factor * in_air,
    )


def _charges(
    potential: Floats,
    flux: Floats,
    volts: Floats,
    left: Complexes,
    right: Complexes,
    between: Ints,
    *,
    open_below: bool,
) -> tuple[Floats, Complexes]:
    """Charges on copper for given potentials in air, and the free ones with the dielectrics, over 2π ε0."""
    copper = len(potential)
    in_air, response = _copper_solution(potential[:, :copper], potential[:, copper:], volts, open_below=open_below)
    interfaces = len(left) - copper
    charge_copper, charge_interface = _with_dielectrics(
        in_air, response, flux[:interfaces], left[copper:], right[copper:]
    )
    left, right = left[:copper], right[:copper]
    outside = np.where(np.isnan(left), right, np.where(np.isnan(right), left, (left + right) / 2))
    free = outside[:, None] * charge_copper
    if len(between):
        every = np.concatenate((charge_copper, charge_interface))
        free[between] += (left - right)[between, None] * (flux[interfaces:] @ every) / (2 * np.pi)
    return in_air, free


def _nothing(members: int, pieces: Pieces) -> _Found:
    """A region whose copper all lies in its bounding planes."""
    none = np.zeros(0, dtype=np.complex128)
    return _Found(
        capacitance=np.zeros((members, members), dtype=np.complex128),
        air_capacitance=np.zeros((members, members)),
        unknowns=0,
        contacts=pieces.contacts,
        start=none,
        end=none,
        owner=np.zeros(0, dtype=np.int64),
        air_charge=np.zeros((0, members)),
    )


def _placed(region: Region, start: Complexes, end: Complexes) -> tuple[Complexes, Complexes, Surroundings]:
    """Centres and ways with the infinite plane at y = 0, turned over where the only one lies above."""
    centre, way = (start + end) / 2, end - start
    if region.bottom is not None:
        height = None if region.top is None else region.top - region.bottom
        return centre - 1j * region.bottom, way, Surroundings(grounded=True, height=height)
    if region.top is not None:
        return (centre - 1j * region.top).conj(), way.conj(), Surroundings(grounded=True)
    return centre, way, Surroundings(grounded=False)


def _copper_solution(own: Floats, interface: Floats, volts: Floats, *, open_below: bool) -> tuple[Floats, Floats]:
    """Charges on copper for the given potentials in air, and for unit charges on the interfaces at 0 V."""
    matrix = own
    wanted = np.concatenate((volts, interface), axis=1)
    if open_below:
        copper = len(own)
        matrix = np.zeros((copper + 1, copper + 1))
        matrix[:copper, :copper] = own
        matrix[copper, :copper] = matrix[:copper, copper] = 1.0
        total = np.concatenate((np.zeros(volts.shape[1]), np.ones(interface.shape[1])))
        wanted = np.concatenate((wanted, total[None, :]))
    found = np.linalg.solve(matrix, wanted)[: len(own)].astype(np.float64, copy=False)
    return found[:, : volts.shape[1]], found[:, volts.shape[1] :]


def _with_dielectrics(
    in_air: Floats, response: Floats, flux: Floats, left: Complexes, right: Complexes
) -> tuple[Complexes, Complexes]:
    """Charges on copper and interfaces; complex where the dielectrics have losses."""
    if not len(left):
        return in_air.astype(np.complex128), np.zeros((0, in_air.shape[1]), dtype=np.complex128)
    copper = len(in_air)
    ratio = (left - right) / (np.pi * (left + right))
    through = flux[:, copper:] - flux[:, :copper] @ response
    driven = flux[:, :copper] @ in_air
    matrix = ratio.real[:, None] * through
    matrix.flat[:: len(matrix) + 1] += 1.0
    interface: Complexes = np.linalg.solve(matrix, -ratio.real[:, None] * driven).astype(np.complex128)
    if np.any(ratio.imag):
        # loss tangents are small: what they add is in quadrature, and linear in them. Single precision serves for it
        added = -ratio.imag[:, None] * (driven + through @ interface.real)
        interface.imag = np.linalg.solve(matrix.astype(np.float32), added.astype(np.float32))
    return in_air - response @ interface, interface


def _air_charge(region: Region, found: _Found, count: int) -> AirCharge:
    metres = region.scale * 1e-3
    charge = np.zeros((len(found.owner), count))
    charge[:, list(region.members)] = found.air_charge
    return AirCharge(
        way=(found.end - found.start) * metres,
        owner=np.where(found.owner == PLANE, -1, found.owner),
        charge=charge,
        middle=(found.start + found.end) / 2 * metres,
        bottom=None if region.bottom is None else region.bottom * metres,
        top=None if region.top is None else region.top * metres,
    )


def _frozen(matrix: Floats) -> Floats:
    matrix.setflags(write=False)
    return matrix
