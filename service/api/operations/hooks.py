"""Hooks and deliveries: who is told what happens, and what came of it."""

from service.api.describing import Answer, Body, Example, Operation
from service.api.models.hooks import (
    DeliveriesAnswer,
    DeliveriesQuery,
    DeliveryAnswer,
    EventTypesAnswer,
    HookAnswer,
    HookBody,
    HookPatch,
    HooksAnswer,
    NewHookAnswer,
    SecretBody,
)
from service.api.operations.common import CSRF_TOKEN, DONE, ETAG, IF_NONE_MATCH, LOCATION, NEXT, NOT_MODIFIED, told
from service.media_types import JSON_MEDIA_TYPE

TAG = "hooks"
URL = "https://shop.example/told"
ACCEPTED = told(DeliveryAnswer, "The message, which is sent in the next seconds.", LOCATION, status=202)


def _of_a_hook(name: str, summary: str, answer: Answer, *, writes: bool, problems: tuple[str, ...] = ()) -> Operation:
    return Operation(
        id=name,
        tag=TAG,
        summary=summary,
        headers=(CSRF_TOKEN,) if writes else (),
        answers=(answer,),
        problems=("hook-unknown", *problems),
        examples=(Example(status=answer.status, given="a hook"),),
    )


LIST = Operation(
    id="list_hooks",
    tag=TAG,
    summary="The hooks there are",
    answers=(told(HooksAnswer, "Every hook of the owner of the key."),),
    examples=(Example(status=200),),
)
MAKE = Operation(
    id="make_hook",
    tag=TAG,
    summary="Make a hook",
    description="Messages are signed after Standard Webhooks 1.0.0 with the secret of the answer.",
    headers=(CSRF_TOKEN,),
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=HookBody),),
    answers=(told(NewHookAnswer, "The hook, and its secret, told this once.", LOCATION, status=201),),
    problems=("hook-exists", "too-many-hooks"),
    examples=(
        Example(
            status=201,
            media_type=JSON_MEDIA_TYPE,
            body={"url": URL, "types": ["order.ready", "order.attention", "order.failed"]},
        ),
    ),
)
TELL = _of_a_hook("tell_hook", "A hook", told(HookAnswer, "The hook."), writes=False)
CHANGE = Operation(
    id="change_hook",
    tag=TAG,
    summary="Change a hook",
    headers=(CSRF_TOKEN,),
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=HookPatch),),
    answers=(told(HookAnswer, "The hook as it is now."),),
    problems=("hook-unknown", "hook-exists"),
    examples=(
        Example(status=200, given="a hook", media_type=JSON_MEDIA_TYPE, body={"types": None, "for_all_orders": False}),
    ),
)
DELETE = _of_a_hook("delete_hook", "Delete a hook", DONE, writes=True)
SECRET = Operation(
    id="replace_hook_secret",
    tag=TAG,
    summary="Give a hook a new secret",
    headers=(CSRF_TOKEN,),
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=SecretBody),),
    is_body_required=False,
    answers=(told(NewHookAnswer, "The hook, and its new secret, told this once."),),
    problems=("hook-unknown",),
    examples=(Example(status=200, given="a hook", media_type=JSON_MEDIA_TYPE, body={"old_valid_hours": 24}),),
)
TEST = _of_a_hook("test_hook", "Send a hook a test", ACCEPTED, writes=True, problems=("hook-off",))
ENABLE = _of_a_hook("enable_hook", "Turn a hook on again", told(HookAnswer, "The hook as it is now."), writes=True)
DELIVERIES = Operation(
    id="list_deliveries",
    tag=TAG,
    summary="Messages to a hook, the newest first",
    query=DeliveriesQuery,
    answers=(told(DeliveriesAnswer, "A page of messages.", NEXT),),
    problems=("hook-unknown",),
    examples=(Example(status=200, given="a hook", query={"state": "failed"}),),
)
DELIVERY = Operation(
    id="tell_delivery",
    tag=TAG,
    summary="A message, and what came of it",
    answers=(told(DeliveryAnswer, "The message."),),
    problems=("delivery-unknown",),
    examples=(Example(status=200, given="a delivery"),),
)
REDELIVER = Operation(
    id="redeliver",
    tag=TAG,
    summary="Send a message again",
    headers=(CSRF_TOKEN,),
    answers=(ACCEPTED,),
    problems=("delivery-unknown", "hook-unknown", "hook-off"),
    examples=(Example(status=202, given="a delivery"),),
)
TYPES = Operation(
    id="list_event_types",
    tag=TAG,
    summary="The types of messages",
    headers=(IF_NONE_MATCH,),
    answers=(told(EventTypesAnswer, "Every type, with what it means.", ETAG), NOT_MODIFIED),
    examples=(Example(status=200),),
)
