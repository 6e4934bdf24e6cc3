"""Hostile board files, small each, made to fill memory, take time without end, or reach out of the program."""

from __future__ import annotations

import gzip
import io
import json
import zipfile
from collections.abc import Callable

from fixtures.boards import straight_pair
from tests.readers.ipc2581.documents import document, feature, line, pad

Attack = Callable[[], bytes]
TRACK = feature(line((0, 0), (1, 0)))


def _doctype(declared: str, used: str = "") -> Attack:
    def make() -> bytes:
        head, tail = document(TRACK).split(b"<IPC-2581 ", 1)
        return head + declared.encode() + b"<IPC-2581 " + tail.replace(b'name="board"', f'name="{used}"'.encode(), 1)

    return make


def _laughs() -> str:
    entities = "".join(f'<!ENTITY l{i} "{f"&l{i - 1};" * 10}">' for i in range(1, 12))
    return f'<!DOCTYPE IPC-2581 [<!ENTITY l0 "ha">{entities}]>'


def _xml(sets: str, **pieces: str) -> Attack:
    return lambda: document(TRACK + sets, **pieces)


def _json(**members: object) -> Attack:
    def make() -> bytes:
        tree = straight_pair().board
        for path, value in members.items():
            holder, *steps = [tree, *path.split("__")]
            for step in steps[:-1]:
                holder = holder[int(step) if step.isdigit() else step]
            holder[int(steps[-1]) if steps[-1].isdigit() else steps[-1]] = value
        return json.dumps(tree).encode()

    return make


def _raw(text: str) -> Attack:
    """JSON with the text in the place of the first track's width."""

    def make() -> bytes:
        marked = straight_pair().board
        marked["tracks"][0]["width"] = "HERE"
        return json.dumps(marked).replace('"HERE"', text).encode()

    return make


def _zip(*members: tuple[str, bytes], method: int = zipfile.ZIP_DEFLATED) -> Attack:
    def make() -> bytes:
        out = io.BytesIO()
        with zipfile.ZipFile(out, "w", method) as archive:
            for name, data in members:
                archive.writestr(zipfile.ZipInfo(name), data, compress_type=method)
        return out.getvalue()

    return make


def _shapes_of_shapes() -> bytes:
    entries = '<EntryUser id="u0"><UserSpecial><Circle diameter="1"/></UserSpecial></EntryUser>'
    for level in range(1, 40):
        inner = f'<UserPrimitiveRef id="u{level - 1}"/>' * 10
        entries += f'<EntryUser id="u{level}"><UserSpecial>{inner}</UserSpecial></EntryUser>'
    return document(TRACK, dictionaries=f'<DictionaryUser units="MILLIMETER">{entries}</DictionaryUser>')


def _repeated_shape() -> bytes:
    inner = '<Line startX="0" startY="0" endX="1" endY="0"><LineDesc lineWidth="0.1"/></Line>' * 5000
    held = (
        '<DictionaryUser units="MILLIMETER"><EntryUser id="u"><UserSpecial>'
        f"{inner}</UserSpecial></EntryUser></DictionaryUser>"
    )
    places = "".join(f'<Location x="{i % 100}" y="{i // 100}"/>' for i in range(10_000))
    return document(feature('<UserPrimitiveRef id="u"/>', before=places), dictionaries=held)


def _huge_package() -> bytes:
    pins = "".join(f'<Pin number="{i}" type="SURFACE"><Location x="{i}" y="0"/></Pin>' for i in range(3000))
    parts = "".join(
        f'<Component refDes="U{i}" packageRef="P" layerRef="TOP"><Location x="0" y="{i}"/></Component>'
        for i in range(3000)
    )
    return document(TRACK, step=f'<Package name="P">{pins}</Package>{parts}')


def _copper_upon_itself() -> bytes:
    tree = straight_pair().board
    tree["tracks"] += [
        {"net": "IN_P", "layer": "TOP", "width": 5.0, "points": [[0, i / 1000], [20, -i / 1000]]} for i in range(20_000)
    ]
    return json.dumps(tree).encode()


def _pads_at_one_place() -> bytes:
    shape = '<Circle diameter="1"/>'
    return document(TRACK + "".join(pad(shape, net=f"N{i}") for i in range(20_000)))


def _cuts_upon_cuts() -> bytes:
    drawn = "".join(feature(line((0, i / 1000), (9, i / 1000))) for i in range(2000))
    cuts = feature('<Circle diameter="20"/>', attributes='polarity="NEGATIVE"') * 2000
    return document(drawn + cuts)


