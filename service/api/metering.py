"""What each request cost: one line in the log, and the counts that /metrics gives, by route and never by address.

An address may hold a secret (a link that signs in, a proof link), and there are more addresses than a count can name.
"""

import logging
import time
from collections.abc import Callable

from flask import Flask, Response, g, request
from prometheus_client import CollectorRegistry, Counter, Histogram

from service.api.asking import asker_or_none
from service.api.request_ids import request_id
from service.logs import forget, tell

log = logging.getLogger("discwright")

NO_ROUTE = "none"
METHODS = frozenset({"GET", "HEAD", "OPTIONS", "POST", "PUT", "PATCH", "DELETE"})
OTHER_METHOD = "other"  # anybody may make methods up, and each would be a series of its own
QUIET_ROUTES = frozenset({"/healthz", "/readyz", "/metrics"})  # asked every few seconds, by machines
# s; from what the cache gives to what a large tune takes
BUCKETS_S = (0.005, 0.01, 0.025, 0.05, 0.1, 0.25, 0.5, 1.0, 2.5, 5.0, 10.0, 30.0, 60.0)


def meter(app: Flask, registry: CollectorRegistry, clock: Callable[[], float] = time.monotonic) -> None:
    """Count and log every request of an app. Called before anything else that looks at requests.

    Args:
        app: The app.
        registry: Gets the counts.
        clock: Seconds, only ever forward.
    """
    counts = Counter(
        "discwright_requests", "Requests answered, by route.", ("method", "route", "status"), registry=registry
    )
    times = Histogram(
        "discwright_request_seconds",
        "Seconds from a request to the beginning of its answer.",
        ("method", "route"),
        buckets=BUCKETS_S,
        registry=registry,
    )

    @app.before_request
    def begin() -> None:
        forget()
        tell(request_id=request_id())
        g.begun_s = clock()

    @app.after_request
    def end(response: Response) -> Response:
        begun_s = g.get("begun_s", clock())
        method = request.method if request.method in METHODS else OTHER_METHOD
        route = NO_ROUTE if request.url_rule is None else request.url_rule.rule
        counts.labels(method, route, str(response.status_code)).inc()
        times.labels(method, route).observe(clock() - begun_s)
        said = {"request_id": request_id(), "method": method, "route": route, "status": response.status_code}
        asker = asker_or_none()
        if asker is not None:
            said["key_id"] = asker.key_id
        order_id = (request.view_args or {}).get("order_id")
        if order_id is not None:
            said["order_id"] = order_id
        level = logging.DEBUG if route in QUIET_ROUTES else logging.INFO
        # An answer may be a stream: it has ended when its last byte is written.
        response.call_on_close(lambda: log.log(level, "answered", extra={**said, "ms": _ms(clock() - begun_s)}))
        return response


def _ms(seconds: float) -> float:
    return round(seconds * 1000, 1)
