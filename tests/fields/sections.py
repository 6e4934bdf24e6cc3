"""Sections that the tests of the field solution share, each under a name that says what is odd about it; in mm."""

from __future__ import annotations

import math

from pairrules.fields.cross_section import Conductor, CrossSection, Layer, Patch, Plane, Role

INF = math.inf


def strip(name: str, x0: float, x1: float, y: float, role: Role = "signal") -> Conductor:
    return Conductor(name=name, role=role, strip=(x0, x1, y))


def bar(
    name: str, x0: float, x1: float, y0: float, y1: float, role: Role = "signal", *, lean: float = 0.0
) -> Conductor:
    """A rectangle, or a trapezoid whose top is narrower by `lean` on either side."""
    return Conductor(name=name, role=role, polygon=((x0, y0), (x1, y0), (x1 - lean, y1), (x0 + lean, y1)))


def mask_over(x0: float, x1: float, y0: float, y1: float, thickness: float, er: float) -> Patch:
    """Solder mask that follows a bar: its outline, `thickness` further out, standing on the laminate."""
    return Patch(
        er=er,
        loss_tangent=0.025,
        polygon=(
            (x0 - thickness, y0),
            (x1 + thickness, y0),
            (x1 + thickness, y1 + thickness),
            (x0 - thickness, y1 + thickness),
        ),
    )


def stripline(*, w: float, s: float, b: float, er: float) -> CrossSection:
    """Two strips of no thickness midway between two planes."""
    return CrossSection(
        id="stripline",
        layers=(Layer(y0=0.0, y1=b, er=er),),
        planes=(Plane(y=0.0), Plane(y=b)),
        conductors=(strip("plus", -s / 2 - w, -s / 2, b / 2), strip("minus", s / 2, s / 2 + w, b / 2)),
    )


def microstrip(
    *,
    w: tuple[float, float],
    s: float,
    h: float,
    er: float,
    t: float = 0.0,
    lean: float = 0.0,
    extra: tuple[Conductor, ...] = (),
    patches: tuple[Patch, ...] = (),
    planes: tuple[Plane, ...] | None = None,
    name: str = "microstrip",
) -> CrossSection:
    """Two legs on a laminate over a plane."""
    if t:
        legs = (
            bar("plus", -s / 2 - w[0], -s / 2, h, h + t, lean=lean),
            bar("minus", s / 2, s / 2 + w[1], h, h + t, lean=lean),
        )
    else:
        legs = (strip("plus", -s / 2 - w[0], -s / 2, h), strip("minus", s / 2, s / 2 + w[1], h))
    return CrossSection(
        id=name,
        layers=(Layer(y0=0.0, y1=h, er=er, loss_tangent=0.02),),
        patches=patches,
        planes=(Plane(y=0.0),) if planes is None else planes,
        conductors=(*legs, *extra),
    )


def contract_example() -> CrossSection:
    """Mask over one leg, a slotted plane above, a grounded pour on one side."""
    return CrossSection(
        id="one side poured",
        layers=(Layer(y0=0.0, y1=0.2, er=4.3, loss_tangent=0.02),),
        patches=(Patch(er=3.4, polygon=((-0.42, 0.2), (-0.08, 0.2), (-0.08, 0.25), (-0.42, 0.25))),),
        planes=(Plane(y=0.0), Plane(y=0.4, intervals=((-INF, 0.05), (0.3, INF)))),
        conductors=(
            bar("plus", -0.4, -0.1, 0.2, 0.235),
            strip("minus", 0.1, 0.4, 0.2),
            bar("pour", 0.6, 2.0, 0.2, 0.235, "grounded"),
        ),
    )


def two_dielectrics() -> CrossSection:
    """Stripline whose copper stands on a core and is pressed into a prepreg of another permittivity."""
    return CrossSection(
        id="two dielectrics",
        layers=(Layer(y0=0.0, y1=0.2, er=4.5, loss_tangent=0.02), Layer(y0=0.2, y1=0.41, er=3.6, loss_tangent=0.01)),
        planes=(Plane(y=0.0), Plane(y=0.41)),
        conductors=(bar("plus", -0.25, -0.1, 0.2, 0.218), bar("minus", 0.1, 0.25, 0.2, 0.218)),
    )


