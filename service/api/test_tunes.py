"""/v1/test-tunes: tunes that lead orders of test keys to each state."""

import hashlib
from typing import Any

from flask import Blueprint, Response, request

from service.api.answers import conditional, document_response
from service.api.asking import open_to_all
from service.api.describing import describes
from service.api.operations import test_tunes
from service.api.operations.common import MIDI
from service.api.problems import ProblemError
from service.limits import Limits
from service.orders.test_tunes import StateTune, state_tunes


def test_tune_routes(limits: Limits) -> Blueprint:
    """The routes of test tunes."""
    routes = Blueprint("test_tunes", __name__, url_prefix="/v1/test-tunes")

    @routes.get("")
    @describes(test_tunes.LIST)
    @open_to_all
    def list_all() -> Response:
        return document_response({"tunes": [_told(tune) for tune in state_tunes()]}, request)

    @routes.get("/<name>.mid")
    @describes(test_tunes.TELL)
    @open_to_all
    def give(name: str) -> Response:
        tune = _named(name)
        response = Response(tune.content, content_type=MIDI)
        response.headers["Content-Disposition"] = f'attachment; filename="{tune.name}.mid"'
        response.headers["Cache-Control"] = f"public, max-age={limits.file_max_age_s}"
        response.set_etag(_digest(tune))
        return conditional(response, request)

    return routes


def _told(tune: StateTune) -> dict[str, Any]:
    return {
        "name": tune.name,
        "leads_to": tune.state,
        "meaning": tune.meaning,
        "release_alone": tune.needs_release_alone,
        "sha256": _digest(tune),
        "href": f"/v1/test-tunes/{tune.name}.mid",
    }


def _named(name: str) -> StateTune:
    for tune in state_tunes():
        if tune.name == name:
            return tune
    known = [tune.name for tune in state_tunes()]
    raise ProblemError(
        name="route-unknown",
        detail=f"there is no test tune {name[:60]!r}; there are {', '.join(known)}",
        more={"known_tunes": known},
    )


def _digest(tune: StateTune) -> str:
    return hashlib.sha256(tune.content).hexdigest()
