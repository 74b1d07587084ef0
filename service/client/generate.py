"""Writes the typed part of the client from an API document.

`python -m service.client.generate FILE` reads the document, or - for standard input, and writes `shapes.py` and
`operations.py` beside this file. Where the service runs, curl gives the document at /openapi.json.
"""

import json
import keyword
import re
import sys
import textwrap
from collections.abc import Iterator
from pathlib import Path
from typing import Any

JSON = "application/json"
FORM = "multipart/form-data"
# Documents that people write: given and taken as they are.
WHOLE = ("Movement", "Cutter", "Settings", "SheetJob")
TYPES = {"string": "str", "integer": "int", "number": "float", "boolean": "bool", "null": "None"}
MOST = 120  # characters of a line
USAGE = "usage: python -m service.client.generate FILE, or - for standard input\n"
HEAD = '"""{what} Written by generate.py from the API document; not to be changed by hand."""\n\n'


def shapes_of(document: Any) -> str:
    """The module of typed dictionaries, one for each schema of what is sent and told in JSON."""
    schemas = document["components"]["schemas"]
    wanted = sorted(_reached(_in_json(document), schemas))
    blocks = [_shape(name, schemas[name]) for name in wanted]
    imports = "from typing import Any, NotRequired, TypedDict\n"
    return HEAD.format(what="What is sent and told.") + imports + "\n\n" + "\n\n\n".join(blocks) + "\n"


def operations_of(document: Any) -> str:
    """The module with a method for each operation."""
    methods = [
        _method(verb.upper(), path, operation)
        for path, operations in document["paths"].items()
        for verb, operation in operations.items()
    ]
    body = "\n\n".join(methods)
    imports = (
        "from collections.abc import Mapping\nfrom typing import Any, cast\n\n"
        "from service.client import shapes\n"
        "from service.client.calling import Answer, Caller, Fields, Form, Query, once, place\n"
    )
    head = (
        "class Operations:\n"
        '    """A method for each operation of the API."""\n\n'
        "    def __init__(self, caller: Caller) -> None:\n        self._caller = caller\n\n"
    )
    return HEAD.format(what="The operations of the API.") + imports + "\n\n" + head + body + "\n"


def main(arguments: list[str]) -> int:
    """Write both modules; gives the exit code."""
    if len(arguments) != 1:
        sys.stderr.write(USAGE)
        return 2
    text = sys.stdin.read() if arguments[0] == "-" else Path(arguments[0]).read_text(encoding="utf-8")
    document = json.loads(text)
    here = Path(__file__).parent
    (here / "shapes.py").write_text(shapes_of(document), encoding="utf-8")
    (here / "operations.py").write_text(operations_of(document), encoding="utf-8")
    return 0


def _in_json(document: Any) -> Iterator[Any]:
    for operations in document["paths"].values():
        for operation in operations.values():
            told = [operation.get("requestBody", {}), *_good(operation)]
            yield from (one["content"][JSON]["schema"] for one in told if JSON in one.get("content", {}))
            form = operation.get("requestBody", {}).get("content", {}).get(FORM, {}).get("schema", {})
            yield from form.get("properties", {}).values()


def _good(operation: Any) -> list[Any]:
    return [told for status, told in operation["responses"].items() if status[0] in "23"]


def _reached(value: Any, schemas: Any) -> set[str]:
    found: set[str] = set()
    ahead = {name for schema in value for name in _names_in(schema)}
    while ahead:
        found |= ahead
        ahead = {name for one in ahead for name in _names_in(schemas[one])} - found
    return found


def _names_in(value: Any) -> set[str]:
    if isinstance(value, dict):
        own = {value["$ref"].rpartition("/")[2]} if isinstance(value.get("$ref"), str) else set()
        return (own | {name for part in value.values() for name in _names_in(part)}) - set(WHOLE)
    return {name for part in value for name in _names_in(part)} if isinstance(value, list) else set()


def _shape(name: str, schema: Any) -> str:
    fields = schema.get("properties")
    if not fields or any(keyword.iskeyword(field) for field in fields):
        return f"{name} = {_type(schema)}"
    required = schema.get("required", [])
    said = _sentence(schema.get("description", name))
    lines = [f"class {name}(TypedDict):", f'    """{said}"""', ""]
    for field, told in fields.items():
        kind = _type(told)
        lines.append(f"    {field}: {kind if field in required else f'NotRequired[{kind}]'}")
    return "\n".join(lines)


