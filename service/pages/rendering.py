"""A page from its template: escaped throughout, packed where the browser takes that, nothing inline that runs."""

import gzip
import json
from functools import cache
from typing import Any

from flask import Request, Response, g
from jinja2 import Environment, PackageLoader, StrictUndefined
from markupsafe import Markup

from layout.version import ENGINE_VERSION
from service.access.asker import Asker
from service.pages.assets import address_of
from service.pages.texts import for_scripts, text_of

# Nothing but what this service serves itself; no inline script or style, no plug-ins, no frames (CSP level 3).
POLICY = (
    "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self'; media-src 'self'; connect-src 'self'; "
    "form-action 'self'; base-uri 'none'; frame-ancestors 'none'"
)
HTML_MEDIA_TYPE = "text/html; charset=utf-8"


def page(asked: Request, template: str, *, scripts: tuple[str, ...] = (), status: int = 200, **values: Any) -> Response:
    """A page.

    Args:
        asked: The request, read for the codings it takes.
        template: File in the folder of templates.
        scripts: Parts of the texts that its scripts show.
        status: Of HTTP.
        values: What the template shows; those it asks for and does not get are an error.
    """
    asker: Asker | None = g.get("asker")
    html = (
        _environment()
        .get_template(template)
        .render(asker=asker, script_texts=for_scripts(scripts), here=asked.path, **values)
    )
    response = packed(asked, html.encode())
    response.status_code = status
    response.content_type = HTML_MEDIA_TYPE
    response.headers["Content-Security-Policy"] = POLICY
    response.headers["Referrer-Policy"] = "same-origin"
    response.headers["Cache-Control"] = "private, no-cache"
    return response


def packed(asked: Request, content: bytes) -> Response:
    """An answer with these bytes, by gzip where the request takes it.

    Not for what holds a secret beside words of others: how well the two pack together would tell of the secret.
    """
    takes = asked.accept_encodings.quality("gzip") > 0
    response = Response(gzip.compress(content, 6, mtime=0) if takes else content)
    if takes:
        response.headers["Content-Encoding"] = "gzip"
    response.vary.add("Accept-Encoding")
    return response


@cache
def _environment() -> Environment:
    made = Environment(
        loader=PackageLoader("service.pages"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    made.globals.update(t=text_of, asset=address_of, engine_version=ENGINE_VERSION)
    made.filters["json_block"] = _json_block
    return made


def _json_block(value: Any) -> Markup:
    """A value as JSON that may stand in a block of data of a page: no `<` in it, so that no tag can end the block."""
    text = json.dumps(value, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    return Markup(text.replace("<", "\\u003c").replace("\u2028", "\\u2028").replace("\u2029", "\\u2029"))
