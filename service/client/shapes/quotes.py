"""What is sent and told: quotes. Written by generate.py from the API document; not to be changed by hand."""

from typing import TypedDict

from service.client.shapes.common import Price


class QuoteAnswer(TypedDict):
    """A price, good until a moment for an order of the same input and quantity that names it."""

    id: str
    quantity: int
    price: "Price"
    discs: list["QuotedDisc"]
    created_at: str
    valid_until: str
    links: dict[str, str]


class QuoteLine(TypedDict):
    """A line of a price, for one disc: amount = quantity × rate, rounded to the currency's smallest coin."""

    name: str
    quantity: str
    per: str
    rate: str
    amount: str


class QuotedDisc(TypedDict):
    """The price of one disc of a set."""

    number: int
    good_to_cut: bool
    lines: list["QuoteLine"]
    once: str
    each: str
    amount: str
    not_counted: list[str]
