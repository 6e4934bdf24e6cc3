"""Sections that are their own mirror image: where that is seen, and that half the work comes to the same."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest

from pairrules.fields import solve
from pairrules.fields.boundary import pieces_of
from pairrules.fields.cross_section import CrossSection, Patch, Plane
from pairrules.fields.mirror import cut_at, mirror_of
from pairrules.fields.regions import regions_of
from tests.fields.sections import INF, all_sections, bar, mask_over, microstrip

SECTIONS = all_sections()


def with_all_kinds() -> CrossSection:
    """Copper across the axis, pours on both sides, a mask over all of it, a slot in the plane below."""
    return microstrip(
        w=(0.2, 0.2),
        s=0.4,
        h=0.2,
        er=4.3,
        t=0.035,
        extra=(
            bar("guard", -0.05, 0.05, 0.2, 0.235, "grounded"),
            bar("left", -1.5, -0.6, 0.2, 0.235, "grounded"),
            bar("right", 0.6, 1.5, 0.2, 0.235, "floating"),
        ),
        patches=(mask_over(-1.5, 1.5, 0.2, 0.235, 0.02, 3.5),),
        planes=(Plane(y=0.0, intervals=((-INF, -0.1), (0.1, INF))),),
    )


HALVES = {name: SECTIONS[name] for name in ("strips", "stripline", "mask both", "mask everywhere", "three layers")} | {
    "all kinds": with_all_kinds(),
    "shifted": microstrip(w=(0.2, 0.2), s=0.15, h=0.12, er=4.2, t=0.035, lean=0.01),
}


def images(section: CrossSection) -> list[list[int] | None]:
    found = [mirror_of(pieces_of(region), len(section.conductors)) for region in regions_of(section)]
    return [None if one is None else one.image.tolist() for one in found]


@pytest.mark.parametrize("name", HALVES)
def test_half_the_section_is_worth_the_whole(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    section = HALVES[name]
    assert None not in images(section)
    half = solve.solve_section(section, refine=2.0)
    monkeypatch.setattr(solve, "mirror_of", lambda *_: None)
    whole = solve.solve_section(section, refine=2.0)
    for one, other in ((half.C, whole.C), (half.Cair, whole.Cair), (half.G_per_omega, whole.G_per_omega)):
        # interfaces across the axis are divided otherwise, hence not to the last digit
        assert np.allclose(one, other, rtol=0.0, atol=2e-5 * np.abs(other).max())
    for a, b in zip(half.air, whole.air, strict=True):
        for place in {-1, *range(len(section.conductors))}:
            total = [air.charge[air.owner == place].sum(axis=0) for air in (a, b)]
            assert np.allclose(*total, rtol=0.0, atol=1e-4 * np.abs(b.charge).sum(axis=0).max())


def test_each_conductor_is_given_its_image() -> None:
    assert images(SECTIONS["mask both"]) == [[1, 0]]
    assert images(with_all_kinds()) == [[1, 0, 2, 4, 3]]
    assert images(SECTIONS["three layers"]) == [[1, 0]]


@pytest.mark.parametrize(
    "name", ["mask one leg", "slot under one leg", "plane ends", "pour one side", "unequal strips"]
)
def test_symmetry_is_not_seen_where_there_is_none(name: str) -> None:
    assert images(SECTIONS[name]) == [None]


def test_what_dielectric_lies_where_counts() -> None:
    patch = Patch(er=3.0, polygon=((-0.3, 0.2), (0.0, 0.2), (0.0, 0.3)))
    assert images(dataclasses.replace(SECTIONS["strips"], patches=(patch,))) == [None]
    over = Patch(er=3.0, polygon=((-0.6, 0.1), (0.2, 0.1), (0.2, 0.4), (-0.6, 0.4)))
    under = dataclasses.replace(over, er=2.0, polygon=tuple((-x, y) for x, y in over.polygon))
    # outlines alone are mirrored here, but one patch is painted over the other
    assert images(dataclasses.replace(SECTIONS["strips"], patches=(under, over))) == [None]


def test_pieces_across_the_axis_are_cut_there() -> None:
    (region,) = regions_of(SECTIONS["strips"])
    pieces = pieces_of(region)
    mirror = mirror_of(pieces, 2)
    assert mirror is not None
    cut = cut_at(pieces, mirror.axis)
    across = (np.minimum(cut.start.real, cut.end.real) < mirror.axis - 1e-8) & (
        np.maximum(cut.start.real, cut.end.real) > mirror.axis + 1e-8
    )
    assert not np.any(across)
    assert np.abs(cut.end - cut.start).sum() == pytest.approx(np.abs(pieces.end - pieces.start).sum(), rel=1e-12)
    assert np.count_nonzero(cut.far) == np.count_nonzero(pieces.far)
