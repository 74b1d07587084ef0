"""Movements and cutters kept by owners: no change is lost, old ones are read, and each is for whom it is for."""

import json
import threading
from collections.abc import Iterator
from dataclasses import replace
from io import BytesIO
from typing import Any

import pytest
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from layout.documents import read_movement, shipped_movement, shipped_text
from service.access.scopes import Scope
from service.app import OPENED, create_app
from service.parts import Parts
from service.settings import AccessSettings
from tests.service.api.guarded import bearing, new_key, problem_of
from tests.service.fakes import MANY
from tests.service.shop import TUNE

NEW = {"If-None-Match": "*"}


class Bench:
    """A service with keys of the shop and of two web shops, and movements to be kept in it."""

    def __init__(self, parts: Parts) -> None:
        access = AccessSettings(read_rate=MANY, write_rate=MANY)
        self.parts = replace(parts, settings=replace(parts.settings, access=access))
        self.http: FlaskClient = create_app(self.parts.settings).test_client()
        self.shop = bearing(new_key(parts, *Scope))
        self.web = bearing(new_key(parts, *Scope, owner="Bellgrove"))
        self.other = bearing(new_key(parts, *Scope, owner="Thornbury"))

    def close(self) -> None:
        for opened in self.http.application.extensions[OPENED]:
            opened.close()

    def put(
        self,
        text: bytes,
        said: dict[str, str],
        *,
        path: str = "movements/larkfield-9",
        who: dict[str, str] | None = None,
    ) -> TestResponse:
        headers = {**(who or self.web), **said}
        return self.http.put(f"/v1/{path}", data=text, headers=headers, content_type="application/json")

    def saved(self, text: bytes, said: dict[str, str], **more: Any) -> dict[str, Any]:
        answer = self.put(text, said, **more)
        assert answer.status_code in (200, 201), answer.text
        return dict(answer.json)  # type: ignore[arg-type]  # an answer in JSON

    def get(self, path: str, who: dict[str, str] | None = None) -> TestResponse:
        return self.http.get(f"/v1/{path}", headers=self.web if who is None else who)


@pytest.fixture
def bench(any_parts: Parts) -> Iterator[Bench]:
    opened = Bench(any_parts)
    yield opened
    opened.close()


def movement(title: str = "Larkfield, nine", document_id: str = "larkfield-9", **more: Any) -> bytes:
    """A movement like one that ships."""
    value = {**json.loads(shipped_text("tarnlight-17")), "id": document_id, "title": title, **more}
    return json.dumps(value).encode()


def seen(tag: str) -> dict[str, str]:
    return {"If-Match": tag}


def test_a_movement_is_kept_and_read_again(bench: Bench) -> None:
    answer = bench.put(movement(), NEW)
    told: Any = answer.json

    assert (answer.status_code, answer.headers["Location"]) == (201, "/v1/movements/larkfield-9")
    assert "ETag" not in answer.headers  # RFC 9110 section 9.3.4: what was sent is not what is given
    read = bench.get("movements/larkfield-9")
    assert read.headers["ETag"] == told["entity_tag"]
    assert read_movement(read.data).title == "Larkfield, nine"
    assert (told["revision"], read.json["revision"]) == (1, 1)  # type: ignore[index]


def test_each_change_is_a_new_revision_and_the_old_ones_are_readable(bench: Bench) -> None:
    first = bench.saved(movement("first"), NEW)
    second = bench.saved(movement("second"), seen(first["entity_tag"]))

    assert (first["revision"], second["revision"]) == (1, 2)
    titles = [bench.get(f"movements/larkfield-9?revision={n}").json["title"] for n in (1, 2)]  # type: ignore[index]
    assert titles == ["first", "second"]
    assert bench.get("movements/larkfield-9").json["title"] == "second"  # type: ignore[index]
    revisions = bench.get("movements/larkfield-9/revisions").json["revisions"]  # type: ignore[index]
    assert [(one["revision"], one["kept_by"], one["saved_by"]) for one in revisions] == [
        (2, "own", "a key"),
        (1, "own", "a key"),
    ]


