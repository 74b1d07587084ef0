"""What is sent and told: about. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, TypedDict


class AboutAnswer(TypedDict):
    """What the service is, and where things are."""

    service: str
    engine_version: str
    links: dict[str, str]


class ApiDocument(TypedDict):
    """A document of OpenAPI 3.1; what it holds is said by that specification."""

    openapi: str
    info: dict[str, Any]
    paths: dict[str, Any]
    components: dict[str, Any]


class HealthAnswer(TypedDict):
    """That the service answers."""

    status: str
    engine_version: str


class LimitAnswer(TypedDict):
    """A limit."""

    name: str
    value: float
    unit: str
    reason: str


class LimitsAnswer(TypedDict):
    """Every limit that a request can run into."""

    limits: list["LimitAnswer"]


class ProblemKindAnswer(TypedDict):
    """A kind of error."""

    type: str
    title: str
    status: int
    what_to_do: str
    try_again: bool


class ProblemKindsAnswer(TypedDict):
    """Every kind of error there is. More may come."""

    problems: list["ProblemKindAnswer"]


class SchemasAnswer(TypedDict):
    """Where each schema is, by the name of what it is of."""

    schemas: dict[str, str]
