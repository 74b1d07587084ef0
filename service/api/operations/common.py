"""What many operations say alike."""

from typing import Any

from service.api.describing import Answer, FormPart, HeaderField, Schema
from service.api.models.orders import OrderAnswer
from service.media_types import JSON_MEDIA_TYPE

FORM = "multipart/form-data"
MIDI = "audio/midi"
ZIP = "application/zip"
DXF = "image/vnd.dxf"
SVG = "image/svg+xml"
PDF = "application/pdf"

# A Standard MIDI File of four notes, a second in all: small enough to be looked at.
SMALL_TUNE = bytes.fromhex(
    "4d546864000000060000000101e0"  # the header: one track, 480 ticks to a beat
    "4d54726b0000002f00ff510307a120"  # the track, of 47 bytes: a beat takes half a second
    "0090485a836080480000904c5a8360804c00"  # note 72, then 76, each for a beat
    "00904f5a8360804f000090545a83608054000"  # 79, then 84
    "0ff2f00"
)

OF_LENGTH: Schema = {"type": "integer", "minimum": 0}

IDEMPOTENCY_KEY = HeaderField(
    name="Idempotency-Key",
    meaning='A name for this request, such as "a-1": 1 to 255 printable ASCII characters in quotes. Sent again with '
    "the same key and content within 30 days, the request is answered as the first time, and its work is done once.",
    schema={
        "type": "string",
        "pattern": '^("[ !#-\\[\\]-~]{1,255}"|[!#-\\[\\]-~]{1,255})$',
        "examples": ['"W-1001"'],
    },
)
# What cannot be read in the fields that follow is as if it were not there (RFC 9110), so any text is valid.
IF_MATCH = HeaderField(
    name="If-Match",
    meaning="The entity tag of the order as it was read: the request is refused where it has changed since.",
)
IF_NONE_MATCH = HeaderField(
    name="If-None-Match",
    meaning="The entity tag of what the client has: the answer is 304 where that is still the same.",
)
RANGE = HeaderField(
    name="Range",
    meaning="The part of the file that is wanted; of several none is honoured.",
    schema={"type": "string", "examples": ["bytes=0-99"]},
)
IF_RANGE = HeaderField(
    name="If-Range",
    meaning="The entity tag of what the client has a part of: the whole is sent where it is another.",
)
PREFER = HeaderField(
    name="Prefer",
    meaning="wait=n: wait at most n seconds, up to 30, till there is something new to tell (RFC 7240).",
    schema={"type": "string", "examples": ["wait=20"]},
)
LAST_EVENT_ID = HeaderField(
    name="Last-Event-ID",
    meaning="The number of the last event seen; a stream goes on after it.",
)
CSRF_TOKEN = HeaderField(
    name="X-CSRF-Token",
    meaning="csrf_token of GET /v1/keys/me, which the writes of a signed-in browser bring. Programs leave it out.",
)

ETAG = HeaderField(name="ETag", meaning="Names what was sent; for If-None-Match and If-Match.")
LOCATION = HeaderField(
    name="Location", meaning="Where what was made is.", schema={"type": "string", "format": "uri-reference"}
)
CONTENT_LOCATION = HeaderField(
    name="Content-Location",
    meaning="Where what this answer tells can be had again.",
    schema={"type": "string", "format": "uri-reference"},
)
NEXT = HeaderField(name="Link", meaning='Where there is a next page, its address, with rel="next" (RFC 8288).')
SAVED_AS = HeaderField(name="Content-Disposition", meaning="The name that the file is saved by.")
DIGEST = HeaderField(name="Content-Digest", meaning="SHA-256 of the content, where the whole file is sent (RFC 9530).")
REPR_DIGEST = HeaderField(name="Repr-Digest", meaning="SHA-256 of the whole file (RFC 9530).")
RANGES = HeaderField(name="Accept-Ranges", meaning="bytes: parts of the file may be asked for.")
CONTENT_RANGE = HeaderField(name="Content-Range", meaning="Which part of the file this is.")
WAITED = HeaderField(name="Preference-Applied", meaning="How long a wait was granted.")

NOT_MODIFIED = Answer(status=304, meaning="It is as If-None-Match says.", headers=(ETAG,))
DONE = Answer(status=204, meaning="It is done.")

TUNE_PART = FormPart(name="tune", meaning="The tune: a Standard MIDI File.", media_type=MIDI)


def accept(*media_types: str) -> HeaderField:
    """The field Accept of an operation that can answer with several media types."""
    return HeaderField(
        name="Accept",
        meaning="What the answer shall be; the first of these where it is left out.",
        schema={"type": "string", "enum": list(media_types)},
    )


def told(model: type[Any], meaning: str, *headers: HeaderField, status: int = 200) -> Answer:
    """An answer in JSON."""
    return Answer(status=status, meaning=meaning, contents={JSON_MEDIA_TYPE: model}, headers=headers)


def order_answers(*statuses: int) -> tuple[Answer, ...]:
    """The answers that tell an order."""
    meanings = {200: "The order as it is now.", 202: "The order; it waits for a worker."}
    extra = {200: (), 202: (LOCATION,)}
    return tuple(
        told(OrderAnswer, meanings[status], ETAG, CONTENT_LOCATION, *extra[status], status=status)
        for status in statuses
    )
