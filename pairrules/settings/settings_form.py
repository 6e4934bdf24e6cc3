"""What a settings file may say: its keys and the shape of each."""

from __future__ import annotations

from collections.abc import Mapping

from pairrules.board.units import DIMENSIONS
from pairrules.result import SEVERITIES
from pairrules.settings.limit import RuleForm
from pairrules.settings.network_models import CABLE_FORM, CURVE, FREQUENCY, LOAD_SHAPE, PICKUP_FORM, SOURCE_SHAPE
from pairrules.settings.shapes import Either, ListOf, Named, Number, Quantity, Shape, Table, Text

_TEXTS = ListOf(of=Text())
_LENGTH = Quantity(dimension="length")
_TIME = Quantity(dimension="time", positive=True)
_SIGNED = {"ratio", "angle"}

_PIN_LENGTHS = Named(of=Named(of=Quantity(dimension="length", or_time=True)))

_LAYER = Table(
    keys={
        "name": Text(),
        "kind": Text(words=("copper", "dielectric")),
        "thickness": Quantity(dimension="length", positive=True),
        "permittivity": Number(least=1.0, most=1e6),
        "loss_tangent": Number(least=0.0, most=0.9),
    },
    required=("name", "kind"),
)

_PAIR = Table(
    keys={"name": Text(), "plus": Text(), "minus": Text(), "ignore": _TEXTS},
    any_of=("plus", "ignore"),
    not_both=(("plus", "ignore"), ("minus", "ignore"), ("name", "ignore")),
    needs={"plus": "minus", "minus": "plus"},
)


def settings_form(forms: Mapping[str, RuleForm]) -> Table:
    """The form of a whole file, with the limits of these rules."""
    limits = _limits(forms)
    return Table(
        keys={
            "extends": ListOf(of=Text(), least=0),
            "stackup": ListOf(of=_LAYER),
            "reference_nets": _TEXTS,
            "pairs": ListOf(of=_PAIR),
            "classes": Named(of=_class(limits)),
            "limits": limits,
            "part_values": Named(of=Text()),
            "pin_lengths": _PIN_LENGTHS,
            "waivers": Text(),
        }
    )


def _class(limits: Table) -> Table:
    return Table(
        keys={
            "like": Text(),
            "match": _TEXTS,
            "source": SOURCE_SHAPE,
            "cable": CABLE_FORM,
            "load": LOAD_SHAPE,
            "frequencies": ListOf(of=FREQUENCY),
            "limits": limits,
            "reach": Quantity(dimension="length", positive=True),
            "breakout": _LENGTH,
            "rise_time": _TIME,
            "unit_interval": _TIME,
            "pickup": PICKUP_FORM,
            "mask": CURVE,
            "pin_lengths": _PIN_LENGTHS,
            "expects_pin_lengths": _TEXTS,
        }
    )


def _limits(forms: Mapping[str, RuleForm]) -> Table:
    rules: dict[str, Shape] = {}
    for name, form in sorted(forms.items()):
        keys: dict[str, Shape] = {}
        for key, dimension in form.quantities.items():
            if dimension not in DIMENSIONS:
                raise ValueError(f"rule {name}: {dimension!r} is no dimension")
            timed = key in form.timed
            keys[key] = Quantity(dimension=dimension, signed=dimension in _SIGNED, or_time=timed, or_share=timed)
        keys["severity"] = Text(words=SEVERITIES)
        keys["source"] = Text()
        rules[name] = Either(scalar=Text(words=("off",)), nested=Table(keys=keys, any_of=tuple(form.required)))
    return Table(keys=rules)
