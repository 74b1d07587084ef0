"""Layouts computed in children, over HTTP: what they come to is the same, and what a tune does it does to a child."""

import json
import threading
import time
from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
from flask import Flask
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from layout import walk
from layout.documents import read_settings, shipped_cutter, shipped_movement
from layout.errors import MidiReadError
from service.api import apart
from service.api.apart import ATTEMPTS, COME_AGAIN_S, ComputingFailedError, PlannedApart, within_s
from service.api.computing_queue import LONG_S, open_computing_queue
from service.api.problems import ProblemError
from service.app import OPENED, create_app
from service.children.child_process import ChildEndedError, ChildTooLongError
from service.computing.children import MOST_CHILDREN, Children, NoChildError
from service.computing.messages import Answer, Asked, ChildSetup, DiscTold, Kind, Want
from service.limits import Limits
from service.planner import AnotherDiscError
from service.settings import AccessSettings, ServiceSettings, WorkSettings, settings_from
from tests.faults.ordering import tune_called
from tests.fuzz.test_random_discs import faulty
from tests.service.api.guarded import problem_of
from tests.service.conftest import begin_data, environment_of
from tests.service.fake_planner import REPORT
from tests.service.fakes import MANY
from tests.service.shop import TUNE

WITHIN_S = 5  # that a computation may take of children that fail; the walk has as long as the service gives it
WAIT_S = 30.0  # for what must come; far more than it takes
DOCUMENTS = (shipped_movement("mossbrook-67"), shipped_cutter("fibre-laser"), read_settings("{}"))


def app_of(folder: Path, children: Any, work: WorkSettings | None = None, limits: Limits | None = None) -> Flask:
    begin_data(folder / "data")
    settings = ServiceSettings(
        places=settings_from(environment_of(folder)).places,
        access=AccessSettings(listens_on_loopback=True, write_rate=MANY, read_rate=MANY),
        work=work or WorkSettings(),
        limits=limits or Limits(),
    )
    return create_app(settings, children=children)


def close(app: Flask) -> None:
    for opened in app.extensions[OPENED]:
        opened.close()


@pytest.fixture(scope="module")
def walking(tmp_path_factory: pytest.TempPathFactory) -> Iterator[FlaskClient]:
    children = Children(ChildSetup(planner="layout.walk", memory_mib=2000))
    app = app_of(tmp_path_factory.mktemp("walking"), children)
    yield app.test_client()
    children.end()
    close(app)


@pytest.fixture(scope="module")
def failing(tmp_path_factory: pytest.TempPathFactory) -> Iterator[FlaskClient]:
    children = Children(ChildSetup(planner="tests.faults.planner", memory_mib=300))
    limits = replace(Limits(), search_s=WITHIN_S - 1, after_search_s=1)
    app = app_of(tmp_path_factory.mktemp("failing"), children, WorkSettings(plan_within_s=1), limits)
    yield app.test_client()
    children.end()
    close(app)


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
        ("spin", "takes longer than 5 s"),
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


def told(*, good: bool = True, stopped: str | None = None, layout: bytes = b"{}") -> DiscTold:
    return DiscTold(
        title="Harvest",
        fingerprint="0" * 16,
        disc_number=1,
        disc_count=1,
        good_to_cut=good,
        stopped=stopped,
        told={"layout.json": layout, "report.json": json.dumps(REPORT).encode()},
    )


def laid_out(*answers: Answer | Exception, disc: DiscTold) -> tuple[PlannedApart, Any, OneChild]:
    children = OneChild(Child(Answer(kind=Kind.DONE, discs=(disc,)), *answers))
    planner = PlannedApart(children, within_s=60.0)  # type: ignore[arg-type]
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
    files = Answer(kind=Kind.DONE, files={"disc.dxf": b"cut"})
    planner, made, children = laid_out(files, disc=told(stopped="time"))

    assert planner.files_of(made, not_good=not_good) == {"disc.dxf": b"cut"}
    assert planner.told_of(made, not_good=not_good)["layout.json"] == b"{}"
    assert [asked.want for asked in children.child.asked] == [Want.DISCS, Want.FILES]
    assert len(children.preferred) == 1  # of the child that had just laid it out, before anybody else had it


