"""Orders over HTTP: placed once, seen by their owner alone, decided about, their files given."""

import base64
import errno
import hashlib
import json
import re
import threading
import time
from collections.abc import Iterator
from dataclasses import replace
from io import BytesIO
from typing import Any

import pytest
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from service.access.scopes import Scope
from service.api.waiting_room import WAITING_ROOM, open_waiting_room
from service.app import OPENED, create_app
from service.orders.states import State
from service.parts import Parts
from service.settings import AccessSettings
from service.store.holds import FileKeeper
from tests.service.api.guarded import bearing, new_key, problem_of
from tests.service.conftest import each_case_on_both
from tests.service.fakes import MANY
from tests.service.shop import TUNE, planned

MINE = {"movement": "fernhollow-31", "reference": "W-1001"}
NO_ROOM = {"movement": "fernhollow-31", "settings": {"speed": {"mode": "factor", "factor": 0.5}}}  # twice a turn


class Shop:
    """A service with a key of the shop and keys of two web shops."""

    def __init__(self, parts: Parts) -> None:
        access = AccessSettings(read_rate=MANY, write_rate=MANY)
        self.parts = replace(parts, settings=replace(parts.settings, access=access))
        self.http: FlaskClient = create_app(self.parts.settings).test_client()
        self.shop = bearing(new_key(parts, *Scope))
        self.web = bearing(new_key(parts, Scope.READ, Scope.ORDER, owner="Bellgrove"))
        self.other = bearing(new_key(parts, Scope.READ, Scope.ORDER, owner="Thornbury"))
        self.tests = bearing(new_key(parts, *Scope, owner="Bellgrove", is_test=True))

    def close(self) -> None:
        for opened in self.http.application.extensions[OPENED]:
            opened.close()

    def place(
        self, order: dict[str, Any] = MINE, *, headers: dict[str, str] | None = None, key: str | None = None
    ) -> TestResponse:
        form = {"tune": (BytesIO(TUNE), "tune.mid"), "order": json.dumps(order)}
        once = {} if key is None else {"Idempotency-Key": key}
        return self.http.post("/v1/orders", data=form, headers={**(headers or self.web), **once})

    def placed(self, order: dict[str, Any] = MINE, headers: dict[str, str] | None = None) -> str:
        answer = self.place(order, headers=headers)
        assert answer.status_code == 202, answer.get_data(as_text=True)
        return str(answer.json["id"])  # type: ignore[index]  # an answer in JSON

    def ready(self, order: dict[str, Any] = MINE) -> str:
        order_id = self.placed(order)
        planned(self.parts, order_id)
        return order_id

    def decide(self, order_id: str, path: str, headers: dict[str, str], **said: Any) -> TestResponse:
        if path == "release":
            said = {"plan": self.plan_seen(order_id), **said}
        return self.http.post(f"/v1/orders/{order_id}/{path}", json=said, headers=headers)

    def plan_seen(self, order_id: str) -> str:
        """The tag of the plan in force."""
        return str(self.seen(order_id, self.shop)["plan"]["tag"])

    def seen(self, order_id: str, headers: dict[str, str] | None = None) -> dict[str, Any]:
        answer = self.http.get(f"/v1/orders/{order_id}", headers=headers or self.web)
        assert answer.status_code == 200
        return dict(answer.json)  # type: ignore[arg-type]  # an answer in JSON


@pytest.fixture
def shop(any_parts: Parts) -> Iterator[Shop]:
    opened = Shop(any_parts)
    yield opened
    opened.close()


def test_an_order_is_answered_with_where_it_is(shop: Shop) -> None:
    answer = shop.place()

    told: Any = answer.json
    assert answer.status_code == 202
    assert answer.headers["Location"] == f"/v1/orders/{told['id']}"
    assert (told["state"], told["reference"], told["plan"]) == ("received", "W-1001", None)
    assert told["movement"] == {"id": "fernhollow-31", "revision": 1}
    assert told["tune"]["sha256"] == hashlib.sha256(TUNE).hexdigest()


