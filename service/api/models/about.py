"""What the service tells of itself."""

from typing import Any

from pydantic import ConfigDict, Field

from layout.documents.reading import Part


class AboutAnswer(Part):
    """What the service is, and where things are."""

    service: str
    engine_version: str = Field(description="of the computation; plans made by another may differ")
    links: dict[str, str]


class HealthAnswer(Part):
    """That the service answers."""

    status: str
    engine_version: str


class ReadyAnswer(Part):
    """That the service can serve."""

    status: str
    parts: dict[str, str] = Field(description="what each part says")


class LimitAnswer(Part):
    """A limit."""

    name: str
    value: float
    unit: str
    reason: str


class LimitsAnswer(Part):
    """Every limit that a request can run into."""

    limits: list[LimitAnswer]


class ProblemKindAnswer(Part):
    """A kind of error."""

    type: str = Field(description="the URI reference that problems of this kind have as their type")
    title: str
    status: int
    what_to_do: str
    try_again: bool = Field(description="whether the very same request may do better later")


class ProblemKindsAnswer(Part):
    """Every kind of error there is. More may come."""

    problems: list[ProblemKindAnswer]


class ApiDocument(Part):
    """A document of OpenAPI 3.1; what it holds is said by that specification."""

    model_config = ConfigDict(extra="allow")

    openapi: str = Field(examples=["3.1.0"])
    info: dict[str, Any]
    paths: dict[str, Any]
    components: dict[str, Any]


class SchemasAnswer(Part):
    """Where each schema is, by the name of what it is of."""

    schemas: dict[str, str]


class SchemaAnswer(Part):
    """A JSON Schema; what it holds is said by the dialect that it names."""

    model_config = ConfigDict(extra="allow")

    dialect: str = Field(alias="$schema")
    type: str
    properties: dict[str, Any]


class Problem(Part):
    """Problem details (RFC 9457). Kinds add members of their own."""

    model_config = ConfigDict(extra="allow")

    type: str = Field(description="the kind; a GET of it explains it", examples=["/problems/key-missing"])
    title: str
    status: int
    detail: str = Field(description="what went wrong this time: the thing, the value seen, what is allowed")
    instance: str = Field(description="path of the request")
    request_id: str = Field(description="the id of the request, as in the header Request-Id")
    try_again: bool = Field(
        description="whether the very same request may do better later, after the seconds of Retry-After"
    )
