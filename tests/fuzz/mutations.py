"""Boards, settings and waivers changed at random by their structure: what a careless or hostile exporter might write.

A tree is dropped from, repeated, swapped, renamed, retyped, scaled and moved about; then, sometimes, the bytes are cut,
spliced and packed. Everything follows from the random generator handed in, so that a seed repeats a case.
"""

from __future__ import annotations

import copy
import gzip
import io
import json
import zipfile
from collections.abc import Callable, Sequence
from random import Random
from typing import Any

import yaml
from lxml import etree

Tree = Any

NUMBERS = (0.0, -1.0, 1.0, 1e-12, 1e-6, 1e-3, 0.5, 2.0, -2.0, 10.0, 1e3, 1e4, 9999.0, 1e6, 1e9, 1e150, 1e300, 1e308)
FACTORS = (0.0, -1.0, 1e-9, 1e-6, 1e-3, 0.1, 0.5, 0.9, 0.999999, 1.000001, 1.1, 2.0, 3.0, 10.0, 25.4, 1e3, 1e6, 1e12)
WORDS = (
    "", " ", "GND", "IN_P", "IN_N", "IN", "TOP", "BOTTOM", "GND2", "all", "true", "false", "1", "-0", "1e999", "nan",
    "-inf", "0x10", "1_0", "1,5", "٣", "NONE", "No Net", "MILLIMETER", "INCH", "MICRON", "mm", "in", "copper", "PLUS",
    "POSITIVE", "NEGATIVE", "VIA", "PLATED", "NONPLATED", "PLANE", "DRILL", "CONDUCTOR", "HOLLOW", "VOID", "ERASE",
    "polygon", "circle", "rect", "oval", "round_rect", "\x1b[2J", "\u202e", "\ud7ff", "{n}", "{s}%s%n", "../../x",
    "a" * 5000, "<![CDATA[", "&amp;", "*", "?[", "U1", "J1", "C", "A", "B", "top", "ground", "power", "signal",
)  # fmt: skip
_CHUNK = 64
_STRANGE = (b"\0", b"\xff\xfe", b"]]>", b"<!DOCTYPE x>", b"&x;", b"{", b"[" * 2000)


def mutated_json(tree: Tree, other: Tree, random: Random) -> bytes:
    """A changed JSON document. other: a tree that pieces may be taken from."""
    tree = copy.deepcopy(tree)
    for _ in range(_few(random)):
        places = list(_places(tree))
        random.choice(_JSON_CHANGES)(places, list(_places(other)), random)
    return _rough(json.dumps(tree).encode("utf-8", errors="surrogatepass"), random)


def mutated_xml(data: bytes, other: bytes, random: Random) -> bytes:
    """A changed XML document. other: a document that elements may be taken from."""
    root = etree.fromstring(data)
    for _ in range(_few(random)):
        elements = [element for element in root.iter() if isinstance(element.tag, str)]
        random.choice(_XML_CHANGES)(elements, other, random)
    encoding = random.choice(("UTF-8",) * 8 + ("UTF-16", "ISO-8859-1", "US-ASCII"))
    return _rough(bytes(etree.tostring(root, encoding=encoding, xml_declaration=True)), random)


def mutated_yaml(tree: Tree, other: Tree, random: Random) -> bytes:
    """A changed settings or waiver file."""
    tree = copy.deepcopy(tree)
    for _ in range(_few(random)):
        places = list(_places(tree))
        random.choice(_JSON_CHANGES)(places, list(_places(other)), random)
    text = yaml.safe_dump(tree, allow_unicode=True, sort_keys=False)
    return _rough(text.encode("utf-8", errors="surrogatepass"), random)


def packed(data: bytes, random: Random) -> bytes:
    """The file in an archive that is sometimes damaged, sometimes of odd make."""
    if random.random() < 0.5:
        whole = gzip.compress(data, mtime=0)
        whole += random.choice((b"", b"", gzip.compress(data[:50], mtime=0), b"\0" * 20, b"\x1f\x8b"))
    else:
        out = io.BytesIO()
        method = random.choice((zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED, zipfile.ZIP_BZIP2, zipfile.ZIP_LZMA))
        with zipfile.ZipFile(out, "w", method) as archive:
            for name in random.sample(
                ("../../b.xml", "/etc/b.json", "b\0.xml", "b.xml", "CON", "a/" * 90 + "b.cvg"), 2
            ):
                archive.writestr(zipfile.ZipInfo(name), data)
        whole = out.getvalue()
    return _rough(whole, random)


