"""Quotes, as answers tell them."""

from pydantic import Field

from layout.documents.reading import Part


class Price(Part):
    """An amount of money."""

    amount: str = Field(description="a decimal number", examples=["18.98"])
    currency: str = Field(description="by ISO 4217", examples=["EUR"])


class QuoteLine(Part):
    """A line of a price, for one disc: amount = quantity × rate, rounded to the currency's smallest coin."""

    name: str = Field(examples=["machine time"])
    quantity: str
    per: str = Field(description="what is counted", examples=["min"])
    rate: str
    amount: str


class QuotedDisc(Part):
    """The price of one disc of a set."""

    number: int = Field(description="which disc, from 1")
    good_to_cut: bool = Field(description="whether no error-level finding stands")
    lines: list[QuoteLine]
    once: str = Field(description="what is asked once, however many copies: setting up")
    each: str = Field(description="what is asked for each copy")
    amount: str = Field(description="once + each × the quantity ordered")
    not_counted: list[str] = Field(description="what no document says how it is made, and so has no price")


class QuoteAnswer(Part):
    """A price, good until a moment for an order of the same input and quantity that names it."""

    id: str
    quantity: int = Field(description="copies of each disc")
    price: Price = Field(description="for all copies of all discs: the sum of the discs' amounts")
    discs: list[QuotedDisc]
    created_at: str
    valid_until: str
    links: dict[str, str]
