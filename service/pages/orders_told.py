"""What the pages of orders say in words: states and what comes next, facts, plans, what happened."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

from service.access.asker import Asker
from service.access.scopes import Scope
from service.orders.states import FINISHED, EventType, State
from service.orders.views import EventView, OrderView
from service.pages.disc_told import counted
from service.pages.texts import text_of, texts

# How a state looks: what waits for a person stands out.
LOOKS = {
    State.ATTENTION: "warn",
    State.READY: "good",
    State.RELEASED: "good",
    State.FAILED: "bad",
    State.CANCELLED: "quiet",
}

# Told by a person's own name; who did all else is told by the title of their key.
BY_PEOPLE = frozenset({EventType.RELEASED, EventType.ACCEPTED, EventType.DECLINED})


@dataclass(frozen=True, slots=True, kw_only=True)
class Moment:
    """A moment: for programs, and for people in UTC."""

    for_programs: str
    for_people: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Listed:
    """An order in the list: its address, what it is called, its state in words and how that looks."""

    address: str
    name: str
    tune: str
    state: str
    look: str
    movement: str
    updated: Moment
    is_test: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class EventTold:
    """What happened: when, in words, by whom, and what was said with it."""

    seq: int
    at: Moment
    what: str
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Decisions:
    """What the page offers to whom asks; `missing` says why something that might be looked for is not offered."""

    release: bool
    reason_wanted: bool
    replan: bool
    cancel: bool
    recall: bool
    link: bool
    report: bool
    repeat: bool
    erase: bool
    missing: tuple[str, ...]


def moment(at: datetime) -> Moment:
    """A moment in words, in UTC to the minute."""
    utc = at.astimezone(UTC)
    return Moment(for_programs=utc.isoformat(timespec="seconds"), for_people=utc.strftime("%Y-%m-%d %H:%M UTC"))


def state_words(state: str) -> str:
    """A state in a few words."""
    return text_of(f"orders.state_{state}")


def name_of(order: OrderView) -> str:
    """What an order is called: by its reference, else its tune, else the title its plan found in it, else its id."""
    return order.reference or order.tune_name or title_of(order) or order.id


def title_of(order: OrderView) -> str:
    """The tune's title as its plan found it; "" before the first plan."""
    return "" if order.plan is None else str(order.plan.told.get("title") or "")


def listed(order: OrderView) -> Listed:
    """An order as the list shows it."""
    return Listed(
        address=f"/orders/{order.id}",
        name=name_of(order),
        tune=order.tune_name or title_of(order) or text_of("orders.tune_unnamed"),
        state=state_words(order.state),
        look=LOOKS.get(State(order.state), ""),
        movement=order.movement_id,
        updated=moment(order.updated_at),
        is_test=order.is_test,
    )


def next_of(order: OrderView) -> str:
    """What happens next with an order, and who has to do something."""
    if order.erased_at is not None:
        return text_of("orders.next_erased")
    if order.state == State.RECEIVED and order.plan is not None:
        return text_of("orders.next_received_anew")
    return text_of(f"orders.next_{order.state}")


def decisions_of(order: OrderView, asker: Asker) -> Decisions:
    """What may be decided about an order by who asks."""
    state = State(order.state)
    is_there = order.erased_at is None
    waits = is_there and state in (State.READY, State.ATTENTION)
    orders, releases = Scope.ORDER in asker.scopes, Scope.RELEASE in asker.scopes
    is_released = is_there and state is State.RELEASED
    may_be_planned = waits or is_released or state is State.FAILED
    has_files = order.plan is not None and bool(order.plan.files)
    return Decisions(
        release=waits and releases,
        reason_wanted=state is State.ATTENTION,
        replan=is_there and orders and bool(order.tune_digest) and may_be_planned,
        cancel=is_there and orders and (state is not State.CANCELLED) and not is_released,
        recall=is_released and orders and asker.sees_all_owners,
        link=waits and orders,
        report=is_released and releases,
        repeat=is_released and orders and has_files and (asker.is_test or not order.is_test),
        erase=is_there and orders and state in FINISHED,
        missing=tuple(text_of(f"orders.missing_{name}") for name in _missing(order, asker)),
    )


def _missing(order: OrderView, asker: Asker) -> Iterator[str]:
    """The names of the texts that say why something is not offered."""
    if order.erased_at is not None:
        return
    state, orders = State(order.state), Scope.ORDER in asker.scopes
    waits, is_released = state in (State.READY, State.ATTENTION), state is State.RELEASED
    if (waits or is_released) and Scope.RELEASE not in asker.scopes:
        yield "release"
    if not orders and state is not State.CANCELLED:
        yield "order"
    if orders and is_released and not asker.sees_all_owners:
        yield "recall"
    if orders and not order.tune_digest and (waits or is_released or state is State.FAILED):
        yield "tune"
    if orders and is_released and order.plan is not None and not order.plan.files:
        yield "files"


def facts_of(order: OrderView) -> tuple[tuple[str, str], ...]:
    """The facts of an order: each a name and a value."""
    facts = {
        "reference": order.reference,
        "tune": order.tune_name or title_of(order),
        "movement": text_of("orders.fact_movement_value", id=order.movement_id, revision=order.movement_revision),
        "cutter": order.cutter_id,
        "quantity": counted("orders.fact_quantity_value", order.quantity),
        "most_lost": text_of("orders.fact_most_lost_value", share=percent(order.most_lost_share)),
        "release": text_of("orders.fact_release_alone") if order.release_alone else None,
        "repeat": order.repeat_of,
        "run": order.run_id,
        "hook": order.hook_id,
        "quote": order.quote_id,
        "created": moment(order.created_at).for_people,
        "finished": None if order.finished_at is None else moment(order.finished_at).for_people,
        "erased": None if order.erased_at is None else moment(order.erased_at).for_people,
        "id": order.id,
    }
    return tuple((text_of(f"orders.fact_{name}"), value) for name, value in facts.items() if value)


def event_told(event: EventView) -> EventTold:
    """An event in words: one of a type that has none is told by its type."""
    key = f"orders.event_{event.type.removeprefix('order.')}"
    what = text_of(key) if key in texts() else event.type
    said_by = "orders.event_by" if event.type in BY_PEOPLE else "orders.event_by_key"
    by = text_of(said_by, by=event.by) if event.by else ""
    return EventTold(seq=event.seq, at=moment(event.at), what=what + by, lines=tuple(_event_lines(event.data)))


def percent(share: float) -> str:
    """A share in hundredths."""
    return f"{100 * share:.1f} %"


def _event_lines(data: Mapping[str, Any]) -> list[str]:
    """What an event tells beside; what is not known is left to programs."""
    lines = []
    if data.get("revision") is not None:
        lines.append(text_of("orders.event_revision", revision=data["revision"]))
    for name in ("reason", "despite_findings", "note"):
        if data.get(name):
            lines.append(text_of(f"orders.event_{name}", words=data[name]))
    if data.get("recalled"):
        lines.append(text_of("orders.event_recalled"))
    if data.get("repeat_of"):
        lines.append(text_of("orders.event_repeat_of", id=data["repeat_of"]))
    if data.get("count") is not None:
        lines.append(counted("orders.event_count", data["count"]))
    measures = data.get("measures") or {}
    if measures:
        lines.append("; ".join(f"{name} {value:g}" for name, value in measures.items()))
    return lines
