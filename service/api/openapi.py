"""/openapi.json and /v1/schemas: the API document, and the schemas of the documents people write."""

from functools import cache

from flask import Blueprint, Flask, Response, current_app, request

from service.api.answers import document_response
from service.api.api_document import document_of
from service.api.api_schemas import DOCUMENTS, Schema, schema_alone
from service.api.asking import open_to_all
from service.api.describing import describes, operation_asked
from service.api.operations import about
from service.api.problems import ProblemError
from service.api.retiring import tell_retirement

SCHEMA_MEDIA_TYPE = "application/schema+json"


def openapi_routes(public_url: str | None) -> Blueprint:
    """The routes that describe the API.

    Args:
        public_url: How the service is reached; None for as the request says.
    """
    routes = Blueprint("openapi", __name__)

    @cache
    def document(app: Flask) -> Schema:
        return document_of(app, server=public_url or "/")

    @routes.get("/openapi.json")
    @describes(about.DOCUMENT)
    @open_to_all
    def tell_document() -> Response:
        return document_response(document(current_app._get_current_object()), request)  # type: ignore[attr-defined]

    @routes.get("/v1/schemas")
    @describes(about.SCHEMAS)
    @open_to_all
    def list_schemas() -> Response:
        return document_response({"schemas": {name: f"/v1/schemas/{name}" for name in DOCUMENTS}}, request)

    @routes.get("/v1/schemas/<name>")
    @describes(about.SCHEMA)
    @open_to_all
    def tell_schema(name: str) -> Response:
        if name not in DOCUMENTS:
            raise ProblemError(
                name="route-unknown",
                detail=f"there is no schema called {name[:60]!r}; there are {', '.join(DOCUMENTS)}",
                more={"known_ids": list(DOCUMENTS)},
            )
        response = document_response(schema_alone(DOCUMENTS[name]), request)
        response.content_type = SCHEMA_MEDIA_TYPE
        return response

    @routes.after_app_request
    def tell_what_goes(response: Response) -> Response:
        operation = operation_asked(request)
        if operation is None or operation.retirement is None:
            return response
        return tell_retirement(response, operation.retirement)

    return routes
