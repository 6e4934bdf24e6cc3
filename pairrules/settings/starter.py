"""The text of a first settings file for a board: its pairs in likely classes, and what people must still fill in."""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from fnmatch import fnmatchcase
from pathlib import Path

from pairrules.settings.likely_set import DraftPair, Likely, likely_set
from pairrules.settings.limit import RuleForm
from pairrules.settings.nodes import LONGEST_TEXT
from pairrules.settings.pair_class import PairClass
from pairrules.settings.read_settings import BASE, read_settings
from pairrules.shipped import rules_folder

_OTHER = "other-pairs"

_TO_FILL = (
    ("source", "{kind: line-driver, resistance: <ohm>}", "what drives the pair"),
    ("load", "{kind: line-receiver, across: <ohm>}", "what receives it"),
    ("frequencies", "[<Hz>]", "at which its balance counts"),
)
_TO_CONSIDER = (
    ("cable", "{length: <m>, resistance: <ohm/m>, capacitance: <pF/m>, twisted: true}", "where one lies between"),
    ("rise_time", "<ns>", "of its edges; limits may then be a share of it"),
    ("breakout", "<mm>", "at each end in which gap and running apart are excused"),
    ("expects_pin_lengths", "[<part>]", "whose lengths inside the package count"),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Draft:
    """What a first settings file is written from.

    Parameters
    ----------
    file: the board's, without folders. pairs: those found. unpaired: nets that look like half a pair.
    reference: nets taken for reference. layers: (name, kind) of the stack, top first.
    lacking: what the stack lacks for a cross-section, in words.
    """

    file: str
    pairs: tuple[DraftPair, ...]
    unpaired: tuple[str, ...] = ()
    reference: tuple[str, ...] = ()
    layers: tuple[tuple[str, str], ...] = ()
    lacking: tuple[str, ...] = ()


def starter(draft: Draft, forms: Mapping[str, RuleForm]) -> str:
    """The file's text; `read_settings` reads it without fault, whatever the names on the board are."""
    groups = _grouped(draft.pairs)
    sets = sorted({likely.set for _, likely, _ in groups if likely.set})
    templates = _templates(sets, forms)
    count = len(draft.pairs)
    lines = [
        f"# First settings for {shown(draft.file)}: {count} pair{'' if count == 1 else 's'} in likely classes.",
        "# The classes are guesses by name, parts and impedance: move pairs to where they belong. What stands in <...>",
        "# only you can know; every quantity carries its unit. `pairrules explain` tells what each rule judges.",
        f"extends: [{', '.join((BASE, *sets))}]",
        "",
        *_stackup(draft),
        "",
        *_reference(draft.reference),
        "",
        *_pairs(draft.unpaired),
        "",
        *_classes(groups, templates),
    ]
    return "\n".join(lines) + "\n"


def shipped_sets() -> tuple[str, ...]:
    """The names of the shipped sets but `base`, sorted."""
    return tuple(sorted(file.stem for file in rules_folder().glob("*.yaml") if file.stem != BASE))


def shown(text: str) -> str:
    """Text as a comment may hold it: what cannot be printed is a question mark, long text is cut."""
    plain = "".join(c if c.isprintable() else "?" for c in text)
    return plain if len(plain) <= 200 else f"{plain[:200]}..."


def pattern_for(name: str, known: Iterable[str]) -> str:
    """A pattern that fits a name, and of the other `known` names as few as can be.

    The name itself where that will do. Characters that settings cannot hold are question marks.
    """
    awkward = {i for i, c in enumerate(name) if not c.isprintable()}
    awkward |= {i for i in (0, len(name) - 1) if name[i : i + 1] == " "}
    if not awkward and len(name) < LONGEST_TEXT and not any(o != name and fnmatchcase(o, name) for o in known):
        return name
    parts = ["?" if i in awkward else f"[{c}]" if c in "*?[" else c for i, c in enumerate(name)]
    text, most = "", LONGEST_TEXT - 2
    for part in parts:
        if len(text) + len(part) > most:
            return f"{text}*"
        text += part
    return text


def _quoted(text: str) -> str:
    return json.dumps(text, ensure_ascii=False)


def _grouped(pairs: Sequence[DraftPair]) -> list[tuple[str, Likely, list[DraftPair]]]:
    """Class name, guess and pairs: by the class the file declares, else by likely set; those without a guess last."""
    groups: dict[str, tuple[Likely, list[DraftPair]]] = {}
    for pair in pairs:
        likely = likely_set(pair)
        writable = pair.declared and pattern_for(pair.declared, ()) == pair.declared
        name = pair.declared if writable else f"{likely.set}-pairs" if likely.set else _OTHER
        groups.setdefault(name, (likely, []))[1].append(pair)
    ordered = sorted(groups, key=lambda name: (not groups[name][0].set, name))
    return [(name, *groups[name]) for name in ordered]


def _templates(sets: Sequence[str], forms: Mapping[str, RuleForm]) -> Mapping[str, PairClass]:
    text = f"extends: [{', '.join((BASE, *sets))}]"
    return {one.name: one for one in read_settings(Path("draft.yaml"), forms=forms, text=text).classes}


def _stackup(draft: Draft) -> list[str]:
    if not draft.lacking:
        return ["# The board file has the whole stackup: impedances and delays are known."]
    lines = [
        f"# The board file lacks the {shown(draft.lacking[0])}{' and more' if len(draft.lacking) > 1 else ''}.",
        "# Without it no impedance, delay or balance is known. Fill in from the board maker's stackup, top to bottom:",
        "# stackup:",
    ]
    layers = draft.layers
    if all(kind == "copper" for _, kind in layers):
        between = [("D" + str(n + 1), "dielectric") for n in range(len(layers) - 1)]
        layers = tuple(layer for n, layer in enumerate(layers) for layer in (layer, *between[n : n + 1]))
    for name, kind in layers:
        material = ", permittivity: <number>, loss_tangent: <number>" if kind == "dielectric" else ""
        lines.append(f"#   - {{name: {_quoted(shown(name))}, kind: {kind}, thickness: <mm>{material}}}")
    return lines


def _reference(nets: tuple[str, ...]) -> list[str]:
    if not nets:
        return [
            "# No net was taken for reference. Name those that carry the return current:",
            '# reference_nets: ["<net>"]',
        ]
    names = ", ".join(_quoted(pattern_for(net, ())) for net in nets)
    return [
        "# Nets whose copper carries the return current, as they were found; mend the list.",
        f"reference_nets: [{names}]",
    ]


def _pairs(unpaired: tuple[str, ...]) -> list[str]:
    lines = [
        "# Pairs that were not found, and nets that are no pair, are named so:",
        "# pairs:",
        '#   - {name: "<name>", plus: "<net>", minus: "<net>"}',
        '#   - {ignore: ["<net>"]}',
    ]
    if unpaired:
        lines.append("# Nets that look like half a pair: " + ", ".join(_quoted(shown(net)) for net in unpaired))
    return lines


def _classes(groups: Sequence[tuple[str, Likely, list[DraftPair]]], templates: Mapping[str, PairClass]) -> list[str]:
    names = [pair.name for _, _, pairs in groups for pair in pairs]
    known = {*names, *(net for _, _, pairs in groups for pair in pairs for net in pair.nets)}
    used: set[str] = set()
    lines: list[str] = []
    for name, likely, pairs in groups:
        patterns = []
        for pair in pairs:
            # Where two pairs share a name their nets tell them apart.
            of = pair.name if names.count(pair.name) == 1 or not pair.nets else pair.nets[0]
            pattern = pattern_for(of, known)
            if pattern and pattern not in used:
                used.add(pattern)
                patterns.append(pattern)
        if patterns:
            lines += ["", *_class(name, likely, pairs, patterns, templates.get(likely.set))]
    if not lines:
        return ["# No pair was found, so that no class is needed."]
    return [
        "# In any class, where it applies:",
        *(f"#   {key}: {form}   # {said}" for key, form, said in _TO_CONSIDER),
        "classes:",
        *lines[1:],
    ]


def _class(
    name: str, likely: Likely, pairs: list[DraftPair], patterns: list[str], template: PairClass | None
) -> list[str]:
    lines = [f"  # {shown(_about(pair))}" for pair in pairs]
    lines += [f"  {_quoted(name)}:"]
    if likely.set and likely.set != name:
        lines.append(f"    like: {likely.set}")
    if not likely.set:
        lines.append(f"    # like: <one of {', '.join(shipped_sets())}>, and extend it above")
    lines += ["    match:", *(f"      - {_quoted(pattern)}" for pattern in patterns)]
    open_keys = [one for one in _TO_FILL if template is None or not getattr(template, one[0])]
    if open_keys:
        lines += ["    # To fill in, else the balance stays unknown:"]
        lines += [f"    # {key}: {form}   # {said}" for key, form, said in open_keys]
    return lines


def _about(pair: DraftPair) -> str:
    likely = likely_set(pair)
    said = [f"{pair.name}: {likely.set or 'no set fits'}, {likely.why}"]
    if pair.impedance_ohm is not None and f"{pair.impedance_ohm:.3g} ohm" not in likely.why:
        said.append(f"{pair.impedance_ohm:.3g} ohm")
    if pair.ends:
        said.append(" to ".join(end.split(" ")[0] for end in pair.ends))
    if pair.declared:
        said.append(f"class {pair.declared} in the board file")
    return "; ".join(said)