def test_the_same_request_sent_twice_is_one_order(shop: Shop) -> None:
    first, second = (shop.place(key='"order 1001"') for _ in range(2))

    assert first.get_data() == second.get_data()
    assert (first.status_code, first.headers["Location"]) == (second.status_code, second.headers["Location"])
    assert len(shop.http.get("/v1/orders", headers=shop.web).json["orders"]) == 1  # type: ignore[index]


def test_a_key_used_for_another_request_is_refused(shop: Shop) -> None:
    shop.place(key='"a-1"')

    told = problem_of(shop.place({**MINE, "quantity": 2}, key='"a-1"'), "key-reused")

    assert told["detail"] == "the Idempotency-Key 'a-1' was used for a request that brought something else"


def test_an_order_tried_out_with_a_key_for_tests_is_still_placed_when_it_is_meant(shop: Shop) -> None:
    tried = shop.place(headers=shop.tests, key='"order 1001"')

    meant = shop.place(key='"order 1001"')

    told: list[Any] = [tried.json, meant.json]
    assert [one["is_test"] for one in told] == [True, False]
    listed: Any = shop.http.get("/v1/orders", headers=shop.web).json
    assert [one["id"] for one in listed["orders"]] == [told[1]["id"]]


def test_the_same_key_of_another_owner_is_another_key(shop: Shop) -> None:
    mine = shop.place(key='"a-1"')
    others = shop.place(headers=shop.other, key='"a-1"')

    assert mine.json["id"] != others.json["id"]  # type: ignore[index]


def test_a_refused_request_leaves_its_key_free(shop: Shop) -> None:
    problem_of(shop.place({"movement": "nowhere-1"}, key='"a-1"'), "document-invalid")

    assert shop.place(key='"a-1"').status_code == 202


@pytest.mark.parametrize("key", ['""', '"', "", '"a', "a b", "é", '"' + "x" * 256 + '"'])
def test_a_key_that_is_none_is_refused(shop: Shop, key: str) -> None:
    told = problem_of(shop.place(key=key), "request-malformed")

    assert "1 to 255 printable ASCII characters in quotes" in told["detail"]


