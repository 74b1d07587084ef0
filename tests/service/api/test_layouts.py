import errno
import json
from io import BytesIO

import pytest

from layout.documents import shipped_movement
from service.api.layouts import LayoutTeller
from tests.service.api.conftest import ClientFor
from tests.service.fakes import HEARING_FILES, LASER_FILES, THIN_WEB, TUNE, Client, FakePlanner

TUNE_MEDIA_TYPES = ["audio/midi", "audio/x-midi", "audio/mid", "application/x-midi", "application/octet-stream"]

GIVEN_ALL_THE_SAME = [name for name in LASER_FILES if name not in ("disc.dxf", "hits.csv")]


def own_movement() -> bytes:
    return shipped_movement("fernhollow-31").model_dump_json(exclude_none=True).replace("fernhollow", "mine").encode()


@pytest.mark.parametrize("media_type", [*TUNE_MEDIA_TYPES, "audio/midi; charset=binary", None])
def test_a_tune_as_the_raw_body_becomes_a_layout(client: Client, media_type: str | None) -> None:
    answer = client.post_tune(media_type=media_type)

    assert answer.status_code == 201
    assert answer.content_type == "application/json"
    assert set(answer.json) == {"fingerprint", "title", "disc", "good_to_cut", "links", "layout"}
    assert answer.json["good_to_cut"] is True
    assert answer.json["layout"]["movement"] == {"id": "fernhollow-31", "revision": 1}
    assert answer.headers["Location"] == f"/v1/layouts/{answer.json['fingerprint']}"


def test_the_fibre_laser_is_meant_where_no_cutter_is_named(client: Client) -> None:
    assert client.post_tune().json["layout"]["cutter"] == {"id": "fibre-laser"}


def test_the_cutter_named_is_the_one_used(client: Client) -> None:
    answer = client.post_tune(query="movement=fernhollow-31&cutter=turn-press")

    assert answer.json["layout"]["cutter"] == {"id": "turn-press"}


def test_every_link_leads_to_its_file(client: Client) -> None:
    links = client.post_tune().json["links"]

    answers = {name: client.get(links[name]) for name in LASER_FILES}

    assert list(links) == [*LASER_FILES, *HEARING_FILES]  # heard in test_hearings: this planner's disc has no tracks
    assert {name: answer.status_code for name, answer in answers.items()} == dict.fromkeys(LASER_FILES, 200)
    assert {name: answer.content_type for name, answer in answers.items()} == {
        "disc.dxf": "image/vnd.dxf",
        "record.dxf": "image/vnd.dxf",
        "disc.svg": "image/svg+xml",
        "hits.csv": "text/csv; charset=utf-8",
        "layout.json": "application/json",
        "report.json": "application/json",
        "work-sheet.pdf": "application/pdf",
        "making.json": "application/json",
    }
    assert answers["record.dxf"].data == b"record.dxf of Harvest Dance"


def test_the_location_tells_the_layout_again(client: Client) -> None:
    made = client.post_tune()

    again = client.get(made.headers["Location"])

    assert again.status_code == 200
    assert again.json == made.json


@pytest.mark.parametrize(
    ("accept", "content"),
    [
        ("image/vnd.dxf", b"disc.dxf of Harvest Dance"),
        ("image/svg+xml", b"disc.svg of Harvest Dance"),
        ("text/html, image/svg+xml;q=0.9, application/json;q=0.1", b"disc.svg of Harvest Dance"),
    ],
)
def test_a_file_asked_for_by_its_media_type_is_the_answer_itself(client: Client, accept: str, content: bytes) -> None:
    answer = client.post_tune(Accept=accept)

    assert answer.status_code == 200
    assert answer.data == content
    assert "Accept" in answer.headers["Vary"]
    assert client.get(answer.headers["Content-Location"]).data == content


@pytest.mark.parametrize("accept", ["*/*", "application/json", "text/html,*/*;q=0.8", "application/*", ""])
def test_a_client_that_does_not_mind_gets_the_layout_in_json(client: Client, accept: str) -> None:
    answer = client.post_tune(Accept=accept)

    assert (answer.status_code, answer.content_type) == (201, "application/json")


def test_tune_and_settings_come_as_parts_with_file_names(client: Client) -> None:
    parts = {"tune": (BytesIO(TUNE), "a.mid"), "settings": (BytesIO(b'{"title": "Autumn"}'), "s.json")}

    answer = client.post_parts(parts)

    assert answer.status_code == 201
    assert answer.json["title"] == "Autumn"


