"""Runs over HTTP: many orders from one archive, whatever the archive is; and their files in one archive."""

import io
import json
import os
import random
import struct
import subprocess
import sys
import time
import zipfile
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest
from sqlalchemy import func, select, update
from werkzeug.test import TestResponse

from service.access.scopes import Scope
from service.limits import MIB
from service.orders.run_opening import RunOpener
from service.parts import Parts
from service.store.files import FileLostError
from service.store.tables import PlanFile, Run
from tests.service.api.guarded import bearing, new_key, problem_of
from tests.service.api.test_orders import Shop as OrderShop
from tests.service.conftest import environment_of, sqlite_first
from tests.service.shop import TUNE, archive_of, keeper_of, planned

FERN: dict[str, Any] = {"movements": ["fernhollow-31"]}
BOUNDARY = "discs"
FORM = f"multipart/form-data; boundary={BOUNDARY}"


class Shop(OrderShop):
    """A service that is asked for runs."""

    def ask(
        self,
        archive: bytes,
        run: dict[str, Any] = FERN,
        *,
        headers: dict[str, str] | None = None,
        key: str | None = None,
    ) -> TestResponse:
        once = {} if key is None else {"Idempotency-Key": key}
        return self.http.post(
            "/v1/runs", data=form_of(archive, run), content_type=FORM, headers={**(headers or self.web), **once}
        )

    def begun(self, archive: bytes, run: dict[str, Any] = FERN, headers: dict[str, str] | None = None) -> str:
        answer = self.ask(archive, run, headers=headers)
        assert answer.status_code == 202, answer.text
        return str(answer.json["id"])  # type: ignore[index]  # an answer in JSON

    def opened(self, archive: bytes, run: dict[str, Any] = FERN, headers: dict[str, str] | None = None) -> str:
        """A run whose pairs are orders."""
        run_id = self.begun(archive, run, headers)
        RunOpener(self.parts.store, keeper_of(self.parts), lambda _: None, self.parts.settings.limits).open_all()
        return run_id

    def get(self, path: str, headers: dict[str, str] | None = None) -> Any:
        answer = self.http.get(path, headers=headers or self.web)
        assert answer.status_code == 200, answer.text
        return answer.json

    def items(self, run_id: str) -> list[dict[str, Any]]:
        return list(self.get(f"/v1/runs/{run_id}/items")["items"])

    def results(self, run_id: str) -> zipfile.ZipFile:
        answer = self.http.get(f"/v1/runs/{run_id}/results.zip", headers=self.web)
        assert (answer.status_code, answer.content_type) == (200, "application/zip")
        return zipfile.ZipFile(io.BytesIO(answer.data))

    def run_count(self) -> int:
        with self.parts.store.reading() as session:
            return session.scalars(select(func.count()).select_from(Run)).one()


@pytest.fixture
def shop(any_parts: Parts) -> Iterator[Shop]:
    opened = Shop(any_parts)
    yield opened
    opened.close()


def test_a_run_sent_again_gets_its_answer_though_its_movement_was_withdrawn_since(shop: Shop) -> None:
    own = {**shop.get("/v1/movements/tarnlight-17"), "id": "own-17"}
    address = "/v1/movements/own-17"
    made = shop.http.put(address, json=own, headers={**shop.shop, "If-None-Match": "*"})
    assert made.status_code == 201, made.text
    archive, run = archive_of(a=TUNE), {"movements": ["own-17"]}

    first = shop.ask(archive, run, key='"once"')
    tag = shop.http.get(address, headers=shop.shop).headers["ETag"]
    gone = shop.http.delete(address, headers={**shop.shop, "If-Match": tag})
    again, new = shop.ask(archive, run, key='"once"'), shop.ask(archive, run, key='"another"')

    assert (first.status_code, gone.status_code, again.status_code) == (202, 204, 202)
    assert again.data == first.data
    problem_of(new, "document-invalid")


