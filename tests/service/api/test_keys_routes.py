"""/v1/keys: made, listed, told and revoked by whom it concerns, and unknown to all others."""

from typing import Any

import pytest
from flask.testing import FlaskClient

from service.access.scopes import Scope
from service.parts import Parts
from tests.service.api.guarded import bearing, guarded_app, new_key, problem_of, signed_in
from tests.service.conftest import each_case_on_both

SAME = {"Request-Id": "the-same"}  # so that two answers may be alike to the byte
NEVER_MADE = "key_" + 32 * "0"


@pytest.fixture
def http(any_parts: Parts) -> FlaskClient:
    return guarded_app(any_parts).test_client()


def made(http: FlaskClient, headers: dict[str, str], **body: Any) -> dict[str, Any]:
    answer = http.post("/v1/keys", json={"title": "web shop", "scopes": ["read"], **body}, headers=headers)
    assert answer.status_code == 201, answer.text
    told: Any = answer.json
    return dict(told)


def test_a_key_is_made_and_its_secret_told_once(any_parts: Parts, http: FlaskClient) -> None:
    admin = bearing(new_key(any_parts, *Scope))

    answer = http.post(
        "/v1/keys", json={"title": "web shop", "scopes": ["order", "read"], "owner": "Bellgrove"}, headers=admin
    )

    told: Any = answer.json
    secret = told.pop("secret")
    assert (answer.status_code, answer.headers["Cache-Control"]) == (201, "no-store")
    assert told["owner"]["title"] == "Bellgrove"
    assert told["owner"]["is_shop"] is False
    assert (told["title"], told["scopes"], told["is_test"]) == ("web shop", ["read", "order"], False)
    assert told["created_at"] == "2026-12-02T10:00:00.000000Z"
    again = http.get(answer.headers["Location"], headers=admin)
    assert again.json == told
    assert secret not in http.get("/v1/keys", headers=admin).text
    assert http.get("/order", headers=bearing(secret)).status_code == 200


def test_without_an_owner_a_key_is_of_the_owner_that_asks(any_parts: Parts, http: FlaskClient) -> None:
    theirs = new_key(any_parts, Scope.ADMIN, Scope.READ, owner="Bellgrove")

    told = made(http, bearing(theirs))

    assert told["owner"]["id"] == theirs.told.owner.id
    assert http.get(f"/v1/keys/{told['id']}", headers=bearing(theirs)).json["owner"]["title"] == "Bellgrove"  # type: ignore[index]


def test_a_revoked_key_opens_nothing_and_is_listed_so(any_parts: Parts, http: FlaskClient) -> None:
    admin = bearing(new_key(any_parts, Scope.ADMIN, Scope.READ))
    told = made(http, admin)

    answers = [http.delete(f"/v1/keys/{told['id']}", headers=admin) for _ in range(2)]

    assert [(answer.status_code, answer.data) for answer in answers] == [(204, b"")] * 2
    problem_of(http.get("/read", headers=bearing(told["secret"])), "key-refused")
    listed = http.get("/v1/keys", headers=admin).json["keys"]  # type: ignore[index]
    revoked = {key["id"]: key["revoked_at"] for key in listed}
    assert revoked.pop(told["id"]) == "2026-12-02T10:00:00.000000Z"
    assert list(revoked.values()) == [None]


@pytest.mark.parametrize("method", ["GET", "DELETE"])
def test_another_owner_s_key_is_as_one_that_never_was(any_parts: Parts, http: FlaskClient, method: str) -> None:
    theirs = new_key(any_parts, Scope.ADMIN, owner="Bellgrove").told.id
    ours = bearing(new_key(any_parts, *Scope, owner="Larkfield"))
    shop_s_for_tests = bearing(new_key(any_parts, *Scope, is_test=True))

    for asker in (ours, shop_s_for_tests):
        other, never = (
            http.open(f"/v1/keys/{key}", method=method, headers={**asker, **SAME}) for key in (theirs, NEVER_MADE)
        )
        problem_of(other, "key-unknown")
        assert other.data.replace(theirs.encode(), NEVER_MADE.encode()) == never.data
        fields = [{name: value for name, value in answer.headers if name != "RateLimit"} for answer in (other, never)]
        assert fields[0] == fields[1]


