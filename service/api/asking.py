"""Who asks: every route declares who may, and one guard before all of them finds out who does.

A route without a declaration answers nobody. A request shows a key (`Authorization: Bearer dw_…`), or the cookie of a
browser that is signed in as one; the cookie alone is never enough to write, see `service/api/own_pages.py`.
"""

import logging
from collections.abc import Callable
from dataclasses import dataclass
from datetime import datetime
from enum import StrEnum
from functools import wraps
from typing import Any, TypeVar

from flask import Flask, Request, Response, current_app, g, request
from werkzeug.exceptions import NotFound

from service.access.asker import Asker
from service.access.browsers import Browser, find_browser
from service.access.keys import KeyInForce, find_key, note_use
from service.access.rates import Count, Kind, Rates, of_address
from service.access.scopes import Scope
from service.api.own_pages import SAFE_METHODS, cookie_of, is_of_this_machine, why_not_vouched
from service.api.problems import ProblemError
from service.moments import utc_now
from service.parts import Parts

log = logging.getLogger("discwright")

NUL = "\0"
CHALLENGE = 'Bearer realm="discwright"'  # RFC 6750 section 3
BY_KEY = ("Authorization", "Cookie")  # fields of a request by which answers differ
View = TypeVar("View", bound=Callable[..., Any])


class Openness(StrEnum):
    """Who may come without a key."""

    NOBODY = "nobody"
    ON_LOOPBACK = "open on loopback"  # programs and pages of this machine, where the service listens there alone
    ALL = "open"


@dataclass(frozen=True, slots=True, kw_only=True)
class Access:
    """Who may ask for a route; the attribute `access` of its view.

    Attributes:
        scope: What a key must be allowed; None where any key will do.
        openness: Who may come without a key.
        is_counted: Whether requests count against a rate.
        sees_more: Whether, of a route open to all, a key shows more than nobody sees; one shown must then be allowed.
    """

    scope: Scope | None
    openness: Openness = Openness.NOBODY
    is_counted: bool = True
    sees_more: bool = False


def needs(scope: Scope) -> Callable[[Callable[..., Any]], Callable[..., Any]]:
    """Declare that a view needs a key with a scope; the view gets the `Asker` as its first argument.

    Stands next to the route, above anything that reads the request.
    """
    return _with_asker(Access(scope=scope))


def needs_any_key(view: Callable[..., Any]) -> Callable[..., Any]:
    """Declare that a view needs a key, whatever it may do; the view gets the `Asker` as its first argument."""
    return _with_asker(Access(scope=None))(view)


def open_on_loopback(scope: Scope) -> Callable[[View], View]:
    """Declare that a view needs a key with a scope, but for who asks on this machine, see `Openness`.

    The view gets no argument; `asker_or_none` tells who asks.
    """
    return _declared(Access(scope=scope, openness=Openness.ON_LOOPBACK))


def open_to_all(view: View) -> View:
    """Declare that a view is for all, as often as they like: it does no work and tells nothing of anybody."""
    return _declared(Access(scope=None, openness=Openness.ALL, is_counted=False))(view)


def open_but_counted(view: View) -> View:
    """Declare that a view is for all, each address as often as the rates say."""
    return _declared(Access(scope=None, openness=Openness.ALL))(view)


def open_and_more_with(scope: Scope) -> Callable[[View], View]:
    """Declare that a view is for all, each address as often as the rates say, and that a key with a scope sees more.

    The view gets no argument; `asker_or_none` tells who asks. A key that is shown and lacks the scope is refused.
    """
    return _declared(Access(scope=scope, openness=Openness.ALL, sees_more=True))


def access_of(view: Callable[..., Any]) -> Access | None:
    """What a view declares; None where it declares nothing."""
    declared = getattr(view, "access", None)
    return declared if isinstance(declared, Access) else None


def asker_or_none() -> Asker | None:
    """Who asks; None where nobody showed a key, on a route that takes such."""
    asker: Asker | None = g.get("asker")
    return asker


def browser_or_none() -> Browser | None:
    """The browser that asks; None where it is no browser that is signed in."""
    browser: Browser | None = g.get("browser")
    return browser


def guard(app: Flask, parts: Parts, rates: Rates, clock: Callable[[], datetime] = utc_now) -> None:
    """Let every route of an app be asked only by whom it declares.

    Args:
        app: The app; routes may be added before and after.
        parts: Read for keys and settings.
        rates: Counts requests.
        clock: The moment, in UTC.
    """
    gate = _Gate(parts, rates, clock)

    @app.before_request
    def let_in() -> None:
        if NUL in request.path:  # there is no such id, and PostgreSQL takes no such text
            raise NotFound
        if request.endpoint is not None:  # else there is no such route, which is told to all
            gate.let_in(request, access_of(app.view_functions[request.endpoint]))

    @app.after_request
    def tell_count(response: Response) -> Response:
        count: Count | None = g.get("count")
        if count is not None:
            for name, value in count.header_fields().items():
                response.headers[name] = value
        if g.get("by_key", False):  # what one key is shown is not what another is
            if "Vary" in response.headers:
                response.vary.update(BY_KEY)
            else:
                response.headers["Vary"] = ", ".join(BY_KEY)
        return response


