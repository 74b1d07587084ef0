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


def _sound(whose: str, tag: str, summary: str, unknown: tuple[str, ...], examples: tuple[Example, ...]) -> Operation:
    return Operation(
        id=f"tell_{whose}_sound",
        tag=tag,
        summary=summary,
        description=_SOUND,
        query=SoundQuery,
        headers=_HEAD,
        answers=_answers(WAV_MEDIA_TYPE),
        problems=(*unknown, *_PROBLEMS),
        examples=examples,
    )


def _plucks(whose: str, tag: str, summary: str, unknown: tuple[str, ...], example: Example) -> Operation:
    return Operation(
        id=f"tell_{whose}_plucks",
        tag=tag,
        summary=summary,
        description=_PLUCKS,
        query=PlucksQuery,
        headers=_HEAD,
        answers=_answers(MIDI),
        problems=(*unknown, *_PROBLEMS),
        examples=(example,),
    )


_HEADER_ALONE = {"Range": "bytes=0-43"}
_A_DISC = {"revision": 1, "disc": 1}
_OF_LAYOUTS = ("layout-unknown", "layout-outdated", "too-much-to-compute")
_OF_ORDERS, _OF_PROOFS = ("order-unknown",), ("proof-refused", "order-unknown")

LAYOUT_SOUND = _sound(
    "layout",
    "layouts",
    "A layout as it sounds",
    _OF_LAYOUTS,
    (
        Example(status=200, given="a layout", query={"of": "written", "bits": "24"}),
        Example(status=206, given="a layout", headers=_HEADER_ALONE),
    ),
)
LAYOUT_PLUCKS = _plucks(
    "layout", "layouts", "What a layout plays, as MIDI", _OF_LAYOUTS, Example(status=200, given="a layout")
)
ORDER_SOUND = _sound(
    "order",
    "orders",
    "A disc of a plan as it sounds",
    _OF_ORDERS,
    (Example(status=206, given="a ready order", path=_A_DISC, headers=_HEADER_ALONE),),
)
ORDER_PLUCKS = _plucks(
    "order",
    "orders",
    "What a disc of a plan plays, as MIDI",
    _OF_ORDERS,
    Example(status=200, given="a ready order", path=_A_DISC),
)
PROOF_SOUND = _sound(
    "proof",
    "proofs",
    "A disc of a proof as it sounds",
    _OF_PROOFS,
    (Example(status=206, given="a proof", path={"disc": 1}, headers=_HEADER_ALONE),),
)
PROOF_PLUCKS = _plucks(
    "proof",
    "proofs",
    "What a disc of a proof plays, as MIDI",
    _OF_PROOFS,
    Example(status=200, given="a proof", path={"disc": 1}),
)
