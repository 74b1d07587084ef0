"""Proofs: what a customer with a signed link sees of an order, and says about it."""

from service.api.describing import Body, Example, Operation
from service.api.models.proofs import ProofAnswer, VerdictAnswer, VerdictBody
from service.api.operations.common import IF_NONE_MATCH, IF_RANGE, RANGE, told
from service.api.operations.orders import FILE_ANSWERS
from service.media_types import JSON_MEDIA_TYPE

TAG = "proofs"

SHOW = Operation(
    id="show_proof",
    tag=TAG,
    summary="What a proof shows",
    description="The link is its own key: who has it sees this order, and nothing else.",
    answers=(told(ProofAnswer, "The discs as they would be cut."),),
    problems=("proof-refused", "order-unknown"),
    examples=(Example(status=200, given="a proof"),),
)
FILE = Operation(
    id="tell_proof_file",
    tag=TAG,
    summary="A file of a proof",
    headers=(IF_NONE_MATCH, RANGE, IF_RANGE),
    answers=FILE_ANSWERS,
    problems=("proof-refused", "order-unknown", "range-unsatisfiable"),
    examples=(Example(status=200, given="a proof", path={"disc": 1, "name": "disc.svg"}),),
)
VERDICT = Operation(
    id="say_verdict",
    tag=TAG,
    summary="Accept or decline a proof",
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=VerdictBody),),
    answers=(told(VerdictAnswer, "What was said is kept, and told by event."),),
    problems=("proof-refused", "order-unknown", "state-forbids"),
    examples=(
        Example(
            status=200,
            given="a proof",
            media_type=JSON_MEDIA_TYPE,
            body={"verdict": "accepted", "by": "B. Client"},
        ),
    ),
)
