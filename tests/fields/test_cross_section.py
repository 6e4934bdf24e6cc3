"""Records of a cross-section refuse what cannot be, and say what a conductor measures."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest

from pairrules.fields.cross_section import Conductor, CrossSection, Layer, Patch, Plane, signed_area
from tests.fields.sections import bar, strip

SQUARE = ((0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0))


def test_measures_of_a_conductor() -> None:
    one = bar("a", 0.0, 0.3, 0.2, 0.235, lean=0.01)
    assert one.x_range == (0.0, 0.3)
    assert one.y_range == (0.2, 0.235)
    assert one.area_mm2 == pytest.approx(0.29 * 0.035)
    flat = strip("b", 0.0, 0.3, 0.2)
    assert (flat.x_range, flat.y_range, flat.area_mm2) == ((0.0, 0.3), (0.2, 0.2), 0.0)


def test_area_has_the_sign_of_the_way_round() -> None:
    assert signed_area(SQUARE) == 1.0
    assert signed_area(SQUARE[::-1]) == -1.0


def test_signals_keep_their_order() -> None:
    section = CrossSection(conductors=(bar("g", 5, 6, 0, 1, "grounded"), bar("p", 0, 1, 0, 1), bar("m", 2, 3, 0, 1)))
    assert section.signals == (1, 2)


def test_a_plane_without_ends_is_infinite() -> None:
    assert Plane(y=0.0).infinite
    assert Plane(y=0.0, intervals=((-math.inf, math.inf),)).infinite
    assert not Plane(y=0.0, intervals=((-math.inf, 1.0),)).infinite


@pytest.mark.parametrize(
    ("build", "sentence"),
    [
        (lambda: Layer(y0=1.0, y1=1.0, er=4.0), "y0 = 1 is not below y1 = 1"),
        (lambda: Layer(y0=0.0, y1=math.inf, er=4.0), "y0, y1 must be finite"),
        (lambda: Layer(y0=0.0, y1=1.0, er=0.9), "er = 0.9 is no relative permittivity; give 1 or more"),
        (lambda: Layer(y0=0.0, y1=1.0, er=math.nan), "er = nan is no relative permittivity; give 1 or more"),
        (lambda: Layer(y0=0.0, y1=1.0, er=4.0, loss_tangent=1.0), "loss_tangent = 1 is not within 0 and 1"),
        (lambda: Patch(polygon=SQUARE[:2], er=4.0), "a polygon of 2 corners encloses nothing; give three or more"),
        (lambda: Patch(polygon=((0, 0), (1, 1), (2, 2)), er=4.0), "the polygon encloses no area"),
        (lambda: Patch(polygon=((0, 0), (1, math.nan), (2, 2)), er=4.0), "polygon must be finite"),
        (lambda: Plane(y=math.nan), "y must be finite"),
        (lambda: Plane(y=0.0, intervals=((1.0, 0.0),)), "x[0] does not run from a smaller to a greater x"),
        (lambda: Plane(y=0.0, intervals=((0, 2), (1, 3))), "x[1] starts before the stretch left of it ends"),
        (lambda: Conductor(name="a", role="signal"), "a conductor has either a polygon or a strip"),
        (lambda: Conductor(name="a", role="hot", strip=(0, 1, 0)), "role 'hot' is none of signal, grounded, floating"),  # type: ignore[arg-type]
        (lambda: strip("a", 1, 1, 0), "strip runs from 1 to 1, not to a greater x"),
        (lambda: CrossSection(conductors=()), "a section needs at least one conductor"),
        (lambda: CrossSection(conductors=(strip("a", 0, 1, 0),) * 2), "conductor name 'a' stands more than once"),
    ],
)
def test_refused(build: Callable[[], object], sentence: str) -> None:
    with pytest.raises(ValueError) as caught:
        build()
    assert str(caught.value) == sentence
