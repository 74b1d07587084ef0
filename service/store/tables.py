"""The tables: one class for each kind of row, with what its columns mean.

Rows are changed by guarded updates (`update(...).where(state and attempt as they were read)`), so that of two
processes one alone succeeds; see `service/orders`. Nothing here is a promise to users: answers are made elsewhere.
"""

from datetime import datetime
from typing import Any

from sqlalchemy import (
    JSON,
    BigInteger,
    ForeignKey,
    Index,
    LargeBinary,
    MetaData,
    PrimaryKeyConstraint,
    String,
    Text,
    UniqueConstraint,
)
from sqlalchemy.orm import DeclarativeBase, Mapped, mapped_column

from service.store.columns import Moment

ID = String(48)  # a word, an underscore, 32 hex digits
DIGEST = String(64)  # SHA-256 in hex digits
WORD = String(40)

Facts = dict[str, Any]


class Row(DeclarativeBase):
    """A row of any table."""

    # Constraints are named by rule, so that migrations can name them too.
    metadata = MetaData(
        naming_convention={
            "ix": "ix_%(column_0_N_label)s",
            "uq": "uq_%(table_name)s_%(column_0_N_name)s",
            "fk": "fk_%(table_name)s_%(column_0_name)s_%(referred_table_name)s",
            "pk": "pk_%(table_name)s",
        }
    )
    type_annotation_map = {datetime: Moment(), Facts: JSON()}  # noqa: RUF012 -- read by the base class, as it asks


class Counter(Row):
    """A number that is counted up in the transaction that uses it, so that what it numbers has no gaps."""

    __tablename__ = "counters"
    name: Mapped[str] = mapped_column(WORD, primary_key=True)
    value: Mapped[int] = mapped_column(BigInteger)


class Owner(Row):
    """Whose orders and files these are: the shop itself, or one integrator."""

    __tablename__ = "owners"
    id: Mapped[str] = mapped_column(ID, primary_key=True)
    title: Mapped[str] = mapped_column(String(200))
    is_shop: Mapped[bool]  # the shop sees the orders of all owners
    created_at: Mapped[datetime]


class Key(Row):
    """A key of the API. The secret itself is kept nowhere."""

    __tablename__ = "keys"
    id: Mapped[str] = mapped_column(ID, primary_key=True)
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"))
    title: Mapped[str] = mapped_column(String(200))
    secret_sha256: Mapped[str] = mapped_column(DIGEST, unique=True)
    scopes: Mapped[str] = mapped_column(String(200))  # words of service.access.scopes, with spaces between
    is_test: Mapped[bool]  # its orders never reach the shop
    created_at: Mapped[datetime]
    last_used_at: Mapped[datetime | None]
    revoked_at: Mapped[datetime | None]


class LoginLink(Row):
    """A link that signs one browser in, once."""

    __tablename__ = "login_links"
    secret_sha256: Mapped[str] = mapped_column(DIGEST, primary_key=True)
    key_id: Mapped[str] = mapped_column(ForeignKey("keys.id"))
    expires_at: Mapped[datetime]
    used_at: Mapped[datetime | None]


class BrowserSession(Row):
    """A browser that is signed in as a key."""

    __tablename__ = "browser_sessions"
    secret_sha256: Mapped[str] = mapped_column(DIGEST, primary_key=True)
    key_id: Mapped[str] = mapped_column(ForeignKey("keys.id"))
    csrf_token: Mapped[str] = mapped_column(DIGEST)
    created_at: Mapped[datetime]
    expires_at: Mapped[datetime]


class StoredDocument(Row):
    """One revision of a movement or a cutter; the one in force is the highest. Each owner has ids of its own."""

    __tablename__ = "stored_documents"
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"))  # the shop's are everybody's to use
    kind: Mapped[str] = mapped_column(String(16))  # "movement" or "cutter"
    id: Mapped[str] = mapped_column(String(64))  # as the document says
    revision: Mapped[int]
    body: Mapped[str] = mapped_column(Text)  # as it was written, with what it says of the worth of numbers
    digest: Mapped[str] = mapped_column(DIGEST)
    key_id: Mapped[str | None] = mapped_column(ForeignKey("keys.id"))
    created_at: Mapped[datetime]
    withdrawn_at: Mapped[datetime | None]  # not offered any more; orders that name it keep it
    __table_args__ = (PrimaryKeyConstraint("owner_id", "kind", "id", "revision"),)


