"""Runs, as requests ask for them and answers tell them."""

from typing import Annotated

from pydantic import Field, StrictBool

from layout.documents.reading import Part
from service.api.models.orders import MOST_COPIES, Named, OneLine, SettingsBrought
from service.limits import Limits

MOST_PAIRS = Limits().run_orders
MOST_PAGE = 100  # runs of one page; each is counted while it is told
MOST_ITEMS_PAGE = 1000  # pairs of one page: about 250 kB of JSON


class PairBody(Part):
    """One tune of the archive for one movement."""

    tune: Annotated[str, Field(min_length=1, max_length=200)] = Field(description="its name in the archive")
    movement: Named = Field(description="which movement", examples=["fernhollow-31"])
    reference: OneLine | None = Field(default=None, description="of its order")


class RunBody(Part):
    """The part `run`: what is ordered of the tunes in the part `archive`."""

    movements: Annotated[list[Named], Field(max_length=100)] = Field(
        default_factory=list, description="every tune of the archive for each of these", examples=[["fernhollow-31"]]
    )
    pairs: Annotated[list[PairBody], Field(max_length=MOST_PAIRS)] = Field(
        default_factory=list, description="these pairs, in place of every tune for each of `movements`"
    )
    cutter: Named | None = Field(default=None, description="which cutter; null for the default")
    settings: SettingsBrought = Field(default_factory=dict, description="a settings document for all")
    quantity: Annotated[int, Field(ge=1, le=MOST_COPIES)] = Field(default=1, description="copies of each disc")
    reference: OneLine | None = Field(
        default=None, description="the sender's own; orders without one of theirs get it with their number"
    )
    most_lost_share: Annotated[float, Field(ge=0, le=1)] = Field(
        default=0.05, description="a person must decide where more of a tune's weight is lost than this share"
    )
    release_alone: StrictBool = Field(
        default=False, description="released without a person where nothing stands; needs the scope release"
    )
    hook: Annotated[str, Field(max_length=48)] | None = Field(
        default=None, description="the id of a hook that is told of each order"
    )


class RunsQuery(Part):
    """Which runs are listed."""

    test: bool = Field(default=False, description="runs of keys for tests, in place of the others")
    after: Annotated[str, Field(max_length=500)] | None = Field(
        default=None, description="where the page begins: from the header Link of the page before"
    )
    limit: Annotated[int, Field(ge=1, le=MOST_PAGE)] = Field(default=20, description="how many runs at most")


class ItemsQuery(Part):
    """Which pairs are listed."""

    after: Annotated[int, Field(ge=0, le=MOST_PAIRS)] = Field(default=0, description="pairs past this number alone")
    limit: Annotated[int, Field(ge=1, le=MOST_ITEMS_PAGE)] = Field(default=200, description="how many at most")


class RunAnswer(Part):
    """A run, and how far it is."""

    id: str
    reference: str | None
    order_count: int
    counts: dict[str, int] = Field(description='pairs by state; "waits" before they are orders, "refused" for ever')
    is_finished: bool
    created_at: str
    links: dict[str, str]


class RunsAnswer(Part):
    """A page of runs, the newest first; the header Link leads to the next."""

    runs: list[RunAnswer]


class ItemAnswer(Part):
    """A pair, and what became of it."""

    number: int
    tune: str
    movement: str
    order: str | None
    state: str
    reason: str | None


class ItemsAnswer(Part):
    """Pairs in the order asked; the header Link leads to the next page."""

    items: list[ItemAnswer]
