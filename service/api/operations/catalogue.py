"""Movements and cutters: those that ship, and those that owners keep, by revisions."""

import json
from collections.abc import Mapping
from types import MappingProxyType
from typing import Any

from pydantic import BaseModel

from layout.documents import Cutter, Movement, shipped_text
from service.api.describing import Answer, Body, Example, HeaderField, Operation
from service.api.models.documents import CheckAnswer, DocumentQuery, DocumentsQuery, RevisionsAnswer, SavedAnswer
from service.api.models.shipped import CuttersAnswer, MovementsAnswer
from service.api.operations.common import (
    CSRF_TOKEN,
    DONE,
    ETAG,
    IF_NONE_MATCH,
    LOCATION,
    NEXT,
    NOT_MODIFIED,
    told,
)
from service.media_types import JSON_MEDIA_TYPE

TAG = "catalogue"
MODELS: Mapping[str, type[BaseModel]] = MappingProxyType({"movement": Movement, "cutter": Cutter})
LISTS: Mapping[str, type[BaseModel]] = MappingProxyType({"movement": MovementsAnswer, "cutter": CuttersAnswer})
SHIPPED: Mapping[str, str] = MappingProxyType({"movement": "fernhollow-31", "cutter": "fibre-laser"})
IF_REVISION = HeaderField(
    name="If-Match",
    meaning="The entity tag of the newest revision: nobody's change is lost to another's.",
)
IF_NEW = HeaderField(
    name="If-None-Match", meaning="*: only where there is none yet.", schema={"type": "string", "examples": ["*"]}
)
GUARDS = ("precondition-required", "document-changed", "key-for-tests")


def _list(kind: str) -> Operation:
    return Operation(
        id=f"list_{kind}s",
        tag=TAG,
        summary=f"The {kind}s there are",
        description="Those that ship; a key sees its owner's own and the shop's too.",
        query=DocumentsQuery,
        headers=(IF_NONE_MATCH,),
        answers=(told(LISTS[kind], "Each in short.", ETAG, NEXT), NOT_MODIFIED),
        examples=(Example(status=200, query={"limit": 10}),),
    )


def _tell(kind: str) -> Operation:
    return Operation(
        id=f"tell_{kind}",
        tag=TAG,
        summary=f"A {kind}",
        query=DocumentQuery,
        headers=(IF_NONE_MATCH,),
        answers=(told(MODELS[kind], "The document.", ETAG), NOT_MODIFIED),
        problems=(f"{kind}-unknown",),
        examples=(
            Example(status=200, path={"document_id": SHIPPED[kind]}),
            Example(status=200, path={"document_id": SHIPPED[kind]}, query={"as": "written", "revision": 1}),
        ),
    )


def _revisions(kind: str) -> Operation:
    return Operation(
        id=f"list_revisions_of_{kind}",
        tag=TAG,
        summary=f"The revisions of a {kind}",
        answers=(told(RevisionsAnswer, "The newest first."),),
        problems=(f"{kind}-unknown",),
        examples=(Example(status=200, path={"document_id": SHIPPED[kind]}),),
    )


def _save(kind: str) -> Operation:
    own = f"own-{kind}"

    def document() -> dict[str, Any]:
        return {**json.loads(shipped_text(SHIPPED[kind])), "id": own}

    return Operation(
        id=f"save_{kind}",
        tag=TAG,
        summary=f"Keep a {kind}, or a new revision of it",
        description="Orders keep the revision that they were planned with.",
        headers=(IF_REVISION, IF_NEW, CSRF_TOKEN),
        bodies=(Body(media_type=JSON_MEDIA_TYPE, model=MODELS[kind]),),
        answers=(
            told(SavedAnswer, "The revision that is in force now."),
            told(SavedAnswer, "The first revision.", LOCATION, status=201),
        ),
        problems=GUARDS,
        examples=(
            Example(
                status=201,
                path={"document_id": own},
                headers={"If-None-Match": "*"},
                media_type=JSON_MEDIA_TYPE,
                body=document,
            ),
        ),
    )


def _check(kind: str) -> Operation:
    def document() -> dict[str, Any]:
        return {**json.loads(shipped_text(SHIPPED[kind])), "id": "Own"}

    return Operation(
        id=f"check_{kind}",
        tag=TAG,
        summary=f"Check a {kind} and keep nothing",
        description="Read as one that is saved is read, with every rule that its schema cannot say.",
        headers=(CSRF_TOKEN,),
        bodies=(Body(media_type=JSON_MEDIA_TYPE, model=MODELS[kind]),),
        answers=(told(CheckAnswer, "What is wrong with it."),),
        examples=(Example(status=200, media_type=JSON_MEDIA_TYPE, body=document),),
    )


def _withdraw(kind: str) -> Operation:
    return Operation(
        id=f"withdraw_{kind}",
        tag=TAG,
        summary=f"Offer a {kind} no more",
        description="Its revisions stay readable, and orders keep theirs.",
        headers=(IF_REVISION, CSRF_TOKEN),
        answers=(Answer(status=DONE.status, meaning="It is not offered any more."),),
        problems=(*GUARDS, f"{kind}-unknown", "document-not-own"),
        examples=(Example(status=DONE.status, given=f"a {kind} of one's own", path={"document_id": f"own-{kind}"}),),
    )


LIST = MappingProxyType({kind: _list(kind) for kind in MODELS})
TELL = MappingProxyType({kind: _tell(kind) for kind in MODELS})
REVISIONS = MappingProxyType({kind: _revisions(kind) for kind in MODELS})
SAVE = MappingProxyType({kind: _save(kind) for kind in MODELS})
CHECK = MappingProxyType({kind: _check(kind) for kind in MODELS})
WITHDRAW = MappingProxyType({kind: _withdraw(kind) for kind in MODELS})
