"""Who may ask: every declaration with every key, writes of browsers, rates."""

import logging
from collections.abc import Iterator
from dataclasses import replace

import pytest
from flask.testing import FlaskClient
from sqlalchemy import text

from service.access.keys import list_keys, revoke_key
from service.access.scopes import Scope
from service.access.secret_texts import new_key_secret
from service.parts import Parts
from service.settings import AccessSettings, PlaceSettings
from tests.service.api.guarded import (
    CROSS_SITE,
    METHODS,
    NOW,
    Clock,
    bearing,
    guarded_app,
    new_key,
    problem_of,
    signed_in,
)


def set_access(parts: Parts, access: AccessSettings, public_url: str | None = None) -> Parts:
    places = PlaceSettings(data_directory=parts.settings.places.data_directory, public_url=public_url)
    return replace(parts, settings=replace(parts.settings, access=access, places=places))


@pytest.fixture
def http(parts: Parts) -> FlaskClient:
    return guarded_app(parts).test_client()


@pytest.fixture
def loopback(parts: Parts) -> FlaskClient:
    """A service that listens on loopback alone."""
    return guarded_app(set_access(parts, AccessSettings(listens_on_loopback=True))).test_client()


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("needed", Scope)
def test_a_route_answers_a_key_with_its_scope_and_no_other(
    parts: Parts, http: FlaskClient, needed: Scope, method: str
) -> None:
    for scope in Scope:
        answer = http.open(f"/{needed}", method=method, headers=bearing(new_key(parts, scope)))
        if scope is needed:
            assert answer.status_code == 200
            continue
        told = problem_of(answer, "scope-missing")
        assert told["detail"] == f"this needs a key with the scope {needed}; the key shown has {scope}"
        assert told["scope"] == needed
        assert answer.headers["WWW-Authenticate"] == (
            f'Bearer realm="discwright", error="insufficient_scope", scope="{needed}"'
        )


def test_a_view_gets_the_key_that_asks(parts: Parts, http: FlaskClient) -> None:
    key = new_key(parts, Scope.READ)

    assert http.get("/read", headers=bearing(key)).json["asker"] == key.told.id  # type: ignore[index]
    assert http.get("/any", headers=bearing(key)).json["asker"] == key.told.id  # type: ignore[index]


@pytest.mark.parametrize("path", [*(f"/{scope}" for scope in Scope), "/any", "/loopback"])
@pytest.mark.parametrize("method", [*METHODS, "HEAD", "OPTIONS"])
def test_who_shows_no_key_is_told_how_to_show_one(http: FlaskClient, path: str, method: str) -> None:
    answer = http.open(path, method=method)

    assert answer.status_code == 401
    assert answer.headers["WWW-Authenticate"] == 'Bearer realm="discwright"'
    if method != "HEAD":
        assert problem_of(answer, "key-missing")["detail"] == (
            "the request shows no key; add the header  Authorization: Bearer dw_…"
        )


def test_a_key_that_never_was_and_one_that_was_revoked_are_answered_alike(parts: Parts, http: FlaskClient) -> None:
    revoked = new_key(parts, *Scope)
    revoke_key(parts.store, revoked.told.id, NOW)

    answers = [
        http.get("/read", headers={"Authorization": shown, "Request-Id": "the-same"})
        for shown in (
            f"Bearer {revoked.secret}",
            f"Bearer {new_key_secret()}",
            "Bearer nonsense",
            "Bearer ",
            "Bearer",
            "",
            "Basic ZHdfOg==",
            f"Basic {revoked.secret}",
            "Bearer \x00\xff",
        )
    ]

    problem_of(answers[0], "key-refused")
    assert answers[0].headers["WWW-Authenticate"] == 'Bearer realm="discwright", error="invalid_token"'
    assert {answer.data for answer in answers} == {answers[0].data}
    fields = [{name: value for name, value in answer.headers if name != "RateLimit"} for answer in answers]
    assert fields == [fields[0]] * len(fields)


@pytest.mark.parametrize("spelling", ["bearer {}", "BEARER {}", "Bearer   {}", " Bearer {} "])
def test_the_scheme_is_read_as_http_has_it(parts: Parts, http: FlaskClient, spelling: str) -> None:
    shown = spelling.format(new_key(parts, Scope.READ).secret)

    assert http.get("/read", headers={"Authorization": shown}).status_code == 200