def test_a_tune_in_a_part_without_a_file_name_keeps_its_bytes(client: Client, planner: FakePlanner) -> None:
    # Bytes that no text decoding leaves as they are, and line ends that look like a boundary's.
    tune = b"MThd\x00\xff\xfe\x80\r\n--\r\n"
    body = b"".join(
        b'--xx\r\nContent-Disposition: form-data; name="' + name + b'"\r\n\r\n' + content + b"\r\n"
        for name, content in ((b"tune", tune), (b"settings", b"{}"))
    )

    in_parts = client.post_tune(body + b"--xx--\r\n", media_type="multipart/form-data; boundary=xx")

    assert in_parts.data == client.post_tune(tune).data
    assert planner.laid_out_count == 1


def test_a_restorer_posts_a_movement_of_their_own(client: Client) -> None:
    parts = {"tune": (BytesIO(TUNE), "a.mid"), "movement": (BytesIO(own_movement()), "mine.json")}

    answer = client.post_parts(parts, query="")

    assert answer.status_code == 201
    assert answer.json["layout"]["movement"] == {"id": "mine-31", "revision": 1}
    assert "mine-31-r1" in client.get(answer.json["links"]["disc.dxf"]).headers["Content-Disposition"]


def test_the_same_tune_again_is_not_laid_out_again(client: Client, planner: FakePlanner) -> None:
    first = client.post_tune()

    second = client.post_tune()

    assert planner.laid_out_count == 1
    assert second.data == first.data


def test_a_layout_made_by_one_worker_is_found_by_the_other(client_for: ClientFor) -> None:
    one, other = client_for(FakePlanner()), client_for(FakePlanner())
    links = one.post_tune().json["links"]

    answers = [other.get(links[name]).status_code for name in LASER_FILES]

    assert answers == [200] * len(LASER_FILES)


def test_a_file_that_only_a_press_has_is_none_of_a_laser_s(client: Client) -> None:
    made = client.post_tune()

    answer = client.get(f"{made.headers['Location']}/press.nc")

    assert answer.status_code == 404
    assert "a layout for fibre-laser, a laser, has no file called 'press.nc'" in answer.json["detail"]
    assert answer.json["known_files"] == LASER_FILES


def test_cutting_files_are_kept_back_where_an_error_stands(faulty_client: Client) -> None:
    made = faulty_client.post_tune()

    refused = faulty_client.get(f"{made.headers['Location']}/disc.dxf")

    assert made.status_code == 201
    assert made.json["good_to_cut"] is False
    assert list(made.json["links"]) == [*GIVEN_ALL_THE_SAME, *HEARING_FILES]
    assert refused.status_code == 422
    assert refused.json["findings"] == made.json["layout"]["findings"]


@pytest.mark.parametrize("name", ["disc.dxf", "hits.csv"])
def test_a_reason_gives_cutting_files_that_say_what_they_are(faulty_client: Client, name: str) -> None:
    made = faulty_client.post_tune(query="movement=fernhollow-31&despite_findings=a%20trial%20cut")

    given = faulty_client.get(made.json["links"][name])

    assert list(made.json["links"]) == [*LASER_FILES, *HEARING_FILES]
    assert made.json["layout"]["despite_findings"] == "a trial cut"
    assert given.status_code == 200
    assert given.data == f"{name} of Harvest Dance NOT GOOD TO CUT: a trial cut".encode()
    assert 'filename="NOT-GOOD-TO-CUT_harvest-dance_' in given.headers["Content-Disposition"]


def test_a_reason_given_by_another_worker_s_layout_marks_the_file_too(client_for: ClientFor) -> None:
    one, other = (client_for(FakePlanner(findings=(THIN_WEB,))) for _ in range(2))
    path = one.post_tune().headers["Location"]

    given = other.get(f"{path}/disc.dxf?despite_findings=trial")

    assert given.data == b"disc.dxf of Harvest Dance NOT GOOD TO CUT: trial"


def test_a_reason_marks_the_layout_it_is_given_for(faulty_client: Client) -> None:
    first = faulty_client.post_tune().headers["Location"]
    faulty_client.post_parts({"tune": (BytesIO(TUNE), "a.mid"), "settings": '{"title": "Another"}'})

    given = faulty_client.get(f"{first}/disc.dxf?despite_findings=trial")

    assert given.data == b"disc.dxf of Harvest Dance NOT GOOD TO CUT: trial"