def test_every_tune_of_the_archive_is_ordered_for_every_movement_named(shop: Shop) -> None:
    run_id = shop.opened(archive_of(b=TUNE, a=TUNE), {"movements": ["fernhollow-31", "tarnlight-17"], "reference": "R"})

    told = shop.get(f"/v1/runs/{run_id}")
    orders = shop.get(told["links"]["orders"])["orders"]
    assert (told["order_count"], told["counts"], told["is_finished"]) == (4, {"received": 4}, False)
    assert [(item["number"], item["tune"], item["movement"]) for item in shop.items(run_id)] == [
        *((1, "b.mid", "fernhollow-31"), (2, "b.mid", "tarnlight-17")),
        *((3, "a.mid", "fernhollow-31"), (4, "a.mid", "tarnlight-17")),
    ]
    assert sorted(order["reference"] for order in orders) == ["R-1", "R-2", "R-3", "R-4"]
    assert {order["run"] for order in orders} == {run_id}


def test_a_run_is_answered_before_any_of_its_pairs_is_an_order(shop: Shop) -> None:
    answer = shop.ask(archive_of(a=TUNE))

    told: Any = answer.json
    assert answer.status_code == 202
    assert answer.headers["Location"] == told["links"]["self"] == f"/v1/runs/{told['id']}"
    assert told["counts"] == {"waits": 1}


def test_the_same_request_sent_twice_is_one_run(shop: Shop) -> None:
    archive = archive_of(a=TUNE)  # made once: it holds the moment
    first, second = (shop.ask(archive, key='"r-1"') for _ in range(2))

    assert first.data == second.data
    assert shop.run_count() == 1
    problem_of(shop.ask(archive_of(a=TUNE, b=TUNE), key='"r-1"'), "key-reused")


def test_pairs_and_runs_are_listed_in_pages_that_lead_on(shop: Shop) -> None:
    run_ids = [shop.begun(archive_of(**{f"t{number}": TUNE for number in range(5)})) for _ in range(3)]

    def pages(path: str, member: str, field: str) -> list[Any]:
        seen: list[Any] = []
        while path:
            answer = shop.http.get(path, headers=shop.web)
            seen += [one[field] for one in answer.json[member]]  # type: ignore[index]
            path = answer.headers.get("Link", "").partition(">")[0].lstrip("<")
        return seen

    assert pages(f"/v1/runs/{run_ids[0]}/items?limit=2", "items", "number") == [1, 2, 3, 4, 5]
    assert pages("/v1/runs?limit=2", "runs", "id") == run_ids[::-1]
    problem_of(shop.http.get("/v1/runs?after=made-up", headers=shop.web), "parameter-invalid")


def test_runs_of_test_keys_are_apart_and_so_are_their_orders(shop: Shop) -> None:
    run_id = shop.opened(archive_of(a=TUNE), headers=shop.tests)

    assert shop.get("/v1/runs", shop.shop)["runs"] == []
    assert shop.get(f"/v1/orders?run={run_id}", shop.shop)["orders"] == []
    assert [run["id"] for run in shop.get("/v1/runs?test=true", shop.shop)["runs"]] == [run_id]
    [order] = shop.get(f"/v1/orders?run={run_id}", shop.tests)["orders"]
    assert order["is_test"] is True


@pytest.mark.parametrize(
    ("run", "pointer", "says"),
    [
        ({"movements": ["nowhere-1"]}, "/movements/0", "there is no movement 'nowhere-1'; GET /v1/movements lists"),
        (
            {"pairs": [{"tune": "a.mid", "movement": {"id": "fernhollow-31", "revision": 99}}]},
            "/pairs/0/movement",
            "there is no movement 'fernhollow-31' of revision 99",
        ),
        (
            {"pairs": [{"tune": "z.mid", "movement": "fernhollow-31"}]},
            "/pairs/0/tune",
            "no tune 'z.mid' in the archive",
        ),
        ({**FERN, "cutter": "no-cutter"}, "/cutter", "there is no cutter 'no-cutter'"),
        ({**FERN, "hook": "hook_" + 32 * "0"}, "/hook", "there is no hook"),
        ({**FERN, "pairs": [{"tune": "a.mid", "movement": "x"}]}, "/pairs", "name either movements, for every tune"),
        ({}, "/pairs", "name either movements, for every tune, or pairs"),
        ({**FERN, "settings": {"discs": 0}}, "/discs", "greater than or equal to 1"),
        ({**FERN, "colour": "red"}, "/colour", ""),
    ],
)
def test_what_cannot_be_ordered_at_all_is_refused_at_once(
    shop: Shop, run: dict[str, Any], pointer: str, says: str
) -> None:
    told = problem_of(shop.ask(archive_of(a=TUNE), run), "document-invalid")

    [fault] = told["invalid_params"]
    assert fault["pointer"] == pointer
    assert says in fault["detail"]
    assert shop.run_count() == 0