# -- trees of JSON and YAML -------------------------------------------------------------------------------------------

Place = tuple[Any, Any]
"""A list or table, and the key of one of its values."""


def _places(tree: Tree) -> Sequence[Place]:
    found: list[Place] = []
    todo = [tree]
    while todo:
        holder = todo.pop()
        if isinstance(holder, dict):
            keys: list[Any] = list(holder)
        elif isinstance(holder, list):
            keys = list(range(len(holder)))
        else:
            continue
        found += [(holder, key) for key in keys]
        todo += [holder[key] for key in keys]
    return found


def _few(random: Random) -> int:
    return random.choice((0, 1, 1, 1, 1, 2, 2, 3, 5, 9))


def _drop(places: list[Place], other: list[Place], random: Random) -> None:
    if places:
        holder, key = random.choice(places)
        del holder[key]


def _repeat(places: list[Place], other: list[Place], random: Random) -> None:
    lists = [(holder, key) for holder, key in places if isinstance(holder, list)]
    if lists:
        holder, key = random.choice(lists)
        for _ in range(random.choice((1, 1, 1, 2, 20))):
            holder.insert(random.choice((key, len(holder))), copy.deepcopy(holder[key]))


def _swap(places: list[Place], other: list[Place], random: Random) -> None:
    if not places:
        return
    (one, a), (two, b) = random.choice(places), random.choice(places)
    one[a], two[b] = copy.deepcopy(two[b]), copy.deepcopy(one[a])


def _rename(places: list[Place], other: list[Place], random: Random) -> None:
    named = [(holder, key) for holder, key in places if isinstance(holder, dict)]
    if named:
        holder, key = random.choice(named)
        holder[random.choice((random.choice(named)[1], *random.sample(WORDS, 1)))] = holder.pop(key)


def _retype(places: list[Place], other: list[Place], random: Random) -> None:
    if places:
        holder, key = random.choice(places)
        deep: Any = 1.0
        for _ in range(random.choice((1, 5, 30))):
            deep = [deep]
        values = (None, True, [], {}, [[]], [0, 0], [1e999, 0], float("nan"), 10**400, -1, "1", deep, holder[key])
        holder[key] = random.choice((*values, random.choice(WORDS), random.choice(NUMBERS), [holder[key]]))


def _scale(places: list[Place], other: list[Place], random: Random) -> None:
    numbers = [(holder, key) for holder, key in places if type(holder[key]) in {int, float}]
    if numbers:
        holder, key = random.choice(numbers)
        holder[key] = random.choice((_times(holder[key], random.choice(FACTORS)), random.choice(NUMBERS)))


def _scale_many(places: list[Place], other: list[Place], random: Random) -> None:
    factor, share = random.choice(FACTORS), random.random()
    for holder, key in places:
        if type(holder[key]) in {int, float} and random.random() < share:
            holder[key] = _times(holder[key], factor)


def _times(value: float, factor: float) -> float:
    """The product, of an integer that no float holds the integer itself."""
    try:
        return value * factor
    except OverflowError:
        return -value


def _like_another(places: list[Place], other: list[Place], random: Random) -> None:
    """A value becomes that of another value under the same key, so that points coincide and nets are confused."""
    if places:
        holder, key = random.choice(places)
        same = [(h, k) for h, k in (*places, *other) if k == key and type(h) is type(holder)]
        if same:
            h, k = random.choice(same)
            holder[key] = copy.deepcopy(h[k])


def _word(places: list[Place], other: list[Place], random: Random) -> None:
    texts = [(holder, key) for holder, key in places if isinstance(holder[key], str)]
    if texts:
        holder, key = random.choice(texts)
        held = holder[random.choice([k for h, k in texts if h is holder])]
        holder[key] = random.choice((random.choice(WORDS), held, held[::-1], held + "\0", held * 3, held.lower()))


_JSON_CHANGES: tuple[Callable[[list[Place], list[Place], Random], None], ...] = (
    _drop,
    _drop,
    _repeat,
    _swap,
    _rename,
    _retype,
    _scale,
    _scale,
    _scale,
    _scale_many,
    _like_another,
    _like_another,
    _word,
)


# -- XML --------------------------------------------------------------------------------------------------------------


def _drop_element(elements: list[Any], other: bytes, random: Random) -> None:
    element = random.choice(elements)
    if element.getparent() is not None:
        element.getparent().remove(element)


def _repeat_element(elements: list[Any], other: bytes, random: Random) -> None:
    element = random.choice(elements)
    if element.getparent() is not None:
        for _ in range(random.choice((1, 1, 1, 2, 20))):
            element.addnext(copy.deepcopy(element))