@each_case_on_both("what text it can be asked for")
@pytest.mark.parametrize("strange", ["me2", "%00", "%FF", "key_1", "x" * 2000, NEVER_MADE.upper(), "..%2f"])
def test_what_is_no_id_is_no_key(any_parts: Parts, http: FlaskClient, strange: str) -> None:
    answer = http.delete(f"/v1/keys/{strange}", headers=bearing(new_key(any_parts, Scope.ADMIN)))

    assert answer.status_code == 404


def test_an_owner_sees_its_own_keys_and_the_shop_sees_all(any_parts: Parts, http: FlaskClient) -> None:
    ours = new_key(any_parts, Scope.ADMIN, owner="Larkfield")
    theirs = new_key(any_parts, Scope.ADMIN, owner="Bellgrove")
    shop_s = new_key(any_parts, Scope.ADMIN)

    def seen_by(key: Any) -> list[str]:
        return [told["id"] for told in http.get("/v1/keys", headers=bearing(key)).json["keys"]]  # type: ignore[index]

    assert seen_by(ours) == [ours.told.id]
    assert seen_by(shop_s) == sorted(key.told.id for key in (ours, theirs, shop_s))


def test_keys_are_listed_in_pages(any_parts: Parts, http: FlaskClient) -> None:
    ids = sorted(new_key(any_parts, Scope.ADMIN).told.id for _ in range(4))
    admin = new_key(any_parts, Scope.ADMIN)
    path: str | None = "/v1/keys?limit=2"
    seen = []
    while path:
        answer = http.get(path, headers=bearing(admin))
        seen.append([key["id"] for key in answer.json["keys"]])  # type: ignore[index]
        link = answer.headers.get("Link")
        path = link and link.removeprefix("<").removesuffix('>; rel="next"')

    assert sorted(key for page in seen for key in page) == sorted([*ids, admin.told.id])
    assert [len(page) for page in seen] == [2, 2, 1]


@each_case_on_both("what it can be asked")
@pytest.mark.parametrize(
    ("query", "detail"),
    [
        ("limit=0", "limit is '0': Input should be greater than or equal to 1"),
        ("limit=501", "limit is '501': Input should be less than or equal to 500"),
        ("limit=many", "limit is 'many': a whole number is needed"),
        ("after=%00", "after is "),
        ("limit=1&limit=2", "the parameter limit comes 2 times; give it once"),
        ("before=x", "there is no parameter called 'before' here; known are after, limit"),
    ],
)
def test_a_page_that_cannot_be_asked_for(parts: Parts, query: str, detail: str) -> None:
    http = guarded_app(parts).test_client()

    answer = http.get(f"/v1/keys?{query}", headers=bearing(new_key(parts, Scope.ADMIN)))

    told = problem_of(answer, "parameter-invalid")
    assert told["detail"].startswith(detail)
    assert told["parameter"] == query.partition("=")[0]


@pytest.mark.parametrize(
    ("body", "pointer", "detail"),
    [
        ('{"title": "x"}', "/scopes", "this field is needed"),
        ('{"title": "x", "scopes": []}', "/scopes", "at least 1"),
        ('{"title": "x", "scopes": ["write"]}', "/scopes/0", "'read', 'order', 'release', 'movements' or 'admin'"),
        ('{"title": " ", "scopes": ["read"]}', "/title", "a title is 1 to 200 characters"),
        ('{"title": "a\\nb", "scopes": ["read"]}', "/title", "a title is 1 to 200 characters"),
        ('{"title": "\\ud800", "scopes": ["read"]}', "/title", "is half a character"),
        ('{"title": {"value": "x"}, "scopes": ["read"]}', "/title/value", "a number is needed"),
        ('{"title": {"value": 5}, "scopes": ["read"]}', "/title", "a plain value is needed, got an object"),
        ('{"title": "x", "scopes": ["read"], "is_test": 1}', "/is_test", "true or false is needed, got 1"),
        ('{"title": "x", "scopes": ["read"], "colour": 1}', "/colour", "no such field; remove it"),
        ("[]", "", "a JSON object is needed"),
        ("{", "", "not JSON"),
        ("[" * 5000, "", "nested more than"),
    ],
)
def test_a_key_that_cannot_be_made(parts: Parts, body: str, pointer: str, detail: str) -> None:
    http = guarded_app(parts).test_client()

    answer = http.post("/v1/keys", data=body, content_type="application/json", headers=bearing(new_key(parts, *Scope)))

    told = problem_of(answer, "document-invalid")
    (fault,) = told["invalid_params"]
    assert (told["document"], fault["pointer"]) == ("key", pointer)
    assert detail in fault["detail"]


