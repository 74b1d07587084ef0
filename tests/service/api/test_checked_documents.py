"""A movement or a cutter checked without being kept: every rule of reading, each fault at its place."""

import json
from collections.abc import Iterator
from typing import Any

import pytest

from layout.documents import shipped_text
from service.parts import Parts
from tests.service.api.guarded import problem_of
from tests.service.api.test_kept_documents import NEW, Bench
from tests.service.api.whole_documents import LASER, MOVEMENT, PRESS


@pytest.fixture
def bench(parts: Parts) -> Iterator[Bench]:
    bench = Bench(parts)
    yield bench
    bench.close()


def checked(bench: Bench, kind: str, document: Any) -> Any:
    answer = bench.http.post(f"/v1/{kind}s/check", json=document, headers=bench.web)
    assert answer.status_code == 200, answer.text
    return answer.json


def changed(document: dict[str, Any], place: str, value: Any) -> dict[str, Any]:
    made: dict[str, Any] = json.loads(json.dumps(document))
    *parts, last = place.strip("/").split("/")
    inner: Any = made
    for part in parts:
        inner = inner[int(part) if isinstance(inner, list) else part]
    inner[int(last) if isinstance(inner, list) else last] = value
    return made


TWO_TRACKS: dict[str, Any] = {
    **MOVEMENT,
    "tracks": [{"track": 1, "radius_mm": 20}, {"track": 2, "radius_mm": 25}],
    "teeth": [{"tooth": 1, "track": 1, "pitch": "C4"}, {"tooth": 2, "track": 2, "pitch": "D4"}],
}


@pytest.mark.parametrize(("kind", "document"), [("movement", TWO_TRACKS), ("cutter", LASER), ("cutter", PRESS)])
def test_a_document_without_a_fault_is_told_to_have_none_and_nothing_is_kept(
    bench: Bench, kind: str, document: dict[str, Any]
) -> None:
    assert checked(bench, kind, document) == {"faults": [], "fault_count": 0}
    assert bench.get(f"{kind}s/all").status_code == 404


@pytest.mark.parametrize(
    ("place", "value", "pointer", "detail"),
    [
        ("/tracks/1/radius_mm", 19, "/tracks/1/radius_mm", "track 2 (19 mm) must lie outside track 1 (20 mm)"),
        ("/tracks/1/track", 3, "/tracks/1/track", "tracks must be numbered 1, 2, 3 … from the innermost"),
        ("/teeth/1/track", 9, "/teeth/1/track", "tooth 2: there is no track 9"),
        ("/teeth/1/tooth", 1, "/teeth/1/tooth", "tooth 1 is listed 2 times; number every tooth once"),
        ("/teeth/1/track", 1, "/teeth/1/pitch", "tooth 2: track 1 already has a tooth of another pitch"),
        ("/disc/centre_hole_mm", 130, "/disc/centre_hole_mm", "centre_hole_mm must be below outer_diameter_mm"),
        ("/disc/features/0/count", 300, "/disc/features/0/count", "300 of 3 mm do not fit round 11 mm"),
        ("/projection/length_mm", 1, "/projection/length_mm", "a slot needs length_mm, along the travel, not below"),
        (
            "/tracks",
            {"first_radius_mm": 20, "last_radius_mm": 20, "count": 2},
            "/tracks",
            "track 2 (20 mm) must lie outside track 1 (20 mm)",
        ),
    ],
)
def test_what_does_not_go_together_in_a_movement_is_told_at_its_field(
    bench: Bench, place: str, value: Any, pointer: str, detail: str
) -> None:
    told = checked(bench, "movement", changed(TWO_TRACKS, place, value))

    assert told["fault_count"] == 1
    assert told["faults"][0]["pointer"] == pointer
    assert told["faults"][0]["detail"].startswith(detail)


@pytest.mark.parametrize(
    ("document", "place", "value", "pointer"),
    [
        (LASER, "/feature_rules/web", [2, 1, 3], "/feature_rules/web"),
        (LASER, "/layers", {"RIM": {"name": "HOLES", "colour": 1}}, "/layers"),
        (LASER, "/fold/slit", "centre-line", "/fold/slit_width_mm"),
        (LASER, "/kerf_mm", 0, "/kerf_compensated"),
        (PRESS, "/tools/0/edge_ahead_mm", 9, "/tools/0/edge_ahead_mm"),
        (PRESS, "/press/change_word", "T", "/press/change_word"),
    ],
)
def test_what_does_not_go_together_in_a_cutter_is_told_at_its_field(
    bench: Bench, document: dict[str, Any], place: str, value: Any, pointer: str
) -> None:
    told = checked(bench, "cutter", changed(document, place, value))

    assert [fault["pointer"] for fault in told["faults"]] == [pointer]


def test_every_fault_of_single_fields_is_told_at_once_up_to_a_limit(bench: Bench) -> None:
    teeth = [{"tooth": 0, "track": 1, "pitch": "H4"}] * 200

    told = checked(bench, "movement", {**TWO_TRACKS, "teeth": teeth})

    assert told["fault_count"] == 400  # 200 teeth, the number and the pitch of each
    assert 0 < len(told["faults"]) < 400
    assert told["faults"][0]["pointer"] == "/teeth/0/tooth"


def test_what_is_no_document_at_all_is_told_too(bench: Bench) -> None:
    answer = bench.http.post("/v1/movements/check", data=b"[", headers=bench.web, content_type="application/json")

    assert answer.json is not None
    assert answer.json["faults"][0]["pointer"] == ""
    assert answer.json["faults"][0]["detail"].startswith("not JSON")
    other = bench.http.post("/v1/movements/check", data=b"{}", headers=bench.web, content_type="text/plain")
    assert problem_of(other, "media-type-unsupported")["allowed_types"] == ["application/json"]


def test_an_id_may_still_be_check(bench: Bench) -> None:
    text = shipped_text("tarnlight-17").replace(b'"tarnlight-17"', b'"check"')

    assert bench.saved(text, NEW, path="movements/check")["revision"] == 1
    assert bench.get("movements/check").status_code == 200
