"""Browsers: a link once, a key in a form, the cookie's attributes, signing out."""

import pytest
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from service.access.first_start import first_start
from service.access.scopes import Scope
from service.access.secret_texts import new_key_secret
from service.parts import Parts
from tests.service.api.guarded import CROSS_SITE, NOW, Clock, guarded_app, new_key, problem_of, signed_in


@pytest.fixture
def clock() -> Clock:
    return Clock()


@pytest.fixture
def http(parts: Parts, clock: Clock) -> FlaskClient:
    return guarded_app(parts, clock).test_client()


def first_link(parts: Parts) -> str:
    first = first_start(parts.store, NOW)
    assert first is not None
    return first.sign_in_path


def attributes(answer: TestResponse) -> tuple[str, set[str]]:
    """The name of the one cookie an answer sets, and its attributes."""
    (field,) = answer.headers.getlist("Set-Cookie")
    pair, *others = field.split("; ")
    return pair.partition("=")[0], {other for other in others if not other.startswith("Expires=")}


def test_the_first_link_signs_the_browser_in_as_the_shop(parts: Parts, http: FlaskClient) -> None:
    answer = http.get(first_link(parts))

    own = http.get("/v1/keys/me").json
    assert (answer.status_code, answer.headers["Location"], answer.data) == (303, "/", b"")
    assert attributes(answer) == ("discwright", {"HttpOnly", "SameSite=Lax", "Path=/"})
    assert answer.headers["Cache-Control"] == "no-store"
    assert answer.headers["Referrer-Policy"] == "no-referrer"
    assert own is not None
    assert own["owner"]["is_shop"] is True
    assert own["scopes"] == ["read", "order", "release", "movements", "admin"]


def test_a_link_used_twice_signs_nobody_in(parts: Parts, http: FlaskClient) -> None:
    link = first_link(parts)
    http.get(link)
    other = guarded_app(parts).test_client()

    told = problem_of(other.get(link), "sign-in-refused")

    assert told["detail"] == "the link was used, is older than 15 minutes, or was never made"
    problem_of(other.get("/v1/keys/me"), "key-missing")


def test_a_link_too_old_or_never_made_is_answered_as_one_used(parts: Parts, http: FlaskClient, clock: Clock) -> None:
    link = first_link(parts)
    clock.go_on(minutes=15)

    old, never = http.get(link), http.get("/sign-in/never-made")

    of_each = {"instance": "", "request_id": ""}
    assert problem_of(old, "sign-in-refused") | of_each == never.json | of_each  # type: ignore[operator]


@pytest.mark.parametrize("looks", ["head", "prefetch"])
def test_looking_ahead_does_not_use_a_link_up(parts: Parts, http: FlaskClient, looks: str) -> None:
    link = first_link(parts)

    ahead = http.head(link) if looks == "head" else http.get(link, headers={"Sec-Purpose": "prefetch;prerender"})

    assert ahead.status_code == 403
    assert http.get(link).status_code == 303


def test_over_https_the_cookie_goes_over_https_alone(parts: Parts, http: FlaskClient) -> None:
    answer = http.get(first_link(parts), base_url="https://discs.example")

    assert attributes(answer) == ("__Host-discwright", {"Secure", "HttpOnly", "SameSite=Lax", "Path=/"})
    assert http.get("/v1/keys/me", base_url="https://discs.example").status_code == 200


def test_a_browser_signs_in_with_a_key(parts: Parts, http: FlaskClient) -> None:
    key = new_key(parts, Scope.READ)

    answer = http.post("/sign-in", data={"key": f" {key.secret}\n"})

    assert (answer.status_code, answer.headers["Location"]) == (303, "/")
    assert http.get("/v1/keys/me").json["id"] == key.told.id  # type: ignore[index]


def test_each_sign_in_has_a_secret_of_its_own(parts: Parts, http: FlaskClient) -> None:
    key = new_key(parts, Scope.READ)
    http.set_cookie("discwright", "chosen-by-another")

    tokens = {signed_in(http, key) for _ in range(3)}

    cookie = http.get_cookie("discwright")
    assert cookie is not None
    assert cookie.value != "chosen-by-another"
    assert len(tokens) == 3


@pytest.mark.parametrize("key", ["", "nonsense", new_key_secret()], ids=["empty", "nonsense", "never made"])
def test_a_key_not_in_force_signs_nobody_in(http: FlaskClient, key: str) -> None:
    answer = http.post("/sign-in", data={"key": key})

    assert problem_of(answer, "sign-in-refused")["detail"] == "the field key holds no key that is in force"
    assert "Set-Cookie" not in answer.headers


def test_a_sign_in_that_is_no_form_is_refused(parts: Parts, http: FlaskClient) -> None:
    answer = http.post("/sign-in", json={"key": new_key(parts, Scope.READ).secret})

    told = problem_of(answer, "media-type-unsupported")
    assert told["allowed_types"] == ["application/x-www-form-urlencoded"]


@pytest.mark.parametrize("headers", CROSS_SITE)
def test_another_site_signs_nobody_in(parts: Parts, http: FlaskClient, headers: dict[str, str]) -> None:
    answer = http.post("/sign-in", data={"key": new_key(parts, Scope.READ).secret}, headers=headers)

    problem_of(answer, "write-not-vouched")
    assert "Set-Cookie" not in answer.headers


def test_who_signs_out_is_signed_out_and_its_cookie_opens_nothing(parts: Parts, http: FlaskClient) -> None:
    token = signed_in(http, new_key(parts, Scope.READ))
    cookie = http.get_cookie("discwright")
    assert cookie is not None

    answer = http.post("/sign-out", data={"csrf_token": token})

    assert answer.status_code == 303
    assert answer.headers["Clear-Site-Data"] == '"cache"'
    assert http.get_cookie("discwright") is None
    http.set_cookie("discwright", cookie.value)
    told = problem_of(http.get("/v1/keys/me"), "key-missing")
    assert told["detail"].startswith("this browser is not signed in any more, and the request shows no key")


def test_nobody_is_signed_out_by_another_site(parts: Parts, http: FlaskClient) -> None:
    signed_in(http, new_key(parts, Scope.READ))

    problem_of(http.post("/sign-out"), "write-not-vouched")

    assert http.get("/v1/keys/me").status_code == 200


def test_a_browser_stays_signed_in_for_the_hours_of_the_setting(parts: Parts, http: FlaskClient, clock: Clock) -> None:
    signed_in(http, new_key(parts, Scope.READ))
    cookie = http.get_cookie("discwright")
    assert cookie is not None
    http.set_cookie("discwright", cookie.value)  # one that the browser does not let go by itself

    clock.go_on(hours=11, minutes=59)
    before = http.get("/v1/keys/me").status_code
    clock.go_on(minutes=1)

    assert (before, http.get("/v1/keys/me").status_code) == (200, 401)
