import io
import zipfile
from io import BytesIO
from pathlib import Path

import pytest
from werkzeug.test import TestResponse

from tests.service.api.conftest import ClientFor
from tests.service.fakes import LASER_FILES, THIN_WEB, TUNE, Client, FakePlanner


def post(client: Client, discs: int = 3, query: str = "", **headers: str) -> TestResponse:
    parts = {"tune": (BytesIO(TUNE), "a.mid"), "settings": (BytesIO(b'{"discs": %d}' % discs), "s.json")}
    spelt = {name.replace("_", "-"): value for name, value in headers.items()}
    return client.http.post(
        f"/v1/layouts?movement=fernhollow-31{query}", data=parts, content_type="multipart/form-data", headers=spelt
    )


def unpacked(answer: TestResponse) -> dict[str, bytes]:
    with zipfile.ZipFile(io.BytesIO(answer.data)) as archive:
        assert archive.testzip() is None
        return {name: archive.read(name) for name in archive.namelist()}


@pytest.fixture
def half_faulty(client_for: ClientFor) -> Client:
    """A client of a service whose second disc of every set has a web too thin to cut."""
    return client_for(FakePlanner(findings=(THIN_WEB,), faulty_disc=2))


def test_several_discs_are_several_layouts_each_with_its_own_links(client: Client) -> None:
    answer = post(client)

    assert (answer.status_code, answer.content_type) == (201, "application/json")
    assert set(answer.json) == {"discs"}
    assert [disc["disc"] for disc in answer.json["discs"]] == [{"number": n, "of": 3} for n in (1, 2, 3)]
    assert len({disc["fingerprint"] for disc in answer.json["discs"]}) == 3
    for number, disc in enumerate(answer.json["discs"], start=1):
        given = {name: client.get(path).data for name, path in disc["links"].items() if name in LASER_FILES}
        assert list(given) == LASER_FILES
        assert given["disc.dxf"] == f"disc.dxf of Harvest Dance {number}/3".encode()


def test_each_disc_is_a_layout_that_tells_itself_again(client: Client) -> None:
    made = post(client)

    again = [client.get(f"/v1/layouts/{disc['fingerprint']}") for disc in made.json["discs"]]

    assert [answer.json for answer in again] == made.json["discs"]
    assert "Location" not in made.headers
    assert made.headers.getlist("Link") == [
        f'</v1/layouts/{disc["fingerprint"]}>; rel="item"' for disc in made.json["discs"]
    ]


def test_one_disc_is_answered_as_ever(client: Client) -> None:
    answer = post(client, discs=1)

    assert answer.json["disc"] == {"number": 1, "of": 1}
    assert answer.headers["Location"] == f"/v1/layouts/{answer.json['fingerprint']}"


def test_the_same_discs_again_are_not_laid_out_again(client: Client, planner: FakePlanner) -> None:
    first = post(client)

    second = post(client)

    assert second.data == first.data
    assert planner.laid_out_count == 1


def test_a_disc_let_go_by_the_cache_is_made_again(client: Client, planner: FakePlanner, tmp_path: Path) -> None:
    first = post(client)
    next((tmp_path / "layouts").glob(f"{first.json['discs'][1]['fingerprint']}-*")).unlink()

    second = post(client)

    assert second.data == first.data
    assert planner.laid_out_count == 2


def test_the_names_of_a_disc_s_files_say_which_it_is(client: Client) -> None:
    disc = post(client).json["discs"][1]

    name = client.get(disc["links"]["disc.dxf"]).headers["Content-Disposition"]

    assert 'filename="harvest-dance_disc-2-of-3_fernhollow-31-r1_cold-rolled-steel-0.5mm_label-side_mm_' in name


