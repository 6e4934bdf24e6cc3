"""The JSON Schemas of what goes in and what comes out, shipped as files `<name>.schema.json` beside this module.

Source of the language: JSON Schema, draft 2020-12.
"""

from __future__ import annotations

from importlib.resources import files

_ENDING = ".schema.json"

SCHEMAS: tuple[str, ...] = tuple(
    sorted(entry.name.removesuffix(_ENDING) for entry in files(__name__).iterdir() if entry.name.endswith(_ENDING))
)
"""Names of the schemas there are, sorted."""


def schema_text(name: str) -> str:
    """The text of one schema.

    Parameters
    ----------
    name: one of `SCHEMAS`.

    Raises
    ------
    KeyError: where there is no schema of that name.
    """
    if name not in SCHEMAS:
        raise KeyError(name)
    return (files(__name__) / f"{name}{_ENDING}").read_text(encoding="utf-8")
