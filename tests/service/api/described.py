"""Answers held against the API document, and what must be there before an example can be sent."""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from io import BytesIO
from typing import Any

import jsonschema  # type: ignore[import-untyped]
from flask import Flask
from flask.testing import FlaskClient
from werkzeug.test import TestResponse

from service.access.browsers import make_link
from service.access.scopes import Scope
from service.api.describing import Example
from service.api.operations.common import SMALL_TUNE
from service.moments import utc_now
from service.parts import Parts
from tests.service.api.guarded import bearing, new_key
from tests.service.shop import archive_of, planned

FORMS = ("multipart/form-data", "application/x-www-form-urlencoded")
JSON_TYPES = ("application/json", "application/problem+json", "application/schema+json")
# Of every answer, and told for none: they are for browsers and caches.
UNTOLD = {
    *("Cache-Control", "Clear-Site-Data", "Connection", "Content-Security-Policy", "Referrer-Policy", "Vary"),
    *("X-Accel-Buffering", "X-Content-Type-Options"),
}
NOT_SENT = {"Content-Type", "Content-Length", "Content-Encoding", "Date"}


@dataclass
class World:
    """A shop in which examples are tried."""

    app: Flask
    parts: Parts

    def __post_init__(self) -> None:
        self.http: FlaskClient = self.app.test_client()
        self.key = new_key(self.parts, *Scope)
        self.headers = bearing(self.key)
        self.made_count = 0

    def send(self, method: str, path: str, example: Example, given: Mapping[str, Any]) -> TestResponse:
        """Send an example, with what was given in place of the ids and secrets it shows."""
        for name, value in {**example.path, **given}.items():
            path = path.replace(f"{{{name}}}", str(value))
        headers = {**self.headers, **example.headers, **given.get("headers", {})}
        body = example.content
        sent: dict[str, Any] = {}
        if example.media_type in FORMS:
            body = {**body, **given.get("fields", {})} if example.given else body
            sent["data"] = {name: as_part(name, value) for name, value in body.items()}
            sent["content_type"] = example.media_type
        elif isinstance(body, bytes):
            sent = {"data": body, "content_type": example.media_type}
        elif example.media_type:
            sent["json"] = {**body, **given["said"]} if "said" in given else body
        return self.http.open(path, method=method, query_string=dict(example.query), headers=headers, **sent)

    def given(self, what: str) -> dict[str, Any]:
        """What must be there before, by the parameters of paths that name it."""
        if what.endswith("of one's own"):
            return self._own_document(what.split()[1])
        return {
            "": lambda: {},
            "a layout": self._layout,
            "an order": lambda: {"order_id": self._order()},
            "a ready order": lambda: {"order_id": self._ready()},
            "a ready order that was looked at": self._looked_at,
            "a released order": self._released,
            "a proof": self._proof,
            "a run": self._run,
            "a quote": self._quote,
            "a hook": lambda: {"hook_id": self._hook()},
            "a delivery": self._delivery,
            "a key": self._key,
            "a link that signs in": self._link,
        }[what]()

    def post(self, path: str, **sent: Any) -> Any:
        """Ask for something that must be there."""
        answer = self.http.post(path, headers=self.headers, **sent)
        assert answer.status_code < 300, answer.text
        return answer.json

    def _layout(self) -> dict[str, Any]:
        made = self.post("/v1/layouts?movement=fernhollow-31", data=SMALL_TUNE, content_type="audio/midi")
        return {"fingerprint": made["fingerprint"]}

    def _order(self) -> str:
        self.made_count += 1
        tune, order = SMALL_TUNE, {"movement": "fernhollow-31", "reference": f"made {self.made_count}"}
        form = {"tune": as_part("tune", tune), "order": as_part("order", order)}
        return str(self.post("/v1/orders", data=form)["id"])

    def _ready(self) -> str:
        order_id = self._order()
        planned(self.parts, order_id)
        assert self.http.get(f"/v1/orders/{order_id}", headers=self.headers).json["state"] == "ready"  # type: ignore[index]
        return order_id

    def _looked_at(self) -> dict[str, Any]:
        order_id = self._ready()
        seen: Any = self.http.get(f"/v1/orders/{order_id}", headers=self.headers).json
        return {"order_id": order_id, "said": {"plan": seen["plan"]["tag"]}}

    def _released(self) -> dict[str, Any]:
        looked_at = self._looked_at()
        order_id = looked_at["order_id"]
        self.post(f"/v1/orders/{order_id}/release", json={"by": "A. Maker", **looked_at["said"]})
        return {"order_id": order_id, "fields": {"order": {"repeat_of": order_id}}}

    def _run(self) -> dict[str, Any]:
        archive = (BytesIO(archive_of(a=SMALL_TUNE)), "tunes.zip", "application/zip")
        form = {"archive": archive, "run": as_part("run", {"movements": ["fernhollow-31"]})}
        return {"run_id": self.post("/v1/runs", data=form)["id"]}

    def _quote(self) -> dict[str, Any]:
        form = {"tune": as_part("tune", SMALL_TUNE), "order": as_part("order", {"movement": "fernhollow-31"})}
        return {"quote_id": self.post("/v1/quotes", data=form)["id"]}

    def _proof(self) -> dict[str, Any]:
        made = self.post(f"/v1/orders/{self._ready()}/proof-links")
        return {"text": made["href"].rpartition("/")[2]}

    def _hook(self) -> str:
        self.made_count += 1
        return str(self.post("/v1/hooks", json={"url": f"https://shop.example/made-{self.made_count}"})["id"])

    def _delivery(self) -> dict[str, Any]:
        return {"delivery_id": self.post(f"/v1/hooks/{self._hook()}/test")["id"]}

    def _key(self) -> dict[str, Any]:
        made = new_key(self.parts, Scope.READ)
        return {"key_id": made.told.id, "fields": {"key": made.secret}}

    def _link(self) -> dict[str, Any]:
        with self.parts.store.writing() as session:
            return {"secret": make_link(session, self.key.told.id, utc_now())}

    def _own_document(self, kind: str) -> dict[str, Any]:
        shipped = {"movement": "fernhollow-31", "cutter": "fibre-laser"}[kind]
        own = json.loads(self.http.get(f"/v1/{kind}s/{shipped}?as=written").data) | {"id": f"own-{kind}"}
        path = f"/v1/{kind}s/own-{kind}"
        answer = self.http.put(path, json=own, headers={**self.headers, "If-None-Match": "*"})
        assert answer.status_code in (201, 412), answer.text
        tag = self.http.get(path, headers=self.headers).headers["ETag"]
        return {"headers": {"If-Match": tag}}


