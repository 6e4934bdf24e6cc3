"""Laws that any field solution of a cross-section obeys, whatever its numbers."""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest

from pairrules.fields.cross_section import Conductor, CrossSection, Layer, Patch, Plane
from pairrules.fields.solve import solve_section
from tests.fields.closeness import near
from tests.fields.sections import INF, all_sections, bar, contract_example, microstrip, strip, stripline

SECTIONS = all_sections()
WITH_PLANE = sorted(name for name, section in SECTIONS.items() if section.planes)


def scaled(section: CrossSection, factor: float, *, mirror: bool = False, shift: float = 0.0) -> CrossSection:
    """The section in another size, moved sideways, or seen in a mirror."""
    sign = -1.0 if mirror else 1.0

    def x(value: float) -> float:
        return sign * value * factor + shift

    def points(polygon: tuple[tuple[float, float], ...]) -> tuple[tuple[float, float], ...]:
        return tuple((x(a), b * factor) for a, b in polygon)

    def conductor(c: Conductor) -> Conductor:
        if c.strip is not None:
            a, b = sorted((x(c.strip[0]), x(c.strip[1])))
            return Conductor(name=c.name, role=c.role, strip=(a, b, c.strip[2] * factor))
        return Conductor(name=c.name, role=c.role, polygon=points(c.polygon or ()))

    def plane(p: Plane) -> Plane:
        if p.intervals is None:
            return Plane(y=p.y * factor)
        ends = [sorted((x(a), x(b))) for a, b in p.intervals]
        return Plane(y=p.y * factor, intervals=tuple(sorted((a, b) for a, b in ends)))

    return CrossSection(
        id=section.id,
        layers=tuple(
            dataclasses.replace(layer, y0=layer.y0 * factor, y1=layer.y1 * factor) for layer in section.layers
        ),
        patches=tuple(dataclasses.replace(patch, polygon=points(patch.polygon)) for patch in section.patches),
        planes=tuple(plane(p) for p in section.planes),
        conductors=tuple(conductor(c) for c in section.conductors),
    )


@pytest.mark.parametrize("name", sorted(SECTIONS))
def test_matrices_are_those_of_a_passive_network(name: str) -> None:
    solved = solve_section(SECTIONS[name])
    for matrix in (solved.C, solved.Cair):
        assert np.array_equal(matrix, matrix.T)
        off = matrix - np.diag(np.diag(matrix))
        assert np.all(off <= 1e-4 * np.diag(matrix).max())
        assert np.all(np.diag(matrix) + off.sum(axis=1) > -1e-4 * np.diag(matrix))
        if SECTIONS[name].planes:
            assert np.all(np.linalg.eigvalsh(matrix) > 0.0)
    assert np.all(np.diag(solved.C) > np.diag(solved.Cair))  # each of these sections has a dielectric
    assert np.all(np.linalg.eigvalsh(solved.G_per_omega) >= -1e-6 * np.diag(solved.C).max())


@pytest.mark.parametrize("name", ["bars", "mask one leg", "slot under one leg", "pours, no plane", "contract"])
def test_twice_the_cells_shrink_the_error_eightfold(name: str) -> None:
    fine = solve_section(SECTIONS[name], refine=4.0)
    errors = [
        np.max(np.abs(solve_section(SECTIONS[name], refine=refine).C - fine.C)) / np.max(fine.C)
        for refine in (0.5, 1.0)
    ]
    assert errors[1] < errors[0] / 4.0
    assert errors[1] < 1e-3


@pytest.mark.parametrize(
    ("w", "s", "h", "er", "c11", "c12", "c22"),
    [
        ((0.4, 0.25), 0.1, 0.2, 4.3, 127.57692, -17.96529, 96.98664),
        ((0.2, 0.2), 0.2, 0.2, 4.2, 81.42, -8.424, 81.42),
        ((0.3, 0.3), 0.15, 0.2, 4.2, 102.8, -12.44, 102.8),
    ],
)
def test_strips_of_no_thickness_worked_out_beforehand(
    w: tuple[float, float], s: float, h: float, er: float, c11: float, c12: float, c22: float
) -> None:
    """Values of another moment-method program, converged there to the digits given; no published source."""
    found = solve_section(microstrip(w=w, s=s, h=h, er=er)).C * 1e12
    assert found == pytest.approx(np.array([[c11, c12], [c12, c22]]), abs=1e-3 * c11)


