"""Problems as pages: what a program gets as problem details, a person gets in words, and a way on."""

import json

from flask import Flask, Response, request
from werkzeug.exceptions import HTTPException

from service.api.media import prefers_html
from service.api.problems import PROBLEM_MEDIA_TYPE
from service.api.proofs import PAGE as PROOFS
from service.api.sign_in import FIRST_PAGE
from service.pages.rendering import page

API = "/v1/"
SIGN_IN = "/sign-in"
UNAUTHORIZED = 401


def show_problems(app: Flask) -> None:
    """Show problems as pages to whom asks for pages; what lies under /v1 answers programs and stays as it is."""

    @app.after_request
    def show(response: Response) -> Response:
        if response.mimetype != PROBLEM_MEDIA_TYPE or request.path.startswith(API):
            return response
        is_sign_in = request.path == SIGN_IN  # the one form that a browser sends by itself
        if not (request.method == "GET" or is_sign_in) or not prefers_html(request):
            response.vary.add("Accept")
            return response
        problem = json.loads(response.get_data())
        template = _template_for(request.path, response.status_code)
        query = request.query_string.decode("latin-1")
        shown = page(
            request,
            template,
            status=response.status_code,
            problem=problem,
            back=_back_of_form() if is_sign_in else request.path + (f"?{query}" if query else ""),
        )
        for name in ("Retry-After", "WWW-Authenticate", "RateLimit", "RateLimit-Policy"):
            if name in response.headers:
                shown.headers[name] = response.headers[name]
        shown.vary.add("Accept")
        return shown


def _back_of_form() -> str:
    """The page that the form wanted to come back to; the first where its body is no form that can be read."""
    try:
        return request.form.get("back", FIRST_PAGE)
    except HTTPException:  # it is too large, or was never sent whole: that was the problem to begin with
        return FIRST_PAGE


def _template_for(path: str, status: int) -> str:
    """A customer with a proof link gets no way into the shop, whatever goes wrong."""
    if path == PROOFS or path.startswith(f"{PROOFS}/"):
        return "proof_refused.html"
    is_sign_in = path == SIGN_IN or path.startswith(f"{SIGN_IN}/")
    return "sign_in.html" if status == UNAUTHORIZED or is_sign_in else "problem.html"
