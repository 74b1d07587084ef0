"""/metrics: how the shop does, as text for Prometheus (its exposition format 0.0.4).

What is said of orders, the queue and hooks is read from the database when it is asked for, so it is the same whichever
process answers. Requests are counted by each process; where several serve one port, their counts are added up.
"""

import os
from collections.abc import Iterator

from flask import Blueprint, Response, request
from prometheus_client import CONTENT_TYPE_LATEST, CollectorRegistry, generate_latest
from prometheus_client.core import GaugeMetricFamily, HistogramMetricFamily
from prometheus_client.metrics_core import Metric
from prometheus_client.multiprocess import MultiProcessCollector
from prometheus_client.registry import Collector
from sqlalchemy import func, select

from service.access.scopes import Scope
from service.api.asking import CHALLENGE, asker_or_none, open_on_loopback
from service.api.describing import describes
from service.api.operations import about
from service.api.own_pages import is_of_this_machine
from service.api.problems import ProblemError
from service.background.queue import Queue, QueueAwayError
from service.background.stage_times import StageTimes, stage_times
from service.hooks.deliveries import count_deliveries
from service.orders.states import State
from service.parts import Parts
from service.store.tables import Hook, Order

COUNTS_OF_PROCESSES = "PROMETHEUS_MULTIPROC_DIR"  # the folder by which the processes of one port share their counts


def metrics_routes(parts: Parts, queue: Queue, counted: CollectorRegistry) -> Blueprint:
    """The route of metrics.

    Args:
        parts: Read for the numbers of the shop.
        queue: Asked for its length.
        counted: What this process counts.
    """
    routes = Blueprint("metrics", __name__)
    of_shop = CollectorRegistry(auto_describe=False)
    of_shop.register(_Shop(parts, queue))

    @routes.get("/metrics")
    @describes(about.METRICS)
    @open_on_loopback(Scope.ADMIN)
    def tell_metrics() -> Response:
        settings = parts.settings
        is_near = settings.access.listens_on_loopback and is_of_this_machine(request, settings.places.public_url)
        if asker_or_none() is None and not is_near:
            # Layouts may be open to all; how the shop does is not.
            raise ProblemError(
                name="key-missing",
                detail="metrics need a key with the scope admin; add the header  Authorization: Bearer dw_…",
                headers={"WWW-Authenticate": CHALLENGE},
            )
        text = generate_latest(of_shop) + generate_latest(_of_all_processes(counted))
        response = Response(text, content_type=CONTENT_TYPE_LATEST)
        response.headers["Cache-Control"] = "no-store"
        return response

    return routes


def _of_all_processes(counted: CollectorRegistry) -> CollectorRegistry:
    if COUNTS_OF_PROCESSES not in os.environ:
        return counted
    together = CollectorRegistry(auto_describe=False)
    MultiProcessCollector(together)  # type: ignore[no-untyped-call]
    return together


class _Shop(Collector):
    """The numbers of the shop, read anew at each scrape."""

    def __init__(self, parts: Parts, queue: Queue) -> None:
        self._parts = parts
        self._queue = queue

    def collect(self) -> Iterator[Metric]:
        """All of them.

        Raises:
            StoreBusyError: The database does not answer.
        """
        store = self._parts.store
        with store.reading() as session:
            now = store.now(session)
            counted = session.execute(select(Order.state, func.count()).group_by(Order.state))
            by_state = {state: count for state, count in counted}
            waiting = select(func.min(Order.updated_at)).where(Order.state == State.RECEIVED)
            oldest = session.scalar(waiting)
            deliveries = count_deliveries(session)
            disabled = session.scalar(
                select(func.count()).where(Hook.disabled_at.is_not(None), Hook.deleted_at.is_(None))
            )
            planned = stage_times(session)
        yield _by_word("discwright_orders", "Orders by state.", {state: by_state.get(state, 0) for state in State})
        age_s = 0.0 if oldest is None else max(0.0, (now - oldest).total_seconds())
        yield _one("discwright_oldest_waiting_order_seconds", "Age of the order that waits longest.", age_s)
        yield _by_word("discwright_hook_messages", "Messages to hooks, by what became of them.", deliveries)
        yield _one("discwright_hooks_disabled", "Hooks that are told nothing until they are enabled.", disabled or 0)
        yield from self._length()
        yield _planning(planned)

    def _length(self) -> Iterator[Metric]:
        try:
            length = self._queue.length()
        except QueueAwayError:
            yield _one("discwright_queue_up", "Whether the queue answers.", 0)
        else:
            yield _one("discwright_queue_up", "Whether the queue answers.", 1)
            yield _one("discwright_queue_length", "Messages in the queue that no worker has taken.", length)


def _one(name: str, meaning: str, value: float) -> Metric:
    return GaugeMetricFamily(name, meaning, value=value)


def _by_word(name: str, meaning: str, values: dict[str, int]) -> Metric:
    family = GaugeMetricFamily(name, meaning, labels=("state",))
    for word, value in values.items():
        family.add_metric((word,), value)
    return family


def _planning(planned: tuple[StageTimes, ...]) -> Metric:
    family = HistogramMetricFamily(
        "discwright_planning_seconds", "Seconds that planning took, by stage, over all workers.", labels=("stage",)
    )
    for times in planned:
        buckets = [(f"{at_most_s:g}" if at_most_s is not None else "+Inf", n) for at_most_s, n in times.cumulated()]
        family.add_metric((times.stage,), buckets=buckets, sum_value=times.total_s)
    return family
