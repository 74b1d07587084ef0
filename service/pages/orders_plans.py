"""The plans of an order as a person reads them: who asked, what changed since the one before, what was said of each."""

import json
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

from service.orders.states import EventType
from service.orders.views import EventView, OrderView, PlanView
from service.pages.disc_told import LEVELS, counted
from service.pages.orders_told import Moment, moment, percent
from service.pages.texts import text_of
from service.parts import Parts

MOST_CHANGES = 12  # of settings that are told of one plan; the rest is counted
MOST_SHOWN = 60  # characters of a value

Settings = Mapping[str, Any]  # a settings document, as it was asked for


@dataclass(frozen=True, slots=True, kw_only=True)
class PlanTold:
    """A plan of the order.

    Attributes:
        revision: Its number.
        made: When.
        standing: Whether it is in force, in words.
        is_superseded: Whether it must not be cut any more.
        asked: Why it was made and by whom, as far as that is known.
        plays: What it plays, loses and what was found.
        changes: What is different from the plan before; () for the first, and where nothing is.
        lines: What was said and decided about it, in the order it happened.
        discs: The numbers of its discs; () once its files are deleted.
    """

    revision: int
    made: Moment
    standing: str
    is_superseded: bool
    asked: str
    plays: str
    changes: tuple[str, ...]
    lines: tuple[str, ...]
    discs: tuple[int, ...]


def plans_told(
    parts: Parts, order: OrderView, plans: Sequence[PlanView], events: Sequence[EventView]
) -> tuple[PlanTold, ...]:
    """The plans of an order, in the order given.

    Args:
        parts: Read for the settings that plans were made with.
        order: The order.
        plans: Its plans, the newest first, none between them left out.
        events: What happened to the order, the oldest first.

    Raises:
        StoreError: A file cannot be read.
    """
    before = {later.revision: earlier for later, earlier in pairwise(plans)}
    settings = {plan.revision: settings_of(parts, plan) for plan in plans}
    told = []
    for plan in plans:
        earlier = before.get(plan.revision)
        changes = () if earlier is None else changes_of(earlier, plan)
        if earlier is not None and earlier.files and plan.files:
            changes = (*changes, *settings_changes(settings[earlier.revision], settings[plan.revision]))
        told.append(_plan(order, plan, events, changes))
    return tuple(told)


def settings_of(parts: Parts, plan: PlanView) -> Settings:
    """The settings a plan was made with; empty where there are none any more.

    Raises:
        StoreError: Their document cannot be read.
    """
    digest = plan.inputs.get("settings_sha256") if plan.files else None
    return json.loads(parts.files.read(digest)) if digest else {}


def changes_of(earlier: PlanView, plan: PlanView) -> tuple[str, ...]:
    """What is different in a plan from an earlier one, but for its settings."""
    if not earlier.files or not plan.files:
        return ()
    pairs = {
        "movement": tuple(f"{one.inputs['movement']['revision']}" for one in (earlier, plan)),
        "engine": (earlier.engine_version, plan.engine_version),
        "discs": tuple(f"{len(one.told['discs'])}" for one in (earlier, plan)),
        "kept": tuple(f"{_sum(one, 'kept_count')}" for one in (earlier, plan)),
        "lost": (percent(earlier.lost_share), percent(plan.lost_share)),
        "found": (_found(earlier), _found(plan)),
        "price": (_price(earlier), _price(plan)),
    }
    return tuple(
        text_of(f"orders.changed_{name}", was=was, now=now) for name, (was, now) in pairs.items() if was != now
    )


def settings_changes(was: Settings, now: Settings) -> tuple[str, ...]:
    """The settings that are different, each with what it was and what it is now."""
    before, after = dict(_flat(was)), dict(_flat(now))
    changed = [name for name in dict.fromkeys((*before, *after)) if before.get(name) != after.get(name)]
    lines = [
        text_of("orders.changed_setting", name=name, was=_said(before, name), now=_said(after, name))
        for name in changed[:MOST_CHANGES]
    ]
    if len(changed) > MOST_CHANGES:
        lines.append(counted("orders.changed_more", len(changed) - MOST_CHANGES))
    return tuple(lines)


