"""/v1/runs: many orders asked for at once, and their files in one archive."""

from collections.abc import Callable
from typing import Any
from urllib.parse import urlencode

from flask import Blueprint, Request, Response, request

from layout.documents import read_settings, shipped_cutter_ids
from layout.errors import DocumentError, Problem
from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.answers import json_bytes, json_response
from service.api.archive import ZIP_MEDIA_TYPE
from service.api.asking import needs
from service.api.bodies import pieces_of
from service.api.cursors import Cursors
from service.api.describing import describes
from service.api.failures import too_large
from service.api.models.orders import DocumentName
from service.api.models.runs import MOST_PAIRS, ItemsQuery, RunBody, RunsQuery
from service.api.multipart import parts_in
from service.api.once import once
from service.api.operations import runs
from service.api.posted import FORM_MEDIA_TYPE
from service.api.problems import ProblemError
from service.api.request_models import read_arguments, read_text
from service.api.run_results import item_told, results_of
from service.api.zip_stream import zip_stream
from service.limits import Limits
from service.media_types import JSON_MEDIA_TYPE
from service.moments import moment_text
from service.orders.archives import ArchiveError, open_archive
from service.orders.asked import NamedDocument
from service.orders.faults import InputRefusedError
from service.orders.kept_answers import Given
from service.orders.run_views import RunView, find_run, items_of, list_runs
from service.orders.running import AlsoOfRun, AskedRun, Pair, begin_run, pinned
from service.parts import Parts
from service.store.holds import FileKeeper

PARTS = ("archive", "run")

Pin = Callable[[str, DocumentName | str, str], NamedDocument]  # kind, as it is named, pointer of where


def run_routes(parts: Parts) -> Blueprint:
    """The routes of runs."""
    routes = Blueprint("runs", __name__, url_prefix="/v1/runs")
    cursors = Cursors(parts.secret_for("runs"))

    @routes.post("")
    @describes(runs.BEGIN)
    @needs(Scope.ORDER)
    def begin(asker: Asker) -> Response:
        return _begun(parts, asker, request)

    @routes.get("")
    @describes(runs.LIST)
    @needs(Scope.READ)
    def list_all(asker: Asker) -> Response:
        return _page(parts, cursors, asker, request)

    @routes.get("/<run_id>")
    @describes(runs.TELL)
    @needs(Scope.READ)
    def tell(asker: Asker, run_id: str) -> Response:
        with parts.store.reading() as session:
            return json_response(run_told(find_run(session, asker, run_id)))

    @routes.get("/<run_id>/items")
    @describes(runs.ITEMS)
    @needs(Scope.READ)
    def list_items(asker: Asker, run_id: str) -> Response:
        return _page_of_items(parts, asker, run_id, request)

    @routes.get("/<run_id>/results.zip")
    @describes(runs.RESULTS)
    @needs(Scope.READ)
    def give_results(asker: Asker, run_id: str) -> Response:
        with parts.store.reading() as session:
            find_run(session, asker, run_id)  # told before the archive begins
        response = Response(zip_stream(results_of(parts, asker, run_id)), content_type=ZIP_MEDIA_TYPE)
        response.headers["Content-Disposition"] = f'attachment; filename="{run_id}.zip"'
        response.headers["Cache-Control"] = "no-cache"
        return response

    return routes


def run_told(run: RunView) -> dict[str, Any]:
    """A run as plain values."""
    address = f"/v1/runs/{run.id}"
    return {
        "id": run.id,
        "reference": run.reference,
        "order_count": run.order_count,
        "counts": dict(run.counts),
        "is_finished": run.is_finished,
        "created_at": moment_text(run.created_at),
        "links": {
            "self": address,
            "items": f"{address}/items",
            "orders": f"/v1/orders?run={run.id}",
            "results": f"{address}/results.zip",
        },
    }


def _begun(parts: Parts, asker: Asker, asked: Request) -> Response:
    """Write a run down.

    Raises:
        ProblemError, LayoutError: Something of it cannot be taken; nothing is ordered.
    """
    limits = parts.settings.limits
    brought = _brought(asked, limits)
    body = read_text(asked, RunBody, brought["run"], document="run")
    if body.release_alone and Scope.RELEASE not in asker.scopes:
        raise ProblemError(
            name="scope-missing",
            detail="release_alone needs the scope release, which the key shown lacks",
            more={"scope": Scope.RELEASE.value},
        )
    try:
        with open_archive(brought["archive"], limits) as archive:
            names = archive.tune_names()
    except ArchiveError as fault:
        raise ProblemError(name="archive-unreadable", detail=str(fault)) from fault
    keeper = FileKeeper(parts.store, parts.files)

    def beginning(also: AlsoOfRun) -> RunView:
        # Read only where the run is not begun yet: a movement withdrawn since changes no answer that is kept.
        run = _asked(parts, asker, brought["archive"], body, names)
        return begin_run(parts.store, keeper, asker, run, also)

    try:
        return once(parts, asked, asker, brought, beginning, _given)
    except InputRefusedError as fault:
        raise _refused(fault.pointer, str(fault)) from fault


