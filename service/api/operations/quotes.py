"""Quotes: what an order would cost."""

from dataclasses import replace

from service.api.describing import Example, Operation
from service.api.models.quotes import QuoteAnswer
from service.api.operations.common import CONTENT_LOCATION, FORM, LOCATION, SMALL_TUNE, told
from service.api.operations.orders import PLACE

TAG = "quotes"

MAKE = replace(
    PLACE,
    id="make_quote",
    tag=TAG,
    summary="Ask what an order would cost",
    description="The same form as that of an order, but for quote and repeat_of. The price follows from the rates that "
    "the cutter states, and holds until valid_until for an order of the same input and quantity that names the quote.",
    answers=(told(QuoteAnswer, "The price.", LOCATION, CONTENT_LOCATION, status=201),),
    problems=(*PLACE.problems, "not-priced", "too-much-to-compute"),
    examples=(
        Example(
            status=201,
            media_type=FORM,
            body={"tune": SMALL_TUNE, "order": {"movement": "fernhollow-31", "quantity": 12}},
        ),
    ),
)
TELL = Operation(
    id="tell_quote",
    tag=TAG,
    summary="A quote",
    answers=(told(QuoteAnswer, "The price."),),
    problems=("order-unknown",),
    examples=(Example(status=200, given="a quote"),),
)