def test_a_key_in_the_query_or_the_body_is_none(parts: Parts, http: FlaskClient) -> None:
    secret = new_key(parts, Scope.READ).secret

    problem_of(http.get("/read", query_string={"key": secret, "access_token": secret}), "key-missing")
    problem_of(http.post("/read", data={"access_token": secret}), "key-missing")


def test_a_route_that_declares_nothing_answers_nobody(
    parts: Parts, http: FlaskClient, caplog: pytest.LogCaptureFixture
) -> None:
    with caplog.at_level(logging.ERROR, "discwright"):
        answer = http.get("/undeclared", headers=bearing(new_key(parts, *Scope)))

    problem_of(answer, "internal-error")
    assert b"secret" not in answer.data
    assert "/undeclared declares nobody who may ask for it" in caplog.text


def test_an_open_route_answers_all_without_counting(http: FlaskClient) -> None:
    for headers in ({}, bearing(new_key_secret())):
        answer = http.get("/open", headers=headers)
        assert answer.status_code == 200
        assert "RateLimit" not in answer.headers


def test_what_is_not_there_is_not_there_for_all(http: FlaskClient) -> None:
    problem_of(http.get("/nowhere"), "route-unknown")
    problem_of(http.put("/read"), "method-not-allowed")


def test_the_use_of_a_key_is_noted(parts: Parts) -> None:
    clock = Clock()
    http = guarded_app(parts, clock).test_client()
    key = new_key(parts, Scope.READ)
    clock.go_on(minutes=5)

    http.get("/read", headers=bearing(key))
    clock.go_on(seconds=30)
    http.get("/read", headers=bearing(key))

    (told,) = list_keys(parts.store)
    assert told.last_used_at == clock.now.replace(second=0)


# Who may come without a key


def test_on_loopback_a_program_of_this_machine_needs_no_key(loopback: FlaskClient) -> None:
    for method in METHODS:
        assert loopback.open("/loopback", method=method).json == {"asker": None, "read": 0}


@pytest.mark.parametrize(
    "headers",
    [
        *CROSS_SITE,
        {"Host": "elsewhere.example"},  # a name of another site, made to lead here
        {"Host": "192.168.1.5:8000"},
        {"X-Forwarded-For": "203.0.113.9"},  # a proxy on this machine speaks for others
        {"Forwarded": "for=203.0.113.9"},
        {"Via": "1.1 shop"},
    ],
)
def test_on_loopback_others_need_a_key(parts: Parts, loopback: FlaskClient, headers: dict[str, str]) -> None:
    key = new_key(parts, Scope.ORDER)

    refused = loopback.post("/loopback", headers=headers)
    taken = loopback.post("/loopback", headers={**headers, **bearing(key)})

    problem_of(refused, "key-missing")
    assert taken.json["asker"] == key.told.id  # type: ignore[index]


def test_on_loopback_another_machine_needs_a_key(loopback: FlaskClient) -> None:
    answer = loopback.post("/loopback", environ_overrides={"REMOTE_ADDR": "192.168.1.5"})

    problem_of(answer, "key-missing")


@pytest.mark.parametrize("origin", [{"Origin": "http://localhost"}, {"Sec-Fetch-Site": "same-origin"}])
def test_on_loopback_an_own_page_needs_no_key(loopback: FlaskClient, origin: dict[str, str]) -> None:
    assert loopback.post("/loopback", headers=origin).status_code == 200


def test_a_setting_opens_or_shuts_what_is_open_on_loopback(parts: Parts) -> None:
    far = {"REMOTE_ADDR": "203.0.113.9"}
    opened = guarded_app(set_access(parts, AccessSettings(open_layouts=True))).test_client()
    shut = guarded_app(set_access(parts, AccessSettings(open_layouts=False, listens_on_loopback=True))).test_client()

    assert opened.post("/loopback", environ_overrides=far).status_code == 200
    problem_of(shut.post("/loopback"), "key-missing")
    problem_of(opened.get("/read"), "key-missing")


def test_on_loopback_a_key_that_is_shown_must_be_good(parts: Parts, loopback: FlaskClient) -> None:
    problem_of(loopback.post("/loopback", headers=bearing(new_key_secret())), "key-refused")
    problem_of(loopback.post("/loopback", headers=bearing(new_key(parts, Scope.READ))), "scope-missing")


