"""Discs as they sound: the same for layouts, orders and proofs."""

from service.api.describing import Answer, Example, Operation
from service.api.models.hearings import PlucksQuery, SoundQuery
from service.api.operations.common import (
    CONTENT_RANGE,
    DIGEST,
    ETAG,
    IF_NONE_MATCH,
    IF_RANGE,
    MIDI,
    NOT_MODIFIED,
    RANGE,
    RANGES,
    REPR_DIGEST,
    SAVED_AS,
)
from service.media_types import WAV_MEDIA_TYPE

_HEARD = (
    "What this disc does on this comb: left-out notes and nudges, each tooth with its own cents, dampers, the start "
    "and, where a turn of a winding is asked for, its sag. Time 0 is when the disc begins to move. "
)
_SOUND = _HEARD + "48 kHz, one channel, at its loudest 1 dB below full scale. What the movement leaves out is assumed."
_PLUCKS = _HEARD + "Each pluck of a track is a note until it is silenced; a tick is 0.05 ms. Cents are not told."
_PROBLEMS = ("document-invalid", "hearing-too-long", "range-unsatisfiable")
_HEAD = (IF_NONE_MATCH, RANGE, IF_RANGE)


def _answers(media_type: str) -> tuple[Answer, ...]:
    return (
        Answer(
            status=200,
            meaning="The whole file.",
            contents={media_type: None},
            headers=(ETAG, DIGEST, REPR_DIGEST, RANGES, SAVED_AS),
        ),
        Answer(
            status=206,
            meaning="The part of the file that Range asks for.",
            contents={media_type: None},
            headers=(ETAG, CONTENT_RANGE, REPR_DIGEST, RANGES, SAVED_AS),
        ),
        NOT_MODIFIED,
    )


LAYOUT_SOUND = Operation(
    id="tell_layout_sound",
    tag="layouts",
    summary="A layout as it sounds",
    description=_SOUND,
    query=SoundQuery,
    headers=_HEAD,
    answers=_answers(WAV_MEDIA_TYPE),
    problems=("layout-unknown", *_PROBLEMS),
    examples=(
        Example(status=200, given="a layout", query={"of": "written", "bits": "24"}),
        Example(status=206, given="a layout", headers={"Range": "bytes=0-43"}),
    ),
)
LAYOUT_PLUCKS = Operation(
    id="tell_layout_plucks",
    tag="layouts",
    summary="What a layout plays, as MIDI",
    description=_PLUCKS,
    query=PlucksQuery,
    headers=_HEAD,
    answers=_answers(MIDI),
    problems=("layout-unknown", *_PROBLEMS),
    examples=(Example(status=200, given="a layout"),),
)
ORDER_SOUND = Operation(
    id="tell_order_sound",
    tag="orders",
    summary="A disc of a plan as it sounds",
    description=_SOUND,
    query=SoundQuery,
    headers=_HEAD,
    answers=_answers(WAV_MEDIA_TYPE),
    problems=("order-unknown", *_PROBLEMS),
    examples=(
        Example(status=206, given="a ready order", path={"revision": 1, "disc": 1}, headers={"Range": "bytes=0-43"}),
    ),
)
ORDER_PLUCKS = Operation(
    id="tell_order_plucks",
    tag="orders",
    summary="What a disc of a plan plays, as MIDI",
    description=_PLUCKS,
    query=PlucksQuery,
    headers=_HEAD,
    answers=_answers(MIDI),
    problems=("order-unknown", *_PROBLEMS),
    examples=(Example(status=200, given="a ready order", path={"revision": 1, "disc": 1}),),
)
PROOF_SOUND = Operation(
    id="tell_proof_sound",
    tag="proofs",
    summary="A disc of a proof as it sounds",
    description=_SOUND,
    query=SoundQuery,
    headers=_HEAD,
    answers=_answers(WAV_MEDIA_TYPE),
    problems=("proof-refused", "order-unknown", *_PROBLEMS),
    examples=(Example(status=206, given="a proof", path={"disc": 1}, headers={"Range": "bytes=0-43"}),),
)
PROOF_PLUCKS = Operation(
    id="tell_proof_plucks",
    tag="proofs",
    summary="What a disc of a proof plays, as MIDI",
    description=_PLUCKS,
    query=PlucksQuery,
    headers=_HEAD,
    answers=_answers(MIDI),
    problems=("proof-refused", "order-unknown", *_PROBLEMS),
    examples=(Example(status=200, given="a proof", path={"disc": 1}),),
)