def _move_element(elements: list[Any], other: bytes, random: Random) -> None:
    element, holder = random.choice(elements), random.choice(elements)
    if element.getparent() is not None and element not in list(holder.iterancestors()) and element is not holder:
        holder.insert(random.randrange(len(holder) + 1), element)


def _take_element(elements: list[Any], other: bytes, random: Random) -> None:
    element = random.choice(list(etree.fromstring(other).iter()))
    holder = random.choice(elements)
    holder.insert(random.randrange(len(holder) + 1), copy.deepcopy(element))


def _wrap_element(elements: list[Any], other: bytes, random: Random) -> None:
    element = random.choice(elements)
    if element.getparent() is None:
        return
    for _ in range(random.choice((1, 2, 10, 300))):
        outer = etree.Element(random.choice((element.tag, random.choice(elements).tag)), attrib=dict(element.attrib))
        element.getparent().replace(element, outer)
        outer.append(element)


def _rename_element(elements: list[Any], other: bytes, random: Random) -> None:
    random.choice(elements).tag = random.choice((random.choice(elements).tag, "Xyz", "{urn:other}Set"))


def _with_attributes(elements: list[Any]) -> list[Any]:
    return [element for element in elements if element.attrib]


def _drop_attribute(elements: list[Any], other: bytes, random: Random) -> None:
    element = random.choice(_with_attributes(elements) or elements)
    if element.attrib:
        del element.attrib[random.choice(sorted(element.attrib))]


def _rename_attribute(elements: list[Any], other: bytes, random: Random) -> None:
    element = random.choice(_with_attributes(elements) or elements)
    if element.attrib:
        value = element.attrib.pop(random.choice(sorted(element.attrib)))
        element.set(
            random.choice(sorted(random.choice(_with_attributes(elements) or [element]).attrib) or ["x"]), value
        )


def _set_attribute(elements: list[Any], other: bytes, random: Random) -> None:
    element = random.choice(_with_attributes(elements) or elements)
    if element.attrib:
        word = "".join(c for c in random.choice((*WORDS, *map(repr, NUMBERS))) if c >= " ")
        element.set(random.choice(sorted(element.attrib)), word)


def _scale_attribute(elements: list[Any], other: bytes, random: Random) -> None:
    found = [(element, key) for element in elements for key, value in element.attrib.items() if _is_number(value)]
    if found:
        element, key = random.choice(found)
        element.set(key, repr(float(element.get(key)) * random.choice(FACTORS)))


def _scale_attributes(elements: list[Any], other: bytes, random: Random) -> None:
    factor, share = random.choice(FACTORS), random.random()
    for element in elements:
        for key, value in element.attrib.items():
            if _is_number(value) and random.random() < share:
                element.set(key, repr(float(value) * factor))


def _copy_attribute(elements: list[Any], other: bytes, random: Random) -> None:
    element = random.choice(_with_attributes(elements) or elements)
    if element.attrib:
        key = random.choice(sorted(element.attrib))
        element.set(key, random.choice([one.get(key) for one in elements if key in one.attrib]))


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


_XML_CHANGES: tuple[Callable[[list[Any], bytes, Random], None], ...] = (
    _drop_element,
    _drop_element,
    _repeat_element,
    _move_element,
    _take_element,
    _wrap_element,
    _rename_element,
    _drop_attribute,
    _rename_attribute,
    _set_attribute,
    _set_attribute,
    _scale_attribute,
    _scale_attribute,
    _scale_attributes,
    _copy_attribute,
    _copy_attribute,
)


# -- bytes ------------------------------------------------------------------------------------------------------------


def _rough(data: bytes, random: Random) -> bytes:
    """Nine of ten times the bytes as they are, else cut, spliced, doubled or flipped somewhere."""
    if random.random() < 0.9 or not data:
        return data
    here, there = random.randrange(len(data)), random.randrange(len(data))
    here, there = min(here, there), max(here, there)
    piece = data[there : there + random.randrange(1, _CHUNK)]
    return random.choice((
        data[:here],
        data[here:],
        data[:here] + data[there:],
        data[:here] + piece + data[here:],
        data[:here] + data[here:there] * 2 + data[there:],
        data[:here] + bytes([data[here] ^ (1 << random.randrange(8))]) + data[here + 1 :],
        data[:here] + random.randbytes(random.randrange(1, 9)) + data[here:],
        data[:here] + random.choice(_STRANGE) + data[here:],
    ))  # fmt: skip