def test_drawings_carry_the_number_that_the_store_gives(bench: Bench) -> None:
    first = bench.saved(movement(revision=7), NEW)
    second = bench.saved(movement("second", revision=7), seen(first["entity_tag"]))

    numbers = [read_movement(bench.get(f"movements/larkfield-9?revision={n}").data).revision for n in (1, 2)]

    assert (first["revision"], second["revision"], numbers) == (1, 2, [1, 2])


def test_a_text_that_says_the_same_makes_no_revision(bench: Bench) -> None:
    first = bench.saved(movement(), NEW)

    again = bench.put(json.dumps(json.loads(movement()), indent=4).encode(), seen(first["entity_tag"]))

    assert (again.status_code, again.json) == (200, first)


def test_the_worth_of_numbers_is_read_as_it_was_written(bench: Bench) -> None:
    worth = {"value": 44.0, "plus_minus": 0.6, "basis": "measured"}
    bench.saved(movement(revolution_s=worth), NEW)

    written = bench.get("movements/larkfield-9?as=written").json
    resolved = bench.get("movements/larkfield-9").json

    assert (written["revolution_s"], resolved["revolution_s"]) == (worth, 44.0)  # type: ignore[index]


def test_a_change_by_one_who_has_not_seen_the_newest_is_refused(bench: Bench) -> None:
    first = bench.saved(movement("first"), NEW)
    bench.saved(movement("second"), seen(first["entity_tag"]))

    told = problem_of(bench.put(movement("third"), seen(first["entity_tag"])), "document-changed")

    assert told["detail"] == "the document is at revision 2, not the one that was seen"
    assert bench.get("movements/larkfield-9").json["title"] == "second"  # type: ignore[index]


@pytest.mark.parametrize("said", [{}, {"If-Match": "*"}, {"If-None-Match": '"1-a"'}])
def test_a_change_must_say_which_revision_it_is_about(bench: Bench, said: dict[str, str]) -> None:
    problem_of(bench.put(movement(), said), "precondition-required")


@pytest.mark.parametrize("tag", ['"1-000000000000000000000000"', 'W/"1-a"'])
def test_what_does_not_exist_was_not_seen(bench: Bench, tag: str) -> None:
    problem_of(bench.put(movement(), seen(tag)), "document-changed")


def test_a_weak_tag_guards_no_change(bench: Bench) -> None:
    first = bench.saved(movement(), NEW)

    problem_of(bench.put(movement("second"), seen("W/" + first["entity_tag"])), "document-changed")


def test_what_is_there_is_not_made_anew(bench: Bench) -> None:
    bench.saved(movement(), NEW)

    problem_of(bench.put(movement("another"), NEW), "document-changed")


def test_of_two_changes_at_the_same_moment_one_wins(bench: Bench) -> None:
    first = bench.saved(movement("first"), NEW)
    said = [seen(first["entity_tag"])] * 4 + [NEW]
    answers: dict[int, TestResponse] = {}
    begin = threading.Barrier(len(said))

    def change(number: int) -> None:
        begin.wait()
        answers[number] = bench.put(movement(f"change {number}"), said[number])

    threads = [threading.Thread(target=change, args=(number,)) for number in range(len(said))]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()

    won = [number for number, answer in answers.items() if answer.status_code == 200]
    assert [answers[number].json["revision"] for number in won] == [2]  # type: ignore[index]
    assert sorted(answer.status_code for answer in answers.values()) == [200, 412, 412, 412, 412]
    assert bench.get("movements/larkfield-9").json["title"] == f"change {won[0]}"  # type: ignore[index]


