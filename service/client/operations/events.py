"""Operations: events. Written by generate.py from the API document; not to be changed by hand."""

from service.client.calling import Answer, Group, Query, place


class OfEvents(Group):
    """Operations: events."""

    def list_events(self, query: Query | None = None) -> Answer:
        """What happened to all orders."""
        path = "/v1/events"
        return self._caller.send("GET", path, query=query)

    def list_order_events(self, order_id: str, query: Query | None = None) -> Answer:
        """What happened to an order."""
        path = place("/v1/orders/{order_id}/events", {"order_id": order_id})
        return self._caller.send("GET", path, query=query)
