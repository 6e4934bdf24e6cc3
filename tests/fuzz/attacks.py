"""Hostile board files, small each, made to fill memory, take time without end, or reach out of the program."""

from __future__ import annotations

import gzip
import io
import json
import math
import zipfile
from collections.abc import Callable
from typing import Any

from fixtures.boards import straight_pair
from tests.readers.ipc2581.documents import LAYERS, box, document, feature, line, pad

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


def _points(places: list[tuple[float, float]], tag: str = "Polygon") -> str:
    begin, *steps = places
    drawn = "".join(f'<PolyStepSegment x="{x}" y="{y}"/>' for x, y in (*steps, begin))
    return f'<{tag}><PolyBegin x="{begin[0]}" y="{begin[1]}"/>{drawn}</{tag}>'


def _star(corners: int, radius: float) -> list[tuple[float, float]]:
    """An odd number of corners, each joined to the two farthest from it: every edge crosses nearly every other."""
    turns = [2 * math.pi * (corners // 2) * i / corners for i in range(corners)]
    return [(round(radius * math.cos(turn), 6), round(radius * math.sin(turn), 6)) for turn in turns]


def _lattice(lines: int) -> str:
    """Lines each way over ten millimetres, every one across every other."""
    styled = '<LineDesc lineWidth="0.001"/></Line>'
    at = [10 * i / lines for i in range(lines)]
    across = "".join(f'<Line startX="0" startY="{y}" endX="10" endY="{y}">{styled}' for y in at)
    return across + "".join(f'<Line startX="{x}" startY="0" endX="{x}" endY="10">{styled}' for x in at)


def _user_shape(drawn: str) -> str:
    entry = f'<EntryUser id="u"><UserSpecial>{drawn}</UserSpecial></EntryUser>'
    return f'<DictionaryUser units="MILLIMETER">{entry}</DictionaryUser>'


def _board(change: Callable[[dict[str, Any]], object]) -> Attack:
    def make() -> bytes:
        tree = straight_pair().board
        change(tree)
        return json.dumps(tree).encode()

    return make


def _part(ref: str, *pins: tuple[str, float, float], **more: object) -> dict[str, object]:
    """A part with a pin a net, each at its place."""
    held = [{"pin": str(i + 1), "net": net, "at": [x, y], "layer": "TOP"} for i, (net, x, y) in enumerate(pins)]
    return {"ref": ref, "pins": held, **more}


def _pinned(nets: list[str]) -> Attack:
    """A part with a pin on each of the nets."""
    return _board(lambda b: b["parts"].append(_part("U9", *((n, i % 100, 20 + i // 100) for i, n in enumerate(nets)))))


def _area(outline: list[tuple[float, float]], layer: str = "TOP", net: str = "X", **more: object) -> Attack:
    return _board(lambda b: b["areas"].append({"net": net, "layer": layer, "outline": outline, **more}))


def _arcs(count: int) -> list[object]:
    """Full turns about a centre nine metres away."""
    return [[0, 0.2], *[{"arc_to": [0, 0.2], "centre": [9000, 0.2], "clockwise": True}] * count]


def _liar() -> bytes:
    """A zip of blanks that says of itself to be packed to gigabytes."""
    data = bytearray(_zip(("b.xml", b"<IPC-2581>" + b" " * 50_000_000))())
    for place in (18, data.index(b"PK\x01\x02") + 20):
        data[place : place + 4] = b"\xf0\xff\xff\x7f"
    return bytes(data)


def _nested_zips() -> bytes:
    data = document(TRACK)
    for _ in range(50):
        data = _zip(("b.xml", data))()
    return data


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
    "an arc about another centre in XML": _xml(
        feature(
            '<Arc startX="1" startY="0" endX="0" endY="5" centerX="0" centerY="0"><LineDesc lineWidth="0.1"/></Arc>'
        )
    ),
    "a width below nothing in XML": _xml(feature(line((0, 0), (1, 0), width=-0.2))),
    "a number that is none in XML": _xml(feature(line((0, 0), (math.nan, 0)))),
    "a number without end in XML": _xml(pad('<Circle diameter="1e999"/>')),
    "a DOCTYPE in another encoding": lambda: (
        _doctype(_laughs(), "&l11;")().decode().replace("UTF-8", "UTF-16").encode("utf-16")
    ),
    "a DOCTYPE behind a long comment": _doctype(f"<!--{'x' * 70_000}-->{_laughs()}", "&l11;"),
    "a comment of twenty megabytes": _xml(f"<!--{'c' * 20_000_000}-->"),
    "a record of two million elements": _xml(f"<Set>{'<a/>' * 2_000_000}</Set>"),
    "a record of six hundred thousand elements with attributes": _xml(
        "<Set>" + '<a b="" c="" d=""/>' * 600_000 + "</Set>"
    ),
    "two hundred thousand pieces without length": _xml(
        feature('<Polyline><PolyBegin x="0" y="0"/>' + '<PolyStepSegment x="0" y="0"/>' * 200_000 + "</Polyline>")
    ),
    "a pad of lines that all cross": lambda: document(
        TRACK + pad('<UserPrimitiveRef id="u"/>'), dictionaries=_user_shape(_lattice(500))
    ),
    "slots of lines that all cross": lambda: document(
        TRACK,
        dictionaries=_user_shape(_lattice(300)),
        drill='<Set net="A"><SlotCavity name="s" platingStatus="PLATED"><UserPrimitiveRef id="u"/></SlotCavity></Set>'
        * 300,
    ),
    "pads that each draw a huge shape anew": lambda: document(
        TRACK + pad('<UserSpecial><UserPrimitiveRef id="u"/></UserSpecial>') * 500,
        dictionaries=_user_shape('<Circle diameter="1"/>' * 10_000),
    ),
    "negative pads of a huge shape": lambda: document(
        TRACK + pad('<UserPrimitiveRef id="u"/>').replace("<Set ", '<Set polarity="NEGATIVE" ') * 500,
        dictionaries=_user_shape('<Circle diameter="1"/>' * 10_000),
    ),
    "cuts that all cross": _xml(
        feature(f"<Contour>{box(-20, -20, 20, 20)}</Contour>")
        + feature(_lattice(1000), attributes='polarity="NEGATIVE"')
    ),
    "a negative layer of lines that all cross": lambda: document(
        feature(_lattice(1000)),
        layers=LAYERS.replace('side="TOP" polarity="POSITIVE"', 'side="TOP" polarity="NEGATIVE"'),
        bottom=TRACK,
    ),
    "areas cut upon cuts": _xml(
        "".join(feature(f"<Contour>{box(-20 + i / 1000, -20, 20, 20)}</Contour>") for i in range(400))
        + "".join(
            feature(f'<Circle diameter="{20 + i / 1000}"/>', attributes='polarity="NEGATIVE"') for i in range(400)
        )
    ),
    "an outline in XML that crosses itself everywhere": _xml(
        feature(f"<Contour>{_points(_star(10_001, 10))}</Contour>")
    ),
    "a cutout that crosses itself everywhere": _xml(
        feature(f"<Contour>{box(-20, -20, 20, 20)}{_points(_star(501, 10), 'Cutout')}</Contour>")
    ),
    "a profile that crosses itself everywhere": lambda: document(
        TRACK, profile=f"<Profile>{_points(_star(501, 10))}</Profile>"
    ),
    "arcs of nine metres in XML": _xml(
        feature(
            '<Contour><Polygon><PolyBegin x="0" y="0"/>'
            + '<PolyStepCurve x="0" y="0" centerX="9000" centerY="0"/>' * 3000
            + "</Polygon></Contour>"
        )
    ),
    "circles of nine metres": _xml("".join(pad(f'<Circle diameter="{9000 + i / 10}"/>') for i in range(1500))),
    "a circle of nine metres at thousands of places": _xml(
        feature('<Circle diameter="9000"/>', before="".join(f'<Location x="{i / 10}" y="0"/>' for i in range(3000)))
    ),
    "a target of a thousand rings": _xml(
        pad('<Moire diameter="9000" ringWidth="1" ringGap="1" ringNumber="1000"/>') * 50
    ),
    "thousands of boards in one file": lambda: document(
        TRACK,
        more_steps="".join(
            f'<Step name="s{i}"><LayerFeature layerRef="TOP">{TRACK}</LayerFeature></Step>' for i in range(3000)
        ),
    ),
    "zip in zip in zip": _nested_zips,
    "a zip that lies of its size": _liar,
    "gzip of five million empty lists": lambda: gzip.compress(
        b'{"pairrules_board": 1, "x": [' + b"[]," * 5_000_000 + b"[]]}", 9, mtime=0
    ),
    "objects a million deep": lambda: b'{"a":' * 1_000_000,
    "a million keys of one name": lambda: b"{" + b'"a":1,' * 500_000 + b'"a":1}',
    "an exponent of a million digits": _raw(f"1e{'9' * 1_000_000}"),
    "thirty thousand layers and a pin on none": lambda: json.dumps(
        straight_pair().board | {"stackup": [{"name": f"L{i}", "kind": "copper"} for i in range(30_000)]}
    ).encode(),
    "an area that crosses itself everywhere": _area(_star(10_001, 3)),
    "an area of a leg that crosses itself everywhere": _area(_star(501, 3), net="IN_P"),
    "a plane's hole that crosses itself everywhere": _area(
        [(-9, -9), (29, -9), (29, 29), (-9, 29)], "GND", "GND", holes=[_star(501, 5)]
    ),
    "a thousand areas that each cross themselves": _board(
        lambda b: b["areas"].extend({"net": "X", "layer": "TOP", "outline": _star(25, 3)} for _ in range(1000))
    ),
    "a board's edge that crosses itself everywhere": _board(lambda b: b.update(outline=_star(501, 30))),
    "a pad that crosses itself everywhere": _board(
        lambda b: b["parts"][0]["pins"][0]["pad"].update(shape="polygon", points=_star(501, 0.1))
    ),
    "tracks round nine metres": _board(
        lambda b: b["tracks"].append({"net": "X", "layer": "TOP", "width": 0.2, "points": _arcs(2000)})
    ),
    "areas round nine metres": _board(
        lambda b: b["areas"].append({"net": "X", "layer": "TOP", "outline": [[0, 1], *_arcs(2000)]})
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
    "a hundred thousand attributes": _xml("<Set " + " ".join(f'a{i}="1"' for i in range(100_000)) + "/>"),
    "fifty thousand namespaces": _xml("<Set " + " ".join(f'xmlns:a{i}="u{i}"' for i in range(50_000)) + "/>"),
    "a million comments": _xml("<!---->" * 1_000_000),
    "a million instructions": _xml("<?a b?>" * 1_000_000),
    "an inclusion from a file": lambda: document(
        TRACK, bom='<xi:include xmlns:xi="http://www.w3.org/2001/XInclude" href="file:///etc/passwd" parse="text"/>'
    ),
    "thirty thousand layers": lambda: document(
        TRACK,
        layers=LAYERS
        + "".join(
            f'<Layer name="L{i}" layerFunction="CONDUCTOR" side="INTERNAL" polarity="POSITIVE"/>' for i in range(30_000)
        ),
    ),
    "one net named on fifty thousand pins": lambda: document(
        TRACK,
        step='<LogicalNet name="N">'
        + "".join(f'<PinRef componentRef="U{i}" pin="1"/>' for i in range(50_000))
        + "</LogicalNet>",
    ),
    "a net named thirty thousand times": lambda: document(TRACK, step='<LogicalNet name="A"/>' * 30_000),
    "thirty thousand declarations of one pair": _board(
        lambda b: b["pairs"].extend({"name": f"q{i}", "plus": "IN_P", "minus": "IN_N"} for i in range(30_000))
    ),
    "brackets nine hundred deep": _board(lambda b: b.update(x=json.loads("[" * 900 + "]" * 900))),
    "two hundred thousand points at one place": _board(
        lambda b: b["tracks"].append({"net": "X", "layer": "TOP", "width": 0.2, "points": [[0, 0]] * 200_000})
    ),
    "five thousand nets that differ in a letter": _pinned(
        [f"D{chr(33 + i % 90)}{chr(33 + i // 90)}" for i in range(5000)]
    ),
    "nets of nothing but polarities": _pinned([f"{'P_N+-DPH' * 60}{i}" for i in range(400)]),
    "nets of thousands of letters": _pinned([f"D{'1' * 3900}P{i}" for i in range(500)]),
    "five thousand parts across a pair": _board(
        lambda b: b["parts"].extend(_part(f"R{i}", ("IN_P", 10, 0.2), ("IN_N", 10, -0.2)) for i in range(5000))
    ),
    "resistors from every net to every other": _board(
        lambda b: b["parts"].extend(
            _part(f"R{i}_{k}", (f"M{i}" if i else "IN_P", i, 50 + k), (f"M{k}" if k else "IN_N", i, 50.5 + k))
            for i in range(70)
            for k in range(i)
        )
    ),
    "ten thousand pads of a leg at one place": _board(
        lambda b: b["parts"].extend(_part(f"X{i}", ("IN_P", 10, 0.2)) for i in range(10_000))
    ),
    "twenty thousand vias of a leg at one place": _board(
        lambda b: b["vias"].extend(
            [{"net": "IN_P", "at": [10, 0.2], "from": "TOP", "to": "BOTTOM", "drill": 0.1}] * 20_000
        )
    ),
    "foreign areas that cross one another": _board(
        lambda b: b["areas"].extend(
            {"net": "X", "layer": "TOP", "outline": outline}
            for i in range(1000)
            for at in (i / 50 - 10,)
            for outline in (
                [[0, at], [20, at], [20, at + 0.004], [0, at + 0.004]],
                [[at + 10, -10], [at + 10.004, -10], [at + 10.004, 10], [at + 10, 10]],
            )
        )
    ),
}
"""Files that are read all the same, in bounded memory, and hurt nobody."""


def _yaml_laughs(head: str) -> bytes:
    lists = [f"x0: &x0 [{'a, ' * 9}a]"] + [f"x{i}: &x{i} [{f'*x{i - 1}, ' * 9}*x{i - 1}]" for i in range(1, 12)]
    return "\n".join([*lists, head.format("*x11")]).encode()


SETTINGS: dict[str, Attack] = {
    "settings of aliases of aliases": lambda: _yaml_laughs("pairs: {}"),
    "settings a hundred thousand deep": lambda: b"pairs: " + b"[" * 100_000,
    "settings nested by a hundred thousand dashes": lambda: b"pairs: " + b"\n- " * 3 + b"- " * 100_000,
    "settings of ten megabytes": lambda: b"#" * 10_000_000,
    "settings that name themselves": lambda: b"pairs: &p [*p]",
    "settings with a text of a megabyte": lambda: b"pairs: [{name: " + b"n" * 1_000_000 + b"}]",
    "settings with a tag that calls": lambda: b"pairs: !!python/object/apply:os.system [id]",
}
"""Settings that are refused."""

WAIVERS: dict[str, Attack] = {
    "waivers of aliases of aliases": lambda: _yaml_laughs("waivers: {}"),
    "waivers a hundred thousand deep": lambda: b"waivers: " + b"[" * 100_000,
    "waivers of ten megabytes": lambda: b"#" * 10_000_000,
    "waivers that name themselves": lambda: b"waivers: &p [*p]",
}
"""Waivers that are refused, in the file beside the board."""

SETTINGS_BORNE: dict[str, Attack] = {
    "patterns of hundreds of stars": lambda: b'pairs: [{ignore: ["%b", "%b"]}]' % (b"*N" * 400 + b"b", b"*" * 500),
}
"""Settings that are obeyed."""
