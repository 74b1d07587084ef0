"""Orders: placed, seen, listed, deleted, and decided about."""

from service.api.describing import Answer, Body, Example, FormPart, HeaderField, Operation
from service.api.models.orders import (
    CancelBody,
    EventsAnswer,
    EventsQuery,
    FileQuery,
    OrderAnswer,
    OrderBody,
    OrdersAnswer,
    OrdersQuery,
    ReleaseBody,
    ReplanBody,
    ReportBody,
)
from service.api.models.proofs import ProofLinkAnswer
from service.api.models.report_records import FileRecord
from service.api.operations.common import (
    CONTENT_RANGE,
    CSRF_TOKEN,
    DIGEST,
    ETAG,
    FORM,
    IDEMPOTENCY_KEY,
    IF_MATCH,
    IF_NONE_MATCH,
    IF_RANGE,
    LAST_EVENT_ID,
    NEXT,
    NOT_MODIFIED,
    PREFER,
    RANGE,
    RANGES,
    REPR_DIGEST,
    SAVED_AS,
    SMALL_TUNE,
    TUNE_PART,
    WAITED,
    accept,
    order_answers,
    told,
)
from service.api.operations.layouts import DOCUMENT_PARTS
from service.media_types import JSON_MEDIA_TYPE, MEDIA_TYPES

TAG = "orders"
STREAM = "text/event-stream"
WRITES = (IDEMPOTENCY_KEY, CSRF_TOKEN)
DECIDES = (IDEMPOTENCY_KEY, IF_MATCH, CSRF_TOKEN)
OF_AN_ORDER = ("order-unknown", "state-forbids", "order-changed")

PLACE = Operation(
    id="place_order",
    tag=TAG,
    summary="Place an order",
    description="A form with the tune and what is ordered. The order is kept before it is answered for, and planned "
    "by a worker: wait for it at its Location, by its events, or by a hook. Send an Idempotency-Key, and send the "
    "request again with the same key wherever no answer came: there will be one order.",
    headers=WRITES,
    bodies=(
        Body(
            media_type=FORM,
            parts=(
                TUNE_PART,
                FormPart(name="order", meaning="What is ordered.", media_type=JSON_MEDIA_TYPE, model=OrderBody),
                *DOCUMENT_PARTS,
            ),
        ),
    ),
    answers=order_answers(202),
    problems=(
        *("tune-missing", "midi-unreadable", "rulings-contradict", "movement-unknown", "cutter-unknown"),
        *("multipart-unreadable", "parameter-invalid", "order-unknown", "state-forbids", "scope-missing"),
        "document-invalid",
    ),
    examples=(
        Example(
            status=202,
            headers={"Idempotency-Key": '"W-1001"'},
            media_type=FORM,
            body={
                "tune": SMALL_TUNE,
                "order": {"movement": "fernhollow-31", "quantity": 2, "reference": "W-1001"},
            },
        ),
        Example(
            status=202,
            given="a released order",
            media_type=FORM,
            body={"order": {"repeat_of": "order_00000000000000000000000000000000", "reference": "W-1002"}},
        ),
    ),
)
LIST = Operation(
    id="list_orders",
    tag=TAG,
    summary="Orders, in the order of their last change, the newest last",
    query=OrdersQuery,
    answers=(told(OrdersAnswer, "A page of orders.", NEXT),),
    examples=(Example(status=200, query={"state": "ready", "limit": 10}),),
)
TELL = Operation(
    id="tell_order",
    tag=TAG,
    summary="An order",
    description="With Prefer: wait=n it is told when it is planned, or when it is not as If-None-Match says any "
    "more, at the latest after n seconds.",
    headers=(IF_NONE_MATCH, PREFER),
    answers=(told(OrderAnswer, "The order.", ETAG, WAITED), NOT_MODIFIED),
    problems=("order-unknown",),
    examples=(Example(status=200, given="an order"),),
)
ERASE = Operation(
    id="erase_order",
    tag=TAG,
    summary="Delete the personal data of a finished order",
    description="A tombstone is left: that there was an order, and when.",
    headers=(CSRF_TOKEN,),
    answers=(told(OrderAnswer, "What is left of the order."),),
    problems=("order-unknown", "state-forbids", "order-changed"),
    examples=(Example(status=200, given="a released order"),),
)
RELEASE = Operation(
    id="release_order",
    tag=TAG,
    summary="Release an order for cutting",
    description="Its cutting files may be taken from then on. Where a person had to decide, with a reason. "
    "Only the plan that was seen is released: its tag is sent along, and another one in force is a 412.",
    headers=DECIDES,
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=ReleaseBody),),
    answers=order_answers(200, 202),
    problems=(*OF_AN_ORDER, "findings-stand"),
    examples=(
        Example(
            status=200,
            given="a ready order that was looked at",
            headers={"Idempotency-Key": '"release-W-1001"'},
            media_type=JSON_MEDIA_TYPE,
            body={"by": "A. Maker", "plan": "1-e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855"},
        ),
    ),
)
REPLAN = Operation(
    id="replan_order",
    tag=TAG,
    summary="Plan an order anew",
    description="A released plan is superseded by it, which is told by event.",
    headers=DECIDES,
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=ReplanBody),),
    is_body_required=False,
    answers=order_answers(202),
    problems=(*OF_AN_ORDER, "rulings-contradict", "movement-unknown"),
    examples=(
        Example(
            status=202,
            given="a ready order",
            media_type=JSON_MEDIA_TYPE,
            body={"settings": {"title": "Four notes, again"}},
        ),
    ),
)
CANCEL = Operation(
    id="cancel_order",
    tag=TAG,
    summary="Cancel an order",
    description="After its release only where the shop confirms that the files were called back.",
    headers=DECIDES,
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=CancelBody),),
    is_body_required=False,
    answers=order_answers(200),
    problems=OF_AN_ORDER,
    examples=(
        Example(
            status=200,
            given="an order",
            media_type=JSON_MEDIA_TYPE,
            body={"reason": "ordered twice"},
        ),
    ),
)
REPORT = Operation(
    id="report_on_order",
    tag=TAG,
    summary="Say what was done with a released order",
    headers=DECIDES,
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=ReportBody),),
    answers=order_answers(200),
    problems=OF_AN_ORDER,
    examples=(
        Example(
            status=200,
            given="a released order",
            media_type=JSON_MEDIA_TYPE,
            body={"what": "measured", "count": 1, "measures": {"tab_width_mm": 1.19}},
        ),
    ),
)
PROOF_LINK = Operation(
    id="make_proof_link",
    tag=TAG,
    summary="A signed link by which a customer sees the order and decides",
    description="It leads people to a page, and who asks for JSON to the same at /v1/proofs.",
    headers=(CSRF_TOKEN,),
    answers=(told(ProofLinkAnswer, "The link.", status=201),),
    problems=("order-unknown", "state-forbids"),
    examples=(Example(status=201, given="a ready order"),),
)

