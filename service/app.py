"""The web service: builds the Flask app and wires its parts."""

import os
from collections.abc import Callable, Iterator
from datetime import UTC, datetime
from typing import Any

from flask import Blueprint, Flask
from prometheus_client import CollectorRegistry

from service.access.rates import Rates
from service.api.about import about_routes
from service.api.answers import with_safe_head
from service.api.apart import PlannedApart, within_s
from service.api.asking import guard
from service.api.catalogue import catalogue_routes
from service.api.computing_queue import open_computing_queue
from service.api.desk import LayoutDesk
from service.api.events import event_routes
from service.api.exports import export_routes
from service.api.failures import answer_failures
from service.api.hearing_shelf import HearingShelf
from service.api.hooks import hook_routes
from service.api.in_turn import in_turn
from service.api.keys import key_routes
from service.api.layout_cache import LayoutCache
from service.api.layouts import layout_routes
from service.api.metering import meter
from service.api.metrics import metrics_routes
from service.api.openapi import openapi_routes
from service.api.order_decisions import decision_routes
from service.api.order_files import order_file_routes
from service.api.orders import order_routes
from service.api.problem_pages import problem_pages
from service.api.proofs import proof_routes
from service.api.quotes import quote_routes
from service.api.readiness import readiness_routes
from service.api.request_ids import name_requests
from service.api.runs import run_routes
from service.api.sheets import sheet_routes
from service.api.sign_in import sign_in_routes
from service.api.test_tunes import test_tune_routes
from service.api.trial_pieces import trial_piece_routes
from service.background.queue import Queue
from service.computing.children import Children
from service.logs import is_logging, start_logging
from service.orders.proofs import PURPOSE, ProofLinks
from service.pages.disc import disc_routes
from service.pages.machines import machine_routes
from service.pages.measuring import measuring_routes
from service.pages.new_disc import new_disc_routes
from service.pages.orders import orders_routes
from service.pages.own_routes import own_routes
from service.pages.problems_shown import show_problems
from service.pages.proof import proof_page_routes
from service.pages.reference import reference_routes
from service.parts import Parts, open_parts
from service.planner import AnyPlanner, TheWalk
from service.settings import ServiceSettings, settings_from

OPENED = "discwright opened"


class _App(Flask):
    """The app. No view or hook of it is a coroutine, and Flask would look at each of ten for every request."""

    def ensure_sync(self, func: Callable[..., Any]) -> Callable[..., Any]:
        """The function as it is."""
        return func


def create_app(
    settings: ServiceSettings | None = None, *, planner: AnyPlanner | None = None, children: Children | None = None
) -> Flask:
    """The service as a WSGI app. Made after a process has forked, never before: it opens the database.

    Args:
        settings: None for those that the environment asks for.
        planner: The computation; None for the walk.
        children: They compute layouts, each by the planner it is told; with them no planner is given.

    Raises:
        SettingsError: The environment asks for something the service cannot do.
        StoreError: The database does not answer, or has the tables of another version.
    """
    if settings is None:
        settings = settings_from(os.environ)
    assert planner is None or children is None
    if not is_logging():
        start_logging(settings.work)
    parts = open_parts(settings)
    queue = Queue(settings.queue_url)
    app = _App("discwright", static_folder=None, template_folder=None)
    app.extensions[OPENED] = (parts.store, queue)  # what whoever made the app may close
    app.config["MAX_CONTENT_LENGTH"] = settings.limits.upload_bytes + 1  # one more, to see that it is too large
    counted = CollectorRegistry()
    meter(app, counted)
    answer_failures(app, settings.limits)
    guard(app, parts, Rates(settings.access))
    computing_queue = open_computing_queue(app, None)
    if children is None:
        planner = in_turn(planner or TheWalk(), computing_queue)
    else:
        planner = PlannedApart(children, within_s=within_s(settings))
    desk = LayoutDesk(planner, LayoutCache(settings), computing_queue, settings.limits)
    shelf = HearingShelf(settings)
    for routes in (*_routes_of_layouts(planner, desk, parts, shelf), *_routes_of_orders(parts, queue, shelf)):
        app.register_blueprint(routes)
    app.register_blueprint(metrics_routes(parts, queue, counted))
    app.register_blueprint(readiness_routes(parts))
    app.register_blueprint(openapi_routes(settings.places.public_url))
    for routes in _pages(desk, parts):
        app.register_blueprint(routes)
    app.after_request(with_safe_head)
    show_problems(app)
    name_requests(app)
    return app


def _routes_of_layouts(planner: AnyPlanner, desk: LayoutDesk, parts: Parts, shelf: HearingShelf) -> Iterator[Blueprint]:
    """What is computed at once and kept for a while."""
    settings = parts.settings
    yield layout_routes(desk, parts, shelf)
    yield trial_piece_routes(parts)
    yield quote_routes(planner, parts)
    yield sheet_routes(settings.limits)
    yield catalogue_routes(parts)
    yield about_routes(settings.limits)
    yield test_tune_routes(settings.limits)
    yield problem_pages()


def _routes_of_orders(parts: Parts, queue: Queue, shelf: HearingShelf) -> Iterator[Blueprint]:
    """What is kept, and who may see it."""
    links = _links(parts)
    yield order_routes(parts, queue.send, shelf)
    yield decision_routes(parts, queue.send, links)
    yield order_file_routes(parts, shelf)
    yield run_routes(parts)
    yield event_routes(parts)
    yield proof_routes(parts, links, shelf)
    yield hook_routes(parts)
    yield export_routes(parts)
    yield key_routes(parts, _now)
    yield sign_in_routes(parts, _now)


def _pages(desk: LayoutDesk, parts: Parts) -> Iterator[Blueprint]:
    """What people see."""
    yield own_routes()
    yield new_disc_routes(parts)
    yield disc_routes(desk)
    yield reference_routes(parts.settings.places.public_url)
    yield machine_routes(parts)
    yield measuring_routes()
    yield orders_routes(parts)
    yield proof_page_routes(parts, _links(parts))


def _links(parts: Parts) -> ProofLinks:
    return ProofLinks(parts.secret_for(PURPOSE), days=parts.settings.work.quote_days)


def _now() -> datetime:
    return datetime.now(UTC)