def test_what_needs_a_key_needs_one_on_loopback_too(loopback: FlaskClient) -> None:
    problem_of(loopback.get("/read"), "key-missing")


# Browsers


def test_a_signed_in_browser_reads_with_its_cookie(parts: Parts, http: FlaskClient) -> None:
    key = new_key(parts, Scope.READ)
    signed_in(http, key)

    answer = http.get("/read")

    assert answer.json == {"asker": key.told.id, "read": 0}
    assert "Cookie" in answer.headers["Vary"]


@pytest.mark.parametrize("method", ["POST", "DELETE"])
def test_a_browser_writes_with_its_token(parts: Parts, http: FlaskClient, method: str) -> None:
    token = signed_in(http, new_key(parts, Scope.READ))

    assert http.open("/read", method=method, headers={"X-CSRF-Token": token}).status_code == 200
    assert http.open("/read", method=method, data={"csrf_token": token}).status_code == 200


@pytest.mark.parametrize("method", ["POST", "DELETE"])
def test_a_browser_does_not_write_with_its_cookie_alone(parts: Parts, http: FlaskClient, method: str) -> None:
    key = new_key(parts, Scope.READ)
    signed_in(http, key)
    others = signed_in(guarded_app(parts).test_client(), key)

    without = problem_of(http.open("/read", method=method), "write-not-vouched")
    wrong = problem_of(http.open("/read", method=method, headers={"X-CSRF-Token": others}), "write-not-vouched")
    empty = problem_of(http.open("/read", method=method, data={"csrf_token": ""}), "write-not-vouched")

    assert without["detail"] == "a browser that is signed in writes with its token; add it as the header X-CSRF-Token"
    assert wrong["detail"] == "X-CSRF-Token is not this browser's token; load the page again"
    assert empty["detail"] == wrong["detail"]


@pytest.mark.parametrize("headers", CROSS_SITE)
def test_another_site_s_page_does_not_write_even_with_the_token(
    parts: Parts, http: FlaskClient, headers: dict[str, str]
) -> None:
    token = signed_in(http, new_key(parts, Scope.READ))

    answer = http.post("/read", headers={**headers, "X-CSRF-Token": token})

    assert "the request comes from a page of " in problem_of(answer, "write-not-vouched")["detail"]
    assert http.post("/read", headers={"X-CSRF-Token": token, "Origin": "http://localhost"}).status_code == 200


def test_the_public_url_is_an_origin_of_the_service_s_own(parts: Parts) -> None:
    http = guarded_app(set_access(parts, AccessSettings(), "https://discs.example/shop")).test_client()
    key = new_key(parts, Scope.READ)
    http.post("/sign-in", data={"key": key.secret}, base_url="https://inner")
    token = http.get("/v1/keys/me", base_url="https://inner").json["csrf_token"]  # type: ignore[index]

    def write(origin: str) -> int:
        headers = {"X-CSRF-Token": token, "Origin": origin}
        return http.post("/read", headers=headers, base_url="https://inner").status_code

    assert [write(origin) for origin in ("https://discs.example", "https://inner", "http://discs.example")] == [
        200,
        200,
        403,
    ]


def test_a_token_in_a_body_that_is_no_form_is_not_looked_for(parts: Parts, http: FlaskClient) -> None:
    token = signed_in(http, new_key(parts, Scope.READ))

    body = b'--x\r\nContent-Disposition: form-data; name="csrf_token"\r\n\r\n' + token.encode() + b"\r\n--x--\r\n"

    refused = http.post("/read", data=body, content_type="multipart/form-data; boundary=x")
    taken = http.post(
        "/read", data=body, content_type="multipart/form-data; boundary=x", headers={"X-CSRF-Token": token}
    )
    problem_of(refused, "write-not-vouched")
    assert taken.json["read"] == len(body)  # type: ignore[index]  # the guard left it whole


def test_a_program_with_a_key_needs_no_token(parts: Parts, http: FlaskClient) -> None:
    key = new_key(parts, Scope.READ)
    signed_in(http, key)

    assert http.post("/read", headers=bearing(key)).status_code == 200


