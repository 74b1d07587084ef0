"""Operations: orders. Written by generate.py from the API document; not to be changed by hand."""

from collections.abc import Mapping
from typing import Any, cast

from service.client import shapes
from service.client.calling import Answer, Form, Group, Query, once, place


class OfOrders(Group):
    """Operations: orders."""

    def place_order(self, parts: Mapping[str, bytes | Mapping[str, Any]]) -> shapes.OrderAnswer:
        """Place an order."""
        path = "/v1/orders"
        return cast("shapes.OrderAnswer", self._caller.json("POST", path, body=Form(parts), headers=once()))

    def list_orders(self, query: Query | None = None) -> shapes.OrdersAnswer:
        """Orders, in the order of their last change, the newest last."""
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

    def list_test_tunes(self) -> shapes.StateTunesAnswer:
        """Tunes that lead an order to each of its states."""
        path = "/v1/test-tunes"
        return cast("shapes.StateTunesAnswer", self._caller.json("GET", path))

    def tell_test_tune(self, name: str) -> Answer:
        """A test tune."""
        path = place("/v1/test-tunes/{name}.mid", {"name": name})
        return self._caller.send("GET", path)