def _type(schema: Any) -> str:  # noqa: PLR0911 -- one line for each kind of schema
    if "$ref" in schema:
        name = schema["$ref"].rpartition("/")[2]
        return "dict[str, Any]" if name in WHOLE else f'"{name}"'
    if "const" in schema:
        return "str"
    for several in ("anyOf", "oneOf"):
        if several in schema:
            kinds = list(dict.fromkeys(_type(choice) for choice in schema[several]))
            if any('"' in kind for kind in kinds):
                return '"' + " | ".join(kind.replace('"', "") for kind in kinds) + '"'
            return " | ".join(kinds)
    kind = schema.get("type")
    if kind == "array":
        return f"list[{_type(schema.get('items', {}))}]"
    if kind == "object":
        more = schema.get("additionalProperties")
        return f"dict[str, {_type(more)}]" if isinstance(more, dict) else "dict[str, Any]"
    return TYPES.get(kind, "Any")


def _method(verb: str, path: str, operation: Any) -> str:
    names = re.findall(r"{(\w+)}", path)
    parameters = operation.get("parameters", [])
    kinds = {one["name"]: _type(one["schema"]) for one in parameters if one["in"] == "path"}
    asked = ["self", *(f"{name}: {kinds[name]}" for name in names)]
    given = [f'"{verb}"', "path"]
    _add_body(operation, asked, given)
    if any(one["in"] == "query" for one in parameters):
        asked.append("query: Query | None = None")
        given.append("query=query")
    if any(one["name"] == "Idempotency-Key" for one in parameters):
        given.append("headers=once()")
    kind, call = _answer(operation, ", ".join(given))
    lines = [
        f"    def {operation['operationId']}(",
        *(f"        {one}," for one in asked),
        f"    ) -> {kind}:",
        f'        """{_sentence(operation["summary"])}"""',
        *_placed(path, names),
        f"        {call}",
    ]
    one_line = f"    def {operation['operationId']}({', '.join(asked)}) -> {kind}:"
    begun = [one_line] if len(one_line) <= MOST else lines[: len(asked) + 2]
    return "\n".join([*begun, *lines[len(asked) + 2 :]])


def _placed(path: str, names: list[str]) -> list[str]:
    """The lines that put the values into a path."""
    if not names:
        return [f'        path = "{path}"']
    given = [f'"{name}": {name}' for name in names]
    line = f'        path = place("{path}", {{{", ".join(given)}}})'
    if len(line) <= MOST:
        return [line]
    begun = ["        path = place(", f'            "{path}",']
    return [*begun, f"            {{{', '.join(given)}}},", "        )"]


def _add_body(operation: Any, asked: list[str], given: list[str]) -> None:
    body = operation.get("requestBody")
    if body is None:
        return
    content = body["content"]
    if JSON in content:
        kind = _type(content[JSON]["schema"])
        kind = kind if kind.startswith("dict") else f"shapes.{kind.strip(chr(34))}"
        asked.append(f"body: {kind}" if body["required"] else f"body: {kind} | None = None")
        given.append("body=body")
    elif FORM in content:
        kind = "Mapping[str, bytes | Mapping[str, Any]]"
        asked.append(f"parts: {kind}" if body["required"] else f"parts: {kind} | None = None")
        given.append(f"body={'Form(parts)' if body['required'] else 'None if parts is None else Form(parts)'}")
    else:
        asked.append("fields: Mapping[str, str]")
        given.append("body=Fields(fields)")


def _answer(operation: Any, given: str) -> tuple[str, str]:
    """What a method gives, and the line that does it."""
    good = [told for status, told in operation["responses"].items() if status[0] == "2"]
    contents = [told.get("content", {}) for told in good]
    if contents and all(set(content) == {JSON} for content in contents):
        kind = _type(contents[0][JSON]["schema"])
        shape = kind if kind.startswith("dict") else f"shapes.{kind.strip(chr(34))}"
        return shape, f'return cast("{shape}", self._caller.json({given}))'
    if contents and not any(contents):
        return "None", f"self._caller.send({given})"
    return "Answer", f"return self._caller.send({given})"


def _sentence(text: str) -> str:
    short = textwrap.shorten(text, MOST - 16, placeholder=" …").replace("\\", "")
    return short if short.endswith((".", "…")) else f"{short}."


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