def all_sections() -> dict[str, CrossSection]:
    """Every kind of section that boards show, the odd ones too."""
    thin = microstrip(w=(0.1, 0.1), s=0.1, h=0.06, er=4.2, t=0.035, lean=0.01)
    mask = tuple(mask_over(x, x + 0.15, 0.12, 0.155, 0.022, 3.5) for x in (-0.225, 0.075))
    slab_mask = Patch(er=3.4, polygon=((-4.0, 0.12), (4.0, 0.12), (4.0, 0.145), (-4.0, 0.145)))
    under = Plane(y=0.0, intervals=((-INF, 0.2),))
    return {
        "stripline": stripline(w=0.3, s=0.1, b=1.0, er=4.2),
        "stripline tight": stripline(w=0.15, s=0.05, b=0.3, er=3.8),
        "stripline wide": stripline(w=3.0, s=0.2, b=0.4, er=4.0),
        "unequal strips": microstrip(w=(0.4, 0.25), s=0.1, h=0.2, er=4.3),
        "strips": microstrip(w=(0.2, 0.2), s=0.2, h=0.2, er=4.2),
        "bars": microstrip(w=(0.2, 0.25), s=0.15, h=0.12, er=4.2, t=0.035),
        "trapezoids": microstrip(w=(0.2, 0.22), s=0.15, h=0.12, er=4.2, t=0.035, lean=0.012),
        "thin prepreg": thin,
        "wide legs": microstrip(w=(3.0, 2.9), s=0.2, h=0.2, er=4.4, t=0.035),
        "narrow gap": microstrip(w=(0.15, 0.16), s=0.05, h=0.1, er=4.1, t=0.018),
        "high": microstrip(w=(0.25, 0.3), s=0.2, h=1.5, er=4.5, t=0.035),
        "mask both": microstrip(w=(0.15, 0.15), s=0.15, h=0.12, er=4.2, t=0.035, patches=mask),
        "mask one leg": microstrip(w=(0.15, 0.15), s=0.15, h=0.12, er=4.2, t=0.035, patches=mask[:1]),
        "mask everywhere": microstrip(w=(0.15, 0.15), s=0.15, h=0.12, er=4.2, t=0.035, patches=(slab_mask, *mask)),
        "pour one side": microstrip(
            w=(0.2, 0.2), s=0.15, h=0.15, er=4.3, t=0.035, extra=(bar("pour", 0.375, 3.0, 0.15, 0.185, "grounded"),)
        ),
        "floating neighbour": microstrip(
            w=(0.2, 0.2), s=0.15, h=0.15, er=4.3, t=0.035, extra=(bar("loose", 0.4, 0.6, 0.15, 0.185, "floating"),)
        ),
        "pours, no plane": microstrip(
            w=(0.2, 0.2),
            s=0.15,
            h=1.0,
            er=4.3,
            t=0.035,
            planes=(),
            extra=(bar("left", -3.0, -0.375, 1.0, 1.035, "grounded"), bar("right", 0.425, 3.0, 1.0, 1.035, "grounded")),
        ),
        "no return": microstrip(w=(0.2, 0.25), s=0.15, h=1.0, er=4.3, t=0.035, planes=()),
        "plane ends": microstrip(w=(0.2, 0.2), s=0.15, h=0.2, er=4.3, t=0.035, planes=(under,)),
        "plane ends beside": microstrip(
            w=(0.2, 0.2), s=0.15, h=0.2, er=4.3, planes=(Plane(y=0.0, intervals=((-INF, 0.5),)),)
        ),
        "slot under one leg": microstrip(
            w=(0.2, 0.2), s=0.2, h=0.2, er=4.3, t=0.035, planes=(Plane(y=0.0, intervals=((-INF, 0.1), (0.3, INF))),)
        ),
        "slot, plane below": CrossSection(
            layers=(Layer(y0=-0.5, y1=0.2, er=4.3),),
            planes=(Plane(y=-0.5), Plane(y=0.0, intervals=((-INF, 0.05), (0.35, INF)))),
            conductors=(bar("plus", -0.3, -0.1, 0.2, 0.235), bar("minus", 0.1, 0.3, 0.2, 0.235)),
        ),
        "two dielectrics": two_dielectrics(),
        "strip on an interface": CrossSection(
            layers=(Layer(y0=0.0, y1=0.2, er=4.5, loss_tangent=0.02), Layer(y0=0.2, y1=0.41, er=3.0)),
            planes=(Plane(y=0.0), Plane(y=0.41)),
            conductors=(strip("plus", -0.25, -0.1, 0.2), strip("minus", 0.1, 0.3, 0.2)),
        ),
        "three layers": CrossSection(
            layers=(Layer(y0=0.0, y1=0.1, er=4.5), Layer(y0=0.1, y1=0.2, er=3.6), Layer(y0=0.2, y1=0.3, er=3.0)),
            planes=(Plane(y=0.0),),
            conductors=(bar("plus", -0.25, -0.1, 0.1, 0.118), bar("minus", 0.1, 0.25, 0.1, 0.118)),
        ),
        "one over the other": CrossSection(
            layers=(Layer(y0=0.0, y1=0.6, er=4.0),),
            planes=(Plane(y=0.0), Plane(y=0.6)),
            conductors=(bar("plus", -0.1, 0.1, 0.2, 0.218), bar("minus", -0.08, 0.12, 0.38, 0.398)),
        ),
        "contract": contract_example(),
    }
