"""`pairrules budget`: how much imbalance a link may have before it misses the rejection that is wanted."""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

import click

from pairrules.balance.budget import Allowance, TraceLeg, Wanted, budget, rejection
from pairrules.balance.cable import cable_elements
from pairrules.balance.load_models import LoadModel, load_model
from pairrules.balance.networks import Element
from pairrules.balance.source_models import source_elements
from pairrules.board.units import quantity
from pairrules.cli.options import output_option
from pairrules.cli.output import write
from pairrules.errors import UsageError
from pairrules.settings.pair_class import PairClass

WANTED_RULE = "link-rejection"
"""The rule whose limit says what a class wants, where `--want` does not."""

_PREFIXES = ((1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "u"), (1e-9, "n"), (1e-12, "p"), (1e-15, "f"))


def _number(
    dimension: str, *, positive: bool = False
) -> Callable[[click.Context, click.Parameter, str | None], float | None]:
    """An option's callback: the number that a text with its unit means, in the unit of `board.units.DIMENSIONS`."""

    def read(ctx: click.Context, param: click.Parameter, value: str | None) -> float | None:
        if value is None:
            return None
        try:
            found = quantity(value, dimension)
        except ValueError as error:
            raise click.BadParameter(str(error), ctx, param) from None
        if found < 0 or (positive and found == 0):
            raise click.BadParameter(f"{value!r} is not {'above zero' if positive else 'zero or more'}", ctx, param)
        return found

    return read


def _frequencies(ctx: click.Context, param: click.Parameter, values: tuple[str, ...]) -> tuple[float, ...]:
    read = _number("frequency", positive=True)
    return tuple(found for value in values if (found := read(ctx, param, value)) is not None)


_OHM = _number("resistance")
_OHM_ABOVE = _number("resistance", positive=True)


@click.command(name="budget")
@click.option("--settings", metavar="FILE", help="Settings that hold the class named by --class.")
@click.option("--class", "klass", metavar="NAME", help="Source, cable, load, frequencies and wanted rejection of it.")
@click.option("--want", callback=_number("ratio"), metavar="RATIO", help='Wanted rejection of the link, "80 dB".')
@click.option("--at", "at", callback=_frequencies, multiple=True, metavar="FREQUENCY", help="There.")
@click.option("--source", callback=_OHM, metavar="R", help="Source resistance of each leg.")
@click.option("--source-minus", callback=_OHM, metavar="R", help="That of minus, where it differs.")
@click.option("--load", callback=_OHM_ABOVE, metavar="R", help="Load resistance from each leg to reference.")
@click.option("--load-capacitance", callback=_number("capacitance"), metavar="C", help="Beside it.")
@click.option("--across", callback=_OHM_ABOVE, metavar="R", help="Load resistance between the legs.")
@click.option("--r1", callback=_OHM_ABOVE, metavar="R", help="A difference amplifier as load: R1 of each leg.")
@click.option("--r2", callback=_OHM_ABOVE, metavar="R", help="Its R2.")
@click.option("--tolerance", callback=_number("share"), metavar="SHARE", help="Tolerance its resistors already have.")
@click.option("--receiver", callback=_number("ratio"), metavar="RATIO", help="The receiver's own rejection.")
@click.option("--leg-impedance", callback=_OHM_ABOVE, metavar="Z", help="Of one track on its own, to judge leg length.")
@click.option("--permittivity", type=click.FloatRange(min=1.0), help="Effective permittivity of that track.")
@click.option("--format", "form", type=click.Choice(["table", "json"]), default="table", show_default=True)
@output_option
def command(
    *,
    settings: str | None,
    klass: str | None,
    want: float | None,
    at: tuple[float, ...],
    form: str,
    output: str | None,
    leg_impedance: float | None,
    permittivity: float | None,
    **network: float | None,
) -> None:
    """Tell how much of each imbalance alone uses up a wanted rejection, and how much is left beside what is given.

    Give a class of a settings file, or the networks as options.
    """
    if (settings is None) != (klass is None):
        raise UsageError("--settings and --class go together", remedy="give both or neither")
    if (leg_impedance is None) != (permittivity is None):
        raise UsageError("--leg-impedance and --permittivity go together", remedy="give both or neither")
    if settings is not None and klass is not None:
        given = [f"--{name.replace('_', '-')}" for name, value in network.items() if value is not None]
        if given:
            raise UsageError(f"{given[0]} and --class are both given", remedy="name the network one way")
        source, between, load, wanted = _of_class(settings, klass, want, at)
    else:
        source, between, load = _of_options(network)
        if want is None or not at:
            raise UsageError("what is wanted is missing", remedy="add --want and at least one --at")
        wanted = [Wanted(frequency_hz=frequency, rejection_db=want) for frequency in at]
    leg = None
    if leg_impedance is not None and permittivity is not None:
        leg = TraceLeg(impedance_ohm=leg_impedance, permittivity=permittivity)
    allowances = budget(source, between, load, wanted, leg=leg)
    has = rejection([*source, *between, *load.elements], load, [one.frequency_hz for one in wanted])
    found = [float(one) if one < 400 else 400.0 for one in has]
    render = _as_json if form == "json" else _as_table
    write(render(wanted, found, allowances, leg is not None), output)


