"""What the service tells of itself: operations open to all."""

from collections.abc import Mapping

from service.api.describing import Answer, Example, Operation
from service.api.models.about import (
    AboutAnswer,
    ApiDocument,
    HealthAnswer,
    LimitsAnswer,
    ProblemKindAnswer,
    ProblemKindsAnswer,
    ReadyAnswer,
    SchemaAnswer,
    SchemasAnswer,
)
from service.api.operations.common import ETAG, IF_NONE_MATCH, NOT_MODIFIED, told

TAG = "about"


def _open(name: str, summary: str, answer: Answer, path: Mapping[str, str] | None = None) -> Operation:
    return Operation(
        id=name,
        tag=TAG,
        summary=summary,
        headers=(IF_NONE_MATCH,),
        answers=(answer, NOT_MODIFIED),
        examples=(Example(status=200, path=path or {}),),
    )


ADDRESSES = _open("tell_addresses", "Where things are", told(AboutAnswer, "What the service is.", ETAG))
HEALTH = Operation(
    id="tell_health",
    tag=TAG,
    summary="Whether the service answers",
    answers=(told(HealthAnswer, "It does."),),
    examples=(Example(status=200),),
)
LIMITS = _open("tell_limits", "What is taken at most", told(LimitsAnswer, "Every limit, with its reason.", ETAG))
PROBLEM_KINDS = _open(
    "list_problem_kinds", "The kinds of errors", told(ProblemKindsAnswer, "Every kind, with what to do.", ETAG)
)
PROBLEM_KIND = _open(
    "tell_problem_kind",
    "What a kind of error means",
    told(ProblemKindAnswer, "The kind, and what to do about it.", ETAG),
    {"name": "document-invalid"},
)
DOCUMENT = _open(
    "tell_api_document",
    "This document",
    told(ApiDocument, "The API, described after OpenAPI 3.1.", ETAG),
)
SCHEMAS = _open(
    "list_schemas", "The documents there are schemas of", told(SchemasAnswer, "Where each schema is.", ETAG)
)
SCHEMA = Operation(
    id="tell_schema",
    tag=TAG,
    summary="The JSON Schema of a document",
    description="Of movement, cutter, settings or sheet-job, made from what checks these documents. A document may "
    "be valid by its schema and still contradict itself, which only the service sees.",
    headers=(IF_NONE_MATCH,),
    answers=(
        Answer(
            status=200,
            meaning="The schema, in the dialect 2020-12.",
            contents={"application/schema+json": SchemaAnswer},
            headers=(ETAG,),
        ),
        NOT_MODIFIED,
    ),
    examples=(Example(status=200, path={"name": "movement"}),),
)
READY = Operation(
    id="tell_readiness",
    tag="operations",
    summary="Whether the service can serve now",
    answers=(told(ReadyAnswer, "All parts answer."),),
    problems=("not-ready",),
    examples=(Example(status=200),),
)
METRICS = Operation(
    id="tell_metrics",
    tag="operations",
    summary="How the service fares, as text for Prometheus",
    answers=(Answer(status=200, meaning="The figures.", contents={"text/plain": None}),),
    examples=(Example(status=200),),
)
