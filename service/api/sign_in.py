"""/sign-in and /sign-out: how a browser is let in, and leaves."""

import re
from collections.abc import Callable
from datetime import datetime, timedelta

from flask import Blueprint, Request, Response, request

from service.access.asker import Asker
from service.access.browsers import SignedIn, sign_in_as, sign_in_by_link, sign_out
from service.access.keys import find_key
from service.api.asking import needs_any_key, open_but_counted
from service.api.describing import describes
from service.api.operations import keys
from service.api.own_pages import FORM_MEDIA_TYPE, clear_cookie, cookie_of, from_elsewhere, set_cookie
from service.api.problems import ProblemError
from service.moments import utc_now
from service.parts import Parts

FIRST_PAGE = "/"
MOST_CHARACTERS = 2000  # of the path of a page: what every browser and server takes
# A path of this service: two slashes, or a backslash, which browsers take for one, would begin another host.
OWN_PAGE = re.compile(rf"/(?!/)[\x21-\x5b\x5d-\x7e]{{0,{MOST_CHARACTERS - 1}}}")


def sign_in_routes(parts: Parts, clock: Callable[[], datetime] = utc_now) -> Blueprint:
    """The routes by which browsers are signed in and out.

    Args:
        parts: Read for the database and the settings.
        clock: The moment, in UTC.
    """
    routes = Blueprint("sign_in", __name__)
    store, public_url = parts.store, parts.settings.places.public_url
    lasts = timedelta(hours=parts.settings.access.session_hours)

    def first_page(signed_in: SignedIn, to: str = FIRST_PAGE) -> Response:
        response = _led_on(to)
        set_cookie(response, request, signed_in, public_url)
        return response

    @routes.get("/sign-in/<secret>")
    @describes(keys.SIGN_IN_BY_LINK)
    @open_but_counted
    def use_link(secret: str) -> Response:
        # Whoever only looks ahead, as browsers and mail programs do, must not use the link up.
        ahead = request.method == "HEAD" or "prefetch" in request.headers.get("Sec-Purpose", "")
        signed_in = None if ahead else sign_in_by_link(store, secret, clock(), lasts)
        if signed_in is None:
            raise ProblemError(
                name="sign-in-refused",
                detail="the link was used, is older than 15 minutes, or was never made",
                headers={"Referrer-Policy": "no-referrer"},
            )
        return first_page(signed_in)

    @routes.post("/sign-in")
    @describes(keys.SIGN_IN)
    @open_but_counted
    def sign_in() -> Response:
        key = find_key(store, _key_posted(request, public_url))
        if key is None:
            raise ProblemError(name="sign-in-refused", detail="the field key holds no key that is in force")
        return first_page(sign_in_as(store, key, clock(), lasts), _page_wanted(request))

    @routes.post("/sign-out")
    @describes(keys.SIGN_OUT)
    @needs_any_key
    def leave(_: Asker) -> Response:
        cookie = cookie_of(request, public_url)
        if cookie:
            sign_out(store, cookie)
        response = _led_on()
        clear_cookie(response, request, public_url)
        return response

    return routes


def own_page(wanted: str) -> str:
    """The page of this service that is wanted; the first page where what is wanted is none of them."""
    return wanted if OWN_PAGE.fullmatch(wanted) else FIRST_PAGE


def _key_posted(asked: Request, public_url: str | None) -> str:
    """What the field `key` of a form holds; "" where there is none.

    Raises:
        ProblemError: The body is no form, or comes from another site, which must not sign a person in as somebody else.
    """
    elsewhere = from_elsewhere(asked, public_url)
    if elsewhere is not None:
        raise ProblemError(name="write-not-vouched", detail=elsewhere)
    if asked.mimetype != FORM_MEDIA_TYPE:
        raise ProblemError(
            name="media-type-unsupported",
            detail=f"{asked.mimetype[:100] or 'a body without a media type'!r} is not taken; "
            f"send the field key as {FORM_MEDIA_TYPE}",
            more={"allowed_types": [FORM_MEDIA_TYPE]},
            headers={"Accept-Post": FORM_MEDIA_TYPE},
        )
    return asked.form.get("key", "").strip()


def _page_wanted(asked: Request) -> str:
    """The page of this service that the field `back` of a form names; the first page where it names none."""
    return own_page(asked.form.get("back", ""))


def _led_on(to: str = FIRST_PAGE) -> Response:
    """An answer that leads to a page by GET (RFC 9110 section 15.4.4) and tells nobody where from."""
    response = Response(status=303, headers={"Location": to})
    response.headers["Referrer-Policy"] = "no-referrer"
    response.headers["Cache-Control"] = "no-store"
    return response
