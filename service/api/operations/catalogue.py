"""Movements and cutters, each in full."""

from layout.documents import Cutter, Movement
from service.api.describing import Example, Operation
from service.api.operations.common import ETAG, IF_NONE_MATCH, NOT_MODIFIED, told

TAG = "catalogue"

MOVEMENT = Operation(
    id="tell_movement",
    tag=TAG,
    summary="A movement",
    headers=(IF_NONE_MATCH,),
    answers=(told(Movement, "The document, every number plain and every track listed.", ETAG), NOT_MODIFIED),
    problems=("movement-unknown",),
    examples=(Example(status=200, path={"movement_id": "fernhollow-31"}),),
)
CUTTER = Operation(
    id="tell_cutter",
    tag=TAG,
    summary="A cutter",
    headers=(IF_NONE_MATCH,),
    answers=(told(Cutter, "The document, every number plain.", ETAG), NOT_MODIFIED),
    problems=("cutter-unknown",),
    examples=(Example(status=200, path={"cutter_id": "fibre-laser"}),),
)
