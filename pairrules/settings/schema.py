"""JSON Schema 2020-12 of a settings file, drawn from the form that reads it: for editors that check while one types."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from pairrules.board.units import DIMENSIONS
from pairrules.settings.limit import TIMES, RuleForm
from pairrules.settings.settings_form import settings_form
from pairrules.settings.shapes import Either, Flag, Kinds, ListOf, Named, Number, Quantity, Shape, Table, Text

Schema = dict[str, Any]

_DIGITS = r"(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?"


def settings_schema(forms: Mapping[str, RuleForm]) -> Schema:
    """The schema of a settings file in which these rules may have limits.

    A quantity's text is only checked for a number and some unit; whether the unit fits is for the reader to say.
    """
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "$id": "urn:pairrules:schema:settings:1",
        "title": "Settings, version 1",
        "description": "What `pairrules.yaml` may say, or the file that --settings names. Quantities carry units.",
        **_schema(settings_form(forms)),
    }


def _schema(shape: Shape) -> Schema:
    match shape:
        case Quantity():
            return _quantity(shape)
        case Number():
            bounds = {"minimum": shape.least, "maximum": shape.most}
            return {"type": "number"} | {key: bound for key, bound in bounds.items() if bound is not None}
        case Text(words=()):
            # YAML takes an unquoted 5 or true for a number or a truth value; as the name of a net it is a text.
            return {"type": ["string", "number", "boolean"]}
        case Text(words=words):
            # The word off, unquoted, is a truth value to YAML 1.1.
            return {"enum": [*words, False] if "off" in words else list(words)}
        case Flag():
            return {"type": "boolean"}
        case ListOf():
            counts = {"minItems": shape.least} | ({"maxItems": shape.most} if shape.most else {})
            return {"type": "array", "items": _schema(shape.of), **counts}
        case Table():
            return _table(shape)
        case Named():
            return {"type": "object", "additionalProperties": _schema(shape.of), "minProperties": 1}
        case Kinds():
            return {
                "type": "object",
                "required": ["kind"],
                "oneOf": [_kind(kind, form) for kind, form in shape.kinds.items()],
            }
        case Either():
            return {"anyOf": [_schema(shape.scalar), _schema(shape.nested)]}


def _quantity(shape: Quantity) -> Schema:
    sign = "[+-]?" if shape.signed else r"\+?"
    if shape.dimension == "count":
        return {"type": ["number", "string"], "pattern": rf"^\s*{sign}{_DIGITS}\s*$"}
    unit = {"1": "%", "degree": "degrees"}.get(DIMENSIONS[shape.dimension], DIMENSIONS[shape.dimension])
    described = f"{shape.dimension}: a number with its unit, such as {unit}"
    if shape.or_time and shape.dimension != "time":
        described += "; or a time, such as 20 ps"
    if shape.or_share:
        described += f"; or a share, such as 5 % of {' or '.join(TIMES)}"
    return {"type": "string", "pattern": rf"^\s*{sign}{_DIGITS}\s*[^\s\d.]", "description": described}


def _table(shape: Table) -> Schema:
    schema: Schema = {
        "type": "object",
        "properties": {key: _schema(value) for key, value in shape.keys.items()},
        "additionalProperties": False,
    }
    if shape.required:
        schema["required"] = list(shape.required)
    if shape.any_of:
        schema["anyOf"] = [{"required": [key]} for key in shape.any_of]
    if shape.needs:
        schema["dependentRequired"] = {key: [needed] for key, needed in shape.needs.items()}
    if shape.not_both:
        schema["allOf"] = [{"not": {"required": list(both)}} for both in shape.not_both]
    return schema


def _kind(kind: str, form: Table) -> Schema:
    schema = _table(form)
    schema["properties"] = {"kind": {"const": kind}, **schema["properties"]}
    return schema
