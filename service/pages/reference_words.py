"""A schema in words, for people: what a value is, within which bounds, and where its shape is described."""

import json
import re
from typing import Any

from markupsafe import Markup, escape

from service.pages.texts import text_of

Schema = dict[str, Any]
_BOUNDS = (
    ("minimum", "least"),
    ("exclusiveMinimum", "above"),
    ("maximum", "most"),
    ("exclusiveMaximum", "below"),
    ("minLength", "least_characters"),
    ("maxLength", "most_characters"),
    ("minItems", "least_items"),
    ("maxItems", "most_items"),
)
_PIECES = re.compile(r"\*\*(.+?)\*\*|`(.+?)`", re.DOTALL)
_ENUM_SHOWN = 24  # values; more are counted


def blocks_of(text: str) -> list[Markup]:
    """Paragraphs of a description, with its **strong** words and `code`; none for an empty one."""
    return [_inline(block) for block in re.split(r"\n\s*\n", text.strip()) if block]


def _inline(text: str) -> Markup:
    made, end = Markup(), 0
    for piece in _PIECES.finditer(text):
        strong, code = piece.groups()
        made += escape(text[end : piece.start()])
        made += Markup("<strong>{}</strong>").format(strong) if strong else Markup("<code>{}</code>").format(code)
        end = piece.end()
    return made + escape(text[end:])


def name_of(reference: Schema) -> str:
    """The name that a reference ends with."""
    return str(reference["$ref"]).rpartition("/")[2]


def kind_of(schema: Schema) -> Markup:
    """What a value is, with a link to its shape where that has a name.

    Args:
        schema: JSON Schema of the value.
    """
    for name in ("anyOf", "oneOf"):
        if name in schema:
            return Markup(text_of("reference.or")).join(kind_of(choice) for choice in schema[name])
    if "allOf" in schema:
        return Markup(text_of("reference.and")).join(kind_of(part) for part in schema["allOf"])
    if "$ref" in schema:
        return Markup('<a href="#shape-{0}">{0}</a>').format(name_of(schema))
    if "const" in schema:
        return Markup("<code>{}</code>").format(json.dumps(schema["const"]))
    if "enum" in schema:
        return _one_of(schema["enum"])
    return _plain(schema) + _bounds(schema)


def _one_of(values: list[Any]) -> Markup:
    shown = Markup(text_of("reference.or")).join(
        Markup("<code>{}</code>").format(json.dumps(value)) for value in values[:_ENUM_SHOWN]
    )
    more = len(values) - _ENUM_SHOWN
    return shown if more <= 0 else shown + Markup(escape(text_of("reference.more_values", count=more)))


def _plain(schema: Schema) -> Markup:
    kind = schema.get("type", "any")
    if kind == "array":
        if "prefixItems" in schema:
            parts = Markup(", ").join(kind_of(item) for item in schema["prefixItems"])
            return Markup(escape(text_of("reference.kind_row"))) + Markup(" (") + parts + Markup(")")
        return Markup(escape(text_of("reference.kind_array"))) + Markup(" ") + kind_of(schema.get("items", {}))
    if kind == "object" and isinstance(schema.get("additionalProperties"), dict):
        inside = kind_of(schema["additionalProperties"])
        return Markup(escape(text_of("reference.kind_map"))) + Markup(" ") + inside
    if kind == "object" and "plus_minus" in schema.get("properties", {}):
        return Markup(escape(text_of("reference.kind_worth")))
    if schema.get("format") == "binary":
        return Markup(escape(text_of("reference.kind_bytes")))
    kinds = kind if isinstance(kind, list) else [kind]
    return Markup(escape(text_of("reference.or").join(text_of(f"reference.kind_{one}") for one in kinds)))


def _bounds(schema: Schema) -> Markup:
    told = [text_of(f"reference.{word}", value=f"{schema[name]:,}") for name, word in _BOUNDS if name in schema]
    if "format" in schema and schema["format"] != "binary":
        told.append(str(schema["format"]))
    made = Markup(escape("".join(f", {words}" for words in told)))
    if "pattern" in schema:
        made += Markup(", <code>{}</code>").format(schema["pattern"])
        examples = Markup(", ").join(Markup("<code>{}</code>").format(one) for one in schema.get("examples", ()))
        made += Markup(escape(text_of("reference.such_as"))) + examples if examples else Markup()
    return made


def rows_of(schema: Schema) -> dict[str, Any]:
    """The fields of an object as rows, and what it is where it is no object with fields.

    Args:
        schema: JSON Schema of a body or of a shape.
    """
    needed = schema.get("required", ())
    fields = [
        {
            "name": name,
            "is_needed": name in needed,
            "kind": kind_of(field),
            "about": blocks_of(field.get("description", "")),
            "default": json.dumps(field["default"], ensure_ascii=False) if "default" in field else None,
        }
        for name, field in schema.get("properties", {}).items()
    ]
    return {"fields": fields, "kind": None if fields else kind_of(schema)}