def test_on_loopback_a_browser_without_token_counts_as_any_program(parts: Parts, loopback: FlaskClient) -> None:
    token = signed_in(loopback, new_key(parts, Scope.ORDER))

    assert loopback.post("/loopback").json["asker"] is None  # type: ignore[index]
    assert loopback.post("/loopback", headers={"X-CSRF-Token": token}).json["asker"] is not None  # type: ignore[index]
    problem_of(loopback.post("/loopback", headers={"Sec-Fetch-Site": "cross-site"}), "write-not-vouched")


# Rates


@pytest.fixture
def seldom(parts: Parts) -> FlaskClient:
    """A service that takes two requests that read, and one that writes, in a minute."""
    access = AccessSettings(read_rate=(2, 60), write_rate=(1, 60), listens_on_loopback=True)
    return guarded_app(set_access(parts, access)).test_client()


def test_every_answer_to_a_key_tells_how_many_requests_are_left(parts: Parts, seldom: FlaskClient) -> None:
    headers = bearing(new_key(parts, Scope.READ))

    answers = [seldom.get("/read", headers=headers), seldom.get("/admin", headers=headers)]

    assert [answer.status_code for answer in answers] == [200, 403]
    assert [answer.headers["RateLimit"] for answer in answers] == ['"read";r=1;t=60', '"read";r=0;t=60']
    assert {answer.headers["RateLimit-Policy"] for answer in answers} == {'"read";q=2;w=60'}
    assert "Retry-After" not in answers[1].headers


def test_too_many_requests_are_refused_until_the_window_ends(parts: Parts, seldom: FlaskClient) -> None:
    headers = bearing(new_key(parts, Scope.READ))
    seldom.post("/read", headers=headers)

    refused = seldom.post("/read", headers=headers)

    told = problem_of(refused, "too-many-requests")
    wait_s = int(refused.headers["Retry-After"])
    assert 1 <= wait_s <= 60
    assert refused.headers["RateLimit"] == f'"write";r=0;t={wait_s}'
    assert told["detail"] == f"more than 1 requests that write came within 60 seconds; ask again in {wait_s} seconds"
    assert told["retry_after_s"] == wait_s
    assert seldom.get("/read", headers=headers).status_code == 200  # reading is counted by itself
    assert seldom.post("/read", headers=bearing(new_key(parts, Scope.READ))).status_code == 200  # so is another key


def test_who_guesses_keys_is_counted_by_address(seldom: FlaskClient) -> None:
    answers = [seldom.get("/read", headers=bearing(new_key_secret())) for _ in range(3)]
    other = seldom.get("/read", environ_overrides={"REMOTE_ADDR": "203.0.113.9"})

    assert [answer.status_code for answer in answers] == [401, 401, 429]
    problem_of(other, "key-missing")


@pytest.mark.parametrize("path", ["/loopback", "/counted"])
def test_who_needs_no_key_is_counted_by_address_too(seldom: FlaskClient, path: str) -> None:
    assert [seldom.get(path).status_code for _ in range(3)] == [200, 200, 429]


def test_on_loopback_a_key_is_counted_by_itself(parts: Parts, seldom: FlaskClient) -> None:
    headers = bearing(new_key(parts, Scope.ORDER))
    seldom.post("/loopback")

    assert [seldom.post("/loopback", headers=headers).status_code for _ in range(2)] == [200, 429]


def test_writes_that_are_not_vouched_for_are_counted(parts: Parts, seldom: FlaskClient) -> None:
    key = new_key(parts, Scope.READ)
    seldom.post("/sign-in", data={"key": key.secret})

    assert [seldom.post("/read").status_code for _ in range(2)] == [403, 429]


# On every database


@pytest.fixture
def any_http(any_parts: Parts) -> Iterator[FlaskClient]:
    with guarded_app(any_parts).test_client() as client:
        yield client


def test_no_secret_stands_in_the_database_after_all_this(any_parts: Parts, any_http: FlaskClient) -> None:
    key = new_key(any_parts, Scope.READ)
    signed_in(any_http, key)
    cookie = any_http.get_cookie("discwright")
    assert cookie is not None
    names = ("keys", "owners", "login_links", "browser_sessions")

    with any_parts.store.reading() as session:
        kept = repr([session.execute(text(f"SELECT * FROM {name}")).all() for name in names])

    assert key.told.id in kept
    assert key.secret not in kept
    assert cookie.value not in kept