def test_more_orders_than_a_run_may_have_are_refused(shop: Shop) -> None:
    archive = archive_of(**{f"t{number}": b"" for number in range(5001)})

    told = problem_of(shop.ask(archive, {"movements": ["fernhollow-31", "tarnlight-17"]}), "document-invalid")

    assert "that makes 10002 orders; a run has at most 10000" in told["detail"]


def test_release_alone_needs_the_scope(shop: Shop) -> None:
    problem_of(shop.ask(archive_of(a=TUNE), {**FERN, "release_alone": True}), "scope-missing")


def test_a_form_without_its_parts_is_told_which(shop: Shop) -> None:
    told = problem_of(shop.http.post("/v1/runs", data={"run": "{}"}, headers=shop.web), "media-type-unsupported")
    assert "archive and run" in told["detail"]
    told = problem_of(shop.ask(b""), "parameter-missing")
    assert "the part archive is missing or empty" in told["detail"]


def many_entries() -> bytes:
    return archive_of(**{f"{number}": b"" for number in range(10_001)})


def million_entries() -> bytes:
    small = archive_of(a=b"")
    begins, end = small.index(b"PK\x01\x02"), small.index(b"PK\x05\x06")
    return small[begins:end] * 1_000_000 + small[end:]


def overlapping() -> bytes:
    """One packed tune of a million bytes, named five thousand times: 5 GB out of some hundred kB."""
    one = archive_of(tune=bytes(1_000_000))
    begins, end = one.index(b"PK\x01\x02"), one.index(b"PK\x05\x06")
    entry = one[begins:end]
    directory = b"".join(entry.replace(b"tune.mid", f"{number:04d}.mid".encode()) for number in range(5000))
    last = b"PK\x05\x06" + struct.pack("<HHHHIIH", 0, 0, 5000, 5000, len(directory), begins, 0)
    return one[:begins] + directory + last


def bomb() -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED, compresslevel=1) as archive:
        for number in range(6):
            archive.writestr(f"{number}.mid", bytes(100 * MIB))
    return out.getvalue()


def with_password() -> bytes:
    content = bytearray(archive_of(a=b"x"))
    content[content.index(b"PK\x01\x02") + 8] |= 1
    return bytes(content)


def nested() -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as archive:
        archive.writestr("inner.zip", archive_of(a=TUNE))
    return out.getvalue()


def bzip2() -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_BZIP2) as archive:
        archive.writestr("a.mid", bytes(100 * MIB))  # some hundred bytes packed
    return out.getvalue()


def twice() -> bytes:
    content = archive_of(a=b"1", b=b"2")
    return content.replace(b"b.mid", b"a.mid")


HOSTILE: dict[str, tuple[Callable[[], bytes], str]] = {
    "no archive": (lambda: b"MThd", "no ZIP archive"),
    "truncated": (lambda: archive_of(a=TUNE)[:-30], "no ZIP archive"),
    "10,001 tunes": (many_entries, "holds 10001 tunes; at most 10000"),
    "a million entries": (million_entries, "holds 1000000 files and folders; at most 20000"),
    "5 GB from overlapping entries": (overlapping, "unpack to 5000000000 bytes; at most 536870912"),
    "a bomb of 600 MiB": (bomb, "unpack to 629145600 bytes"),
    "a bomb packed by bzip2": (bzip2, "packed by method 12"),
    "a password": (with_password, "packed with a password"),
    "an archive in an archive": (nested, "holds no tune"),
    "a name of 60,000 letters": (lambda: archive_of(**{"x" * 60_000: b""}), "too long"),
    "a name twice": (twice, "come twice"),
}