def as_part(name: str, value: Any) -> Any:
    """A part of a form."""
    if isinstance(value, str):
        return value
    content = value if isinstance(value, bytes) else json.dumps(value).encode()
    return (BytesIO(content), name, "audio/midi" if isinstance(value, bytes) else "application/json")


def closed(value: Any) -> Any:
    """A schema that allows no member that it does not name: what is told and not described is found."""
    if isinstance(value, list):
        return [closed(part) for part in value]
    if not isinstance(value, dict):
        return value
    made = {key: closed(part) for key, part in value.items()}
    is_one = isinstance(value.get("properties"), dict) and (value.get("type") == "object" or "required" in value)
    return {**made, "additionalProperties": False} if is_one and "additionalProperties" not in value else made


def assert_described(document: Any, operation: Any, answer: TestResponse) -> None:
    """See that an answer is as the document says: its status, media type, fields of its head, and body."""
    told = operation["responses"][str(answer.status_code)]
    sent = set(dict(answer.headers)) - NOT_SENT
    assert sent - UNTOLD - told.get("headers", {}).keys() == set()
    content = told.get("content", {})
    if not content:
        assert answer.data == b""
        return
    media_type = answer.mimetype
    schema = content[media_type]["schema"]
    if media_type in JSON_TYPES:
        whole = closed({**schema, "components": document["components"]})
        jsonschema.Draft202012Validator(whole).validate(json.loads(answer.data))