@pytest.mark.parametrize("name", ["strips", "contract", "plane ends", "pours, no plane", "two dielectrics"])
def test_size_place_and_mirror_change_nothing(name: str) -> None:
    section = SECTIONS[name]
    one = solve_section(section)
    for other in (scaled(section, 1 / 0.0254), scaled(section, 1.0, mirror=True), scaled(section, 1.0, shift=37.0)):
        again = solve_section(other)
        assert near(one.C, 2e-6) == again.C
        assert again.Cair == near(one.Cair, 2e-6)


def test_swapping_the_legs_swaps_the_matrices() -> None:
    section = contract_example()
    a, b, *rest = section.conductors
    swapped = dataclasses.replace(section, conductors=(b, a, *rest))
    one, other = solve_section(section).pair, solve_section(swapped).pair
    assert one is not None
    assert other is not None
    assert near(one.C[::-1, ::-1], 1e-9) == other.C
    assert other.capacitance_tilt == pytest.approx(-one.capacitance_tilt, rel=1e-9)
    assert other.impedance_diff_ohm == pytest.approx(one.impedance_diff_ohm, rel=1e-9)


@pytest.mark.parametrize(
    "name", ["strips", "stripline", "mask both", "mask everywhere", "thin prepreg", "three layers"]
)
def test_a_symmetric_section_has_no_tilt(name: str) -> None:
    for shift in (0.0, 12.345, -310.07):  # far from x = 0 rounding makes the mesh a little unlike left and right
        pair = solve_section(scaled(SECTIONS[name], 1.0, shift=shift)).pair
        assert pair is not None
        assert abs(pair.capacitance_tilt) < 1e-12
        assert pair.inductance_tilt is not None
        assert abs(pair.inductance_tilt) < 1e-12


def test_a_far_conductor_changes_nothing() -> None:
    alone = microstrip(w=(0.2, 0.25), s=0.15, h=0.12, er=4.2, t=0.035)
    far = dataclasses.replace(alone, conductors=(*alone.conductors, bar("far", 20.0, 20.5, 0.12, 0.155, "grounded")))
    assert solve_section(far).C[:2, :2] == near(solve_section(alone).C, 3e-5)


def test_a_neighbour_takes_capacitance_from_the_plane() -> None:
    section = SECTIONS["pour one side"]
    beside = solve_section(section)
    alone = solve_section(dataclasses.replace(section, conductors=section.conductors[:2]))
    tilted = beside.pair
    assert tilted is not None
    assert tilted.capacitance_tilt < -1e-3  # the pour lies beside minus
    assert beside.C[0, 1] > alone.C[0, 1]
    assert beside.C[1, 1] > 1.01 * alone.C[1, 1]


def test_a_uniform_dielectric_multiplies_the_capacitance_of_air() -> None:
    section = stripline(w=0.3, s=0.1, b=1.0, er=4.2)
    solved = solve_section(section)
    assert near(4.2 * solved.Cair, 1e-12) == solved.C
    assert solved.pair is not None
    assert solved.pair.er_modes == pytest.approx((4.2, 4.2), rel=1e-9)


def test_two_layers_alike_are_one() -> None:
    one = microstrip(w=(0.2, 0.2), s=0.2, h=0.2, er=4.2)
    halves = tuple(dataclasses.replace(one.layers[0], y0=a, y1=b) for a, b in ((0.0, 0.08), (0.08, 0.2)))
    two = dataclasses.replace(one, layers=halves)
    assert near(solve_section(one).C, 1e-12) == solve_section(two).C


def test_a_patch_is_painted_over_a_layer() -> None:
    plain = microstrip(w=(0.2, 0.2), s=0.2, h=0.2, er=4.2)
    patch = Patch(er=4.2, polygon=((-50.0, 0.0), (50.0, 0.0), (50.0, 0.2), (-50.0, 0.2)))
    painted = dataclasses.replace(plain, layers=(dataclasses.replace(plain.layers[0], er=3.0),), patches=(patch,))
    assert near(solve_section(plain).C, 1e-4) == solve_section(painted).C


