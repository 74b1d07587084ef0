"""A small service in a hurry, for gunicorn to run: the limits of slow clients made short. Its configuration too."""

import sys
import time
from dataclasses import replace

from flask import Flask, Response, request

from service.api.failures import answer_failures
from service.api.request_ids import name_requests
from service.limits import Limits
from service.web_worker import GatheringWorker

QUICK = replace(
    Limits(),
    head_s=2,
    head_bytes=8192,
    body_s=2,
    body_bytes_per_s=1000,
    gathered_bytes=10_000,
    linger_s=1,
    connections=120,
    connections_per_address=50,
    waiting_requests=8,
)
SLOW_S = 1.5
LONG_BYTES = 300_000  # more than the buffers of a connection on loopback and `gathered_bytes`


class QuickWorker(GatheringWorker):
    """Waits for little."""

    limits = QUICK


# Names that gunicorn knows.
worker_class = QuickWorker
keepalive = 0
control_socket_disable = True


def create_app() -> Flask:
    """An app that reads bodies, takes its time where asked to, and says how it is."""
    app = Flask("quick")
    answer_failures(app, QUICK)
    name_requests(app)

    @app.get("/healthz")
    def health() -> Response:
        return Response("well")

    @app.post("/length")
    def length() -> Response:
        return Response(str(len(request.get_data())))

    @app.get("/turn")
    def turn() -> Response:
        return Response(str(sys.getswitchinterval()))

    @app.get("/slow")
    def slow() -> Response:
        time.sleep(SLOW_S)
        return Response("at last")

    return app