def _page(parts: Parts, cursors: Cursors, asker: Asker, asked: Request) -> Response:
    query = read_arguments(asked, RunsQuery)
    after = None if query.after is None else cursors.read(query.after)
    with parts.store.reading() as session:
        page, more = list_runs(session, asker, after=after, most=query.limit, test=query.test)
    response = json_response({"runs": [run_told(run) for run in page]})
    if more is not None:
        on = {**asked.args.to_dict(), "after": cursors.make(more)}
        response.headers["Link"] = f'</v1/runs?{urlencode(on)}>; rel="next"'  # RFC 8288
    return response


def _page_of_items(parts: Parts, asker: Asker, run_id: str, asked: Request) -> Response:
    query = read_arguments(asked, ItemsQuery)
    with parts.store.reading() as session:
        items = items_of(session, asker, run_id, after=query.after, most=query.limit + 1)
    page = items[: query.limit]
    response = json_response({"items": [item_told(item) for item in page]})
    if len(items) > query.limit:
        on = urlencode({"after": page[-1].number, "limit": query.limit})
        response.headers["Link"] = f'</v1/runs/{run_id}/items?{on}>; rel="next"'  # RFC 8288
    return response


def _given(run: RunView) -> Given:
    headers = {
        "Content-Type": JSON_MEDIA_TYPE,
        "Cache-Control": "no-cache",
        "Location": f"/v1/runs/{run.id}",
        "Content-Location": f"/v1/runs/{run.id}",
    }
    return Given(status=202, headers=headers, body=json_bytes(run_told(run)))


def _brought(asked: Request, limits: Limits) -> dict[str, bytes]:
    asked.max_content_length = limits.run_bytes + 1  # larger than other bodies may be
    if asked.mimetype != FORM_MEDIA_TYPE:
        raise ProblemError(
            name="media-type-unsupported",
            detail=f"{asked.mimetype[:100] or 'a body without a media type'!r} is not taken; "
            f"send {FORM_MEDIA_TYPE} with the parts {' and '.join(PARTS)}",
            more={"allowed_types": [FORM_MEDIA_TYPE]},
            headers={"Accept-Post": FORM_MEDIA_TYPE},
        )
    brought = parts_in(
        pieces_of(asked, limits.run_bytes),
        boundary=asked.mimetype_params.get("boundary"),
        known=PARTS,
        most_parts=limits.form_parts,
    )
    missing = [name for name in PARTS if not brought.get(name)]
    if missing:
        raise ProblemError(
            name="parameter-missing",
            detail=f"the part {missing[0]} is missing or empty; the parts are {' and '.join(PARTS)}",
            more={"parameter": missing[0]},
        )
    if len(brought["run"]) > limits.run_list_bytes:
        raise too_large(limits.run_list_bytes, "the part run")
    return brought


def _asked(parts: Parts, asker: Asker, archive: bytes, body: RunBody, names: list[str]) -> AskedRun:
    settings = json_bytes(body.settings)
    read_settings(settings)
    cutter = shipped_cutter_ids()[0] if body.cutter is None else body.cutter
    with parts.store.reading() as session:
        found: dict[tuple[str, NamedDocument], NamedDocument] = {}  # many pairs name the same movement

        def pin(kind: str, named: DocumentName | str, pointer: str) -> NamedDocument:
            asked = (kind, _named(named))
            if asked not in found:
                found[asked] = pinned(session, asker, *asked, pointer)
            return found[asked]

        return AskedRun(
            archive=archive,
            pairs=_pairs(body, names, pin),
            cutter=pin("cutter", cutter, "/cutter"),
            settings=settings,
            quantity=body.quantity,
            most_lost_share=body.most_lost_share,
            release_alone=body.release_alone,
            hook_id=body.hook,
            reference=body.reference,
        )


def _pairs(body: RunBody, names: list[str], pin: Pin) -> tuple[Pair, ...]:
    if bool(body.movements) == bool(body.pairs):
        raise _refused("/pairs", "name either movements, for every tune, or pairs")
    known = set(names)
    for number, pair in enumerate(body.pairs):
        if pair.tune not in known:
            raise _refused(f"/pairs/{number}/tune", f"there is no tune {pair.tune[:60]!r} in the archive")
    if body.pairs:
        return tuple(
            Pair(
                tune=pair.tune,
                movement=pin("movement", pair.movement, f"/pairs/{number}/movement"),
                reference=pair.reference,
            )
            for number, pair in enumerate(body.pairs)
        )
    count = len(names) * len(body.movements)
    if count > MOST_PAIRS:
        raise _refused("/movements", f"that makes {count} orders; a run has at most {MOST_PAIRS}")
    movements = [pin("movement", named, f"/movements/{number}") for number, named in enumerate(body.movements)]
    return tuple(Pair(tune=name, movement=movement) for name in names for movement in movements)


def _named(asked: DocumentName | str) -> NamedDocument:
    return NamedDocument(id=asked) if isinstance(asked, str) else NamedDocument(id=asked.id, revision=asked.revision)


def _refused(pointer: str, message: str) -> DocumentError:
    return DocumentError(document="run", problems=(Problem(pointer=pointer, message=message),))
