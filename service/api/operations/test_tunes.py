"""Test tunes."""

from service.api.describing import Answer, Example, Operation
from service.api.models.test_tunes import StateTunesAnswer
from service.api.operations.common import ETAG, IF_NONE_MATCH, MIDI, NOT_MODIFIED, SAVED_AS, told

TAG = "orders"

LIST = Operation(
    id="list_test_tunes",
    tag=TAG,
    summary="Tunes that lead an order to each of its states",
    description="For orders of test keys, which never reach the shop. With any other key they are tunes like all "
    "others.",
    headers=(IF_NONE_MATCH,),
    answers=(told(StateTunesAnswer, "The tunes, and where each leads.", ETAG), NOT_MODIFIED),
    examples=(Example(status=200),),
)
TELL = Operation(
    id="tell_test_tune",
    tag=TAG,
    summary="A test tune",
    headers=(IF_NONE_MATCH,),
    answers=(
        Answer(status=200, meaning="The MIDI file.", contents={MIDI: None}, headers=(ETAG, SAVED_AS)),
        NOT_MODIFIED,
    ),
    problems=("route-unknown",),
    examples=(Example(status=200, path={"name": "ready"}),),
)
