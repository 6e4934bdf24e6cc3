"""A file's name as a URI reference: relative with forward slashes where the name is relative."""

from __future__ import annotations

from pathlib import PurePath
from urllib.parse import quote


def file_uri(name: str) -> str:
    """The percent-encoded reference (RFC 3986, sections 2.1 and 4.2).

    A colon is encoded too, since in a relative reference's first segment it would look like a scheme. What was no text
    in the file system's encoding comes back as its own bytes.
    """
    path = PurePath(name)
    encoded = quote(b"".join(_bytes(character) for character in path.as_posix()), safe="/")
    return f"file://{'' if encoded.startswith('/') else '/'}{encoded}" if path.is_absolute() else encoded


def _bytes(character: str) -> bytes:
    undecoded = "\udc80" <= character <= "\udcff"
    return character.encode("utf-8", "surrogateescape" if undecoded else "surrogatepass")