class StoredFile(Row):
    """A file in the store of files, under its digest."""

    __tablename__ = "stored_files"
    digest: Mapped[str] = mapped_column(DIGEST, primary_key=True)
    byte_count: Mapped[int] = mapped_column(BigInteger)
    created_at: Mapped[datetime]


class FileHold(Row):
    """One reason to keep a file: an owner holds it for something. A file without holds is swept away."""

    __tablename__ = "file_holds"
    digest: Mapped[str] = mapped_column(ForeignKey("stored_files.digest"), index=True)
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"), index=True)
    holder_id: Mapped[str] = mapped_column(ID, index=True)  # of the order, the quote or the run
    what: Mapped[str] = mapped_column(WORD)  # "tune", "document" or "result"
    __table_args__ = (PrimaryKeyConstraint("digest", "holder_id", "what"),)


class Quote(Row):
    """A price for an order's input, good until a moment."""

    __tablename__ = "quotes"
    id: Mapped[str] = mapped_column(ID, primary_key=True)
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"), index=True)
    key_id: Mapped[str] = mapped_column(ForeignKey("keys.id"))
    inputs_digest: Mapped[str] = mapped_column(DIGEST)
    quantity: Mapped[int]
    total: Mapped[str] = mapped_column(String(40))  # a decimal number as text
    currency: Mapped[str] = mapped_column(String(3))  # ISO 4217
    told: Mapped[Facts]  # the lines of the price, and what was not stated
    created_at: Mapped[datetime]
    valid_until: Mapped[datetime]


class Order(Row):
    """An order: the truth about it. Its files stand in its plans, its story in its events."""

    __tablename__ = "orders"
    id: Mapped[str] = mapped_column(ID, primary_key=True)
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"))
    key_id: Mapped[str | None] = mapped_column(ForeignKey("keys.id"))
    is_test: Mapped[bool]
    state: Mapped[str] = mapped_column(WORD)  # a word of service.orders.states
    version: Mapped[int]  # counted up by every change: the entity tag
    reference: Mapped[str | None] = mapped_column(String(200))
    quantity: Mapped[int]
    tune_digest: Mapped[str] = mapped_column(DIGEST)
    tune_name: Mapped[str | None] = mapped_column(String(200))
    movement_id: Mapped[str] = mapped_column(String(64))
    movement_revision: Mapped[int]
    movement_digest: Mapped[str] = mapped_column(DIGEST)  # of the document, held in the store of files
    cutter_id: Mapped[str] = mapped_column(String(64))
    cutter_digest: Mapped[str] = mapped_column(DIGEST)
    settings_digest: Mapped[str] = mapped_column(DIGEST)
    most_lost_share: Mapped[float]  # more weight lost than this needs a person
    release_alone: Mapped[bool]  # released without a person where nothing stands
    quote_id: Mapped[str | None] = mapped_column(ForeignKey("quotes.id"))
    repeat_of: Mapped[str | None] = mapped_column(ForeignKey("orders.id"))
    run_id: Mapped[str | None] = mapped_column(ForeignKey("runs.id"), index=True)
    hook_id: Mapped[str | None] = mapped_column(ForeignKey("hooks.id"))
    plan_revision: Mapped[int]  # the plan in force; 0 before the first
    reason: Mapped[str | None] = mapped_column(String(500))  # why it failed, was cancelled or needs a person
    despite_findings: Mapped[str | None] = mapped_column(String(500))  # why it is planned and released all the same
    despite_by: Mapped[str | None] = mapped_column(String(200))  # who said so
    created_at: Mapped[datetime]
    updated_at: Mapped[datetime]
    finished_at: Mapped[datetime | None]
    erased_at: Mapped[datetime | None]
    # What a worker holds while it plans.
    attempt: Mapped[int]  # counted up by every take, and part of every guard
    taken_by: Mapped[str | None] = mapped_column(String(100))
    lease_until: Mapped[datetime | None]
    killed: Mapped[int]  # times that a worker took it and never came back
    __table_args__ = (
        Index("ix_orders_work", "state", "lease_until"),
        Index("ix_orders_owner_updated", "owner_id", "updated_at", "id"),
        Index("ix_orders_updated", "updated_at", "id"),
        Index("ix_orders_owner_reference", "owner_id", "reference"),
    )