@pytest.mark.parametrize("kind", HOSTILE)
def test_a_hostile_archive_is_refused_and_why_is_told(shop: Shop, kind: str) -> None:
    make, says = HOSTILE[kind]

    told = problem_of(shop.ask(make()), "archive-unreadable")

    assert says in told["detail"]
    assert len(told["detail"]) < 400
    assert shop.run_count() == 0


@sqlite_first("memory for what no database holds")
def test_hostile_archives_are_refused_soon_and_in_little_memory(shop: Shop, tmp_path: Path) -> None:
    bodies = [tmp_path / f"body {number}" for number in range(len(HOSTILE))]
    for (make, _), body in zip(HOSTILE.values(), bodies, strict=True):
        body.write_bytes(form_of(make(), FERN))

    answers = answered(shop, tmp_path, "POST", *bodies)

    for kind, body, answer in zip(HOSTILE, bodies, answers, strict=True):
        assert answer.status == 422, kind
        # What was sent is there twice, as it grows and as a part; the names of 10,001 tunes take some more.
        assert answer.more_mib < 3 * body.stat().st_size / MIB + 30, kind
        assert answer.seconds < 5, kind


def test_tunes_that_cannot_be_used_are_refused_and_the_others_ordered(shop: Shop) -> None:
    lying = bytearray(archive_of(a=TUNE, bomb=bytes(40 * MIB), lying=bytes(3 * MIB), none=b"no tune", z=TUNE))
    at = lying.rindex(b"lying.mid") - 46 + 24  # the size it is said to unpack to (APPNOTE 4.3.12)
    lying[at : at + 4] = (10).to_bytes(4, "little")

    run_id = shop.opened(bytes(lying))

    items = {item["tune"]: item for item in shop.items(run_id)}
    assert [tune for tune, item in items.items() if item["state"] == "received"] == ["a.mid", "z.mid"]
    assert items["bomb.mid"]["reason"] == "'bomb.mid' is larger than 2097152 bytes"
    assert "'lying.mid' cannot be unpacked" in items["lying.mid"]["reason"]
    assert "MIDI" in items["none.mid"]["reason"]


def test_names_that_lead_elsewhere_are_labels_and_lead_nowhere(shop: Shop, tmp_path: Path) -> None:
    before = sorted(path for path in tmp_path.rglob("*") if path.suffix == ".mid")
    names = ["../../../up", "/abs", "C:\\windows\\c", "a/../../b", "=1+1"]
    run_id = shop.opened(archive_of(**dict.fromkeys(names, TUNE)))
    for item in shop.items(run_id):
        planned(shop.parts, item["order"])

    with shop.results(run_id) as archive:
        folders = {name.partition("/")[0] for name in archive.namelist() if "/" in name}
    assert folders == {
        *("00001_up_fernhollow-31", "00002_abs_fernhollow-31", "00003_c-windows-c_fernhollow-31"),
        *("00004_b_fernhollow-31", "00005_1-1_fernhollow-31"),
    }
    assert sorted(path for path in tmp_path.rglob("*") if path.suffix == ".mid") == before


def test_a_form_that_is_too_large_is_refused_by_its_length_alone(shop: Shop) -> None:
    said = {"CONTENT_LENGTH": f"{64 * MIB + 1}"}  # and nothing sent

    answer = shop.http.post("/v1/runs", content_type=FORM, headers=shop.web, environ_overrides=said)

    assert problem_of(answer, "upload-too-large")["limit_bytes"] == 64 * MIB


def test_a_form_without_a_length_is_read_no_further_than_its_limit(shop: Shop, tmp_path: Path) -> None:
    body = tmp_path / "body"
    with body.open("wb") as file:
        file.write(form_of(b"x", FERN)[:90])
        file.truncate(300 * MIB)

    chunked = {**shop.web, "Transfer-Encoding": "chunked", "Content-Type": FORM}
    with body.open("rb") as stream:
        answer = shop.http.post(
            "/v1/runs", headers=chunked, input_stream=stream, environ_overrides={"wsgi.input_terminated": True}
        )
        read_bytes = stream.tell()

    assert problem_of(answer, "upload-too-large")["limit_bytes"] == 64 * MIB
    assert read_bytes <= 64 * MIB + 16 * MIB + 300_000  # the limit, and what is read on so that the answer is seen


