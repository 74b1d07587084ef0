"""/v1/export: all that is kept of one owner, in one archive that is made while it is sent."""

from flask import Blueprint, Response, request

from service.access.asker import Asker
from service.access.scopes import Scope
from service.api.asking import needs
from service.api.describing import describes
from service.api.models.exports import ExportQuery
from service.api.operations import exports
from service.api.problems import ProblemError
from service.api.request_models import read_arguments
from service.api.zip_stream import Packed, zip_stream
from service.orders.exporting import export_of, find_owner
from service.parts import Parts

ZIP_MEDIA_TYPE = "application/zip"


def export_routes(parts: Parts) -> Blueprint:
    """The route of exports.

    Args:
        parts: What is exported.
    """
    routes = Blueprint("exports", __name__, url_prefix="/v1/export")

    @routes.get("")
    @describes(exports.EXPORT)
    @needs(Scope.ADMIN)
    def export(asker: Asker) -> Response:
        query = read_arguments(request, ExportQuery)
        if asker.is_test:
            raise ProblemError(name="key-for-tests", detail="the key shown is for tests and exports nothing")
        owner_id = _owner_id(parts, asker, query.owner)
        files = export_of(parts.store, parts.files, owner_id)
        archive = zip_stream(Packed(name=name, pieces=pieces) for name, pieces in files)
        response = Response(archive, content_type=ZIP_MEDIA_TYPE)
        response.headers["Content-Disposition"] = f'attachment; filename="export_{owner_id}.zip"'
        response.headers["Cache-Control"] = "no-store"
        return response

    return routes


def _owner_id(parts: Parts, asker: Asker, named: str | None) -> str:
    if named in (None, asker.owner_id):
        return asker.owner_id
    found = find_owner(parts.store, str(named)) if asker.sees_all_owners else None
    if found is None:
        raise ProblemError(name="order-unknown", detail=f"there is no owner {str(named)[:64]!r}")
    return found