class Plan(Row):
    """What was made for an order, once and for all: a released plan never changes."""

    __tablename__ = "plans"
    order_id: Mapped[str] = mapped_column(ForeignKey("orders.id"))
    revision: Mapped[int]  # from 1
    engine_version: Mapped[str] = mapped_column(WORD)
    inputs: Mapped[Facts]  # the digests of tune, movement, cutter and settings, and the movement's revision
    told: Mapped[Facts]  # what an answer tells of it: discs, findings by level, worth, price
    good_to_cut: Mapped[bool]
    lost_share: Mapped[float]
    made_at: Mapped[datetime]
    released_at: Mapped[datetime | None]
    released_by: Mapped[str | None] = mapped_column(String(200))
    release_reason: Mapped[str | None] = mapped_column(String(500))
    superseded_at: Mapped[datetime | None]
    __table_args__ = (PrimaryKeyConstraint("order_id", "revision"),)


class PlanFile(Row):
    """One file of a plan; its bytes stand in the store of files."""

    __tablename__ = "plan_files"
    order_id: Mapped[str] = mapped_column(ID)
    revision: Mapped[int]
    disc: Mapped[int]  # from 1
    name: Mapped[str] = mapped_column(String(60))
    digest: Mapped[str] = mapped_column(ForeignKey("stored_files.digest"), index=True)
    byte_count: Mapped[int] = mapped_column(BigInteger)
    media_type: Mapped[str] = mapped_column(String(100))
    saved_as: Mapped[str] = mapped_column(String(300))  # the name of the download
    is_for_cutting: Mapped[bool]  # given only after release
    __table_args__ = (PrimaryKeyConstraint("order_id", "revision", "disc", "name"),)


class Event(Row):
    """One thing that happened to an order. Never changed; `seq` has no gaps and rises as events are committed."""

    __tablename__ = "events"
    seq: Mapped[int] = mapped_column(BigInteger, primary_key=True, autoincrement=False)
    order_id: Mapped[str] = mapped_column(ForeignKey("orders.id"), index=True)
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"), index=True)
    type: Mapped[str] = mapped_column(WORD)
    at: Mapped[datetime]
    by: Mapped[str | None] = mapped_column(String(200))
    data: Mapped[Facts]


class KeptAnswer(Row):
    """The answer to a request with an Idempotency-Key; `status` is null while the request is still running."""

    __tablename__ = "kept_answers"
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"))
    operation: Mapped[str] = mapped_column(String(200))  # method and path
    key: Mapped[str] = mapped_column(String(255))
    digest: Mapped[str] = mapped_column(DIGEST)  # of the digests of the request's parts
    token: Mapped[str] = mapped_column(ID)  # of the request that is answering; guards against a late one
    status: Mapped[int | None]
    headers: Mapped[Facts | None]
    body: Mapped[bytes | None] = mapped_column(LargeBinary)  # empty where what it told of was deleted
    about: Mapped[str | None] = mapped_column(String(100), index=True)  # the id of what it tells of
    started_at: Mapped[datetime]
    lease_until: Mapped[datetime]  # after it a request that never ended may be made again
    expires_at: Mapped[datetime] = mapped_column(index=True)
    __table_args__ = (PrimaryKeyConstraint("owner_id", "operation", "key"),)