def test_files_with_a_reason_of_a_faulty_disc_are_asked_for_though_others_came_along() -> None:
    given = [("record.dxf", b"unmarked"), ("disc.dxf", b"marked"), ("layout.json", b"marked")]
    answers = [Answer(kind=Kind.DONE, files={name: content}) for name, content in given]
    planner, made, children = laid_out(*answers, disc=told(good=False, stopped="time"))

    files, told_again = planner.files_of(made, not_good="trial"), planner.told_of(made, not_good="trial")

    assert (files, told_again) == ({"disc.dxf": b"marked"}, {"layout.json": b"marked"})
    assert [asked.want for asked in children.child.asked] == [Want.DISCS, Want.FILES, Want.FILES, Want.TOLD]


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


def test_the_second_try_has_what_the_first_left_of_the_time(monkeypatch: pytest.MonkeyPatch) -> None:
    now_s = [100.0]
    monkeypatch.setattr(apart.time, "monotonic", lambda: now_s[0])

    class Slow(Child):
        def ask(self, asked: Asked, within_s: float) -> Answer:
            waited_s.append(within_s)
            now_s[0] += 25
            return super().ask(asked, within_s)

    waited_s: list[float] = []
    ended = ChildEndedError("its process was ended by SIGKILL")
    children = OneChild(Slow(ended, Answer(kind=Kind.DONE, discs=(told(),))))
    PlannedApart(children, within_s=60.0).lay_out_discs(b"MThd", *DOCUMENTS)  # type: ignore[arg-type]

    assert waited_s == [60.0, 35.0]


@pytest.mark.parametrize(("plan_s", "search_s", "after_s", "all_s"), [(300, 60, 60, 300), (30, 60, 60, 120)])
def test_a_layout_may_take_as_long_as_an_order_and_never_less_than_a_search_and_what_follows(
    plan_s: int, search_s: int, after_s: int, all_s: int
) -> None:
    limits = replace(Limits(), search_s=search_s, after_search_s=after_s)

    assert within_s(ServiceSettings(work=WorkSettings(plan_within_s=plan_s), limits=limits)) == all_s


def test_while_all_children_search_for_long_what_this_process_computes_goes_on_and_layouts_wait_in_their_order(
    tmp_path: Path,
) -> None:
    begun, may_end = threading.Semaphore(0), threading.Event()

    class Searching(Child):
        def stopwatch(self) -> Callable[[], float]:
            return lambda: LONG_S  # by now it is

        def ask(self, asked: Asked, within_s: float) -> Answer:
            begun.release()
            assert may_end.wait(WAIT_S)
            return Answer(kind=Kind.DONE, discs=(told(),))

    app = app_of(tmp_path, OneChild(Searching()))
    with ThreadPoolExecutor(max_workers=MOST_CHILDREN + 1) as pool:
        tunes = [tune_called(f"long {number}") for number in range(MOST_CHILDREN + 1)]
        layouts = [pool.submit(post, app.test_client(), tune) for tune in tunes]
        try:
            searching = [begun.acquire(timeout=WAIT_S) for _ in range(MOST_CHILDREN)]
            one_more = begun.acquire(timeout=0.3)
            with ThreadPoolExecutor(max_workers=1) as aside:
                trial = aside.submit(app.test_client().post, "/v1/trial-pieces?movement=tarnlight-17&cutter=turn-press")
                trial_status = trial.result(WAIT_S).status_code
        finally:
            may_end.set()
        statuses = [layout.result(WAIT_S).status_code for layout in layouts]
    close(app)

    assert (searching, one_more) == ([True] * MOST_CHILDREN, False)
    assert trial_status == 200
    assert statuses == [201] * (MOST_CHILDREN + 1)


def test_where_no_child_can_be_started_one_is_told_to_come_again() -> None:
    class NoChildren(OneChild):
        def __enter__(self) -> Child:
            raise NoChildError("no room")

    planner = PlannedApart(NoChildren(Child()), within_s=60.0)  # type: ignore[arg-type]
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
