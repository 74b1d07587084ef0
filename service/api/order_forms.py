"""The form that brings an order, or what is to be priced: a tune, and what is asked for beside it."""

from collections.abc import Mapping

from flask import Request

from layout.documents import shipped_cutter_ids
from layout.errors import DocumentError, Problem
from service.api.answers import json_bytes
from service.api.bodies import body_of
from service.api.models.orders import DocumentName, OrderBody
from service.api.multipart import parts_of
from service.api.posted import FORM_MEDIA_TYPE
from service.api.problems import ProblemError
from service.api.request_models import read_text
from service.limits import Limits
from service.orders.asked import AskedOrder, NamedDocument

PARTS = ("tune", "order", "movement", "cutter", "settings")


def brought_by(asked: Request, limits: Limits) -> dict[str, bytes]:
    """The parts of the form by name.

    Raises:
        ProblemError: It is no form, too large, or cannot be taken apart.
    """
    if asked.mimetype != FORM_MEDIA_TYPE:
        raise ProblemError(
            name="media-type-unsupported",
            detail=f"{asked.mimetype[:100] or 'a body without a media type'!r} is not taken; "
            f"send {FORM_MEDIA_TYPE} with the parts tune and order",
            more={"allowed_types": [FORM_MEDIA_TYPE]},
            headers={"Accept-Post": FORM_MEDIA_TYPE},
        )
    return parts_of(
        body_of(asked, limits.upload_bytes),
        boundary=asked.mimetype_params.get("boundary"),
        known=PARTS,
        most_parts=limits.form_parts,
    )


def order_body(asked: Request, brought: Mapping[str, bytes]) -> OrderBody:
    """The part `order`, checked.

    Raises:
        DocumentError: It is not valid; each fault with its place.
    """
    return read_text(
        asked,
        OrderBody,
        brought.get("order", b""),
        document="order",
        plain="a plain value is needed; a document with the worth of its numbers goes along as a part of its own",
    )


def asked_order(body: OrderBody, brought: Mapping[str, bytes]) -> AskedOrder:
    """What is asked for, by the part `order` and the documents sent along.

    Raises:
        ProblemError: There is no tune.
        DocumentError: There is no movement, or something is given twice.
    """
    if not brought.get("tune"):
        raise ProblemError(name="tune-missing", detail="the request brings no tune: the part tune is missing or empty")
    movement = _source("movement", body.movement, brought)
    if movement is None:
        raise refused("/movement", "no movement is named; name one, or send it as the part movement")
    settings = brought.get("settings")
    if settings is not None and body.settings:
        raise refused("/settings", "settings are given twice, here and as a part; give them once")
    return AskedOrder(
        tune=brought["tune"],
        tune_name=body.tune_name,
        movement=movement,
        cutter=_source("cutter", body.cutter, brought) or NamedDocument(id=shipped_cutter_ids()[0]),
        settings=json_bytes(body.settings) if settings is None else settings,
        quantity=body.quantity,
        reference=body.reference,
        most_lost_share=body.most_lost_share,
        release_alone=body.release_alone,
        quote_id=body.quote,
        hook_id=body.hook,
    )


def refused(pointer: str, message: str) -> DocumentError:
    """That a place of the part `order` cannot be taken."""
    return DocumentError(document="order", problems=(Problem(pointer=pointer, message=message),))


def _source(kind: str, named: DocumentName | str | None, brought: Mapping[str, bytes]) -> NamedDocument | bytes | None:
    if kind in brought and named is not None:
        raise refused(f"/{kind}", f"a {kind} is given twice, here and as a part; give it once")
    if kind in brought:
        return brought[kind]
    if isinstance(named, str):
        return NamedDocument(id=named)
    return None if named is None else NamedDocument(id=named.id, revision=named.revision)