class Run(Row):
    """Many orders asked for at once."""

    __tablename__ = "runs"
    id: Mapped[str] = mapped_column(ID, primary_key=True)
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"), index=True)
    key_id: Mapped[str] = mapped_column(ForeignKey("keys.id"))
    is_test: Mapped[bool]
    reference: Mapped[str | None] = mapped_column(String(200))
    archive_digest: Mapped[str] = mapped_column(DIGEST)  # of the tunes, held in the store of files
    asked: Mapped[Facts]  # what all its orders have in common
    order_count: Mapped[int]
    opened_at: Mapped[datetime | None]  # when every pair had become an order or was refused
    created_at: Mapped[datetime]


class RunItem(Row):
    """One pair of a run: a tune for a movement, and the order it became, or why it became none."""

    __tablename__ = "run_items"
    run_id: Mapped[str] = mapped_column(ForeignKey("runs.id"))
    number: Mapped[int]  # from 1, in the order asked
    tune_name: Mapped[str] = mapped_column(String(200))
    movement_id: Mapped[str] = mapped_column(String(64))
    movement_revision: Mapped[int | None]
    reference: Mapped[str | None] = mapped_column(String(200))
    order_id: Mapped[str | None] = mapped_column(ForeignKey("orders.id"))
    refused: Mapped[str | None] = mapped_column(String(500))
    __table_args__ = (PrimaryKeyConstraint("run_id", "number"),)


class Hook(Row):
    """An address that is told what happens: to all orders of its owner, or to the orders that name it."""

    __tablename__ = "hooks"
    id: Mapped[str] = mapped_column(ID, primary_key=True)
    owner_id: Mapped[str] = mapped_column(ForeignKey("owners.id"), index=True)
    url: Mapped[str] = mapped_column(String(2000))
    types: Mapped[str] = mapped_column(Text)  # types of events, with spaces between; "" for all
    for_all_orders: Mapped[bool]
    is_test: Mapped[bool]  # made with a test key: told of test orders alone, as the others are of none
    secrets: Mapped[Facts]  # {"current": "whsec_…", "before": [{"secret": "whsec_…", "until": µs since 1970}]}
    created_at: Mapped[datetime]
    disabled_at: Mapped[datetime | None]
    disabled_because: Mapped[str | None] = mapped_column(String(200))
    quiet_until: Mapped[datetime | None]  # it asked for fewer messages; none is sent before
    deleted_at: Mapped[datetime | None]  # kept without address and secret, since orders and deliveries name it


class Delivery(Row):
    """One message to one hook, frozen when the event was written, tried until it is taken or given up."""

    __tablename__ = "deliveries"
    id: Mapped[str] = mapped_column(ID, primary_key=True)  # the webhook-id: the same on every try
    hook_id: Mapped[str] = mapped_column(ForeignKey("hooks.id"))
    event_seq: Mapped[int | None] = mapped_column(ForeignKey("events.seq"), index=True)  # null for a test delivery
    body: Mapped[str] = mapped_column(Text)
    state: Mapped[str] = mapped_column(WORD)  # "waiting", "delivered" or "failed"
    tries: Mapped[int]
    next_try_at: Mapped[datetime | None]  # while one is sending: the end of its lease
    lease_until: Mapped[datetime | None]  # set by every take, and part of every guard
    last_status: Mapped[int | None]
    last_error: Mapped[str | None] = mapped_column(String(300))
    created_at: Mapped[datetime]
    finished_at: Mapped[datetime | None]
    __table_args__ = (
        UniqueConstraint("hook_id", "event_seq"),
        Index("ix_deliveries_work", "state", "next_try_at"),
        Index("ix_deliveries_due", "hook_id", "state", "next_try_at"),  # the first due of each hook, at once
        Index("ix_deliveries_hook", "hook_id", "id"),
    )


class Erasure(Row):
    """An order whose personal data was deleted; also written to a log beside the database, for restores."""

    __tablename__ = "erasures"
    order_id: Mapped[str] = mapped_column(ID, primary_key=True)
    at: Mapped[datetime]