def _of_options(network: Mapping[str, float | None]) -> tuple[Sequence[Element], Sequence[Element], LoadModel]:
    given = {name: value for name, value in network.items() if value is not None}
    if "source" not in given:
        raise UsageError("the source is missing", remedy="add --source, or --settings and --class")
    values = {"plus": given["source"]} | ({"minus": given["source_minus"]} if "source_minus" in given else {})
    receiver = ((0.0, given["receiver"]),) if "receiver" in given else ()
    if "r1" in given or "r2" in given:
        for name in ("load", "load_capacitance", "across"):
            if name in given:
                raise UsageError(f"--{name.replace('_', '-')} and --r1 are both given", remedy="give one kind of load")
        if not {"r1", "r2"} <= given.keys():
            raise UsageError("--r1 and --r2 go together", remedy="give both or neither")
        parts = {name: value for name, value in given.items() if name in {"r1", "r2", "tolerance"}}
        return source_elements("impedance", values), (), load_model("difference-amplifier", parts, receiver)
    if "tolerance" in given:
        raise UsageError("--tolerance is given without --r1 and --r2", remedy="it is that of their resistors")
    if "load" not in given:
        raise UsageError("the load is missing", remedy="add --load, or --r1 and --r2")
    legs = {"resistance": given["load"], "capacitance": given.get("load_capacitance", 0.0)}
    shunts = {f"{leg}.{name}": value for leg in ("plus", "minus") for name, value in legs.items()}
    if "across" in given:
        shunts["across.resistance"] = given["across"]
    return source_elements("impedance", values), (), load_model("impedance", shunts, receiver)


def _of_class(
    settings: str, name: str, want: float | None, at: tuple[float, ...]
) -> tuple[Sequence[Element], Sequence[Element], LoadModel, list[Wanted]]:
    klass = _class_named(settings, name)
    place = f"classes.{name}"
    if klass.source is None or klass.load is None:
        lacking = "source" if klass.source is None else "load"
        raise UsageError(f"{lacking} is missing", file=settings, place=place, remedy=f"add {lacking}: to the class")
    frequencies = at or klass.frequencies
    if not frequencies:
        raise UsageError("frequencies are missing", file=settings, place=place, remedy="add them, or give --at")
    limit = klass.limits.get(WANTED_RULE)
    least = limit.quantities.get("least") if want is None and limit is not None else want
    if least is None:
        raise UsageError(
            f"no {WANTED_RULE} is wanted",
            file=settings,
            place=place,
            remedy=f"add limits.{WANTED_RULE}, or give --want",
        )
    try:
        source = source_elements(klass.source.kind, klass.source.values)
        between = () if klass.cable is None else cable_elements(klass.cable.values)
        load = load_model(klass.load.kind, klass.load.values, klass.load.rejection)
    except ValueError as error:
        raise UsageError(str(error), file=settings, place=place, remedy="mend the class") from None
    return source, between, load, [Wanted(frequency_hz=f, rejection_db=least) for f in frequencies]


def _class_named(settings: str, name: str) -> PairClass:
    # Rules and the settings reader are only needed here.
    from pairrules.checks.rule import all_rules
    from pairrules.settings.read_settings import read_settings

    forms = {name: rule.form for name, rule in all_rules().items()}
    chosen = read_settings(Path(settings), forms=forms)
    for klass in chosen.classes:
        if klass.name == name:
            return klass
    known = ", ".join(sorted(klass.name for klass in chosen.classes)) or "none"
    raise UsageError(f"{name!r} is no class", file=settings, remedy=f"known are {known}")


def _as_json(
    wanted: Sequence[Wanted], has: Sequence[float], allowances: Sequence[Allowance], length_judged: bool
) -> str:
    document: dict[str, Any] = {
        "pairrules_budget": 1,
        "wanted": [
            {"frequency_hz": one.frequency_hz, "wanted_db": one.rejection_db, "has_db": found}
            for one, found in zip(wanted, has, strict=True)
        ],
        "allowances": [
            {
                "name": one.name,
                "unit": one.unit,
                "alone": one.alone,
                "remaining": one.remaining,
                "searched_to": one.most,
                "decided_by_hz": one.decided_by_hz,
            }
            for one in allowances
        ],
    }
    if not length_judged:
        document["not_judged"] = {"leg length": _NO_LENGTH}
    return json.dumps(document, indent=2, allow_nan=False) + "\n"


_NO_LENGTH = "the track's impedance and permittivity are not given (--leg-impedance, --permittivity)"


def _as_table(
    wanted: Sequence[Wanted], has: Sequence[float], allowances: Sequence[Allowance], length_judged: bool
) -> str:
    lines = [f"{'frequency':>12}{'wanted':>12}{'has':>12}"]
    for one, found in zip(wanted, has, strict=True):
        lines.append(f"{_shown(one.frequency_hz, 'Hz'):>12}{one.rejection_db:>9.1f} dB{found:>9.1f} dB")
    lines += ["", f"{'imbalance':<20}{'alone':>14}{'remaining':>14}{'decided at':>14}"]
    for kind in allowances:
        alone, remaining = (
            f"> {_shown(kind.most, kind.unit)}" if amount is None else _shown(amount, kind.unit)
            for amount in (kind.alone, kind.remaining)
        )
        decided = "-" if kind.decided_by_hz is None else _shown(kind.decided_by_hz, "Hz")
        lines.append(f"{kind.name:<20}{alone:>14}{remaining:>14}{decided:>14}")
    if not length_judged:
        lines.append(f"leg length is not judged: {_NO_LENGTH}")
    return "\n".join(lines) + "\n"


def _shown(value: float, unit: str) -> str:
    if unit == "1":
        return f"{100 * value:.3g} %"
    factor, prefix = next(((f, p) for f, p in _PREFIXES if value >= f), (1.0, "") if value == 0 else _PREFIXES[-1])
    return f"{value / factor:.4g} {prefix}{unit}"