def test_a_list_that_is_too_large_is_refused(shop: Shop) -> None:
    run = {**FERN, "reference": "x" * (4 * MIB)}

    assert problem_of(shop.ask(archive_of(a=TUNE), run), "upload-too-large")["limit_bytes"] == 4 * MIB


@pytest.mark.parametrize(("name", "problem"), [("part%d", "parameter-invalid"), ("archive", "parameter-invalid")])
def test_a_form_of_ten_thousand_small_parts_is_refused_at_once(shop: Shop, name: str, problem: str) -> None:
    one = '--discs\r\nContent-Disposition: form-data; name="{}"; filename="a"\r\n\r\nx\r\n'
    body = "".join(one.format(name % number if "%" in name else name) for number in range(10_000)) + "--discs--\r\n"
    begun_s = time.monotonic()

    problem_of(shop.http.post("/v1/runs", data=body.encode(), content_type=FORM, headers=shop.web), problem)

    assert time.monotonic() - begun_s < 1.0


def test_results_hold_cutting_files_of_released_orders_alone(shop: Shop) -> None:
    run_id = shop.opened(archive_of(**{name: TUNE for name in ("ready", "released", "anew", "recalled", "waits")}))
    order_ids = [item["order"] for item in shop.items(run_id)]
    for order_id in order_ids[:4]:
        planned(shop.parts, order_id)
    for order_id in order_ids[1:4]:
        assert shop.decide(order_id, "release", shop.shop, by="A. Maker").status_code == 200
    assert shop.decide(order_ids[2], "replan", shop.shop, settings={"title": "Anew"}).status_code == 202
    assert shop.decide(order_ids[3], "cancel", shop.shop, recalled=True).status_code == 200

    with shop.results(run_id) as archive:
        assert archive.testzip() is None
        files: dict[str, set[str]] = {}
        for name in archive.namelist()[:-1]:
            folder, _, file = name.partition("/")
            files.setdefault(folder.split("_")[1], set()).add(file.rpartition("_")[2])
        told = json.loads(archive.read("run.json"))

    cutting = {"hits.csv"}
    assert files.keys() == {"ready", "released"}
    assert files["released"] & cutting == cutting
    assert not files["ready"] & cutting
    assert [(item["state"], item["folder"]) for item in told["items"]] == [
        ("ready", "00001_ready_fernhollow-31"),
        ("released", "00002_released_fernhollow-31"),
        *(("received", None), ("cancelled", None), ("received", None)),
    ]
    assert [item["order"] for item in told["items"]] == order_ids


def test_the_drawing_for_cutting_is_in_the_results_byte_for_byte(shop: Shop) -> None:
    run_id = shop.opened(archive_of(a=TUNE))
    [order_id] = [item["order"] for item in shop.items(run_id)]
    planned(shop.parts, order_id)
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    [file] = [file for file in shop.seen(order_id)["plan"]["files"] if file["name"] == "disc.dxf"]

    with shop.results(run_id) as archive:
        packed = archive.read(f"00001_a_fernhollow-31/{file['saved_as']}")
    assert packed == shop.http.get(file["href"], headers=shop.web).data


def test_the_same_state_gives_the_same_archive(shop: Shop) -> None:
    run_id = shop.opened(archive_of(a=TUNE, b=TUNE))
    for item in shop.items(run_id):
        planned(shop.parts, item["order"])
    path = f"/v1/runs/{run_id}/results.zip"

    first, second = (shop.http.get(path, headers=shop.web).data for _ in range(2))

    assert first == second


