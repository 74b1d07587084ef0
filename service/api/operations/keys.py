"""Keys, and how browsers are signed in as one."""

from collections.abc import Mapping
from typing import Any

from service.api.describing import Answer, Body, Example, HeaderField, Operation
from service.api.models.keys import KeyAnswer, KeyBody, KeysAnswer, KeysQuery, NewKeyAnswer, OwnKeyAnswer
from service.api.operations.common import CSRF_TOKEN, DONE, LOCATION, NEXT, told
from service.media_types import JSON_MEDIA_TYPE

TAG, SIGN_IN_TAG = "keys", "signing in"
FORM_OF_FIELDS = "application/x-www-form-urlencoded"
COOKIE = HeaderField(name="Set-Cookie", meaning="Signs the browser in, or out.")
LED_ON = Answer(status=303, meaning="The first page.", headers=(LOCATION, COOKIE))

LIST = Operation(
    id="list_keys",
    tag=TAG,
    summary="Keys, the oldest first",
    query=KeysQuery,
    answers=(told(KeysAnswer, "A page of keys.", NEXT),),
    examples=(Example(status=200, query={"limit": 10}),),
)
MAKE = Operation(
    id="make_key",
    tag=TAG,
    summary="Make a key",
    headers=(CSRF_TOKEN,),
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=KeyBody),),
    answers=(told(NewKeyAnswer, "The key, and its secret, told this once.", LOCATION, status=201),),
    examples=(
        Example(
            status=201,
            media_type=JSON_MEDIA_TYPE,
            body={"title": "the web shop", "scopes": ["read", "order"], "is_test": True},
        ),
    ),
)
OWN = Operation(
    id="tell_own_key",
    tag=TAG,
    summary="The key that asks",
    answers=(told(OwnKeyAnswer, "The key."),),
    examples=(Example(status=200),),
)
TELL = Operation(
    id="tell_key",
    tag=TAG,
    summary="A key",
    answers=(told(KeyAnswer, "The key."),),
    problems=("key-unknown",),
    examples=(Example(status=200, given="a key"),),
)
REVOKE = Operation(
    id="revoke_key",
    tag=TAG,
    summary="Revoke a key",
    description="It opens nothing from then on, and is never in force again.",
    headers=(CSRF_TOKEN,),
    answers=(DONE,),
    problems=("key-unknown",),
    examples=(Example(status=204, given="a key"),),
)
SIGN_IN_FIELDS: Mapping[str, Mapping[str, Any]] = {
    "key": {"type": "string", "examples": ["dw_…"]},
    "back": {"type": "string", "description": "the page of this service to go to then; the first one if left out"},
}
SIGN_IN = Operation(
    id="sign_in",
    tag=SIGN_IN_TAG,
    summary="Sign a browser in as a key",
    bodies=(Body(media_type=FORM_OF_FIELDS, fields=SIGN_IN_FIELDS),),
    answers=(LED_ON,),
    problems=("sign-in-refused", "write-not-vouched"),
    examples=(Example(status=303, given="a key", media_type=FORM_OF_FIELDS, body={"key": "dw_…"}),),
)
SIGN_IN_BY_LINK = Operation(
    id="sign_in_by_link",
    tag=SIGN_IN_TAG,
    summary="Sign a browser in by a link that works once",
    answers=(LED_ON,),
    problems=("sign-in-refused",),
    examples=(Example(status=303, given="a link that signs in"),),
)
SIGN_OUT = Operation(
    id="sign_out",
    tag=SIGN_IN_TAG,
    summary="Sign a browser out",
    headers=(CSRF_TOKEN,),
    answers=(LED_ON,),
    examples=(Example(status=303),),
)