def test_regions_parted_by_a_plane_do_not_see_each_other() -> None:
    section = CrossSection(
        planes=(Plane(y=0.0), Plane(y=1.0)),
        conductors=(strip("plus", -0.2, 0.2, 0.5), strip("minus", -0.2, 0.2, 1.5)),
    )
    solved = solve_section(section)
    assert solved.C[0, 1] == 0.0
    above = solve_section(CrossSection(planes=(Plane(y=1.0),), conductors=section.conductors[1:]))
    below = solve_section(CrossSection(planes=section.planes, conductors=section.conductors[:1]))
    assert solved.C[1, 1] == near(above.C[0, 0], 1e-12)
    assert solved.C[0, 0] == near(below.C[0, 0], 1e-12)


def test_upside_down_is_the_same() -> None:
    """A strip under its plane, with the laminate between, is a strip over its plane."""
    over = microstrip(w=(0.2, 0.3), s=0.2, h=0.2, er=4.2)
    under = CrossSection(
        layers=(Layer(y0=-0.2, y1=0.0, er=4.2, loss_tangent=0.02),),
        planes=(Plane(y=0.0),),
        conductors=(strip("plus", -0.3, -0.1, -0.2), strip("minus", 0.1, 0.4, -0.2)),
    )
    assert near(solve_section(over).C, 1e-9) == solve_section(under).C
    assert solve_section(under).G_per_omega == near(solve_section(over).G_per_omega, 1e-5)


def test_a_very_wide_plane_is_an_infinite_one() -> None:
    """Two ways to the same field: images, and cells on the plane."""
    whole = SECTIONS["bars"]
    wide = dataclasses.replace(whole, planes=(Plane(y=0.0, intervals=((-4000.0, 4000.0),)),))
    assert near(solve_section(whole).C, 6e-4) == solve_section(wide).C
    closed = dataclasses.replace(whole, planes=(Plane(y=0.0, intervals=((-INF, 0.05), (0.05, INF))),))
    assert near(solve_section(whole).C, 6e-4) == solve_section(closed).C


def test_a_floating_conductor_carries_no_charge() -> None:
    section = SECTIONS["floating neighbour"]
    solved = solve_section(section)
    assert solved.pair is not None
    c = solved.C
    volts = -c[2, :2] / c[2, 2]
    assert near(c[:2, :2] + np.outer(c[:2, 2], volts), 1e-9) == solved.pair.C


def test_conductance_follows_the_loss_tangent() -> None:
    section = stripline(w=0.3, s=0.1, b=1.0, er=4.2)
    lossy = dataclasses.replace(section, layers=(dataclasses.replace(section.layers[0], loss_tangent=0.02),))
    solved = solve_section(lossy)
    assert solved.G_per_omega == near(0.02 * solved.C, 1e-6)
    half = solve_section(microstrip(w=(0.2, 0.2), s=0.2, h=0.2, er=4.2))
    assert np.all(np.diag(half.G_per_omega) < 0.02 * np.diag(half.C))  # air has no losses
    assert np.all(np.diag(half.G_per_omega) > 0.016 * np.diag(half.C))


def test_the_same_section_gives_the_same_bytes() -> None:
    one, other = solve_section(contract_example()), solve_section(contract_example())
    assert one.C.tobytes() == other.C.tobytes()
    assert one.G_per_omega.tobytes() == other.G_per_omega.tobytes()


def test_no_return_leaves_the_common_mode_unknown() -> None:
    pair = solve_section(SECTIONS["no return"]).pair
    assert pair is not None
    assert pair.L is None
    assert pair.impedance_common_ohm is None
    assert pair.inductance_tilt is None
    assert pair.impedance_diff_ohm > 0.0
    assert pair.C.sum() == pytest.approx(0.0, abs=1e-3 * pair.C[0, 0])


