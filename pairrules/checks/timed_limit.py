"""A limit that is said as a time, or as a share of the signal's own times, put into the unit that its rule judges in.

What may be late by so much may be longer by so much times the velocity: a length follows from a time by the pair's own
mean delay per length, the odd mode's where the legs run beside one another.
Source: ℓ = v Δt (textbook). Which share of an edge is harmless is common practice, no source.
"""

from __future__ import annotations

from dataclasses import replace

from pairrules.checks.electrical_figures import figures, lacking, ps_per_mm
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.settings.limit import Limit, Timed


def in_own_unit(subject: Subject, limit: Limit, rule: Rule) -> Limit | Undecided:
    """The limit with all its quantities in the units of the rule's dimensions; its source tells how it came to them.

    `Undecided` where the class does not give the time that the limit is a share of, or the pair's velocity is unknown.
    """
    quantities, steps = dict(limit.quantities), []
    for key, timed in sorted(limit.timed.items()):
        time = _picoseconds(subject, timed)
        if isinstance(time, Undecided):
            return time
        said = f"{timed.said} are {time:.4g} ps" if timed.of else timed.said
        if rule.quantities[key] == "time":
            quantities[key] = time
        else:
            slowness = _slowness(subject)
            if isinstance(slowness, Undecided):
                return slowness
            quantities[key] = time / slowness
            said += f", {quantities[key]:.4g} mm at this pair's {slowness:.3g} ps/mm"
        if timed.of or rule.quantities[key] != "time":
            steps.append(said)
    if not limit.timed:
        return limit
    return replace(limit, quantities=quantities, timed={}, source="; ".join(filter(None, (limit.source, *steps))))


def _picoseconds(subject: Subject, timed: Timed) -> float | Undecided:
    if not timed.of:
        return timed.amount
    klass = subject.klass
    of = None if klass is None else {"rise_time": klass.rise_time_ps, "unit_interval": klass.unit_interval_ps}[timed.of]
    if of is None:
        whose = "the pair has no class that gives one" if klass is None else f"class {klass.name} gives none"
        return Undecided(missing=f"the limit is a share of {timed.of}, and {whose}")
    return timed.amount * of


def _slowness(subject: Subject) -> float | Undecided:
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    found = ps_per_mm(electrical)
    if found is None:
        why = lacking(electrical, "sections", "the pair has no section").missing
        return Undecided(missing=f"the pair's velocity, which a length said as a time needs, is unknown: {why}")
    return found