LATEST = HeaderField(name="Link", meaning='Of a superseded plan, the order, with rel="latest-version" (RFC 5829).')
_FILES = {media_type.partition(";")[0]: None for media_type in MEDIA_TYPES.values()}
FILE_ANSWERS = (
    Answer(
        status=200,
        meaning="The whole file.",
        contents={**_FILES, JSON_MEDIA_TYPE: FileRecord},
        headers=(ETAG, DIGEST, REPR_DIGEST, RANGES, SAVED_AS, LATEST),
    ),
    Answer(
        status=206,
        meaning="The part of the file that Range asks for.",
        contents={**_FILES, JSON_MEDIA_TYPE: None},
        headers=(ETAG, CONTENT_RANGE, REPR_DIGEST, RANGES, SAVED_AS, LATEST),
    ),
    NOT_MODIFIED,
)
FILE = Operation(
    id="tell_order_file",
    tag=TAG,
    summary="A file of a plan",
    description="Previews at any time, cutting files after release. A file never changes, so it may be kept.",
    query=FileQuery,
    headers=(IF_NONE_MATCH, RANGE, IF_RANGE),
    answers=FILE_ANSWERS,
    problems=("order-unknown", "not-released", "plan-superseded", "range-unsatisfiable"),
    examples=(
        Example(status=200, given="a ready order", path={"revision": 1, "disc": 1, "name": "disc.svg"}),
        Example(
            status=206,
            given="a released order",
            path={"revision": 1, "disc": 1, "name": "disc.dxf"},
            headers={"Range": "bytes=0-99"},
        ),
    ),
)

EVENT_ANSWERS = (
    Answer(
        status=200,
        meaning="Events, or a stream of them: each with its number as id, its type, and its JSON as data.",
        contents={JSON_MEDIA_TYPE: EventsAnswer, STREAM: None},
    ),
)
EVENTS = Operation(
    id="list_events",
    tag="events",
    summary="What happened to all orders",
    description="Ask on after the last number seen, and nothing is missed, however long you were away.",
    query=EventsQuery,
    headers=(accept(JSON_MEDIA_TYPE, STREAM), LAST_EVENT_ID),
    answers=EVENT_ANSWERS,
    examples=(Example(status=200, query={"after": 0, "limit": 10}),),
)
ORDER_EVENTS = Operation(
    id="list_order_events",
    tag="events",
    summary="What happened to an order",
    query=EventsQuery,
    headers=(accept(JSON_MEDIA_TYPE, STREAM), LAST_EVENT_ID),
    answers=EVENT_ANSWERS,
    problems=("order-unknown",),
    examples=(Example(status=200, given="an order"),),
)
