"""Splits a cross-section at its infinite planes: nothing on one side of such a plane is felt on the other."""

from __future__ import annotations

import itertools

from pairrules.fields.boundary import Region
from pairrules.fields.cross_section import CrossSection

_REACH_OPEN = 16.0  # how far open interfaces and planes are followed, in sizes of what stands in the region
_REACH_SHUT = 4.0  # the same between two infinite planes, in distances of the planes: e^(−4π) is 4e−6


def regions_of(section: CrossSection) -> tuple[Region, ...]:
    """The regions that hold conductors, from the lowest up.

    Raises
    ------
    ValueError: where a conductor touches an infinite plane or reaches through it.
    """
    heights = sorted({plane.y for plane in section.planes if plane.infinite})
    bounds = [None, *heights, None]
    found = []
    placed: set[int] = set()
    for bottom, top in itertools.pairwise(bounds):
        members = tuple(
            place
            for place, conductor in enumerate(section.conductors)
            if (bottom is None or conductor.y_range[0] >= bottom)
            and (top is None or conductor.y_range[1] <= top)
            and place not in placed
        )
        placed.update(members)
        if members:
            found.append(_region(section, members, bottom, top))
    for place, conductor in enumerate(section.conductors):
        if place not in placed:
            raise ValueError(f"conductor {conductor.name!r} reaches through an infinite plane")
    return tuple(found)


def _region(section: CrossSection, members: tuple[int, ...], bottom: float | None, top: float | None) -> Region:
    for place in members:
        conductor = section.conductors[place]
        if conductor.role != "grounded" and (conductor.y_range[0] == bottom or conductor.y_range[1] == top):
            raise ValueError(f"conductor {conductor.name!r} touches an infinite plane")
    heights = [y for place in members for y in section.conductors[place].y_range]
    sides = [x for place in members for x in section.conductors[place].x_range]
    for plane in section.planes:
        if not plane.infinite and (bottom is None or plane.y > bottom) and (top is None or plane.y < top):
            heights.append(plane.y)
            sides += [x for stretch in plane.intervals or () for x in stretch if abs(x) != float("inf")]
    for patch in section.patches:
        sides += [x for x, _ in patch.polygon]
    heights += [y for layer in section.layers for y in (layer.y0, layer.y1)]
    heights += [bound for bound in (bottom, top) if bound is not None]
    low = max(min(heights), bottom) if bottom is not None else min(heights)
    high = min(max(heights), top) if top is not None else max(heights)
    tall, wide = high - low, max(sides) - min(sides)
    scale = max(tall, wide)
    if bottom is not None and top is not None:
        reach = _REACH_SHUT * (top - bottom)
    else:
        reach = _REACH_OPEN * (tall if bottom is not None or top is not None else scale)
    return Region(
        section=section,
        members=members,
        bottom=None if bottom is None else bottom / scale,
        top=None if top is None else top / scale,
        scale=scale,
        x_range=(min(sides) / scale, max(sides) / scale),
        reach=reach / scale,
    )