def test_of_many_who_make_the_same_document_one_does(bench: Bench) -> None:
    answers: list[int] = []
    begin = threading.Barrier(4)

    def make(number: int) -> None:
        begin.wait()
        answers.append(bench.put(movement(f"made by {number}"), NEW).status_code)

    threads = [threading.Thread(target=make, args=(number,)) for number in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()

    assert sorted(answers) == [201, 412, 412, 412]


@pytest.mark.parametrize(
    ("text", "pointer"),
    [
        (movement(document_id="another-9"), "/id"),
        (movement(revolution_s=-1), "/revolution_s"),
        (movement(colour="red"), "/colour"),
        (b"no JSON", ""),
        (b"[]", ""),
    ],
)
def test_a_document_that_is_not_valid_names_each_bad_field(bench: Bench, text: bytes, pointer: str) -> None:
    told = problem_of(bench.put(text, NEW), "document-invalid")

    assert pointer in [fault["pointer"] for fault in told["invalid_params"]]
    assert bench.get("movements/larkfield-9").status_code == 404


def test_a_document_is_taken_as_json_alone(bench: Bench) -> None:
    answer = bench.http.put(
        "/v1/movements/larkfield-9", data=movement(), headers={**bench.web, **NEW}, content_type="text/plain"
    )

    problem_of(answer, "media-type-unsupported")


def test_a_document_in_another_coding_of_letters_is_kept_in_utf_8(bench: Bench) -> None:
    bench.saved(movement("Dünung \U0001d11e").decode().encode("utf-16"), NEW)

    assert bench.get("movements/larkfield-9?as=written").json["title"] == "Dünung \U0001d11e"  # type: ignore[index]


def test_half_a_letter_is_refused_with_its_place(bench: Bench) -> None:
    told = problem_of(bench.put(movement("half X").replace(b"half X", rb"half \ud800"), NEW), "document-invalid")

    assert [fault["pointer"] for fault in told["invalid_params"]] == ["/title"]


def test_a_letter_that_no_database_takes_by_itself_is_kept_as_json_writes_it(bench: Bench) -> None:
    bench.saved(movement("X", revision=3).replace(b'"X"', rb'"\u0000"'), NEW)

    assert bench.get("movements/larkfield-9").json["title"] == "\0"  # type: ignore[index]


def test_a_shipped_movement_is_revised_from_its_own_revision_on_for_its_owner_alone(bench: Bench) -> None:
    shipped = bench.get("movements/tarnlight-17")
    problem_of(bench.put(movement("ours", "tarnlight-17"), NEW, path="movements/tarnlight-17"), "document-changed")

    ours = bench.saved(movement("ours", "tarnlight-17"), seen(shipped.headers["ETag"]), path="movements/tarnlight-17")

    assert ours["revision"] == shipped_movement("tarnlight-17").revision + 1
    assert bench.get("movements/tarnlight-17").json["title"] == "ours"  # type: ignore[index]
    assert bench.get("movements/tarnlight-17?revision=1").data == shipped.data
    for who in (bench.other, bench.shop, {}):
        assert bench.get("movements/tarnlight-17", who).data == shipped.data
        problem_of(bench.get("movements/tarnlight-17?revision=2", who), "movement-unknown")


def test_the_shops_documents_are_for_all_its_owners_to_use(bench: Bench) -> None:
    bench.saved(movement("the shop's"), NEW, who=bench.shop)

    told: Any = bench.get("movements").json
    [line] = [line for line in told["movements"] if line["id"] == "larkfield-9"]
    assert (line["title"], line["kept_by"], line["revision"]) == ("the shop's", "shop", 1)
    [revision] = bench.get("movements/larkfield-9/revisions").json["revisions"]  # type: ignore[index]
    assert (revision["kept_by"], revision["saved_by"]) == ("shop", None)
    problem_of(bench.get("movements/larkfield-9", {}), "movement-unknown")


def test_an_owners_own_document_hides_the_shops_of_the_same_id(bench: Bench) -> None:
    of_shop = bench.saved(movement("the shop's"), NEW, who=bench.shop)

    own = bench.saved(movement("our own"), seen(of_shop["entity_tag"]))

    assert own["revision"] == 2
    assert bench.get("movements/larkfield-9").json["title"] == "our own"  # type: ignore[index]
    assert bench.get("movements/larkfield-9", bench.shop).json["title"] == "the shop's"  # type: ignore[index]


@pytest.mark.parametrize("path", ["", "/revisions", "?revision=1", "?as=written"])
def test_a_document_of_another_owner_is_as_one_that_never_was(bench: Bench, path: str) -> None:
    bench.saved(movement(), NEW)

    theirs = bench.get(f"movements/larkfield-9{path}", bench.other)
    never = bench.get(f"movements/larkfield-8{path}", bench.other)

    assert (theirs.status_code, never.status_code) == (404, 404)
    differ = ("request_id", "instance")
    told, other = (
        {
            name: text.replace("-9", "-8") if isinstance(text, str) else text
            for name, text in one.items()
            if name not in differ
        }
        for one in (dict(theirs.json), dict(never.json))  # type: ignore[arg-type]
    )
    assert told == other
    assert bench.saved(movement("theirs"), NEW, who=bench.other)["revision"] == 1


def test_without_a_key_the_shipped_ones_alone_are_there(bench: Bench) -> None:
    bench.saved(movement(), NEW)

    told: Any = bench.get("movements", {}).json

    assert [(line["id"], line["kept_by"]) for line in told["movements"]] == [
        ("fernhollow-31", "shipped"),
        ("mossbrook-67", "shipped"),
        ("tarnlight-17", "shipped"),
    ]


def test_a_key_in_a_request_must_be_in_force_and_allowed_to_read(bench: Bench) -> None:
    only_orders = bearing(new_key(bench.parts, Scope.ORDER))

    problem_of(bench.get("movements", {"Authorization": "Bearer dw_no"}), "key-refused")
    problem_of(bench.get("movements", only_orders), "scope-missing")
    assert "Authorization" in bench.get("movements").headers["Vary"]


def test_a_withdrawn_document_is_offered_no_more_and_its_revisions_stay(bench: Bench) -> None:
    first = bench.saved(movement("first"), NEW)
    second = bench.saved(movement("second"), seen(first["entity_tag"]))

    answer = bench.http.delete("/v1/movements/larkfield-9", headers={**bench.web, **seen(second["entity_tag"])})

    assert (answer.status_code, answer.data) == (204, b"")
    problem_of(bench.get("movements/larkfield-9"), "movement-unknown")
    assert "larkfield-9" not in bench.get("movements").text
    assert bench.get("movements/larkfield-9?revision=1").json["title"] == "first"  # type: ignore[index]
    assert all(one["withdrawn_at"] for one in bench.get("movements/larkfield-9/revisions").json["revisions"])  # type: ignore[index]
    assert bench.saved(movement("anew"), NEW)["revision"] == 3


def test_a_withdrawal_is_guarded_as_a_change_is(bench: Bench) -> None:
    first = bench.saved(movement("first"), NEW)
    bench.saved(movement("second"), seen(first["entity_tag"]))

    def withdraw(document_id: str, said: dict[str, str]) -> TestResponse:
        return bench.http.delete(f"/v1/movements/{document_id}", headers={**bench.web, **said})

    problem_of(withdraw("larkfield-9", {}), "precondition-required")
    problem_of(withdraw("larkfield-9", NEW), "precondition-required")
    problem_of(withdraw("larkfield-9", seen(first["entity_tag"])), "document-changed")
    problem_of(withdraw("larkfield-8", seen(first["entity_tag"])), "movement-unknown")
    shipped = bench.get("movements/tarnlight-17").headers["ETag"]
    problem_of(withdraw("tarnlight-17", seen(shipped)), "document-not-own")


def test_after_a_withdrawal_what_was_hidden_is_in_force_again(bench: Bench) -> None:
    shipped = bench.get("movements/tarnlight-17")
    path = "movements/tarnlight-17"
    ours = bench.saved(movement("ours", "tarnlight-17"), seen(shipped.headers["ETag"]), path=path)

    bench.http.delete(f"/v1/{path}", headers={**bench.web, **seen(ours["entity_tag"])})

    assert bench.get(path).data == shipped.data
    again = bench.saved(movement("again", "tarnlight-17"), seen(shipped.headers["ETag"]), path=path)
    assert again["revision"] == 3


def test_only_a_key_with_the_scope_and_not_for_tests_changes_documents(bench: Bench) -> None:
    others = bearing(new_key(bench.parts, Scope.READ, Scope.ORDER, Scope.RELEASE, Scope.ADMIN))
    for_tests = bearing(new_key(bench.parts, *Scope, owner="Bellgrove", is_test=True))

    assert problem_of(bench.put(movement(), NEW, who=others), "scope-missing")["scope"] == "movements"
    problem_of(bench.put(movement(), NEW, who=for_tests), "key-for-tests")
    problem_of(bench.put(movement(), NEW, who={"X": "y"}), "key-missing")


def test_a_cutter_is_kept_and_revised_likewise(bench: Bench) -> None:
    text = {**json.loads(shipped_text("fibre-laser")), "id": "our-laser"}
    first = bench.saved(json.dumps(text).encode(), NEW, path="cutters/our-laser")
    second = bench.saved(
        json.dumps({**text, "kerf_mm": 0.21}).encode(), seen(first["entity_tag"]), path="cutters/our-laser"
    )

    assert (first["revision"], second["revision"]) == (1, 2)
    kerfs = [bench.get(f"cutters/our-laser?revision={n}").json["kerf_mm"] for n in (1, 2)]  # type: ignore[index]
    assert kerfs == [text["kerf_mm"], 0.21]
    lines = bench.get("cutters").json["cutters"]  # type: ignore[index]
    assert [(line["id"], line["revision"], line["kept_by"]) for line in lines] == [
        ("fibre-laser", 1, "shipped"),
        ("our-laser", 2, "own"),
        ("turn-press", 1, "shipped"),
    ]


def test_lists_are_read_page_by_page(bench: Bench) -> None:
    for number in range(3):
        bench.saved(movement(document_id=f"a-{number}"), NEW, path=f"movements/a-{number}")

    ids, path = [], "movements?limit=2"
    for _ in range(9):
        answer: Any = bench.get(path)
        ids += [line["id"] for line in answer.json["movements"]]
        if "Link" not in answer.headers:
            break
        path = answer.headers["Link"].split("<")[1].split(">")[0].removeprefix("/v1/")

    assert ids == ["a-0", "a-1", "a-2", "fernhollow-31", "mossbrook-67", "tarnlight-17"]


def test_an_order_keeps_the_revision_it_was_placed_with(bench: Bench) -> None:
    first = bench.saved(movement("first"), NEW)
    form = {"tune": (BytesIO(TUNE), "a.mid"), "order": json.dumps({"movement": "larkfield-9"})}
    order = bench.http.post("/v1/orders", data=form, headers=bench.web)
    second = bench.saved(movement("second"), seen(first["entity_tag"]))
    bench.http.delete("/v1/movements/larkfield-9", headers={**bench.web, **seen(second["entity_tag"])})

    told: Any = bench.http.get(order.headers["Location"], headers=bench.web).json

    assert told["movement"] == {"id": "larkfield-9", "revision": 1}


@pytest.mark.parametrize("query", ["revision=0", "revision=x", "as=pdf", "revision=1&revision=2", "colour=red"])
def test_a_question_that_is_none_is_refused(bench: Bench, query: str) -> None:
    problem_of(bench.get(f"movements/tarnlight-17?{query}"), "parameter-invalid")
