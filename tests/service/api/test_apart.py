"""Layouts computed in children, over HTTP: what they come to is the same, and what a tune does it does to a child."""

import json
import time
from collections.abc import Callable, Iterator
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from layout import walk
from layout.documents import read_settings, shipped_cutter, shipped_movement
from layout.errors import MidiReadError
from service.api.apart import ATTEMPTS, COME_AGAIN_S, ComputingFailedError, PlannedApart
from service.api.computing_queue import ComputingQueue, open_computing_queue
from service.api.problems import ProblemError
from service.app import OPENED, create_app
from service.children.child_process import ChildEndedError, ChildTooLongError
from service.computing.children import Children, NoChildError
from service.computing.messages import Answer, Asked, ChildSetup, DiscTold, Kind, Want
from service.planner import AnotherDiscError
from service.settings import AccessSettings, ServiceSettings, WorkSettings, settings_from
from tests.faults.ordering import tune_called
from tests.fuzz.test_random_discs import faulty
from tests.service.api.guarded import problem_of
from tests.service.conftest import begin_data, environment_of
from tests.service.fakes import MANY
from tests.service.shop import TUNE

WITHIN_S = 2  # that a computation may take in these tests
DOCUMENTS = (shipped_movement("mossbrook-67"), shipped_cutter("fibre-laser"), read_settings("{}"))


def http_of(folder: Path, planner: str) -> tuple[FlaskClient, Children]:
    begin_data(folder / "data")
    settings = ServiceSettings(
        places=settings_from(environment_of(folder)).places,
        access=AccessSettings(listens_on_loopback=True, write_rate=MANY, read_rate=MANY),
        work=WorkSettings(plan_within_s=WITHIN_S, plan_memory_mib=300),
    )
    children = Children(ChildSetup(planner=planner, memory_mib=300))
    return create_app(settings, children=children).test_client(), children


def let_go(http: FlaskClient, children: Children) -> None:
    children.end()
    for opened in http.application.extensions[OPENED]:
        opened.close()


@pytest.fixture(scope="module")
def walking(tmp_path_factory: pytest.TempPathFactory) -> Iterator[FlaskClient]:
    http, children = http_of(tmp_path_factory.mktemp("walking"), "layout.walk")
    yield http
    let_go(http, children)


@pytest.fixture(scope="module")
def failing(tmp_path_factory: pytest.TempPathFactory) -> Iterator[FlaskClient]:
    http, children = http_of(tmp_path_factory.mktemp("failing"), "tests.faults.planner")
    yield http
    let_go(http, children)


def post(http: FlaskClient, tune: bytes, more: str = "") -> TestResponse:
    path = f"/v1/layouts?movement=mossbrook-67{more}"
    return http.post(path, data=tune, content_type="audio/midi")


def test_a_layout_and_its_files_are_those_this_process_would_make(walking: FlaskClient) -> None:
    made = post(walking, TUNE)

    [here] = walk.lay_out_discs(TUNE, *DOCUMENTS, time.monotonic)
    files = walk.files_of(here)
    assert made.status_code == 201
    assert made.json["fingerprint"] == here.fingerprint
    assert made.json["layout"] == json.loads(files["layout.json"])
    given = {name: walking.get(f"/v1/layouts/{here.fingerprint}/{name}").data for name in files}
    assert given == files


def test_a_disc_that_is_not_good_is_given_with_a_reason_as_this_process_would(walking: FlaskClient) -> None:
    spoilt = faulty(DOCUMENTS[0], "thick star wheels")
    document = json.dumps(spoilt.model_dump(mode="json", exclude_none=True)).encode()
    parts = {"tune": (BytesIO(TUNE), "tune.mid"), "movement": (BytesIO(document), "movement.json")}
    made = walking.post("/v1/layouts", data=parts, content_type="multipart/form-data").get_json()
    assert not made["good_to_cut"]
    address = f"/v1/layouts/{made['fingerprint']}"

    marked = walking.get(f"{address}/disc.dxf?despite_findings=trial")
    told = walking.get(f"{address}/layout.json?despite_findings=trial")

    [here] = walk.lay_out_discs(TUNE, spoilt, *DOCUMENTS[1:], time.monotonic)
    files = walk.files_of(here, not_good="trial")
    assert (marked.data, told.data) == (files["disc.dxf"], files["layout.json"])