class _Gate:
    """Finds out who asks, and whether they may."""

    def __init__(self, parts: Parts, rates: Rates, clock: Callable[[], datetime]) -> None:
        self._store = parts.store
        self._access = parts.settings.access
        self._public_url = parts.settings.places.public_url
        self._rates = rates
        self._clock = clock

    def let_in(self, asked: Request, access: Access | None) -> None:
        """Note who asks in `g`.

        Raises:
            ProblemError: They may not.
        """
        if access is None:
            log.error("%s declares nobody who may ask for it", asked.endpoint)
            raise ProblemError(name="internal-error", detail="the service failed; its log holds more")
        for name in ("asker", "browser", "count"):  # of a request before in the same context
            g.pop(name, None)
        g.by_key = access.openness is not Openness.ALL or access.sees_more
        if access.openness is Openness.ALL and not access.sees_more:
            if access.is_counted:
                self._count(asked, of_address(asked.remote_addr))
            return
        key = self._key_shown(asked, access)
        if key is None:
            self._count(asked, of_address(asked.remote_addr))
            if access.sees_more or (access.openness is Openness.ON_LOOPBACK and self._is_open_to(asked)):
                return
            raise _key_missing(has_cookie=cookie_of(asked, self._public_url) is not None)
        self._count(asked, key.asker.key_id)
        note_use(self._store, key, self._clock())
        if access.scope is not None and access.scope not in key.asker.scopes:
            raise _scope_missing(access.scope, key.asker)
        g.asker = key.asker

    def _key_shown(self, asked: Request, access: Access) -> KeyInForce | None:
        shown = asked.headers.get("Authorization")
        if shown is not None:
            scheme, _, secret = shown.strip().partition(" ")
            key = find_key(self._store, secret.strip()) if scheme.lower() == "bearer" else None
            if key is None:
                self._count(asked, of_address(asked.remote_addr))
                raise _key_refused()
            return key
        cookie = cookie_of(asked, self._public_url)
        browser = find_browser(self._store, cookie, self._clock()) if cookie else None
        if browser is None:
            return None
        if asked.method not in SAFE_METHODS:
            reason = why_not_vouched(asked, browser, self._public_url)
            if reason is not None and access.openness is Openness.ON_LOOPBACK and self._is_open_to(asked):
                return None  # asked for without leaning on the cookie, as any program here may
            if reason is not None:
                self._count(asked, browser.key.asker.key_id)
                raise ProblemError(name="write-not-vouched", detail=reason)
        g.browser = browser
        return browser.key

    def _is_open_to(self, asked: Request) -> bool:
        if self._access.open_layouts is not None:
            return self._access.open_layouts
        return self._access.listens_on_loopback and is_of_this_machine(asked, self._public_url)

    def _count(self, asked: Request, whose: str) -> None:
        kind = Kind.READ if asked.method in SAFE_METHODS else Kind.WRITE
        count = self._rates.count(kind, whose)
        g.count = count
        if count is not None and count.is_over:
            raise ProblemError(
                name="too-many-requests",
                detail=f"more than {count.most} requests that {kind} came within {count.window_s} seconds; "
                f"ask again in {count.reset_s} seconds",
                more={"retry_after_s": count.reset_s},
            )


def _with_asker(access: Access) -> Callable[[Callable[..., Any]], Callable[..., Any]]:
    def declare(view: Callable[..., Any]) -> Callable[..., Any]:
        @wraps(view)
        def asked(*arguments: Any, **named: Any) -> Any:
            # Without the guard nobody was let in: a fault of the program, so nothing is answered.
            return current_app.ensure_sync(view)(g.asker, *arguments, **named)

        return _declared(access)(asked)

    return declare


def _declared(access: Access) -> Callable[[View], View]:
    def declare(view: View) -> View:
        view.access = access  # type: ignore[attr-defined]  # functions take attributes
        return view

    return declare


def _key_missing(*, has_cookie: bool) -> ProblemError:
    signed_out = "this browser is not signed in any more, and " if has_cookie else ""
    return ProblemError(
        name="key-missing",
        detail=f"{signed_out}the request shows no key; add the header  Authorization: Bearer dw_…",
        headers={"WWW-Authenticate": CHALLENGE},
    )


def _key_refused() -> ProblemError:
    # One text for a key that never was, one that was revoked, and what is no key at all.
    return ProblemError(
        name="key-refused",
        detail="the header Authorization shows no key that is in force; it is  Bearer dw_…",
        headers={"WWW-Authenticate": f'{CHALLENGE}, error="invalid_token"'},
    )


def _scope_missing(scope: Scope, asker: Asker) -> ProblemError:
    has = ", ".join(sorted(asker.scopes)) or "none"
    return ProblemError(
        name="scope-missing",
        detail=f"this needs a key with the scope {scope}; the key shown has {has}",
        more={"scope": scope},
        headers={"WWW-Authenticate": f'{CHALLENGE}, error="insufficient_scope", scope="{scope}"'},
    )