def test_one_request_gives_a_marked_cutting_file(faulty_client: Client) -> None:
    answer = faulty_client.post_tune(query="movement=fernhollow-31&despite_findings=trial", Accept="image/vnd.dxf")

    assert answer.status_code == 200
    assert answer.data == b"disc.dxf of Harvest Dance NOT GOOD TO CUT: trial"
    assert "NOT-GOOD-TO-CUT" in answer.headers["Content-Disposition"]


def test_a_reason_changes_nothing_where_no_error_stands(client: Client) -> None:
    plain = client.post_tune()

    with_reason = client.post_tune(query="movement=fernhollow-31&despite_findings=trial")

    assert with_reason.data == plain.data
    assert with_reason.headers["ETag"] == plain.headers["ETag"]


def test_a_file_the_client_has_is_not_sent_again(client: Client) -> None:
    path = client.post_tune().json["links"]["disc.svg"]
    first = client.get(path)

    second = client.get(path, If_None_Match=first.headers["ETag"])

    assert not first.headers["ETag"].startswith("W/")
    assert (second.status_code, second.data) == (304, b"")
    assert second.headers["ETag"] == first.headers["ETag"]


def test_a_layout_the_client_has_is_neither_told_again_nor_put_together(
    client: Client, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = client.post_tune().headers["Location"]
    first = client.get(path)
    monkeypatch.setattr(LayoutTeller, "_told", lambda *_: pytest.fail("what the client has was put together"))

    second = client.get(path, If_None_Match=first.headers["ETag"])

    own = {"Request-Id", "RateLimit", "Date", "Content-Length", "Content-Type"}  # of each answer, and of what is sent
    heads = [{name: value for name, value in answer.headers if name not in own} for answer in (first, second)]
    assert (second.status_code, second.data) == (304, b"")
    assert heads[0] == heads[1]


@pytest.mark.parametrize("accept", ["application/json", "image/svg+xml"])
def test_what_is_posted_is_answered_whole_whatever_the_client_has(client: Client, accept: str) -> None:
    first = client.post_tune(Accept=accept)

    second = client.post_tune(Accept=accept, If_None_Match=first.headers["ETag"])

    assert (second.status_code, second.data) == (first.status_code, first.data)


def test_files_have_entity_tags_of_their_own(faulty_client: Client) -> None:
    path = faulty_client.post_tune().headers["Location"]
    asked = ["", "/record.dxf", "/disc.svg", "/disc.svg?despite_findings=trial", "/disc.svg?despite_findings=other"]

    tags = [faulty_client.get(path + rest).headers["ETag"] for rest in asked]

    assert len(set(tags)) == len(asked)


def test_a_picture_is_shown_and_runs_nothing(client: Client) -> None:
    answer = client.get(client.post_tune().json["links"]["disc.svg"])

    assert answer.headers["Content-Disposition"].startswith("inline; ")
    assert answer.headers["Content-Security-Policy"] == "default-src 'none'; style-src 'unsafe-inline'"
    assert answer.headers["X-Content-Type-Options"] == "nosniff"


def test_files_may_be_kept_by_the_client_and_the_layout_s_answer_asks_again(client: Client) -> None:
    made = client.post_tune()

    file = client.get(made.json["links"]["disc.dxf"])

    assert file.headers["Cache-Control"] == "private, max-age=86400"
    assert made.headers["Cache-Control"] == "no-cache"


def test_the_file_s_own_json_is_given_as_it_was_written(client: Client) -> None:
    made = client.post_tune()

    answer = client.get(made.json["links"]["layout.json"])

    assert json.loads(answer.data) == made.json["layout"]
    assert answer.headers["Content-Disposition"].startswith("attachment; ")


def test_a_head_request_tells_the_size_and_sends_nothing(client: Client) -> None:
    path = client.post_tune().json["links"]["disc.dxf"]

    answer = client.http.head(path)

    assert (answer.status_code, answer.data) == (200, b"")
    assert answer.content_length == len(b"disc.dxf of Harvest Dance")


def test_where_there_is_no_room_a_layout_is_refused_in_words_and_made_later(client: Client) -> None:
    def full(*_: object) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    with pytest.MonkeyPatch.context() as patched:
        patched.setattr("os.replace", full)
        refused = client.post_tune()
    later = client.post_tune()

    assert (refused.status_code, refused.json["type"]) == (507, "/problems/store-full")
    assert refused.json["detail"] == "there is no room left in the folder of layouts"
    assert int(refused.headers["Retry-After"]) > 0
    assert later.status_code == 201