def test_a_tune_that_cannot_be_read_is_told_as_ever(walking: FlaskClient) -> None:
    told = post(walking, b"no tune")

    with pytest.raises(MidiReadError) as raised:
        walk.lay_out_discs(b"no tune", *DOCUMENTS)
    assert (told.status_code, told.json["type"]) == (422, "/problems/midi-unreadable")
    assert told.json["detail"] == str(raised.value)


@pytest.mark.parametrize(
    ("deed", "why"),
    [
        ("segfault", "ended 2 processes that tried; of the last, its process was ended by SIGSEGV"),
        ("exit 3", "ended 2 processes that tried; of the last, its process ended with code 3"),
        ("spin", "takes longer than 2 s"),
        ("fill", "takes more than 300 MiB of memory"),
    ],
)
def test_a_tune_that_ends_what_computes_it_is_refused_and_the_next_is_laid_out(
    failing: FlaskClient, deed: str, why: str
) -> None:
    refused = post(failing, tune_called(f"do:{deed};"))
    after = post(failing, tune_called(f"after {deed}"))

    assert (
        problem_of(refused, "too-much-to-compute")["detail"]
        == f"laying this tune out {why}; shorten it, or split it over more discs"
    )
    assert after.status_code == 201


def test_a_fault_of_the_program_is_logged_with_its_trace_and_told_without(
    failing: FlaskClient, caplog: pytest.LogCaptureFixture
) -> None:
    told = post(failing, tune_called("do:divide;"))

    assert (told.status_code, told.json["type"]) == (500, "/problems/internal-error")
    assert "ZeroDivisionError: of the test" in caplog.text
    assert "ZeroDivisionError" not in told.text


def test_what_computes_apart_takes_a_place_as_ever(failing: FlaskClient) -> None:
    open_computing_queue(failing.application, 0)
    refused = post(failing, tune_called("no place"))
    open_computing_queue(failing.application, None)

    assert (refused.status_code, refused.json["type"]) == (503, "/problems/service-busy")


class Child:
    """A child that answers, or fails, as it is told to."""

    def __init__(self, *answers: Answer | Exception) -> None:
        self.asked: list[Asked] = []
        self.answers = list(answers)

    def stopwatch(self) -> Callable[[], float]:
        return lambda: 0.0

    def ask(self, asked: Asked, within_s: float) -> Answer:
        self.asked.append(asked)
        answer = self.answers.pop(0)
        if isinstance(answer, Exception):
            raise answer
        return answer


class OneChild:
    """Children that are one."""

    setup = ChildSetup(planner="layout.walk", memory_mib=300)

    def __init__(self, child: Child) -> None:
        self.child = child
        self.preferred: list[Any] = []

    def one(self, preferred: Any = None) -> "OneChild":
        self.preferred.append(preferred)
        return self

    def __enter__(self) -> Child:
        return self.child

    def __exit__(self, *_: object) -> None:
        """It stays."""


def told(*, good: bool = True, stopped: str | None = None, layout: bytes = b"{}", **files: bytes) -> DiscTold:
    return DiscTold(
        title="Harvest",
        fingerprint="0" * 16,
        disc_number=1,
        disc_count=1,
        good_to_cut=good,
        stopped=stopped,
        told={"layout.json": layout},
        files=files,
    )


def laid_out(*answers: Answer | Exception, disc: DiscTold) -> tuple[PlannedApart, Any, OneChild]:
    children = OneChild(Child(Answer(kind=Kind.DONE, discs=(disc,)), *answers))
    planner = PlannedApart(children, ComputingQueue(), 60.0)  # type: ignore[arg-type]
    [made] = planner.lay_out_discs(b"MThd", *DOCUMENTS, time.monotonic, most_s=7)
    return planner, made, children


