"""/v1/movements and /v1/cutters: the documents that ship."""

from typing import Any

from flask import Blueprint, Response, request

from layout.documents import shipped_cutter, shipped_cutter_ids, shipped_movement, shipped_movement_ids
from service.api.answers import document_response
from service.api.asking import open_to_all
from service.catalogue import cutter_told, document_told, movement_told


def catalogue_routes() -> Blueprint:
    """The routes of movements and cutters."""
    routes = Blueprint("catalogue", __name__, url_prefix="/v1")

    def answer(value: Any) -> Response:
        return document_response(value, request)

    @routes.get("/movements")
    @open_to_all
    def list_movements() -> Response:
        return answer({"movements": [movement_told(shipped_movement(known)) for known in shipped_movement_ids()]})

    @routes.get("/movements/<movement_id>")
    @open_to_all
    def tell_movement(movement_id: str) -> Response:
        return answer(document_told(shipped_movement(movement_id)))

    @routes.get("/cutters")
    @open_to_all
    def list_cutters() -> Response:
        return answer({"cutters": [cutter_told(shipped_cutter(known)) for known in shipped_cutter_ids()]})

    @routes.get("/cutters/<cutter_id>")
    @open_to_all
    def tell_cutter(cutter_id: str) -> Response:
        return answer(document_told(shipped_cutter(cutter_id)))

    return routes