def test_of_many_at_the_same_moment_one_order_is_placed(shop: Shop) -> None:
    answers: list[TestResponse] = []

    def place() -> None:
        answers.append(shop.place(key='"race"'))

    threads = [threading.Thread(target=place) for _ in range(6)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()

    kinds = {answer.status_code for answer in answers}
    assert kinds <= {202, 409}
    assert len({answer.json["id"] for answer in answers if answer.status_code == 202}) == 1  # type: ignore[index]
    assert all("Retry-After" in answer.headers for answer in answers if answer.status_code == 409)
    assert len(shop.http.get("/v1/orders", headers=shop.web).json["orders"]) == 1  # type: ignore[index]


def test_a_request_whose_key_is_just_being_answered_is_told_to_wait(shop: Shop) -> None:
    key = '"slow"'
    answering, going_on = threading.Event(), threading.Event()
    keep = FileKeeper.keep

    def slowly(keeper: FileKeeper, contents: Any) -> Any:
        answering.set()
        going_on.wait(20)
        return keep(keeper, contents)

    with pytest.MonkeyPatch.context() as patched:
        patched.setattr(FileKeeper, "keep", slowly)
        first: list[TestResponse] = []
        thread = threading.Thread(target=lambda: first.append(shop.place(key=key)))
        thread.start()
        assert answering.wait(20)
        told = shop.place(key=key)
        going_on.set()
        thread.join()

    problem_of(told, "still-running")
    assert (told.headers["Retry-After"], told.json["try_again"]) == ("1", True)  # type: ignore[index]
    assert first[0].get_data() == shop.place(key=key).get_data()


def test_where_there_is_no_room_nothing_is_ordered_and_the_same_request_works_later(shop: Shop) -> None:
    def fails(_handle: int) -> None:
        raise OSError(errno.ENOSPC, "no room")

    with pytest.MonkeyPatch.context() as patched:
        patched.setattr("os.fsync", fails)
        refused = shop.place(key='"full"')
    later = shop.place(key='"full"')

    problem_of(refused, "store-full")
    assert int(refused.headers["Retry-After"]) > 0
    assert later.status_code == 202
    assert len(shop.http.get("/v1/orders", headers=shop.web).json["orders"]) == 1  # type: ignore[index]


@pytest.mark.parametrize(
    ("order", "pointer", "message"),
    [
        ({}, "/movement", "no movement is named"),
        ({"movement": "nowhere-1"}, "/movement", "there is no movement 'nowhere-1'"),
        ({"movement": {"id": "fernhollow-31", "revision": 9}}, "/movement", "of revision 9"),
        ({**MINE, "cutter": "x"}, "/cutter", "there is no cutter 'x'"),
        ({**MINE, "quantity": 0}, "/quantity", "greater than or equal to 1"),
        ({**MINE, "referrence": "x"}, "/referrence", "no such field"),
        ({**MINE, "reference": "two\nlines"}, "/reference", "one line"),
        ({**MINE, "most_lost_share": 1.5}, "/most_lost_share", "less than or equal to 1"),
        ({**MINE, "quote": "quote_nowhere"}, "/quote", "there is no quote"),
        ({**MINE, "hook": "hook_nowhere"}, "/hook", "there is no hook"),
        ({**MINE, "repeat_of": "order_" + "0" * 32}, "/repeat_of", "leave tune out"),
    ],
)
def test_an_order_that_is_not_valid_names_the_place(
    shop: Shop, order: dict[str, Any], pointer: str, message: str
) -> None:
    told = problem_of(shop.place(order), "document-invalid")

    [fault] = told["invalid_params"]
    assert fault["pointer"] == pointer
    assert re.search(re.escape(message), fault["detail"]), fault["detail"]


def test_settings_of_an_order_are_checked_at_once(shop: Shop) -> None:
    told = problem_of(shop.place({**MINE, "settings": {"discs": 0}}), "document-invalid")

    assert (told["document"], told["invalid_params"][0]["pointer"]) == ("settings", "/discs")


def test_an_order_without_a_tune_is_refused(shop: Shop) -> None:
    answer = shop.http.post("/v1/orders", data={"order": json.dumps(MINE)}, headers=shop.web)

    problem_of(
        shop.http.post(
            "/v1/orders",
            data={"order": (BytesIO(json.dumps(MINE).encode()), "order.json")},
            headers=shop.web,
            content_type="multipart/form-data",
        ),
        "tune-missing",
    )
    problem_of(answer, "media-type-unsupported")  # without a file the client sends no form with parts


def test_an_order_to_be_released_alone_needs_the_scope(shop: Shop) -> None:
    told = problem_of(shop.place({**MINE, "release_alone": True}), "scope-missing")

    assert told["scope"] == "release"


def test_an_order_is_planned_released_and_its_files_taken(shop: Shop) -> None:
    order_id = shop.ready()
    before = shop.seen(order_id)
    released: Any = shop.decide(order_id, "release", shop.shop, by="A. Maker").json
    files = {file["name"]: file for file in released["plan"]["files"]}
    dxf = shop.http.get(files["disc.dxf"]["href"], headers=shop.web)

    assert before["state"] == "ready"
    assert [file["href"] for file in before["plan"]["files"] if file["name"] == "disc.dxf"] == [None]
    assert (released["state"], released["plan"]["released_by"]) == ("released", "A. Maker")
    assert hashlib.sha256(dxf.get_data()).hexdigest() == files["disc.dxf"]["sha256"]
    digest = base64.b64encode(hashlib.sha256(dxf.get_data()).digest()).decode()
    assert dxf.headers["Content-Digest"] == f"sha-256=:{digest}:"
    assert dxf.headers["Content-Disposition"] == f'attachment; filename="{files["disc.dxf"]["saved_as"]}"'
    assert dxf.headers["Cache-Control"] == "private, max-age=86400, immutable"


def test_a_cutting_file_is_kept_back_before_release_and_a_preview_is_not(shop: Shop) -> None:
    order_id = shop.ready()

    refused = shop.http.get(f"/v1/orders/{order_id}/plans/1/files/1/disc.dxf", headers=shop.shop)
    preview = shop.http.get(f"/v1/orders/{order_id}/plans/1/files/1/disc.svg", headers=shop.web)

    problem_of(refused, "not-released")
    assert (preview.status_code, preview.content_type) == (200, "image/svg+xml")


def test_a_range_of_a_file_is_given(shop: Shop) -> None:
    order_id = shop.ready()
    address = f"/v1/orders/{order_id}/plans/1/files/1/record.dxf"
    whole = shop.http.get(address, headers=shop.web).get_data()

    part = shop.http.get(address, headers={**shop.web, "Range": "bytes=10-19"})
    end = shop.http.get(address, headers={**shop.web, "Range": "bytes=-5"})
    beyond = shop.http.get(address, headers={**shop.web, "Range": f"bytes={len(whole)}-"})

    assert (part.status_code, part.get_data()) == (206, whole[10:20])
    assert part.headers["Content-Range"] == f"bytes 10-19/{len(whole)}"
    assert "Content-Digest" not in part.headers
    assert part.headers["Repr-Digest"].startswith("sha-256=:")
    assert end.get_data() == whole[-5:]
    problem_of(beyond, "range-unsatisfiable")
    assert beyond.headers["Content-Range"] == f"bytes */{len(whole)}"


def test_a_file_that_the_client_has_is_not_sent_again(shop: Shop) -> None:
    order_id = shop.ready()
    address = f"/v1/orders/{order_id}/plans/1/files/1/disc.svg"
    tag = shop.http.get(address, headers=shop.web).headers["ETag"]

    again = shop.http.get(address, headers={**shop.web, "If-None-Match": tag})

    assert (again.status_code, again.get_data()) == (304, b"")


def test_despite_an_error_an_order_is_released_with_a_reason_and_its_files_say_so(shop: Shop) -> None:
    order_id = shop.ready(NO_ROOM)

    told = problem_of(shop.decide(order_id, "release", shop.shop, by="A. Maker"), "findings-stand")
    waits = shop.decide(order_id, "release", shop.shop, by="A. Maker", despite_findings="a test cut")
    planned(shop.parts, order_id)
    order = shop.seen(order_id)

    assert "not good to cut" in told["detail"]
    assert (waits.status_code, waits.json["state"]) == (202, "received")  # type: ignore[index]
    assert (order["state"], order["plan"]["despite_findings"]) == ("released", "a test cut")


def test_a_release_needs_the_scope(shop: Shop) -> None:
    problem_of(shop.decide(shop.ready(), "release", shop.web, by="B. Client"), "scope-missing")


def test_a_decision_about_what_has_changed_is_refused(shop: Shop) -> None:
    order_id = shop.placed()
    tag = shop.http.get(f"/v1/orders/{order_id}", headers=shop.shop).headers["ETag"]
    planned(shop.parts, order_id)

    refused = shop.decide(order_id, "release", {**shop.shop, "If-Match": tag}, by="A. Maker")
    now = shop.http.get(f"/v1/orders/{order_id}", headers=shop.shop).headers["ETag"]

    problem_of(refused, "order-changed")
    assert shop.decide(order_id, "release", {**shop.shop, "If-Match": now}, by="A. Maker").status_code == 200


@pytest.mark.parametrize("tag", ['""', '"", W/"N"', f'"{"9" * 400}"', '"²"', '"1", "2"'])
def test_a_tag_that_is_none_of_ours_matches_no_order(shop: Shop, tag: str) -> None:
    order_id = shop.ready()

    problem_of(shop.decide(order_id, "release", {**shop.shop, "If-Match": tag}, by="A. Maker"), "order-changed")


def test_a_release_sent_twice_with_its_key_is_one_release(shop: Shop) -> None:
    order_id = shop.ready()
    once = {**shop.shop, "Idempotency-Key": '"release"'}

    first, second = (shop.decide(order_id, "release", once, by="A. Maker") for _ in range(2))
    third = shop.decide(order_id, "release", shop.shop, by="A. Maker")

    assert (first.status_code, second.status_code) == (200, 200)
    assert first.get_data() == second.get_data()
    problem_of(third, "state-forbids")


def test_a_superseded_plan_says_so_and_its_files_are_not_to_be_cut(shop: Shop) -> None:
    order_id = shop.ready()
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    answer = shop.decide(order_id, "replan", shop.web, settings={"title": "Another name"})
    planned(shop.parts, order_id)
    order = shop.seen(order_id)
    address = f"/v1/orders/{order_id}/plans/1/files/1/disc.dxf"

    assert answer.status_code == 202
    assert (order["plan"]["revision"], order["plan"]["title"]) == (2, "Another name")
    assert order["superseded_revisions"] == [1]
    problem_of(shop.http.get(address, headers=shop.shop), "plan-superseded")
    all_the_same = shop.http.get(f"{address}?superseded=yes", headers=shop.shop)
    assert all_the_same.status_code == 200
    assert all_the_same.headers["Link"] == f'</v1/orders/{order_id}>; rel="latest-version"'


def test_a_released_order_is_cancelled_only_by_the_shops_recall(shop: Shop) -> None:
    order_id = shop.ready()
    shop.decide(order_id, "release", shop.shop, by="A. Maker")

    problem_of(shop.decide(order_id, "cancel", shop.web, recalled=True), "state-forbids")
    cancelled = shop.decide(order_id, "cancel", shop.shop, reason="wrong tune", recalled=True)

    assert cancelled.json["state"] == "cancelled"  # type: ignore[index]


def test_a_repeat_gives_the_stored_files_again_without_planning(shop: Shop) -> None:
    first = shop.ready()
    form = {"order": (BytesIO(json.dumps({"repeat_of": first, "reference": "again"}).encode()), "order.json")}

    too_early = shop.http.post("/v1/orders", data=dict(form), headers=shop.web, content_type="multipart/form-data")
    shop.decide(first, "release", shop.shop, by="A. Maker")
    form = {"order": (BytesIO(json.dumps({"repeat_of": first, "reference": "again"}).encode()), "order.json")}
    repeated = shop.http.post("/v1/orders", data=form, headers=shop.web, content_type="multipart/form-data")

    told: Any = repeated.json
    problem_of(too_early, "state-forbids")
    assert (repeated.status_code, told["state"], told["repeat_of"]) == (202, "ready", first)
    digests = [file["sha256"] for file in told["plan"]["files"]]
    assert digests == [file["sha256"] for file in shop.seen(first)["plan"]["files"]]


def test_an_order_of_another_answers_as_one_that_never_was(shop: Shop) -> None:
    order_id = shop.ready()
    never = "order_" + "0" * 32
    asking = {**shop.other, "Request-Id": "the-same"}

    for path in ("", "/events", "/plans/1/files/1/disc.svg"):
        mine = shop.http.get(f"/v1/orders/{order_id}{path}", headers=asking)
        nobodys = shop.http.get(f"/v1/orders/{never}{path}", headers=asking)
        assert mine.status_code == nobodys.status_code == 404
        assert mine.get_data(as_text=True).replace(order_id, never) == nobodys.get_data(as_text=True)
    for what in ("cancel", "replan", "proof-links"):
        problem_of(shop.decide(order_id, what, shop.other), "order-unknown")
    assert shop.http.get("/v1/orders", headers=shop.other).json == {"orders": []}
    assert shop.http.get("/v1/events", headers=shop.other).json == {"events": [], "last": 0}


def test_the_shop_sees_all_orders_but_those_for_tests(shop: Shop) -> None:
    order_id, test_id = shop.placed(), shop.placed(headers=shop.tests)

    plainly: Any = shop.http.get("/v1/orders", headers=shop.shop).json
    for_tests: Any = shop.http.get("/v1/orders?test=true", headers=shop.shop).json

    assert [order["id"] for order in plainly["orders"]] == [order_id]
    assert [order["id"] for order in for_tests["orders"]] == [test_id]


def test_pages_are_led_to_by_links(shop: Shop) -> None:
    ids = [shop.placed({**MINE, "reference": f"W-{number}"}) for number in range(3)]

    first = shop.http.get("/v1/orders?limit=2", headers=shop.web)
    address = re.fullmatch(r'<(.+)>; rel="next"', first.headers["Link"])
    assert address is not None
    second = shop.http.get(address[1], headers=shop.web)

    assert [order["id"] for order in [*first.json["orders"], *second.json["orders"]]] == ids  # type: ignore[index]
    assert "Link" not in second.headers
    problem_of(shop.http.get("/v1/orders?after=forged", headers=shop.web), "parameter-invalid")


def test_a_client_waits_until_its_order_is_planned(shop: Shop) -> None:
    order_id = shop.placed()
    worker = threading.Timer(0.5, planned, (shop.parts, order_id))
    worker.start()

    answer = shop.http.get(f"/v1/orders/{order_id}", headers={**shop.web, "Prefer": "wait=20, foo; bar=1"})
    worker.join()

    assert answer.json["state"] == "ready"  # type: ignore[index]
    assert answer.headers["Preference-Applied"] == "wait=20"


@pytest.mark.parametrize(
    ("asked", "applied"),
    [("wait=999999999999", "30"), ("WAIT = 31", "30"), ("wait=0007", "7"), ("wait=" + 5000 * "9", "30")],
)
def test_a_wait_is_cut_to_the_longest_there_is_and_the_answer_says_so(shop: Shop, asked: str, applied: str) -> None:
    order_id = shop.ready()  # it is decided, so that nothing is waited for

    answer = shop.http.get(f"/v1/orders/{order_id}", headers={**shop.web, "Prefer": asked})

    assert answer.headers["Preference-Applied"] == f"wait={applied}"


def test_a_client_that_has_the_newest_is_told_so_after_its_wait(shop: Shop) -> None:
    order_id = shop.placed()
    tag = shop.http.get(f"/v1/orders/{order_id}", headers=shop.web).headers["ETag"]

    answer = shop.http.get(f"/v1/orders/{order_id}", headers={**shop.web, "If-None-Match": tag, "Prefer": "wait=1"})

    assert answer.status_code == 304


@each_case_on_both("what text it can be asked for")
@pytest.mark.parametrize("id_in_path", ["%00", "order_%00", "a%00b"])
@pytest.mark.parametrize(
    "place", ["orders/{}", "orders/{}/events", "orders/{}/plans/1/files/1/disc.svg", "runs/{}", "quotes/{}", "hooks/{}"]
)
def test_an_id_with_a_nul_leads_nowhere(shop: Shop, place: str, id_in_path: str) -> None:
    answer = shop.http.get(f"/v1/{place.format(id_in_path)}", headers=shop.web)

    problem_of(answer, "route-unknown")


@each_case_on_both("its largest numbers")
@pytest.mark.parametrize("revision", [2**31 - 1, 2**31, 2**63, 10**30])
def test_a_file_of_a_plan_that_no_table_can_number_is_unknown(shop: Shop, revision: int) -> None:
    order_id = shop.ready()

    answer = shop.http.get(f"/v1/orders/{order_id}/plans/{revision}/files/1/disc.svg", headers=shop.web)

    problem_of(answer, "route-unknown")


@each_case_on_both("what it can be asked")
@pytest.mark.parametrize(
    ("asked", "parameter"),
    [
        (f"events?after={2**63}", "after"),
        ("events?after=" + "9" * 30, "after"),
        ("orders?run=%00", "run"),
        ("movements?after=a%00", "after"),
        ("orders?updated_since=0001-01-01T00:00:00%2B23:59", "updated_since"),
        ("orders?updated_since=9999-12-31T23:59:59-23:59", "updated_since"),
    ],
)
def test_a_question_that_no_table_can_be_asked_is_refused(shop: Shop, asked: str, parameter: str) -> None:
    told = problem_of(shop.http.get(f"/v1/{asked}", headers=shop.web), "parameter-invalid")

    assert told["parameter"] == parameter


@each_case_on_both("what it can hold")
@pytest.mark.parametrize(
    ("said", "pointer"),
    [
        ({"movement": {"id": "fernhollow-31", "revision": 2**31}}, "/movement"),
        ({"movement": "a\0b"}, "/movement"),
        ({**MINE, "cutter": "\0"}, "/cutter"),
        ({**MINE, "quote": "quote_\0"}, "/quote"),
        ({**MINE, "hook": "\0"}, "/hook"),
        ({**MINE, "settings": {"title": "a\0b"}}, "/settings/title"),
        ({**MINE, "settings": {"a\0b": 1}}, "/settings"),
    ],
)
def test_an_order_that_names_what_no_table_can_hold_is_refused(shop: Shop, said: dict[str, Any], pointer: str) -> None:
    told = problem_of(shop.place(said), "document-invalid")

    assert told["invalid_params"][0]["pointer"].startswith(pointer)


def test_more_of_a_files_end_than_there_is_gives_all_of_it(shop: Shop) -> None:
    order_id = shop.ready()
    place = f"/v1/orders/{order_id}/plans/1/files/1/disc.svg"
    whole = shop.http.get(place, headers=shop.web).get_data()

    answer = shop.http.get(place, headers={**shop.web, "Range": f"bytes=-{10 * len(whole)}"})

    assert (answer.status_code, answer.get_data()) == (206, whole)
    assert answer.headers["Content-Range"] == f"bytes 0-{len(whole) - 1}/{len(whole)}"


@pytest.mark.parametrize("host", ["a b", "shop.example:99999", "shop.example/there"])
def test_a_proof_link_leads_to_no_host_that_is_none(shop: Shop, host: str) -> None:
    order_id = shop.ready()

    answer = shop.http.post(f"/v1/orders/{order_id}/proof-links", headers={**shop.web, "Host": host})

    told = problem_of(answer, "request-malformed")
    assert "Host" in told["detail"]


def test_where_no_more_may_wait_a_client_is_answered_at_once(shop: Shop) -> None:
    order_id = shop.placed()
    open_waiting_room(shop.http.application, 0)
    begun_s = time.monotonic()

    answer = shop.http.get(f"/v1/orders/{order_id}", headers={**shop.web, "Prefer": "wait=20"})

    assert (answer.status_code, answer.json["state"]) == (200, "received")  # type: ignore[index]
    assert "Preference-Applied" not in answer.headers
    assert time.monotonic() - begun_s < 5


def test_who_has_waited_leaves_the_place_to_the_next(shop: Shop) -> None:
    order_id = shop.placed()
    open_waiting_room(shop.http.application, 1)

    answers = [shop.http.get(f"/v1/orders/{order_id}", headers={**shop.web, "Prefer": "wait=1"}) for _ in range(2)]

    assert [answer.headers.get("Preference-Applied") for answer in answers] == ["wait=1", "wait=1"]


def test_where_no_more_may_stream_a_stream_tells_what_there_is_and_ends(shop: Shop) -> None:
    order_id = shop.ready()
    open_waiting_room(shop.http.application, 1)
    headers = {**shop.web, "Accept": "text/event-stream"}
    first = shop.http.get(f"/v1/orders/{order_id}/events", headers=headers, buffered=False)

    told = shop.http.get(f"/v1/orders/{order_id}/events", headers=headers).get_data(as_text=True)
    first.close()

    assert re.findall(r"^id: (.+)$", told, re.MULTILINE) == ["1", "2", "3"]
    assert told.startswith("retry: 2000")
    assert shop.http.application.extensions[WAITING_ROOM].enter("any")  # a stream that was cut has left its place


def test_events_are_asked_for_after_the_last_that_was_seen(shop: Shop) -> None:
    order_id = shop.ready()

    first: Any = shop.http.get("/v1/events?limit=2", headers=shop.web).json
    rest: Any = shop.http.get(f"/v1/events?after={first['last']}", headers=shop.web).json

    types = [event["type"] for event in [*first["events"], *rest["events"]]]
    assert types == ["order.received", "order.planned", "order.ready"]
    assert {event["order"] for event in rest["events"]} == {order_id}


def test_events_come_as_a_stream_that_goes_on_where_it_was_cut(shop: Shop, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("service.api.events.STREAMS_FOR_S", 1.0)
    monkeypatch.setattr("service.api.events.LOOKS_EVERY_S", 0.05)
    order_id = shop.ready()
    headers = {**shop.web, "Accept": "text/event-stream"}

    whole = shop.http.get(f"/v1/orders/{order_id}/events", headers=headers)
    rest = shop.http.get(f"/v1/orders/{order_id}/events", headers={**headers, "Last-Event-ID": "2"})

    assert whole.content_type == "text/event-stream; charset=utf-8"
    assert re.findall(r"^event: (.+)$", whole.get_data(as_text=True), re.MULTILINE) == [
        "order.received",
        "order.planned",
        "order.ready",
    ]
    assert re.findall(r"^id: (.+)$", rest.get_data(as_text=True), re.MULTILINE) == ["3"]


def test_a_customer_sees_and_accepts_a_proof_without_a_key(shop: Shop) -> None:
    order_id = shop.ready()
    link: Any = shop.decide(order_id, "proof-links", shop.web).json
    assert link["href"].startswith("http://localhost/proof/")
    path = f"/v1/proofs/{link['href'].rpartition('/')[2]}"

    shown: Any = shop.http.get(path).json
    picture = shop.http.get(shown["discs"][0]["files"]["disc.svg"])
    said = shop.http.post(f"{path}/verdict", json={"verdict": "accepted", "by": "B. Client", "note": "lovely"})

    assert (shown["reference"], shown["waits_for_decision"]) == ("W-1001", True)
    assert picture.content_type == "image/svg+xml"
    assert said.status_code == 200
    events: Any = shop.http.get(f"/v1/orders/{order_id}/events", headers=shop.web).json
    assert (events["events"][-1]["type"], events["events"][-1]["by"]) == ("order.accepted", "B. Client")
    problem_of(shop.http.get(path.replace("disc.svg", "disc.dxf")[:-3] + "xyz"), "proof-refused")
    problem_of(shop.http.get(f"{path}/files/1/disc.dxf"), "route-unknown")


def test_what_was_made_is_reported_and_told_by_an_event(shop: Shop) -> None:
    order_id = shop.ready()
    shop.decide(order_id, "release", shop.shop, by="A. Maker")

    answer = shop.decide(order_id, "reports", shop.shop, what="measured", measures={"tab_width_mm": 1.19})

    assert answer.status_code == 200
    events: Any = shop.http.get(f"/v1/orders/{order_id}/events", headers=shop.web).json
    assert events["events"][-1]["data"] == {"revision": 1, "measures": {"tab_width_mm": 1.19}}


def test_a_deleted_order_leaves_a_tombstone_without_personal_data(shop: Shop) -> None:
    order_id = shop.placed()

    problem_of(shop.http.delete(f"/v1/orders/{order_id}", headers=shop.web), "state-forbids")
    planned(shop.parts, order_id)
    shop.decide(order_id, "cancel", shop.web, reason="a private reason")
    gone: Any = shop.http.delete(f"/v1/orders/{order_id}", headers=shop.web).json
    events = shop.http.get(f"/v1/orders/{order_id}/events", headers=shop.web).get_data(as_text=True)

    assert (gone["state"], gone["reference"], gone["tune"]["name"]) == (State.CANCELLED, None, None)
    assert gone["erased_at"] is not None
    assert gone["plan"]["files"] == []
    for word in ("W-1001", "a private reason", "Turning Day"):
        assert word not in json.dumps(gone)
        assert word not in events


@pytest.mark.parametrize(
    ("kind", "order"),
    [
        ("movement", MINE),
        ("cutter", {**MINE, "cutter": "fibre-laser"}),
        ("settings", {**MINE, "settings": {"title": "For Ada"}}),
    ],
)
def test_a_document_that_is_named_and_sent_as_well_is_refused_at_its_place(
    shop: Shop, kind: str, order: dict[str, Any]
) -> None:
    form = {"tune": (BytesIO(TUNE), "tune.mid"), "order": json.dumps(order), kind: (BytesIO(b"{}"), f"{kind}.json")}

    told = problem_of(shop.http.post("/v1/orders", data=form, headers=shop.web), "document-invalid")

    [fault] = told["invalid_params"]
    assert fault["pointer"] == f"/{kind}"
    assert "given twice, here and as a part" in fault["detail"]


@pytest.mark.parametrize("asked", ["lines=1-2", "bytes=0-1,4-5", "bytes"])
def test_a_range_that_is_not_understood_is_as_if_it_were_not_there(shop: Shop, asked: str) -> None:
    order_id = shop.ready()
    address = f"/v1/orders/{order_id}/plans/1/files/1/record.dxf"
    whole = shop.http.get(address, headers=shop.web).get_data()

    answer = shop.http.get(address, headers={**shop.web, "Range": asked})

    assert (answer.status_code, answer.get_data()) == (200, whole)