def _plan(order: OrderView, plan: PlanView, events: Sequence[EventView], changes: tuple[str, ...]) -> PlanTold:
    is_superseded = plan.superseded_at is not None
    standing = "superseded" if is_superseded else "in_force" if plan.revision == order.plan_revision else "replaced"
    return PlanTold(
        revision=plan.revision,
        made=moment(plan.made_at),
        standing=text_of(f"orders.plan_{standing}"),
        is_superseded=is_superseded,
        asked=_asked(plan, events),
        plays=text_of("orders.plan_plays", kept=_sum(plan, "kept_count"), asked=_sum(plan, "asked_count"))
        + " "
        + text_of("orders.plan_lost", lost=percent(plan.lost_share))
        + " "
        + text_of("orders.plan_found", found=_found(plan))
        if plan.told["discs"]
        else "",
        changes=changes,
        lines=tuple(_lines(plan, events)),
        discs=tuple(disc["number"] for disc in plan.told["discs"]) if plan.files else (),
    )


def _asked(plan: PlanView, events: Sequence[EventView]) -> str:
    """Why a plan was made. Who asked is known of the first, and of one that took a released one's place."""
    if plan.inputs.get("repeat_of"):
        return text_of("orders.asked_repeat")
    if plan.inputs.get("despite_findings"):
        return text_of("orders.asked_despite")
    if plan.revision == 1:
        kind, begins, by = "placed", EventType.RECEIVED, None
    else:
        kind, begins, by = "anew", EventType.SUPERSEDED, plan.revision - 1
    for event in events:
        if event.type == begins and event.by and (by is None or event.data.get("revision") == by):
            return text_of(f"orders.asked_{kind}_by", by=event.by)
    return text_of(f"orders.asked_{kind}")


def _lines(plan: PlanView, events: Sequence[EventView]) -> Iterator[str]:
    """What the customer said of a plan, and what was decided about it."""
    for event in events:
        if event.type in (EventType.ACCEPTED, EventType.DECLINED) and event.data.get("revision") == plan.revision:
            kind = "accepted" if event.type == EventType.ACCEPTED else "declined"
            by = event.by or text_of("orders.by_nobody")
            yield text_of(f"orders.plan_{kind}", by=by, at=moment(event.at).for_people)
    if plan.released_at is not None:
        by = plan.released_by or text_of("orders.by_nobody")
        yield text_of("orders.plan_released", by=by, at=moment(plan.released_at).for_people)
    if plan.release_reason:
        yield text_of("orders.plan_reason", reason=plan.release_reason)
    if plan.superseded_at is not None:
        yield text_of("orders.plan_superseded_at", at=moment(plan.superseded_at).for_people)


def _sum(plan: PlanView, name: str) -> int:
    return sum(disc[name] for disc in plan.told["discs"])


def _found(plan: PlanView) -> str:
    counts = {level: sum(disc["findings"].get(level, 0) for disc in plan.told["discs"]) for level in LEVELS}
    words = [counted(f"orders.found_{level}", count) for level, count in counts.items() if count]
    return ", ".join(words) or text_of("orders.found_nothing")


def _price(plan: PlanView) -> str:
    prices = [disc["price"] for disc in plan.told["discs"]]
    told = [text_of("orders.disc_price", **price) for price in prices if price is not None]
    return " + ".join(told) or text_of("orders.price_none")


def _flat(value: Any, name: str = "") -> Iterator[tuple[str, Any]]:
    """The single values of a settings document by their place; a list of many things is one value."""
    if not isinstance(value, Mapping):
        yield name, value
        return
    for inner, one in value.items():
        yield from _flat(one, f"{name}.{inner}" if name else inner)


def _said(values: Mapping[str, Any], name: str) -> str:
    if name not in values:
        return text_of("orders.setting_none")
    value = values[name]
    if isinstance(value, list) and any(isinstance(one, Mapping) for one in value):
        return counted("orders.setting_count", len(value))
    words = json.dumps(value, ensure_ascii=False)
    return words if len(words) <= MOST_SHOWN else f"{words[:MOST_SHOWN]}…"
