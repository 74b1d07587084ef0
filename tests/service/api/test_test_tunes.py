"""/v1/test-tunes: listed with where they lead, and given as MIDI files."""

import hashlib

from service.orders.states import State
from tests.service.api.guarded import problem_of
from tests.service.fakes import Client

FROM_PLANNING = {State.READY, State.RELEASED, State.ATTENTION, State.FAILED}


def test_every_state_that_planning_leads_to_has_its_tune(client: Client) -> None:
    tunes = client.get("/v1/test-tunes").json["tunes"]  # type: ignore[index]  # an answer in JSON

    assert {tune["leads_to"] for tune in tunes} == FROM_PLANNING


def test_each_tune_is_given_as_it_is_listed(client: Client) -> None:
    for tune in client.get("/v1/test-tunes").json["tunes"]:  # type: ignore[index]
        answer = client.get(tune["href"])
        assert (answer.status_code, answer.content_type) == (200, "audio/midi")
        assert hashlib.sha256(answer.data).hexdigest() == tune["sha256"]
        assert client.get(tune["href"], If_None_Match=answer.headers["ETag"]).status_code == 304


def test_a_name_that_is_none_tells_those_there_are(client: Client) -> None:
    told = problem_of(client.get("/v1/test-tunes/happy.mid"), "route-unknown")

    assert told["detail"].startswith("there is no test tune 'happy'; there are ready, released, attention-finding, ")