def test_an_archive_holds_every_file_of_every_disc(client: Client) -> None:
    answer = post(client, Accept="application/zip")

    files = unpacked(answer)
    assert (answer.status_code, answer.content_type) == (200, "application/zip")
    assert len(files) == 3 * len(LASER_FILES)
    assert sorted({path.partition("/")[0] for path in files}) == ["1", "2", "3"]
    [drawing] = [path for path in files if path.startswith("2/") and path.endswith(".dxf") and "record" not in path]
    assert files[drawing] == b"disc.dxf of Harvest Dance 2/3"
    assert drawing.startswith("2/harvest-dance_disc-2-of-3_fernhollow-31-r1_")
    assert 'attachment; filename="harvest-dance_3-discs_fernhollow-31-r1_' in answer.headers["Content-Disposition"]
    assert answer.headers["Content-Disposition"].endswith('_all-files.zip"')


def test_the_same_archive_has_the_same_bytes(client: Client) -> None:
    assert post(client, Accept="application/zip").data == post(client, Accept="application/zip").data


def test_one_disc_can_be_had_as_an_archive_too(client: Client) -> None:
    answer = client.post_tune(Accept="application/zip")

    files = unpacked(answer)
    assert {path.partition("/")[0] for path in files} == {"1"}
    assert b"disc.dxf of Harvest Dance" in files.values()
    assert "discs" not in answer.headers["Content-Disposition"]


@pytest.mark.parametrize("accept", ["image/vnd.dxf", "image/svg+xml", "image/*"])
def test_one_drawing_is_no_answer_for_several_discs(client: Client, planner: FakePlanner, accept: str) -> None:
    answer = post(client, Accept=accept)

    assert (answer.status_code, answer.json["type"]) == (406, "/problems/not-acceptable")
    assert "a drawing shows one disc of the 3, and the JSON links to each" in answer.json["detail"]
    assert answer.json["allowed_types"] == ["application/json", "application/zip"]
    assert planner.laid_out_count == 0


def test_a_client_that_would_take_json_as_well_gets_it(client: Client) -> None:
    answer = post(client, Accept="image/svg+xml, application/json;q=0.1")

    assert (answer.status_code, answer.content_type) == (201, "application/json")


def test_a_faulty_disc_keeps_its_own_cutting_files_back(half_faulty: Client) -> None:
    discs = post(half_faulty).json["discs"]

    assert [disc["good_to_cut"] for disc in discs] == [True, False, True]
    assert ["disc.dxf" in disc["links"] for disc in discs] == [True, False, True]


def test_an_archive_with_a_faulty_disc_is_refused(half_faulty: Client) -> None:
    answer = post(half_faulty, Accept="application/zip")

    assert (answer.status_code, answer.json["type"]) == (422, "/problems/not-good-to-cut")
    assert "disc 2 of 3: disc.dxf is kept back" in answer.json["detail"]
    assert [finding["code"] for finding in answer.json["findings"]] == ["web-too-thin"]


def test_a_reason_gives_the_archive_with_the_faulty_disc_marked(half_faulty: Client) -> None:
    answer = post(half_faulty, query="&despite_findings=trial", Accept="application/zip")

    files = unpacked(answer)
    marked = {path for path in files if "NOT-GOOD-TO-CUT" in path}
    assert {path.partition("/")[0] for path in marked} == {"2"}
    assert len(marked) == len(LASER_FILES)
    assert b"disc.dxf of Harvest Dance 2/3 NOT GOOD TO CUT: trial" in files.values()
    assert 'filename="NOT-GOOD-TO-CUT_harvest-dance_3-discs_' in answer.headers["Content-Disposition"]


def test_a_reason_marks_the_disc_it_is_given_for_whatever_worker_answers(client_for: ClientFor) -> None:
    one, other = (client_for(FakePlanner(findings=(THIN_WEB,))) for _ in range(2))
    disc = post(one).json["discs"][2]

    given = other.get(f"/v1/layouts/{disc['fingerprint']}/hits.csv?despite_findings=trial")

    assert given.data == b"hits.csv of Harvest Dance 3/3 NOT GOOD TO CUT: trial"


def test_more_discs_than_there_can_be_are_refused(client: Client) -> None:
    answer = post(client, discs=25)

    assert (answer.status_code, answer.json["type"]) == (422, "/problems/document-invalid")
    assert answer.json["invalid_params"][0]["pointer"] == "/discs"
