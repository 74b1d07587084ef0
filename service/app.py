"""The web service: builds the Flask app and wires its parts."""

import logging
import os
import sys

from flask import Flask

from layout import walk
from service.api.about import about_routes
from service.api.answers import with_safe_head
from service.api.catalogue import catalogue_routes
from service.api.desk import LayoutDesk
from service.api.failures import answer_failures
from service.api.layout_cache import LayoutCache
from service.api.layouts import layout_routes
from service.api.problem_pages import problem_pages
from service.api.sheets import sheet_routes
from service.api.trial_pieces import trial_piece_routes
from service.planner import AnyPlanner
from service.settings import ServiceSettings, settings_from

LOG_LINE = "%(asctime)s %(levelname)s %(message)s"


def create_app(settings: ServiceSettings | None = None, *, planner: AnyPlanner = walk) -> Flask:
    """The service as a WSGI app.

    Args:
        settings: None for those that the environment asks for.
        planner: The computation.

    Raises:
        SettingsError: The environment asks for something the service cannot do.
    """
    if settings is None:
        settings = settings_from(os.environ)
    _log_to_stderr()
    app = Flask("discwright", static_folder=None, template_folder=None)
    app.config["MAX_CONTENT_LENGTH"] = settings.limits.upload_bytes + 1  # one more, to see that it is too large
    desk = LayoutDesk(planner, LayoutCache(settings), settings.limits)
    app.register_blueprint(layout_routes(desk, settings.limits))
    app.register_blueprint(trial_piece_routes(settings.limits))
    app.register_blueprint(sheet_routes(settings.limits))
    app.register_blueprint(catalogue_routes())
    app.register_blueprint(about_routes(settings.limits))
    app.register_blueprint(problem_pages())
    answer_failures(app, settings.limits)
    app.after_request(with_safe_head)
    return app


def _log_to_stderr() -> None:
    log = logging.getLogger("discwright")
    if not log.hasHandlers():
        handler = logging.StreamHandler(sys.stderr)
        handler.setFormatter(logging.Formatter(LOG_LINE))
        log.addHandler(handler)
        log.setLevel(logging.INFO)