def test_a_body_too_large_or_of_another_kind_is_refused(parts: Parts) -> None:
    http = guarded_app(parts).test_client()
    admin = bearing(new_key(parts, *Scope))

    large = http.post("/v1/keys", data=b" " * 10_001, content_type="application/json", headers=admin)
    other = http.post("/v1/keys", data={"title": "x"}, headers=admin)

    problem_of(large, "upload-too-large")
    problem_of(other, "media-type-unsupported")


def test_no_key_gives_more_than_it_has(parts: Parts) -> None:
    http = guarded_app(parts).test_client()
    admin = new_key(parts, Scope.ADMIN, Scope.READ)

    answer = http.post("/v1/keys", json={"title": "x", "scopes": ["read", "release"]}, headers=bearing(admin))

    told = problem_of(answer, "scope-missing")
    assert told["detail"] == "a key gives no more than it has; the key shown lacks release"


@pytest.mark.parametrize("owner", ["Bellgrove", "Larkfield", "the shop"])
def test_an_integrator_makes_no_keys_for_others(parts: Parts, owner: str) -> None:
    http = guarded_app(parts).test_client()
    new_key(parts, Scope.READ, owner="Bellgrove")
    ours = new_key(parts, Scope.ADMIN, Scope.READ, owner="Larkfield")

    answer = http.post("/v1/keys", json={"title": "x", "scopes": ["read"], "owner": owner}, headers=bearing(ours))

    told = problem_of(answer, "document-invalid")
    assert told["invalid_params"] == [
        {"pointer": "/owner", "detail": "the shop's own keys alone make keys for others; leave it out"}
    ]


def test_a_key_for_tests_makes_keys_for_tests_alone(parts: Parts) -> None:
    http = guarded_app(parts).test_client()
    asker = bearing(new_key(parts, *Scope, is_test=True))

    refused = http.post("/v1/keys", json={"title": "x", "scopes": ["read"]}, headers=asker)

    assert problem_of(refused, "document-invalid")["invalid_params"][0]["pointer"] == "/is_test"
    assert made(http, asker, is_test=True)["is_test"] is True


def test_any_key_may_see_itself(parts: Parts) -> None:
    http = guarded_app(parts).test_client()
    key = new_key(parts, Scope.ORDER, owner="Bellgrove", is_test=True)

    own: Any = http.get("/v1/keys/me", headers=bearing(key)).json

    assert own["id"] == key.told.id
    assert own["owner"]["title"] == "Bellgrove"
    assert (own["scopes"], own["is_test"], own["csrf_token"]) == (["order"], True, None)
    assert own["last_used_at"] == "2026-12-02T10:00:00.000000Z"


def test_a_browser_makes_a_key_with_its_token(parts: Parts) -> None:
    http = guarded_app(parts).test_client()
    token = signed_in(http, new_key(parts, *Scope))

    problem_of(http.post("/v1/keys", json={"title": "x", "scopes": ["read"]}), "write-not-vouched")

    assert made(http, {"X-CSRF-Token": token})["title"] == "web shop"


@pytest.mark.parametrize("method", ["DELETE", "PUT", "PATCH", "POST"])
def test_the_key_that_asks_can_be_read_and_nothing_else(http: FlaskClient, any_parts: Parts, method: str) -> None:
    headers = bearing(new_key(any_parts, *Scope))

    answer = http.open("/v1/keys/me", method=method, headers=headers)
    options = http.options("/v1/keys/me", headers=headers)

    problem_of(answer, "method-not-allowed")
    for told in (answer, options):
        assert set(told.headers["Allow"].split(", ")) == {"GET", "HEAD", "OPTIONS"}
