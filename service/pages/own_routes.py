"""/assets: what pages load. /sign-in: the form for a key."""

from flask import Blueprint, Response, request
from werkzeug.exceptions import NotFound

from service.api.asking import open_to_all
from service.api.sign_in import own_page
from service.pages.assets import assets, digest
from service.pages.page_views import gives_page
from service.pages.rendering import page

A_YEAR_S = 31_536_000  # s; what is named by its content never changes


def own_routes() -> Blueprint:
    """The routes that every page leans on."""
    routes = Blueprint("page_parts", __name__)

    @routes.get("/assets/<asked_digest>/<path:name>")
    @gives_page
    @open_to_all
    def give_asset(asked_digest: str, name: str) -> Response:
        asset = assets().get(name)
        if asset is None or asked_digest != digest():
            raise NotFound
        takes = request.accept_encodings.quality("gzip") > 0
        response = Response(asset.packed if takes else asset.content, content_type=asset.media_type)
        if takes:
            response.headers["Content-Encoding"] = "gzip"
        response.vary.add("Accept-Encoding")
        response.headers["Cache-Control"] = f"public, max-age={A_YEAR_S}, immutable"
        return response

    @routes.get("/sign-in")
    @gives_page
    @open_to_all
    def show_sign_in() -> Response:
        return page(request, "sign_in.html", problem=None, back=own_page(request.args.get("back", "")))

    return routes
