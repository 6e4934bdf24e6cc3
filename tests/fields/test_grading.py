"""Cells of a boundary: they cover it, crowd where they should, and mirror where the section does."""

from __future__ import annotations

import numpy as np
import pytest

from pairrules.fields.boundary import INTERFACE, PLANE, pieces_of
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.grading import Cells, cells_of
from pairrules.fields.regions import regions_of
from tests.fields.sections import all_sections

SECTIONS = all_sections()


def meshed(section: CrossSection, refine: float = 1.0) -> tuple[Cells, float]:
    (region,) = regions_of(section)
    return cells_of(pieces_of(region), region, refine=refine), region.scale


@pytest.mark.parametrize("name", sorted(SECTIONS))
def test_cells_cover_the_copper_once(name: str) -> None:
    section = SECTIONS[name]
    cells, scale = meshed(section)
    length = np.abs(cells.end - cells.start) * scale
    assert np.all(length > 0.0)
    for place, conductor in enumerate(section.conductors):
        if conductor.strip is not None:
            expected = conductor.strip[1] - conductor.strip[0]
        else:
            corners = np.array(conductor.polygon) @ np.array([1, 1j])
            expected = float(np.abs(np.roll(corners, -1) - corners).sum())
        assert length[cells.owner == place].sum() == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("name", sorted(SECTIONS))
def test_dielectrics_beside_the_cells_are_those_of_the_section(name: str) -> None:
    section = SECTIONS[name]
    cells, _ = meshed(section)
    known = {1.0} | {layer.er for layer in section.layers} | {patch.er for patch in section.patches}
    on = cells.owner == INTERFACE
    assert np.all(cells.left[on] != cells.right[on])
    sides = np.concatenate((cells.left, cells.right))
    assert set(np.unique(sides[~np.isnan(sides)].real).tolist()) <= known
    polygons = [place for place, conductor in enumerate(section.conductors) if conductor.polygon is not None]
    inside = np.isin(cells.owner, polygons)
    assert np.all(np.isnan(cells.left[inside]))  # outlines run counter-clockwise: copper on the left
    assert not np.any(np.isnan(cells.right))


@pytest.mark.parametrize("name", ["strips", "mask both", "thin prepreg", "stripline"])
def test_a_mirrored_section_has_a_mirrored_mesh(name: str) -> None:
    cells, _ = meshed(SECTIONS[name])
    middle = (cells.start + cells.end) / 2
    one = np.sort_complex(np.round(middle, 9) + 0)
    other = np.sort_complex(np.round(-middle.conj(), 9) + 0)
    assert np.max(np.abs(one - other)) < 1e-8


def test_neighbouring_cells_grow_gently() -> None:
    cells, scale = meshed(SECTIONS["contract"])
    for owner in (0, 1, 2, PLANE, INTERFACE):
        on = cells.owner == owner
        start, end = cells.start[on], cells.end[on]
        joined = np.abs(end[:-1] - start[1:]) * scale < 1e-9
        size = np.abs(end - start)
        ratio = np.maximum(size[1:] / size[:-1], size[:-1] / size[1:])[joined]
        assert np.median(ratio) < 2.0
        assert np.max(ratio) < 12.0  # the first two cells at a corner stand 1 : 7, as x ∝ t³ has it


def test_refining_multiplies_the_cells() -> None:
    counts = [len(meshed(SECTIONS["contract"], refine)[0].start) for refine in (1.0, 2.0, 4.0)]
    assert counts[1] == pytest.approx(2 * counts[0], rel=0.1)
    assert counts[2] == pytest.approx(4 * counts[0], rel=0.1)


def test_cells_are_small_where_copper_comes_close_to_a_plane_that_is_cut() -> None:
    cells, scale = meshed(SECTIONS["plane ends"])
    under = (cells.owner == PLANE) & (np.abs((cells.start + cells.end).real / 2 * scale) < 0.275)
    assert np.max(np.abs(cells.end - cells.start)[under]) * scale < 0.2 / 2.5
