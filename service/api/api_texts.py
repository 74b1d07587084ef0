"""What the API document says in words: rules for clients, groups, parameters of paths, keys."""

from collections.abc import Mapping
from typing import Any

from service.access.scopes import MEANINGS as SCOPES
from service.api.describing import Schema
from service.api.models.hooks import DELIVERY_ID
from service.api.models.orders import ORDER_ID
from service.api.problems import PROBLEMS
from service.wording import shortened

_RULES = """\
A layout service for punched tune discs: a tune and a movement become a disc that is proved to play, and orders for
discs go from a shop's pipeline to its cutter. The computation here is version {engine_version}.

**Versions.** The path holds the version, /v1. Within it nothing that a client may rely on goes or changes its
meaning, but more may come at any time: operations, optional fields of requests, and members, states, types of events
and kinds of problems in answers. A client ignores members it does not know; it waits on an order whose state it does
not know; it treats a kind of problem it does not know by its status and its member `try_again`. Fields that are not
known in a request are refused, so that a slip of the pen is not lost. What shall go is announced twelve months
before by the header fields `Deprecation` (RFC 9745) and `Sunset` (RFC 8594) in its answers, and here.

**Problems.** Every error is told as problem details (RFC 9457). `type` names its kind, and leads to a page that says
what to do. `try_again` says whether the very same request may do better later; wait the seconds that `Retry-After`
says, where it is there. Any other request for which no answer came may be sent again too where it carries the same
`Idempotency-Key`, or where its method is idempotent by itself.

**Ids of requests.** Every answer has a `Request-Id`: that of the request where it brought one of 1 to 128 letters,
digits and `.` `_` `~` `:` `-`, else one made here. Problems hold it as `request_id`; tell it to who looks after the
service.

**Keys.** Programs show a key in the header `Authorization`. What belongs to another owner is answered as if it did
not exist. Requests are counted for each key: `RateLimit` says how many are left.

**Times** are RFC 3339 in UTC, prices decimal strings with an ISO 4217 currency, lengths mm, angles degrees in files.

**Danger.** Cutting discs means laser light, fume, moving presses, sharp edges and wound springs. A layout that is
good to cut is no word on the safety of a machine: local rules and trained people decide.
"""

TAGS: Mapping[str, str] = {
    "about": "What the service is, and what it takes.",
    "catalogue": "Movements and cutters.",
    "layouts": "A tune becomes a disc while you wait; nothing is ordered.",
    "trial pieces": "A piece that shows how a cutter cuts.",
    "sheets": "Discs on sheets of stock.",
    "orders": "Discs that are ordered, planned, released and cut.",
    "quotes": "What an order would cost.",
    "runs": "Many orders from one archive.",
    "events": "What happened to orders.",
    "proofs": "What a customer sees and decides.",
    "hooks": "Who is told by message.",
    "keys": "Who may do what.",
    "signing in": "Browsers.",
    "data": "What is kept of an owner.",
    "operations": "How the service fares.",
}

SCHEMES: Mapping[str, Any] = {
    "key": {
        "type": "http",
        "scheme": "bearer",
        "bearerFormat": "dw_…",
        "description": "A key. Scopes: " + "; ".join(f"`{scope}`: {means}" for scope, means in SCOPES.items()) + ".",
    },
    "browser": {
        "type": "apiKey",
        "in": "cookie",
        "name": "discwright",
        "description": "A browser that is signed in; over https the name is __Host-discwright. Writes bring "
        "X-CSRF-Token too.",
    },
}


class PathParameter:
    """A parameter of paths: what it means, what it may be, and one as it may look."""

    def __init__(self, meaning: str, example: Any, schema: Schema | None = None) -> None:
        """Note them."""
        self.meaning, self.example, self.schema = meaning, example, schema or {"type": "string"}


def _id(kind: str, pattern: str | None = None) -> PathParameter:
    prefix = "msg" if kind == "delivery" else kind
    schema = {"type": "string", "pattern": pattern or f"^{prefix}_[0-9a-f]{{32}}$"}
    return PathParameter(f"The id of a {kind}.", f"{prefix}_0644fa2bd7a0003f1c5be7e27ab1d2c4", schema)


_FROM_1 = {"type": "integer", "minimum": 1, "maximum": 2_147_483_647}
_DOCUMENT_ID = {"type": "string", "pattern": "^[a-z][a-z0-9-]{0,63}$"}
PATH_PARAMETERS: Mapping[str, PathParameter] = {
    "order_id": _id("order", ORDER_ID),
    "hook_id": _id("hook"),
    "delivery_id": _id("delivery", DELIVERY_ID),
    "key_id": _id("key"),
    "quote_id": _id("quote"),
    "run_id": _id("run"),
    "owner_id": _id("owner"),
    "revision": PathParameter("The number of a revision.", 1, _FROM_1),
    "disc": PathParameter("Which disc of the set, from 1.", 1, _FROM_1),
    "name": PathParameter(
        "A name, such as that of a file.", "disc.svg", {"type": "string", "pattern": "^[a-z0-9.-]{1,60}$"}
    ),
    "file_name": PathParameter("The name of a file.", "disc.svg", {"type": "string", "pattern": "^[a-z.-]{1,60}$"}),
    "fingerprint": PathParameter(
        "The fingerprint of a layout.", "5f0c1d2e3a4b5c6d", {"type": "string", "pattern": "^[0-9a-f]{16}$"}
    ),
    "document_id": PathParameter("The id of a movement or a cutter.", "fernhollow-31", _DOCUMENT_ID),
    "movement_id": PathParameter("The id of a movement.", "fernhollow-31", _DOCUMENT_ID),
    "cutter_id": PathParameter("The id of a cutter.", "fibre-laser", _DOCUMENT_ID),
    "text": PathParameter(
        "The signed text of a link to a proof.", "WyJv.YQ", {"type": "string", "pattern": "^[A-Za-z0-9._-]{1,400}$"}
    ),
    "secret": PathParameter(
        "The secret of a link that signs in.", "b2Nj", {"type": "string", "pattern": "^[A-Za-z0-9_-]{1,100}$"}
    ),
}


def description(engine_version: str) -> str:
    """What the document says of the whole.

    Args:
        engine_version: Of the computation.
    """
    return _RULES.format(engine_version=engine_version)


def about_problem(name: str) -> str:
    """A kind of problem in a sentence."""
    kind = PROBLEMS[name]
    again = "may do better later" if kind.try_again else "will not do better"
    return f"`{name}`: {shortened(kind.title, 200)}; the same request {again}."