def test_impedances_are_those_of_the_definitions() -> None:
    pair = solve_section(SECTIONS["unequal strips"]).pair
    assert pair is not None
    assert pair.L is not None
    assert pair.impedance_common_ohm is not None
    one = np.array([1.0, 1.0])
    half = np.array([0.5, -0.5])
    cdd, ccc = half @ pair.C @ half, one @ pair.C @ one
    apart = np.array([1.0, -1.0])
    ldd, lcc = apart @ pair.L @ apart, one @ pair.L @ one / 4
    assert pair.impedance_diff_ohm == pytest.approx(math.sqrt(ldd / cdd), rel=1e-12)
    assert pair.impedance_common_ohm == pytest.approx(math.sqrt(lcc / ccc), rel=1e-12)


@pytest.mark.parametrize(
    ("conductors", "sentence"),
    [
        ((bar("a", 0, 1, 1, 2), bar("b", 0.5, 1.5, 1.5, 2.5)), "conductor 'b' and conductor 'a' touch"),
        ((bar("a", 0, 1, 1, 2), bar("b", 1, 2, 1, 2)), "conductor 'b' and conductor 'a' touch"),
        ((bar("a", 0, 1, 1, 2), bar("b", 1, 2, 2, 3)), "conductor 'b' and conductor 'a' touch"),
        ((strip("a", 0, 1, 1), strip("b", 1, 1.5, 1)), "conductor 'b' and conductor 'a' touch"),
        ((strip("a", 0, 1, 1), bar("b", 1, 2, 0.5, 2, "grounded")), "conductor 'b' and conductor 'a' touch"),
        ((strip("a", 0, 1, 1), strip("b", 0.5, 1.5, 1)), "conductor 'b' and conductor 'a' touch"),
        ((bar("a", 0, 3, 1, 3), bar("b", 1, 2, 1.5, 2.5)), "conductor 'b' and conductor 'a' touch"),
        ((bar("a", 0, 1, -1, 1),), "conductor 'a' reaches through an infinite plane"),
        ((bar("a", 0, 1, 0, 1),), "conductor 'a' touches an infinite plane"),
        (
            (Conductor(name="a", role="signal", polygon=((0, 1), (1, 2), (1, 1), (0, 2.5))),),
            "the outline of conductor 'a' crosses itself",
        ),
    ],
)
def test_copper_that_cannot_be(conductors: tuple[Conductor, ...], sentence: str) -> None:
    with pytest.raises(ValueError) as caught:
        solve_section(CrossSection(conductors=conductors, planes=(Plane(y=0.0),)))
    assert str(caught.value) == sentence


def test_a_leg_must_not_touch_a_plane_that_ends() -> None:
    section = CrossSection(
        conductors=(bar("a", 0, 1, 1, 2), bar("b", 3, 4, 1, 2)), planes=(Plane(y=1.5, intervals=((-INF, 0.5),)),)
    )
    with pytest.raises(ValueError) as caught:
        solve_section(section)
    assert str(caught.value) == "conductor 'a' and a plane touch"


def test_grounded_copper_that_lies_in_a_plane_is_the_plane() -> None:
    bare = SECTIONS["strips"]
    flat = dataclasses.replace(bare, conductors=(*bare.conductors, strip("flat", 0.0, 1.0, 0.0, "grounded")))
    solved = solve_section(flat)
    assert solved.joined == ("flat",)
    assert np.isnan(solved.C[2, 2])
    assert solved.C[:2, :2] == near(solve_section(bare).C, 1e-9)


def test_grounded_copper_may_touch_planes_and_itself() -> None:
    walls = (bar("wall", 1, 2, 0, 2, "grounded"), bar("lid", 1.5, 3, 1, 2, "grounded"))
    section = CrossSection(
        conductors=(strip("plus", -2, -1, 1), strip("minus", -0.5, 0.5, 1), *walls), planes=(Plane(y=0.0),)
    )
    solved = solve_section(section)
    assert solved.joined == ("wall", "lid")
    assert np.all(np.isnan(solved.C[2:, 2:]))
    assert np.all(np.isfinite(solved.C[:2]))
    assert solved.pair is not None
    joined = Conductor(name="wall", role="grounded", polygon=((1, 0), (2, 0), (2, 1), (3, 1), (3, 2), (1, 2)))
    whole = solve_section(dataclasses.replace(section, conductors=(*section.conductors[:2], joined)))
    assert solved.C[:2, :2] == near(whole.C[:2, :2], 1e-3)
