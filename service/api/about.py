"""What the service is: whether it answers, what it limits, where things are."""

from flask import Blueprint, Response, request

from layout.version import ENGINE_VERSION
from service.api.answers import document_response, json_response
from service.api.asking import open_to_all
from service.api.describing import describes
from service.api.media import prefers_html
from service.api.operations import about
from service.limits import Limits

FIRST_PAGE = "/new"  # where people begin
ADDRESSES = {
    "movements": "/v1/movements",
    "cutters": "/v1/cutters",
    "layouts": "/v1/layouts",
    "trial_pieces": "/v1/trial-pieces",
    "sheets": "/v1/sheets",
    "orders": "/v1/orders",
    "events": "/v1/events",
    "hooks": "/v1/hooks",
    "keys": "/v1/keys",
    "limits": "/v1/limits",
    "problems": "/problems",
    "health": "/healthz",
}


def about_routes(limits: Limits) -> Blueprint:
    """The routes that tell about the service itself."""
    routes = Blueprint("about", __name__)

    @routes.get("/")
    @describes(about.ADDRESSES)
    @open_to_all
    def tell_addresses() -> Response:
        if prefers_html(request):
            response = Response(status=303, headers={"Location": FIRST_PAGE})
        else:
            told = {"service": "discwright", "engine_version": ENGINE_VERSION, "links": ADDRESSES}
            response = document_response(told, request)
        response.vary.add("Accept")
        return response

    @routes.get("/healthz")
    @describes(about.HEALTH)
    @open_to_all
    def tell_health() -> Response:
        return json_response({"status": "ok", "engine_version": ENGINE_VERSION})

    @routes.get("/v1/limits")
    @describes(about.LIMITS)
    @open_to_all
    def tell_limits() -> Response:
        told = [
            {"name": limit.name, "value": limit.value, "unit": limit.unit, "reason": limit.reason}
            for limit in limits.told()
        ]
        return document_response({"limits": told}, request)

    return routes
