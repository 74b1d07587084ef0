"""The schemas of the API document, made by pydantic from the models that check and tell."""

from collections.abc import Iterable, Mapping
from typing import Any, Literal

from pydantic import BaseModel
from pydantic.json_schema import GenerateJsonSchema, JsonSchemaMode, models_json_schema

from layout.documents import Cutter, Movement, Settings
from layout.documents.sheets import SheetJob
from service.api.models.documents import DESCRIBED_BY

PLACE = "#/components/schemas/"
DIALECT = "https://json-schema.org/draft/2020-12/schema"
# Documents that people write, by the name of their schema. Told, they are as they could have been written.
DOCUMENTS: Mapping[str, type[BaseModel]] = {
    "movement": Movement,
    "cutter": Cutter,
    "settings": Settings,
    "sheet-job": SheetJob,
}
NO_NUL = "^[^\\u0000]*$"
Use = Literal["asked", "told"]
Schema = dict[str, Any]


class _Plain(GenerateJsonSchema):
    """Without titles, which would repeat the names of fields and models."""

    def field_title_should_be_set(self, schema: Any) -> bool:
        """Never."""
        return False


class Schemas:
    """The named schemas of a set of models."""

    def __init__(self, uses: Iterable[tuple[type[BaseModel], Use]]) -> None:
        """Make them.

        Args:
            uses: The models, each asked for by requests or told by answers.
        """
        wanted = list(dict.fromkeys(uses))
        modes = [(model, _mode(model, use)) for model, use in wanted]
        references, made = models_json_schema(
            list(dict.fromkeys(modes)), schema_generator=_Plain, ref_template=f"{PLACE}{{model}}"
        )
        named: dict[str, Schema] = made.get("$defs", {})
        self._references = {key: dict(value) for key, value in references.items()}
        asked = _reached(
            [self._references[mode] for (_, use), mode in zip(wanted, modes, strict=True) if use == "asked"], named
        )
        documents = _reached([self._references[mode] for mode in modes if mode[0] in DOCUMENTS.values()], named)
        names = _plain_names(named)
        told = {name: schema if name in asked | documents else _open(schema) for name, schema in named.items()}
        told |= {name: _without_nul(named[name]) for name in asked - documents}
        self.named: dict[str, Schema] = {
            names[name]: _renamed(_neat(schema), names) for name, schema in sorted(told.items())
        }
        self._names = names

    def of(self, model: type[BaseModel], use: Use) -> Schema:
        """The reference to the schema of a model."""
        found: Schema = _renamed(self._references[(model, _mode(model, use))], self._names)
        return found

    def reached_from(self, beginnings: list[Schema]) -> dict[str, Schema]:
        """The named schemas that are referred to; those of queries stand with each parameter and are not."""
        reached = _reached(beginnings, self.named)
        return {name: schema for name, schema in self.named.items() if name in reached}


def schema_alone(model: type[BaseModel]) -> Schema:
    """The schema of a document by itself, with all that it refers to."""
    return {"$schema": DIALECT, **_neat(model.model_json_schema(schema_generator=_Plain))}


def _mode(model: type[BaseModel], use: Use) -> JsonSchemaMode:
    return "validation" if use == "asked" or model in DOCUMENTS.values() else "serialization"


def _references_in(value: Any) -> set[str]:
    if isinstance(value, dict):
        found = {name for part in value.values() for name in _references_in(part)}
        reference = value.get("$ref")
        is_one = isinstance(reference, str) and reference.startswith(PLACE)
        return found | {str(reference).removeprefix(PLACE)} if is_one else found
    if isinstance(value, list):
        return {name for part in value for name in _references_in(part)}
    return set()


def _reached(beginnings: list[Schema], named: Mapping[str, Schema]) -> set[str]:
    reached: set[str] = set()
    ahead = _references_in(beginnings)
    while ahead:
        reached |= ahead
        ahead = {found for name in ahead for found in _references_in(named[name])} - reached
    return reached


def _plain_names(named: Mapping[str, Schema]) -> dict[str, str]:
    """The name of each schema in letters alone; that of its module before it where two models are called alike."""
    plain = {}
    for name in named:
        *modules, own = name.partition("-")[0].split("__")
        plain[name] = (modules[-1].title().replace("_", "") if modules else "") + own
    if len(set(plain.values())) < len(plain):
        raise LookupError(f"two schemas would have one name among {sorted(plain.values())}")
    return plain


def _renamed(value: Any, names: Mapping[str, str]) -> Any:
    if isinstance(value, dict):
        if DESCRIBED_BY in value:
            others = {key: part for key, part in value.items() if key != DESCRIBED_BY}
            return {"$ref": f"{PLACE}{value[DESCRIBED_BY]}", **others}
        return {
            key: f"{PLACE}{names[part.removeprefix(PLACE)]}"
            if key == "$ref" and isinstance(part, str)
            else _renamed(part, names)
            for key, part in value.items()
        }
    return [_renamed(part, names) for part in value] if isinstance(value, list) else value


def _open(schema: Schema) -> Schema:
    """The schema of an answer: members that are not known yet may come, and are to be ignored.

    What may be left out is left out where it does not apply; it has no value then that could be taken for it.
    """
    opened = {key: value for key, value in schema.items() if (key, value) != ("additionalProperties", False)}
    properties = schema.get("properties")
    if properties is not None:
        opened["properties"] = {
            name: {key: value for key, value in said.items() if key != "default"} for name, said in properties.items()
        }
    return opened


def _without_nul(value: Any) -> Any:
    """The schema of a request: no text of it holds NUL, see `request_models`."""
    if isinstance(value, dict):
        made = {key: _without_nul(part) for key, part in value.items()}
        is_free = value.get("type") == "string" and not {"pattern", "enum", "const", "format"} & value.keys()
        return {**made, "pattern": NO_NUL} if is_free else made
    return [_without_nul(part) for part in value] if isinstance(value, list) else value


def _neat(value: Any) -> Any:
    """A schema whose descriptions are sentences on one line."""
    if isinstance(value, dict):
        return {
            key: " ".join(part.split()) if key == "description" and isinstance(part, str) else _neat(part)
            for key, part in value.items()
            if not (key == "title" and isinstance(part, str) and "type" in value)
            and not (key == "default" and part is None and value.get("type", "null") != "null")  # left out, not null
        }
    return [_neat(part) for part in value] if isinstance(value, list) else value