def test_what_was_deleted_is_not_in_the_results(shop: Shop) -> None:
    run_id = shop.opened(archive_of(a=TUNE))
    [order_id] = [item["order"] for item in shop.items(run_id)]
    planned(shop.parts, order_id)
    shop.decide(order_id, "cancel", shop.web)
    assert shop.http.delete(f"/v1/orders/{order_id}", headers=shop.web).status_code == 200

    with shop.results(run_id) as archive:
        assert archive.namelist() == ["run.json"]
        assert "a.mid" not in archive.read("run.json").decode()


def test_results_whose_files_are_lost_never_look_whole(shop: Shop) -> None:
    run_id = shop.opened(archive_of(a=TUNE))
    [item] = shop.items(run_id)
    plan = planned(shop.parts, item["order"])
    shop.parts.files.remove(plan.files[-1].digest)
    answer = shop.http.get(f"/v1/runs/{run_id}/results.zip", headers=shop.web, buffered=False)
    got = bytearray()

    def read_all() -> None:
        for piece in answer.iter_encoded():
            got.extend(piece)

    with pytest.raises(FileLostError, match="is not in the store of files"):
        read_all()
    with pytest.raises(zipfile.BadZipFile, match="not a zip file"):
        zipfile.ZipFile(io.BytesIO(got))


@sqlite_first("memory for what no database holds")
def test_a_form_of_the_largest_size_is_in_memory_twice_at_most(shop: Shop, tmp_path: Path) -> None:
    body = tmp_path / "body"
    noise = random.Random(5).randbytes(2 * MIB)
    archive = io.BytesIO()
    with zipfile.ZipFile(archive, "w") as packed:
        for number in range(30):
            packed.writestr(f"{number}.mid", noise)
    body.write_bytes(form_of(archive.getvalue(), FERN))

    [answer] = answered(shop, tmp_path, "POST", body)

    assert answer.status == 202
    assert answer.more_mib < 2 * 60 + 20


@sqlite_first("memory for what no database holds")
def test_results_are_sent_without_being_held_in_memory(shop: Shop, tmp_path: Path) -> None:
    run_id = shop.opened(archive_of(**{f"t{number}": TUNE for number in range(20)}))
    [large] = keeper_of(shop.parts).keep([random.Random(5).randbytes(8 * MIB)])
    for item in shop.items(run_id):
        planned(shop.parts, item["order"])
    with shop.parts.store.writing() as session:
        session.execute(update(PlanFile).where(PlanFile.name == "disc.svg").values(digest=large, byte_count=8 * MIB))

    [answer] = answered(shop, tmp_path, f"GET /{run_id}/results.zip")

    assert answer.status == 200
    assert answer.byte_count > 20 * 8 * MIB
    assert answer.more_mib < 16  # a tenth of what was sent


def form_of(archive: bytes, run: dict[str, Any]) -> bytes:
    head = '--{}\r\nContent-Disposition: form-data; name="{}"; filename="{}"\r\n\r\n'
    return b"".join(
        [
            head.format(BOUNDARY, "archive", "a.zip").encode() + archive + b"\r\n",
            head.format(BOUNDARY, "run", "run.json").encode() + json.dumps(run).encode() + b"\r\n",
            f"--{BOUNDARY}--\r\n".encode(),
        ]
    )


@dataclass(frozen=True)
class Answered:
    """What a process of its own said of a request."""

    status: int
    byte_count: int
    more_mib: float
    seconds: float


def answered(shop: Shop, folder: Path, what: str, *bodies: Path) -> list[Answered]:
    """Ask a process of its own about runs, once with each body."""
    method, _, path = what.partition(" ")
    shown = bearing(new_key(shop.parts, *Scope, owner="Bellgrove"))["Authorization"]
    done = subprocess.run(
        [sys.executable, "-m", "tests.service.api.peak_memory", method, f"/v1/runs{path}", shown, FORM, *bodies],
        env={**os.environ, **environment_of(folder, shop.parts.settings.places.database_url)},
        cwd=Path(__file__).parents[3],
        stdout=subprocess.PIPE,
        text=True,
        check=True,
        timeout=120,
    )
    lines = [line.split() for line in done.stdout.splitlines()]
    return [Answered(int(line[0]), int(line[1]), float(line[2]), float(line[3])) for line in lines]
