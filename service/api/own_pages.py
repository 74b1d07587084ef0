"""Whether a request comes from the service's own pages: cookies, tokens and origins.

A browser sends a cookie with every request to the service, whoever's page makes it. So a write made with the cookie
must bring the token that only the service's own pages can read, and must not come from another site's page.
"""

from functools import lru_cache
from urllib.parse import urlsplit

from flask import Request, Response

from service.access.browsers import Browser, SignedIn
from service.access.loopback import is_loopback

SAFE_METHODS = frozenset({"GET", "HEAD", "OPTIONS"})  # that change nothing (RFC 9110 section 9.2.1)
TOKEN_HEADER, TOKEN_FIELD = "X-CSRF-Token", "csrf_token"
FORM_MEDIA_TYPE = "application/x-www-form-urlencoded"
# A name with __Host- is taken by browsers over https alone, from this host alone (RFC 6265bis section 4.1.3.2).
COOKIE, SECURE_COOKIE = "discwright", "__Host-discwright"
OWN_SITES = frozenset({"same-origin", "none"})  # none: a person typed the address or followed a bookmark
# Fields of a request that came through a proxy, as a WSGI environment names them (PEP 3333).
PASSED_ON = ("HTTP_FORWARDED", "HTTP_X_FORWARDED_FOR", "HTTP_X_FORWARDED_HOST", "HTTP_X_REAL_IP", "HTTP_VIA")


def cookie_of(asked: Request, public_url: str | None) -> str | None:
    """The secret in the cookie of a browser, or None."""
    if "Cookie" not in asked.headers:  # as of most programs
        return None
    return asked.cookies.get(_cookie_name(asked, public_url)) or None


def set_cookie(response: Response, asked: Request, signed_in: SignedIn, public_url: str | None) -> None:
    """Sign the browser in that gets this answer.

    The cookie is no business of scripts, and goes over https alone where the service is reached so. Lax, so that who
    follows a link of a mail to an order is signed in there; writes have the token besides.
    """
    response.set_cookie(
        _cookie_name(asked, public_url),
        signed_in.secret,
        expires=signed_in.expires_at,
        httponly=True,
        secure=_is_secure(asked, public_url),
        samesite="Lax",
        path="/",
    )


def clear_cookie(response: Response, asked: Request, public_url: str | None) -> None:
    """Sign the browser out that gets this answer, and let it forget the answers it kept (W3C Clear Site Data)."""
    secure = _is_secure(asked, public_url)
    name = _cookie_name(asked, public_url)
    response.delete_cookie(name, httponly=True, secure=secure, samesite="Lax", path="/")
    response.headers["Clear-Site-Data"] = '"cache"'


def why_not_vouched(asked: Request, browser: Browser, public_url: str | None) -> str | None:
    """Why a write made with the cookie is not known to come from the service's own pages; None where it is.

    The token is looked for in a form only where the whole body is one: other bodies are left to who reads them.
    """
    elsewhere = from_elsewhere(asked, public_url)
    if elsewhere is not None:
        return elsewhere
    token = asked.headers.get(TOKEN_HEADER)
    if token is None and asked.mimetype == FORM_MEDIA_TYPE:
        token = asked.form.get(TOKEN_FIELD)
    if token is None:
        return f"a browser that is signed in writes with its token; add it as the header {TOKEN_HEADER}"
    return None if browser.is_token(token) else f"{TOKEN_HEADER} is not this browser's token; load the page again"


def from_elsewhere(asked: Request, public_url: str | None) -> str | None:
    """Why a request seems to come from a page of another site; None where nothing says so.

    Browsers say it in Sec-Fetch-Site (W3C Fetch Metadata) and Origin (RFC 6454, Fetch); other programs in neither.
    """
    site = asked.headers.get("Sec-Fetch-Site")
    if site is not None and site not in OWN_SITES:
        return f"the request comes from a page of another site: Sec-Fetch-Site is {site[:40]!r}"
    origin = asked.headers.get("Origin")
    own = {f"{asked.scheme}://{asked.host}", _origin_of(public_url)}
    if origin is not None and origin not in own:
        return (
            f"the request comes from a page of {origin[:100]!r}, which is not where this service is reached; "
            "where it is, the setting DISCWRIGHT_PUBLIC_URL should say so"
        )
    return None


def is_of_this_machine(asked: Request, public_url: str | None) -> bool:
    """Whether a program or an own page of this very machine asks: not a page of another site, nor through a proxy.

    The host must be named as this machine's too, or another site's name could be made to lead here.
    """
    near = is_loopback(asked.remote_addr or "") and _is_of_loopback(asked.host)
    is_passed_on = any(name in asked.environ for name in PASSED_ON)
    return near and not is_passed_on and (asked.method in SAFE_METHODS or from_elsewhere(asked, public_url) is None)


@lru_cache(maxsize=64)  # every request names one, nearly all the same
def _is_of_loopback(host: str) -> bool:
    """Whether the Host of a request is this machine, whatever its port."""
    try:
        return is_loopback(urlsplit(f"//{host}").hostname or "")
    except ValueError:
        return False


def _origin_of(url: str | None) -> str | None:
    if url is None:
        return None
    parts = urlsplit(url)
    return f"{parts.scheme}://{parts.netloc}"


def _is_secure(asked: Request, public_url: str | None) -> bool:
    return asked.is_secure or (public_url or "").startswith("https:")


def _cookie_name(asked: Request, public_url: str | None) -> str:
    return SECURE_COOKIE if _is_secure(asked, public_url) else COOKIE