def _two_metres_wide() -> bytes:
    """Legs so wide for their height over the plane that a cross-section would take ten thousands of cells."""
    tree = straight_pair().board
    for track, pin, sign in zip(tree["tracks"], (0, 1), (1, -1), strict=True):
        y = sign * 1000.1
        track |= {"width": 2000.0, "points": [[0, y], [20, y]]}
        for part in tree["parts"]:
            part["pins"][pin]["at"][1] = y
    tree["areas"][0]["outline"] = [[-5000, -5000], [5000, -5000], [5000, 5000], [-5000, 5000]]
    return json.dumps(tree).encode()


REFUSED: dict[str, Attack] = {
    "entities of entities": _doctype(_laughs(), "&l11;"),
    "an entity from a file": _doctype('<!DOCTYPE IPC-2581 [<!ENTITY f SYSTEM "file:///etc/passwd">]>', "&f;"),
    "an entity from the network": _doctype('<!DOCTYPE IPC-2581 [<!ENTITY f SYSTEM "http://127.0.0.1:9/f">]>', "&f;"),
    "a DTD from the network": _doctype('<!DOCTYPE IPC-2581 SYSTEM "http://127.0.0.1:9/board.dtd">'),
    "a parameter entity": _doctype('<!DOCTYPE IPC-2581 [<!ENTITY % p SYSTEM "http://127.0.0.1:9/p"> %p;]>'),
    "an entity nobody declared": _xml("&gone;"),
    "elements nested a hundred thousand deep": _xml("<Set>" * 100_000),
    "an attribute of twenty megabytes": _xml(f'<Set net="{"n" * 20_000_000}"/>'),
    "a net's name of a hundred kilobytes": _xml(feature(line((0, 0), (1, 0)), net="n" * 100_000)),
    "an element's name of a hundred kilobytes": _xml(f"<{'S' * 100_000}/>"),
    "a text of twenty megabytes": _xml("t" * 20_000_000),
    "a number of a million digits": _xml(
        pad('<Circle diameter="1"/>', before=f'<Location x="{"1" * 1_000_000}" y="0"/>')
    ),
    "a coordinate beyond ten metres": _xml(feature(line((0, 0), (10_001, 0)))),
    "a scale that throws copper away": _xml(feature(line((0, 0), (1, 0)), before='<Xform scale="1e9"/>')),
    "shapes that name shapes without end": _shapes_of_shapes,
    "a shape repeated without end": _repeated_shape,
    "many parts of one huge package": _huge_package,
    "twenty thousand pads at one place": _pads_at_one_place,
    "cuts upon cuts": _cuts_upon_cuts,
    "an unknown encoding": lambda: document(TRACK).replace(b'"UTF-8"', b'"x-strange"'),
    "gzip of gigabytes of blanks": lambda: gzip.compress(document(TRACK) + b" " * 300_000_000, 9, mtime=0),
    "zip of gigabytes of blanks": _zip(("b.xml", b"<IPC-2581>" + b" " * 300_000_000)),
    "a zip in a zip": _zip(("b.xml", _zip(("b.xml", document(TRACK)))())),
    "gzip of a million members": lambda: gzip.compress(b"", mtime=0) * 1_000_000,
    "zip of two hundred thousand members": lambda: _zip(("b.xml", b""))() + b"PK\x01\x02" * 200_000,
    "an archive with a dictionary of gigabytes": _zip(("b.xml", document(TRACK)), method=zipfile.ZIP_LZMA),
    "brackets a million deep": lambda: b'{"a":' + b"[" * 1_000_000,
    "a width that is no number": _raw("NaN"),
    "a width without end": _raw("1e999"),
    "a width of a million digits": _raw("1" * 1_000_000),
    "a name of a megabyte": _json(tracks__0__net="n" * 1_000_000),
    "a point beyond ten metres": _json(tracks__0__points=[[0, 0.2], [20_000, 0.2]]),
    "a width below nothing": _json(tracks__0__width=-0.2),
    "an arc about another centre": _json(
        tracks__0__points=[[0, 0.2], {"arc_to": [20, 0.2], "centre": [3, 0], "clockwise": True}]
    ),
}
"""Files that are refused with one line."""

BORNE: dict[str, Attack] = {
    "half a million elements nobody knows": lambda: document(TRACK, bom="<Strange>" + "<a/>" * 500_000 + "</Strange>"),
    "a hundred thousand kinds of elements": _xml("<Set>" + "".join(f"<K{i}/>" for i in range(100_000)) + "</Set>"),
    "names of archive members that climb": _zip(("../../../../etc/b.xml", document(TRACK)), ("/etc/x", b"x")),
    "a leg of twenty thousand tracks upon one another": _copper_upon_itself,
    "tracks two metres wide": _two_metres_wide,
    "control characters in names": _json(tracks__0__net="IN_P\x1b[2J\u202e"),
}
"""Files that are read all the same, in bounded memory, and hurt nobody."""
