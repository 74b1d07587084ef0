"""What is asked of the service, how often, and why: the mix that stands for a shop's busy hour.

Kinds are of one cost each as far as can be, so that the tail of a kind's times tells of waiting, not of another kind
of work. A deck of 100 cards holds each kind as often as its weight says; it is shuffled, gone through, and shuffled
again.
"""

import json
import random
from collections import deque
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from importlib.resources import files
from typing import Any

from tests.load.asking import Answer, Request

TUNE = files("service.demo").joinpath("tune.mid").read_bytes()
MOVEMENTS = ("fernhollow-31", "mossbrook-67", "tarnlight-17")
LOOKED_AT = 30  # layouts and orders, the last ones: far fewer than the service keeps, as people look at what is new
PASSAGE = {"from_s": 0, "to_s": 20}  # of the demo tune; as much as the smallest movement has a turn for
PAGES = ("/new", "/movements", "/movements/fernhollow-31", "/cutters/fibre-laser")


@dataclass(slots=True)
class Shelf:
    """What the client has learnt: addresses to ask for. A kind whose shelf is empty yet is passed over.

    Attributes:
        key: Of who places orders.
        layouts: Addresses and entity tags of layouts whose files are made.
        undrawn: The same, of those whose files nobody asked for.
        drawings: Addresses and entity tags of drawings.
        posted: Forms that were posted.
        orders: Addresses of orders.
        count: How many titles were given out, each another.
    """

    key: str
    layouts: deque[tuple[str, str]] = field(default_factory=lambda: deque(maxlen=LOOKED_AT))
    undrawn: deque[tuple[str, str]] = field(default_factory=lambda: deque(maxlen=LOOKED_AT))
    drawings: deque[tuple[str, str]] = field(default_factory=lambda: deque(maxlen=LOOKED_AT))
    posted: deque[Request] = field(default_factory=lambda: deque(maxlen=LOOKED_AT))
    orders: deque[str] = field(default_factory=lambda: deque(maxlen=LOOKED_AT))
    count: int = 0

    def settings(self) -> dict[str, Any]:
        """Those of a tune that nobody sent yet: the title is part of the layout."""
        self.count += 1
        return {"title": f"load {self.count}", "passage": PASSAGE}

    @property
    def key_field(self) -> str:
        """The header field that shows the key."""
        return f"Authorization: Bearer {self.key}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """One request of a kind.

    Attributes:
        request: What is sent.
        learn: What its answer adds to the shelf; called where the answer is as it should be.
    """

    request: Request
    learn: Callable[[Answer], None] = lambda answer: None


@dataclass(frozen=True, slots=True, kw_only=True)
class Kind:
    """A kind of request.

    Attributes:
        name: As the tables have it.
        weight: How many of a hundred requests.
        why: Why so many.
        status: What it is answered with.
        make: One of them, from the shelf; None while the shelf lacks what it needs.
    """

    name: str
    weight: int
    why: str
    status: int
    make: Callable[[Shelf, random.Random], Asked | None]


def _form(parts: dict[str, bytes]) -> bytes:
    told = []
    for name, content in parts.items():
        file = '; filename="tune.mid"\r\nContent-Type: audio/midi' if name == "tune" else ""
        told.append(f'--edge\r\nContent-Disposition: form-data; name="{name}"{file}\r\n\r\n'.encode() + content)
    return b"\r\n".join([*told, b"--edge--\r\n"])


FORM_FIELD = "Content-Type: multipart/form-data; boundary=edge"


def _new_layout(shelf: Shelf, chance: random.Random) -> Asked:
    settings = json.dumps(shelf.settings()).encode()
    movement = chance.choice(MOVEMENTS)
    request = Request(
        head=f"POST /v1/layouts?movement={movement} HTTP/1.1\r\n{FORM_FIELD}\r\nAccept: application/json",
        body=_form({"settings": settings, "tune": TUNE}),
    )

    def learn(answer: Answer) -> None:
        shelf.undrawn.append((answer.fields["location"], answer.fields["etag"]))
        shelf.posted.append(request)

    return Asked(request=request, learn=learn)


def _same_tune(shelf: Shelf, chance: random.Random) -> Asked | None:
    return Asked(request=chance.choice(shelf.posted)) if shelf.posted else None


def _first_drawing(shelf: Shelf, _: random.Random) -> Asked | None:
    if not shelf.undrawn:
        return None
    address, tag = shelf.undrawn.popleft()
    return Asked(
        request=Request(head=f"GET {address}/disc.svg HTTP/1.1"),
        learn=lambda _: shelf.layouts.append((address, tag)),
    )


def _layout(shelf: Shelf, chance: random.Random) -> Asked | None:
    return Asked(request=Request(head=f"GET {chance.choice(shelf.layouts)[0]} HTTP/1.1")) if shelf.layouts else None


def _known_layout(shelf: Shelf, chance: random.Random) -> Asked | None:
    return _known(chance.choice(shelf.layouts)) if shelf.layouts else None


def _preview(shelf: Shelf, chance: random.Random) -> Asked | None:
    return _file_of(shelf, chance, "disc.svg") if shelf.layouts else None


def _drawing(shelf: Shelf, chance: random.Random) -> Asked | None:
    return _file_of(shelf, chance, "disc.dxf") if shelf.layouts else None


def _file_of(shelf: Shelf, chance: random.Random, name: str) -> Asked:
    address = f"{chance.choice(shelf.layouts)[0]}/{name}"
    return Asked(
        request=Request(head=f"GET {address} HTTP/1.1"),
        learn=lambda answer: shelf.drawings.append((address, answer.fields["etag"])),
    )


def _known_drawing(shelf: Shelf, chance: random.Random) -> Asked | None:
    return _known(chance.choice(shelf.drawings)) if shelf.drawings else None


def _known(known: tuple[str, str]) -> Asked:
    address, tag = known
    return Asked(request=Request(head=f"GET {address} HTTP/1.1\r\nIf-None-Match: {tag}"))


def _page(_: Shelf, chance: random.Random) -> Asked:
    return Asked(request=Request(head=f"GET {chance.choice(PAGES)} HTTP/1.1\r\nAccept: text/html"))


def _disc_page(shelf: Shelf, chance: random.Random) -> Asked | None:
    if not shelf.layouts:
        return None
    fingerprint = chance.choice(shelf.layouts)[0].rpartition("/")[2]
    return Asked(request=Request(head=f"GET /discs/{fingerprint} HTTP/1.1\r\nAccept: text/html"))


def _order(shelf: Shelf, chance: random.Random) -> Asked:
    order = {"movement": chance.choice(MOVEMENTS), "settings": shelf.settings(), "quantity": 1}
    return Asked(
        request=Request(
            head=f"POST /v1/orders HTTP/1.1\r\n{FORM_FIELD}\r\n{shelf.key_field}",
            body=_form({"order": json.dumps(order).encode(), "tune": TUNE}),
        ),
        learn=lambda answer: shelf.orders.append(json.loads(answer.body)["id"]),
    )


def _order_looked_at(shelf: Shelf, chance: random.Random) -> Asked | None:
    if not shelf.orders:
        return None
    return Asked(request=Request(head=f"GET /v1/orders/{chance.choice(shelf.orders)} HTTP/1.1\r\n{shelf.key_field}"))


def _health(_: Shelf, __: random.Random) -> Asked:
    return Asked(request=Request(head="GET /healthz HTTP/1.1"))


def _movements(_: Shelf, __: random.Random) -> Asked:
    return Asked(request=Request(head="GET /v1/movements HTTP/1.1"))


HEALTH = Kind(name="health", weight=5, why="a proxy and a monitor ask all the time", status=200, make=_health)
ORDER = Kind(name="order placed", weight=1, why="of five layouts one is bought", status=202, make=_order)
NEW_LAYOUT = Kind(
    name="new layout", weight=5, why="the work itself: a tune nobody sent before", status=201, make=_new_layout
)
FIRST_DRAWING = Kind(
    name="first drawing", weight=5, why="each layout is looked at: all files are made", status=200, make=_first_drawing
)
KINDS = (
    NEW_LAYOUT,
    FIRST_DRAWING,
    Kind(name="same tune again", weight=4, why="forms are sent twice, links lost", status=201, make=_same_tune),
    Kind(name="layout", weight=12, why="a shop's page shows it to others", status=200, make=_layout),
    Kind(name="layout, known", weight=16, why="who has it asks whether it holds: 304", status=304, make=_known_layout),
    Kind(name="preview", weight=12, why="the picture beside it", status=200, make=_preview),
    Kind(name="drawing", weight=6, why="the cutting shop fetches it, and again", status=200, make=_drawing),
    Kind(name="drawing, known", weight=8, why="as with the layout: 304", status=304, make=_known_drawing),
    Kind(name="page", weight=8, why="forms and movements, read on the way", status=200, make=_page),
    Kind(name="disc page", weight=4, why="one for each new layout, nearly", status=200, make=_disc_page),
    ORDER,
    Kind(name="order looked at", weight=10, why="a shop asks until it is planned", status=200, make=_order_looked_at),
    Kind(name="movements", weight=4, why="programs read the catalogue when they start", status=200, make=_movements),
    HEALTH,
)


def deck(chance: random.Random) -> Iterator[Kind]:
    """Kinds for ever, each as often as its weight says."""
    cards = [kind for kind in KINDS for _ in range(kind.weight)]
    while True:
        chance.shuffle(cards)
        yield from cards
