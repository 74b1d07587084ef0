"""The operations of the API. Written by generate.py from the API document; not to be changed by hand."""

from collections.abc import Mapping
from typing import Any, cast

from service.client import shapes
from service.client.calling import Answer, Caller, Fields, Form, Query, once, place


class Operations:
    """A method for each operation of the API."""

    def __init__(self, caller: Caller) -> None:
        self._caller = caller

    def tell_addresses(self) -> shapes.AboutAnswer:
        """Where things are."""
        path = "/"
        return cast("shapes.AboutAnswer", self._caller.json("GET", path))

    def tell_health(self) -> shapes.HealthAnswer:
        """Whether the service answers."""
        path = "/healthz"
        return cast("shapes.HealthAnswer", self._caller.json("GET", path))

    def tell_metrics(self) -> Answer:
        """How the service fares, as text for Prometheus."""
        path = "/metrics"
        return self._caller.send("GET", path)

    def tell_api_document(self) -> shapes.FileRecord:
        """This document."""
        path = "/openapi.json"
        return cast("shapes.FileRecord", self._caller.json("GET", path))

    def list_problem_kinds(self) -> shapes.ProblemKindsAnswer:
        """The kinds of errors."""
        path = "/problems"
        return cast("shapes.ProblemKindsAnswer", self._caller.json("GET", path))

    def tell_problem_kind(self, name: str) -> shapes.ProblemKindAnswer:
        """What a kind of error means."""
        path = place("/problems/{name}", {"name": name})
        return cast("shapes.ProblemKindAnswer", self._caller.json("GET", path))

    def tell_readiness(self) -> shapes.ReadyAnswer:
        """Whether the service can serve now."""
        path = "/readyz"
        return cast("shapes.ReadyAnswer", self._caller.json("GET", path))

    def sign_in(self, fields: Mapping[str, str]) -> Answer:
        """Sign a browser in as a key."""
        path = "/sign-in"
        return self._caller.send("POST", path, body=Fields(fields))

    def sign_in_by_link(self, secret: str) -> Answer:
        """Sign a browser in by a link that works once."""
        path = place("/sign-in/{secret}", {"secret": secret})
        return self._caller.send("GET", path)

    def sign_out(self) -> Answer:
        """Sign a browser out."""
        path = "/sign-out"
        return self._caller.send("POST", path)

    def list_cutters(self, query: Query | None = None) -> shapes.CuttersAnswer:
        """The cutters there are."""
        path = "/v1/cutters"
        return cast("shapes.CuttersAnswer", self._caller.json("GET", path, query=query))

    def tell_cutter(self, document_id: str, query: Query | None = None) -> dict[str, Any]:
        """A cutter."""
        path = place("/v1/cutters/{document_id}", {"document_id": document_id})
        return cast("dict[str, Any]", self._caller.json("GET", path, query=query))

    def save_cutter(self, document_id: str, body: dict[str, Any]) -> shapes.SavedAnswer:
        """Keep a cutter, or a new revision of it."""
        path = place("/v1/cutters/{document_id}", {"document_id": document_id})
        return cast("shapes.SavedAnswer", self._caller.json("PUT", path, body=body))

    def withdraw_cutter(self, document_id: str) -> None:
        """Offer a cutter no more."""
        path = place("/v1/cutters/{document_id}", {"document_id": document_id})
        self._caller.send("DELETE", path)

    def list_revisions_of_cutter(self, document_id: str) -> shapes.RevisionsAnswer:
        """The revisions of a cutter."""
        path = place("/v1/cutters/{document_id}/revisions", {"document_id": document_id})
        return cast("shapes.RevisionsAnswer", self._caller.json("GET", path))

    def tell_delivery(self, delivery_id: str) -> shapes.DeliveryAnswer:
        """A message, and what came of it."""
        path = place("/v1/deliveries/{delivery_id}", {"delivery_id": delivery_id})
        return cast("shapes.DeliveryAnswer", self._caller.json("GET", path))

    def redeliver(self, delivery_id: str) -> shapes.DeliveryAnswer:
        """Send a message again."""
        path = place("/v1/deliveries/{delivery_id}/redeliver", {"delivery_id": delivery_id})
        return cast("shapes.DeliveryAnswer", self._caller.json("POST", path))

    def list_event_types(self) -> shapes.EventTypesAnswer:
        """The types of messages."""
        path = "/v1/event-types"
        return cast("shapes.EventTypesAnswer", self._caller.json("GET", path))

    def list_events(self, query: Query | None = None) -> Answer:
        """What happened to all orders."""
        path = "/v1/events"
        return self._caller.send("GET", path, query=query)

    def export_owner(self, query: Query | None = None) -> Answer:
        """All that is kept of one owner."""
        path = "/v1/export"
        return self._caller.send("GET", path, query=query)

    def list_hooks(self) -> shapes.HooksAnswer:
        """The hooks there are."""
        path = "/v1/hooks"
        return cast("shapes.HooksAnswer", self._caller.json("GET", path))

    def make_hook(self, body: shapes.HookBody) -> shapes.NewHookAnswer:
        """Make a hook."""
        path = "/v1/hooks"
        return cast("shapes.NewHookAnswer", self._caller.json("POST", path, body=body))

    def tell_hook(self, hook_id: str) -> shapes.HookAnswer:
        """A hook."""
        path = place("/v1/hooks/{hook_id}", {"hook_id": hook_id})
        return cast("shapes.HookAnswer", self._caller.json("GET", path))

    def change_hook(self, hook_id: str, body: shapes.HookPatch) -> shapes.HookAnswer:
        """Change a hook."""
        path = place("/v1/hooks/{hook_id}", {"hook_id": hook_id})
        return cast("shapes.HookAnswer", self._caller.json("PATCH", path, body=body))

    def delete_hook(self, hook_id: str) -> None:
        """Delete a hook."""
        path = place("/v1/hooks/{hook_id}", {"hook_id": hook_id})
        self._caller.send("DELETE", path)

    def list_deliveries(self, hook_id: str, query: Query | None = None) -> shapes.DeliveriesAnswer:
        """Messages to a hook, the newest first."""
        path = place("/v1/hooks/{hook_id}/deliveries", {"hook_id": hook_id})
        return cast("shapes.DeliveriesAnswer", self._caller.json("GET", path, query=query))

    def enable_hook(self, hook_id: str) -> shapes.HookAnswer:
        """Turn a hook on again."""
        path = place("/v1/hooks/{hook_id}/enable", {"hook_id": hook_id})
        return cast("shapes.HookAnswer", self._caller.json("POST", path))

    def replace_hook_secret(self, hook_id: str, body: shapes.SecretBody | None = None) -> shapes.NewHookAnswer:
        """Give a hook a new secret."""
        path = place("/v1/hooks/{hook_id}/secret", {"hook_id": hook_id})
        return cast("shapes.NewHookAnswer", self._caller.json("POST", path, body=body))

    def test_hook(self, hook_id: str) -> shapes.DeliveryAnswer:
        """Send a hook a test."""
        path = place("/v1/hooks/{hook_id}/test", {"hook_id": hook_id})
        return cast("shapes.DeliveryAnswer", self._caller.json("POST", path))

    def list_keys(self, query: Query | None = None) -> shapes.KeysAnswer:
        """Keys, the oldest first."""
        path = "/v1/keys"
        return cast("shapes.KeysAnswer", self._caller.json("GET", path, query=query))

    def make_key(self, body: shapes.KeyBody) -> shapes.NewKeyAnswer:
        """Make a key."""
        path = "/v1/keys"
        return cast("shapes.NewKeyAnswer", self._caller.json("POST", path, body=body))

    def tell_key(self, key_id: str) -> shapes.KeyAnswer:
        """A key."""
        path = place("/v1/keys/{key_id}", {"key_id": key_id})
        return cast("shapes.KeyAnswer", self._caller.json("GET", path))

    def revoke_key(self, key_id: str) -> None:
        """Revoke a key."""
        path = place("/v1/keys/{key_id}", {"key_id": key_id})
        self._caller.send("DELETE", path)

    def tell_own_key(self) -> shapes.OwnKeyAnswer:
        """The key that asks."""
        path = "/v1/keys/me"
        return cast("shapes.OwnKeyAnswer", self._caller.json("GET", path))

    def make_layout(self, parts: Mapping[str, bytes | Mapping[str, Any]], query: Query | None = None) -> Answer:
        """Make a layout of a tune."""
        path = "/v1/layouts"
        return self._caller.send("POST", path, body=Form(parts), query=query)

    def tell_layout(self, fingerprint: str, query: Query | None = None) -> shapes.LayoutAnswer:
        """A layout that is kept."""
        path = place("/v1/layouts/{fingerprint}", {"fingerprint": fingerprint})
        return cast("shapes.LayoutAnswer", self._caller.json("GET", path, query=query))

    def tell_layout_file(self, fingerprint: str, file_name: str, query: Query | None = None) -> Answer:
        """A file of a layout."""
        path = place("/v1/layouts/{fingerprint}/{file_name}", {"fingerprint": fingerprint, "file_name": file_name})
        return self._caller.send("GET", path, query=query)

    def tell_layout_plucks(self, fingerprint: str, query: Query | None = None) -> Answer:
        """What a layout plays, as MIDI."""
        path = place("/v1/layouts/{fingerprint}/hearing.mid", {"fingerprint": fingerprint})
        return self._caller.send("GET", path, query=query)

    def tell_layout_sound(self, fingerprint: str, query: Query | None = None) -> Answer:
        """A layout as it sounds."""
        path = place("/v1/layouts/{fingerprint}/hearing.wav", {"fingerprint": fingerprint})
        return self._caller.send("GET", path, query=query)

    def tell_limits(self) -> shapes.LimitsAnswer:
        """What is taken at most."""
        path = "/v1/limits"
        return cast("shapes.LimitsAnswer", self._caller.json("GET", path))

    def list_movements(self, query: Query | None = None) -> shapes.MovementsAnswer:
        """The movements there are."""
        path = "/v1/movements"
        return cast("shapes.MovementsAnswer", self._caller.json("GET", path, query=query))

    def tell_movement(self, document_id: str, query: Query | None = None) -> dict[str, Any]:
        """A movement."""
        path = place("/v1/movements/{document_id}", {"document_id": document_id})
        return cast("dict[str, Any]", self._caller.json("GET", path, query=query))

    def save_movement(self, document_id: str, body: dict[str, Any]) -> shapes.SavedAnswer:
        """Keep a movement, or a new revision of it."""
        path = place("/v1/movements/{document_id}", {"document_id": document_id})
        return cast("shapes.SavedAnswer", self._caller.json("PUT", path, body=body))

    def withdraw_movement(self, document_id: str) -> None:
        """Offer a movement no more."""
        path = place("/v1/movements/{document_id}", {"document_id": document_id})
        self._caller.send("DELETE", path)

    def list_revisions_of_movement(self, document_id: str) -> shapes.RevisionsAnswer:
        """The revisions of a movement."""
        path = place("/v1/movements/{document_id}/revisions", {"document_id": document_id})
        return cast("shapes.RevisionsAnswer", self._caller.json("GET", path))

    def place_order(self, parts: Mapping[str, bytes | Mapping[str, Any]]) -> shapes.OrderAnswer:
        """Place an order."""
        path = "/v1/orders"
        return cast("shapes.OrderAnswer", self._caller.json("POST", path, body=Form(parts), headers=once()))

    def list_orders(self, query: Query | None = None) -> shapes.OrdersAnswer:
        """Orders, those changed last first."""
        path = "/v1/orders"
        return cast("shapes.OrdersAnswer", self._caller.json("GET", path, query=query))

    def tell_order(self, order_id: str) -> shapes.OrderAnswer:
        """An order."""
        path = place("/v1/orders/{order_id}", {"order_id": order_id})
        return cast("shapes.OrderAnswer", self._caller.json("GET", path))

    def erase_order(self, order_id: str) -> shapes.OrderAnswer:
        """Delete the personal data of a finished order."""
        path = place("/v1/orders/{order_id}", {"order_id": order_id})
        return cast("shapes.OrderAnswer", self._caller.json("DELETE", path))

    def cancel_order(self, order_id: str, body: shapes.CancelBody | None = None) -> shapes.OrderAnswer:
        """Cancel an order."""
        path = place("/v1/orders/{order_id}/cancel", {"order_id": order_id})
        return cast("shapes.OrderAnswer", self._caller.json("POST", path, body=body, headers=once()))

    def list_order_events(self, order_id: str, query: Query | None = None) -> Answer:
        """What happened to an order."""
        path = place("/v1/orders/{order_id}/events", {"order_id": order_id})
        return self._caller.send("GET", path, query=query)

    def tell_order_file(self, order_id: str, revision: int, disc: int, name: str, query: Query | None = None) -> Answer:
        """A file of a plan."""
        path = place(
            "/v1/orders/{order_id}/plans/{revision}/files/{disc}/{name}",
            {"order_id": order_id, "revision": revision, "disc": disc, "name": name},
        )
        return self._caller.send("GET", path, query=query)

    def tell_order_plucks(self, order_id: str, revision: int, disc: int, query: Query | None = None) -> Answer:
        """What a disc of a plan plays, as MIDI."""
        path = place(
            "/v1/orders/{order_id}/plans/{revision}/files/{disc}/hearing.mid",
            {"order_id": order_id, "revision": revision, "disc": disc},
        )
        return self._caller.send("GET", path, query=query)

    def tell_order_sound(self, order_id: str, revision: int, disc: int, query: Query | None = None) -> Answer:
        """A disc of a plan as it sounds."""
        path = place(
            "/v1/orders/{order_id}/plans/{revision}/files/{disc}/hearing.wav",
            {"order_id": order_id, "revision": revision, "disc": disc},
        )
        return self._caller.send("GET", path, query=query)

    def make_proof_link(self, order_id: str) -> shapes.ProofLinkAnswer:
        """A signed link by which a customer sees the order and decides."""
        path = place("/v1/orders/{order_id}/proof-links", {"order_id": order_id})
        return cast("shapes.ProofLinkAnswer", self._caller.json("POST", path))

    def release_order(self, order_id: str, body: shapes.ReleaseBody) -> shapes.OrderAnswer:
        """Release an order for cutting."""
        path = place("/v1/orders/{order_id}/release", {"order_id": order_id})
        return cast("shapes.OrderAnswer", self._caller.json("POST", path, body=body, headers=once()))

    def replan_order(self, order_id: str, body: shapes.ReplanBody | None = None) -> shapes.OrderAnswer:
        """Plan an order anew."""
        path = place("/v1/orders/{order_id}/replan", {"order_id": order_id})
        return cast("shapes.OrderAnswer", self._caller.json("POST", path, body=body, headers=once()))

    def report_on_order(self, order_id: str, body: shapes.ReportBody) -> shapes.OrderAnswer:
        """Say what was done with a released order."""
        path = place("/v1/orders/{order_id}/reports", {"order_id": order_id})
        return cast("shapes.OrderAnswer", self._caller.json("POST", path, body=body, headers=once()))

    def show_proof(self, text: str) -> shapes.ProofAnswer:
        """What a proof shows."""
        path = place("/v1/proofs/{text}", {"text": text})
        return cast("shapes.ProofAnswer", self._caller.json("GET", path))

    def tell_proof_file(self, text: str, disc: int, name: str) -> Answer:
        """A file of a proof."""
        path = place("/v1/proofs/{text}/files/{disc}/{name}", {"text": text, "disc": disc, "name": name})
        return self._caller.send("GET", path)

    def tell_proof_plucks(self, text: str, disc: int, query: Query | None = None) -> Answer:
        """What a disc of a proof plays, as MIDI."""
        path = place("/v1/proofs/{text}/files/{disc}/hearing.mid", {"text": text, "disc": disc})
        return self._caller.send("GET", path, query=query)

    def tell_proof_sound(self, text: str, disc: int, query: Query | None = None) -> Answer:
        """A disc of a proof as it sounds."""
        path = place("/v1/proofs/{text}/files/{disc}/hearing.wav", {"text": text, "disc": disc})
        return self._caller.send("GET", path, query=query)

    def say_verdict(self, text: str, body: shapes.VerdictBody) -> shapes.VerdictAnswer:
        """Accept or decline a proof."""
        path = place("/v1/proofs/{text}/verdict", {"text": text})
        return cast("shapes.VerdictAnswer", self._caller.json("POST", path, body=body))

    def make_quote(self, parts: Mapping[str, bytes | Mapping[str, Any]]) -> shapes.QuoteAnswer:
        """Ask what an order would cost."""
        path = "/v1/quotes"
        return cast("shapes.QuoteAnswer", self._caller.json("POST", path, body=Form(parts), headers=once()))

    def tell_quote(self, quote_id: str) -> shapes.QuoteAnswer:
        """A quote."""
        path = place("/v1/quotes/{quote_id}", {"quote_id": quote_id})
        return cast("shapes.QuoteAnswer", self._caller.json("GET", path))

    def begin_run(self, parts: Mapping[str, bytes | Mapping[str, Any]]) -> shapes.RunAnswer:
        """Order many discs at once."""
        path = "/v1/runs"
        return cast("shapes.RunAnswer", self._caller.json("POST", path, body=Form(parts), headers=once()))

    def list_runs(self, query: Query | None = None) -> shapes.RunsAnswer:
        """Runs, the newest first."""
        path = "/v1/runs"
        return cast("shapes.RunsAnswer", self._caller.json("GET", path, query=query))

    def tell_run(self, run_id: str) -> shapes.RunAnswer:
        """A run, and how many of its pairs are in which state."""
        path = place("/v1/runs/{run_id}", {"run_id": run_id})
        return cast("shapes.RunAnswer", self._caller.json("GET", path))

    def list_run_items(self, run_id: str, query: Query | None = None) -> shapes.ItemsAnswer:
        """The pairs of a run, and what became of each."""
        path = place("/v1/runs/{run_id}/items", {"run_id": run_id})
        return cast("shapes.ItemsAnswer", self._caller.json("GET", path, query=query))

    def tell_run_results(self, run_id: str) -> Answer:
        """The files of a run in one archive."""
        path = place("/v1/runs/{run_id}/results.zip", {"run_id": run_id})
        return self._caller.send("GET", path)

    def list_schemas(self) -> shapes.FileRecord:
        """The documents there are schemas of."""
        path = "/v1/schemas"
        return cast("shapes.FileRecord", self._caller.json("GET", path))

    def tell_schema(self, name: str) -> Answer:
        """The JSON Schema of a document."""
        path = place("/v1/schemas/{name}", {"name": name})
        return self._caller.send("GET", path)

    def plan_sheets(self, body: dict[str, Any]) -> Answer:
        """Lay discs on sheets of stock."""
        path = "/v1/sheets"
        return self._caller.send("POST", path, body=body)

    def list_test_tunes(self) -> shapes.StateTunesAnswer:
        """Tunes that lead an order to each of its states."""
        path = "/v1/test-tunes"
        return cast("shapes.StateTunesAnswer", self._caller.json("GET", path))

    def tell_test_tune(self, name: str) -> Answer:
        """A test tune."""
        path = place("/v1/test-tunes/{name}.mid", {"name": name})
        return self._caller.send("GET", path)

    def make_trial_piece(
        self,
        parts: Mapping[str, bytes | Mapping[str, Any]] | None = None,
        query: Query | None = None,
    ) -> Answer:
        """Make a trial piece of a movement and a cutter."""
        path = "/v1/trial-pieces"
        return self._caller.send("POST", path, body=None if parts is None else Form(parts), query=query)
