"""Orders, plans and events as plain values of an answer."""

from collections.abc import Sequence
from typing import Any

from service.api.answers import json_bytes
from service.media_types import JSON_MEDIA_TYPE
from service.moments import moment_text
from service.orders.kept_answers import Given
from service.orders.states import State
from service.orders.views import EventView, OrderView, PlanView


def order_address(order_id: str) -> str:
    """Where an order is."""
    return f"/v1/orders/{order_id}"


def file_address(order_id: str, revision: int, disc: int, name: str) -> str:
    """Where a file of a plan is: for ever, since a plan never changes."""
    return f"/v1/orders/{order_id}/plans/{revision}/files/{disc}/{name}"


def order_tag(order: OrderView) -> str:
    """The entity tag of an order: its version."""
    return f"{order.version}"


def order_given(order: OrderView, status: int) -> Given:
    """An answer that tells an order."""
    headers = {
        "Content-Type": JSON_MEDIA_TYPE,
        "Cache-Control": "no-cache",
        "ETag": f'"{order_tag(order)}"',
        "Content-Location": order_address(order.id),
    }
    if status in (201, 202):
        headers["Location"] = order_address(order.id)
    return Given(status=status, headers=headers, body=json_bytes(order_told(order)))


def order_told(order: OrderView) -> dict[str, Any]:
    """An order as plain values."""
    address = order_address(order.id)
    return {
        "id": order.id,
        "state": order.state,
        "reason": order.reason,
        "reference": order.reference,
        "quantity": order.quantity,
        "is_test": order.is_test,
        "movement": {"id": order.movement_id, "revision": order.movement_revision},
        "cutter": {"id": order.cutter_id},
        "tune": {"name": order.tune_name, "sha256": order.tune_digest},
        "most_lost_share": order.most_lost_share,
        "release_alone": order.release_alone,
        "quote": order.quote_id,
        "repeat_of": order.repeat_of,
        "run": order.run_id,
        "hook": order.hook_id,
        "created_at": moment_text(order.created_at),
        "updated_at": moment_text(order.updated_at),
        "finished_at": moment_text(order.finished_at) if order.finished_at else None,
        "erased_at": moment_text(order.erased_at) if order.erased_at else None,
        "plan": plan_told(order.id, order.plan) if order.plan else None,
        "superseded_revisions": list(order.superseded_revisions),
        "links": {
            "self": address,
            "events": f"{address}/events",
            **{what: f"{address}/{what}" for what in _WAYS_ON.get(order.state, ())},
        },
    }


# What may be done next with an order, by its state; each is a path below the order's.
_WAYS_ON: dict[str, tuple[str, ...]] = {
    State.RECEIVED: ("cancel",),
    State.PLANNING: ("cancel",),
    State.ATTENTION: ("release", "replan", "cancel", "proof-links"),
    State.READY: ("release", "replan", "cancel", "proof-links"),
    State.RELEASED: ("replan", "reports"),
    State.FAILED: ("replan", "cancel"),
}


def plan_told(order_id: str, plan: PlanView) -> dict[str, Any]:
    """A plan as plain values; a file that is kept back has no address."""
    released = plan.released_at is not None
    return {
        "revision": plan.revision,
        "tag": plan.tag,
        "engine_version": plan.engine_version,
        "inputs": plan.inputs,
        "title": plan.told["title"],
        "discs": plan.told["discs"],
        "good_to_cut": plan.good_to_cut,
        "lost_share": plan.lost_share,
        "made_at": moment_text(plan.made_at),
        "released_at": moment_text(plan.released_at) if plan.released_at else None,
        "released_by": plan.released_by,
        "despite_findings": plan.release_reason,
        "superseded_at": moment_text(plan.superseded_at) if plan.superseded_at else None,
        "files": [
            {
                "disc": file.disc,
                "name": file.name,
                "sha256": file.sha256,
                "byte_count": file.byte_count,
                "media_type": file.media_type,
                "saved_as": file.saved_as,
                "for_cutting": file.is_for_cutting,
                "href": (
                    file_address(order_id, plan.revision, file.disc, file.name)
                    if released or not file.is_for_cutting
                    else None
                ),
            }
            for file in plan.files
        ],
    }


def event_told(event: EventView) -> dict[str, Any]:
    """An event as plain values."""
    return {
        "seq": event.seq,
        "order": event.order_id,
        "type": event.type,
        "at": moment_text(event.at),
        "by": event.by,
        "data": event.data,
    }


def events_told(events: Sequence[EventView], after: int) -> dict[str, Any]:
    """Events as plain values, with the number to ask on after."""
    return {"events": [event_told(event) for event in events], "last": events[-1].seq if events else after}