def test_what_is_wanted_of_a_disc_is_asked_of_the_child_that_laid_it_out() -> None:
    planner, made, children = laid_out(Answer(kind=Kind.DONE, files={"disc.dxf": b"cut"}), disc=told())

    files = planner.files_of(made, not_good="trial")

    first, then = children.child.asked
    assert files == {"disc.dxf": b"cut"}
    assert children.preferred == [None, children.child]
    assert (first.want, then.want, then.not_good, then.name) == (Want.DISCS, Want.FILES, "trial", first.name)
    assert (then.work, then.work.is_timed, then.work.most_s) == (first.work, True, 7)


def test_two_works_never_have_one_name() -> None:
    planner, _, children = laid_out(Answer(kind=Kind.DONE, discs=(told(),)), disc=told())
    planner.lay_out_discs(b"MThd", *DOCUMENTS)

    first, second = children.child.asked
    assert first.name != second.name
    assert not second.work.is_timed


@pytest.mark.parametrize("not_good", [None, "trial"])
def test_files_that_came_along_are_not_asked_for(not_good: str | None) -> None:
    planner, made, children = laid_out(disc=told(stopped="time", **{"disc.dxf": b"cut"}))

    assert planner.files_of(made, not_good=not_good) == {"disc.dxf": b"cut"}
    assert planner.told_of(made, not_good=not_good) == {"layout.json": b"{}"}
    assert len(children.child.asked) == 1


def test_files_with_a_reason_of_a_faulty_disc_are_asked_for_though_others_came_along() -> None:
    marked = [Answer(kind=Kind.DONE, files={name: b"marked"}) for name in ("disc.dxf", "layout.json")]
    planner, made, children = laid_out(*marked, disc=told(good=False, stopped="time", **{"disc.dxf": b"kept back"}))

    files, told_again = planner.files_of(made, not_good="trial"), planner.told_of(made, not_good="trial")

    assert (files, told_again) == ({"disc.dxf": b"marked"}, {"layout.json": b"marked"})
    assert [asked.want for asked in children.child.asked] == [Want.DISCS, Want.FILES, Want.TOLD]


@pytest.mark.parametrize("layout", [b"{}", b'{"another": 1}'])
def test_a_disc_laid_out_again_gives_files_only_where_it_is_the_same(layout: bytes) -> None:
    again = Answer(kind=Kind.DONE, discs=(told(layout=layout),), files={"disc.dxf": b"cut"})
    planner, made, _ = laid_out(again, disc=told())

    if layout == b"{}":
        assert planner.files_of(made) == {"disc.dxf": b"cut"}
    else:
        with pytest.raises(AnotherDiscError):
            planner.files_of(made)


def test_work_whose_child_was_ended_is_given_to_another_once() -> None:
    ended = ChildEndedError("its process was ended by SIGKILL")
    planner, made, children = laid_out(ended, Answer(kind=Kind.DONE, files={"disc.dxf": b"cut"}), disc=told())

    assert planner.files_of(made) == {"disc.dxf": b"cut"}
    assert len(children.child.asked) == 1 + ATTEMPTS


def test_where_no_child_can_be_started_one_is_told_to_come_again() -> None:
    class NoChildren(OneChild):
        def __enter__(self) -> Child:
            raise NoChildError("no room")

    planner = PlannedApart(NoChildren(Child()), ComputingQueue(), 60.0)  # type: ignore[arg-type]
    with pytest.raises(ProblemError) as refused:
        planner.lay_out_discs(b"MThd", *DOCUMENTS)

    assert (refused.value.name, refused.value.headers) == ("service-busy", {"Retry-After": str(COME_AGAIN_S)})
    assert refused.value.detail == "no process could be started that computes (no room)"


def test_a_fault_of_the_program_is_raised_with_its_trace() -> None:
    planner, made, _ = laid_out(Answer(kind=Kind.FAILED, trace="ZeroDivisionError"), disc=told())

    with pytest.raises(ComputingFailedError, match=r"^ZeroDivisionError$"):
        planner.files_of(made)


def test_work_that_takes_too_long_is_not_tried_again() -> None:
    planner, made, children = laid_out(ChildTooLongError(), disc=told())

    with pytest.raises(ProblemError, match="takes longer than 60 s"):
        planner.files_of(made)
    assert len(children.child.asked) == 2
