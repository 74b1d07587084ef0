"""Writes the typed part of the client from an API document.

`python -m service.client.generate FILE` reads the document, or - for standard input, and writes the folder
`shapes` and `operations` beside this file. Where the service runs, curl gives the document at /openapi.json.
"""

import json
import keyword
import re
import shutil
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
RECORDS, FILE = "records", "LayoutRecord"  # the module, and the schema of which all of it is part
COMMON = "common"  # the module of shapes that several groups of operations share
MOST = 120  # characters of a line
# What methods may need, by where it is imported from.
IMPORTS = {
    "collections.abc": ["Mapping"],
    "typing": ["Any", "cast"],
    "service.client": ["shapes"],
    "service.client.calling": ["Answer", "Fields", "Form", "Group", "Query", "once", "place"],
}
USAGE = "usage: python -m service.client.generate FILE, or - for standard input\n"
HEAD = '"""{what} Written by generate.py from the API document; not to be changed by hand."""\n\n'


def shapes_of(document: Any) -> dict[str, str]:
    """The package of typed dictionaries, one for each schema of what is sent and told in JSON, by module.

    A module holds what one group of operations alone sends and is told; what several do stands in common.py, but for
    what layout.json holds, which stands in records.py.
    """
    schemas = document["components"]["schemas"]
    homes = _homes(document, schemas)
    modules = {
        module: _shapes_module(module, [name for name in homes if homes[name] == module], homes, schemas)
        for module in sorted(set(homes.values()))
    }
    by_module = sorted(homes.items(), key=lambda pair: (pair[1], pair[0].lower()))
    handed_on = [f"from service.client.shapes.{module} import {name} as {name}" for name, module in by_module]
    face = HEAD.format(what="What is sent and told.") + "\n".join(handed_on) + "\n"
    return {"__init__.py": face, **{f"{module}.py": text for module, text in modules.items()}}


def _homes(document: Any, schemas: Any) -> dict[str, str]:
    """The module that each schema stands in, by the schema's name, in alphabetical order."""
    groups: dict[str, set[str]] = {}
    for tag, told in _in_json(document):
        for name in _reached([told], schemas):
            groups.setdefault(name, set()).add(tag.replace(" ", "_"))
    of_files = _reached([{"$ref": FILE}], schemas)
    shared = {name: RECORDS if name in of_files else COMMON for name in groups}
    return {name: groups[name].pop() if len(groups[name]) == 1 else shared[name] for name in sorted(groups)}


def _shapes_module(module: str, names: list[str], homes: dict[str, str], schemas: Any) -> str:
    text = "\n\n\n".join(_shape(name, schemas[name]) for name in names)
    typing = [word for word in ("Any", "NotRequired", "TypeAlias", "TypedDict") if re.search(rf"\b{word}\b", text)]
    foreign = sorted({name for own in names for name in _names_in(schemas[own])} - set(names))
    imports = [f"from typing import {', '.join(typing)}\n"] if typing else []
    for other in sorted({homes[name] for name in foreign}):  # common.py, records.py: what others need stands there
        needed = ", ".join(name for name in foreign if homes[name] == other)
        imports.append(
            "\n" * (len(imports) == 1 and bool(typing)) + f"from service.client.shapes.{other} import {needed}\n"
        )
    space = "\n" * bool(imports) * (2 if text.startswith("class") else 1)
    said = f"What is sent and told: {module.replace('_', ' ')}."
    return HEAD.format(what=said) + "".join(imports) + space + text + "\n"


def operations_of(document: Any) -> dict[str, str]:
    """The package with a method for each operation, by module: one for each group of operations."""
    methods: dict[str, list[str]] = {}
    for path, operations in document["paths"].items():
        for verb, operation in operations.items():
            [tag] = operation["tags"]
            methods.setdefault(tag.replace(" ", "_"), []).append(_method(verb.upper(), path, operation))
    groups = {module: "Of" + "".join(map(str.capitalize, module.split("_"))) for module in sorted(methods)}
    handed_on = [f"from service.client.operations.{module} import {name}" for module, name in groups.items()]
    face = "\n".join([*handed_on, "", "", "class Operations(", *(f"    {name}," for name in groups.values()), "):", ""])
    face += '    """A method for each operation of the API."""\n'
    return {
        "__init__.py": HEAD.format(what="The operations of the API.") + face,
        **{f"{module}.py": _operations_module(module, name, methods[module]) for module, name in groups.items()},
    }


def _operations_module(module: str, name: str, methods: list[str]) -> str:
    body = "\n\n".join(methods)
    code = re.sub('""".*?"""', "", body)
    said = module.replace("_", " ")
    imports = [
        (source, [word for word in words if word == "Group" or re.search(rf"\b{word}\b", code)])
        for source, words in IMPORTS.items()
    ]
    lines = [f"from {source} import {', '.join(words)}\n" for source, words in imports if words]
    own = "".join(line for line in lines if "service" in line)
    others = "".join(line for line in lines if "service" not in line)
    head = f'class {name}(Group):\n    """Operations: {said}."""\n\n'
    between = "\n" * bool(others)
    return HEAD.format(what=f"Operations: {said}.") + others + between + own + "\n\n" + head + body + "\n"


def main(arguments: list[str]) -> int:
    """Write both packages; gives the exit code."""
    if len(arguments) != 1:
        sys.stderr.write(USAGE)
        return 2
    text = sys.stdin.read() if arguments[0] == "-" else Path(arguments[0]).read_text(encoding="utf-8")
    document = json.loads(text)
    here = Path(__file__).parent
    for package, modules in (("shapes", shapes_of(document)), ("operations", operations_of(document))):
        shutil.rmtree(here / package, ignore_errors=True)  # a group that is no more leaves no module
        (here / package).mkdir()
        for name, content in modules.items():
            (here / package / name).write_text(content, encoding="utf-8")
    return 0


def _in_json(document: Any) -> Iterator[tuple[str, Any]]:
    """Every schema of what is sent and told in JSON, with the group of its operation."""
    for operations in document["paths"].values():
        for operation in operations.values():
            [tag] = operation["tags"]
            told = [operation.get("requestBody", {}), *_good(operation)]
            yield from ((tag, one["content"][JSON]["schema"]) for one in told if JSON in one.get("content", {}))
            form = operation.get("requestBody", {}).get("content", {}).get(FORM, {}).get("schema", {})
            yield from ((tag, part) for part in form.get("properties", {}).values())


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
        return f"{name}: TypeAlias = {_type(schema)}"
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
